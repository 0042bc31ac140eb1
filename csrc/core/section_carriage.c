/* section_carriage: a section hung where its loads depend on its shape.
 *
 * Loads per horizontal metre are those of the last shape, hung again until they change no more. For a load p on a line at an
 * angle a from the horizontal the change shrinks about by sin^2 a each time.
 *
 * A free carriage, a force F that rolls without friction, rests where moving it gains no energy: where the tension is the
 * same on both sides, with t the tension vector before it
 *     |t - F| = |t|,   so   F.F - 2 t.F = 0
 * and rolls towards the side of the smaller tension. Where another force hangs the tension jumps, and the carriage may rest
 * there, between balances of different signs. A held one stands at a station x of its span: x(r(s)) = x. Either is one equation
 * in the natural length s, solved within a bracket (T. R. Chandrupatla, Advances in Engineering Software 28 (1997) 145-149).
 */
#include <math.h>

#include "gauss.h"
#include "route.h"
#include "section_load.h"
#include "vector.h"

enum { RUN_ROUNDS = 200, ROLL_ROUNDS = 80 };
static const double RUN_CHANGE = 1e-12;    /* of a share that counts as none */
static const double RUN_SETTLED = 1e-10;   /* and that is accepted where rounding leaves no less */
static const double ROLL_MARGIN = 1e-6;    /* of the span: nearer to a support than this is at it */
static const double ROLL_STEP = 1e-13;     /* of the span: as near as a place is found */
static const double ROLL_FIRST = 0.02;     /* of the span: the first step of the search for a bracket */

/* Horizontal run of a piece: int |t_xy|/|t| W*'(|t|) ds at five Gauss-Legendre points; a piece is short beside its span. */
static double plan_run(const tw_material *material, const tw_piece *piece)
{
    double half = 0.5 * piece->length_m, run = 0.0;
    for (int p = 0; p < 5; p++) {
        double t[3], point = p % 2 ? tw_gauss_five_point[(p + 1) / 2] : -tw_gauss_five_point[(p + 1) / 2];
        tw_piece_tension(piece, half + half * point, t);
        double size = tw_norm(t);
        run += tw_gauss_five_weight[(p + 1) / 2] * hypot(t[0], t[1]) / size * tw_material_stretch(material, size);
    }
    return half * run;
}

/* The share of a load per run that the shape of a piece makes: at its start, and its growth along it. */
static void share_of(const tw_material *material, const tw_piece *piece, double share[2])
{
    double ends[2], t[3];
    for (int e = 0; e < 2; e++) {
        tw_piece_tension(piece, e * piece->length_m, t);
        double size = tw_norm(t);
        ends[e] = hypot(t[0], t[1]) / size * tw_material_stretch(material, size);
    }
    share[0] = plan_run(material, piece) / piece->length_m - 0.5 * (ends[1] - ends[0]);
    share[1] = (ends[1] - ends[0]) / piece->length_m;
}

/* By how much the share of a piece is not that of its shape; what it should be. */
static double run_off(const tw_section *section, size_t span, size_t p, double share[2])
{
    const tw_piece *piece = &section->pieces[p];
    const double *now = section->run_share + 2 * p;
    if (tw_norm(section->run_vector + 3 * p) == 0.0 || !(piece->length_m > 0.0)) {
        share[0] = now[0];
        share[1] = now[1];
        return 0.0;
    }
    share_of(&section->materials[span], piece, share);
    return fabs(share[0] - now[0]) + fabs(share[1] - now[1]) * piece->length_m;
}

double tw_section_runs_off(const tw_section *section)
{
    double most = 0.0, share[2];
    for (size_t k = 0; section->run_vector && k < section->span_count; k++) {
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            double off = run_off(section, k, p, share);
            most = off > most || isnan(off) ? off : most;
        }
    }
    return most;
}

double tw_section_follow_runs(tw_section *section)
{
    double most = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            double *now = section->run_share + 2 * p, share[2];
            const double *vector = section->run_vector + 3 * p;
            double off = run_off(section, k, p, share);
            most = off > most || isnan(off) ? off : most;
            tw_axpy(section->pieces[p].load, share[0] - now[0], vector, section->pieces[p].load);
            tw_axpy(section->pieces[p].ramp, share[1] - now[1], vector, section->pieces[p].ramp);
            now[0] = share[0];
            now[1] = share[1];
        }
    }
    return most;
}

/* Solve, and again until the loads per run are those of the shape. */
static tw_status solve_runs(tw_section *section, const tw_options *options, int warm, size_t *steps)
{
    tw_status status = tw_section_solve(section, options, warm);
    double before = INFINITY;
    *steps += section->steps;
    for (int round = 0; status == TW_OK && section->run_vector; round++) {
        double change = tw_section_follow_runs(section);
        int done = change <= RUN_CHANGE || (change <= RUN_SETTLED && change >= 0.5 * before);
        if (!done && (round == RUN_ROUNDS || !isfinite(change))) {
            return TW_NOT_SETTLED;
        }
        before = change;
        status = tw_section_solve(section, options, 1);
        *steps += section->steps;
        if (done) {
            break;
        }
    }
    return status;
}

/* One carriage on its way. */
typedef struct rolling {
    tw_section *section;
    size_t condition;
    const double *length_m;
    const tw_section *strung;
    int with_addition;
    const tw_options *options;
    const tw_load *load;
    double force[3];
    int warm;
    size_t steps;
    tw_status status;
} rolling;

static const tw_load *carriage_of(const tw_project *project, size_t condition)
{
    const tw_condition *state = &project->conditions[condition];
    for (size_t i = 0; i < state->load_count; i++) {
        const tw_load *load = &project->loads[state->load_first + i];
        if (load->carriage != TW_CARRIAGE_NONE) {
            return load;
        }
    }
    return NULL;
}

/* (|t - F|^2 - |t|^2) / (|t - F| + |t|): what drives a force F on, with t before it, N; negative where it rolls ahead. */
static double drive(const double before[3], const double force[3])
{
    double beyond[3];
    tw_axpy(before, -1.0, force, beyond);
    return (tw_dot(force, force) - 2.0 * tw_dot(before, force)) / (tw_norm(beyond) + tw_norm(before));
}

/* What is zero where the carriage stands, growing with s there. */
static double roll_miss(rolling *run, double s)
{
    double place[3], before[3], beyond[3];
    tw_section *section = run->section;
    if (run->load->carriage == TW_CARRIAGE_HELD) {
        const tw_route_leg leg = tw_route_leg_of(section->project, run->load->carriage_span);
        tw_section_at(section, s, place, NULL);
        return tw_route_station(&leg, place) - run->load->from_m;
    }
    tw_section_beside(section, s, before, beyond);
    return drive(before, run->force);
}

/* The line hung with the carriage at s; NaN, and the status, when that fails. */
static double roll_to(rolling *run, double s)
{
    tw_section *section = run->section;
    section->carriage_m = s;
    run->status = tw_section_load(section, run->condition, run->length_m, run->strung, run->with_addition);
    if (run->status == TW_OK) {
        run->status = solve_runs(section, run->options, run->warm, &run->steps);
    }
    run->warm = run->status == TW_OK;
    return run->warm ? roll_miss(run, section->carriage_m) : (double)NAN;
}

/* Two places between which the miss changes its sign, from a first one; 0 where it keeps it up to the end of the span, which
 * is then in place[1]. */
static int bracket_place(rolling *run, double low, double high, double place[2], double miss[2])
{
    double step = ROLL_FIRST * (high - low);
    miss[0] = roll_to(run, place[0]);
    place[1] = place[0];
    miss[1] = miss[0];
    while (run->status == TW_OK && miss[0] * miss[1] > 0.0) {
        double end = miss[1] < 0.0 ? high : low;
        if (place[1] == end) {
            return 0;
        }
        place[0] = place[1];
        miss[0] = miss[1];
        place[1] = miss[1] < 0.0 ? fmin(place[0] + step, high) : fmax(place[0] - step, low);
        miss[1] = roll_to(run, place[1]);
        step *= 2.0;
    }
    return run->status == TW_OK;
}

/* Chandrupatla's method: inverse quadratic interpolation where it can be trusted, else bisection. Returns the better end of
 * what is left of the bracket; place[1] is then the other. */
static double narrow_place(rolling *run, double place[2], double miss[2], double tolerance)
{
    double b = place[0], fb = miss[0], a = place[1], fa = miss[1], c = a, fc = fa;
    double share = fa != fb ? fmin(fmax(fa / (fa - fb), 0.01), 0.99) : 0.5;
    for (int round = 0; round < ROLL_ROUNDS && fa != 0.0 && fb != 0.0; round++) {
        double at = a + share * (b - a);
        double miss_at = roll_to(run, at);
        if (run->status != TW_OK) {
            return at;
        }
        int same = (miss_at < 0.0) == (fa < 0.0);
        c = same ? a : b;
        fc = same ? fa : fb;
        b = same ? b : a;
        fb = same ? fb : fa;
        a = at;
        fa = miss_at;
        double least = tolerance / fabs(b - a);
        if (least > 0.5) {
            break;
        }
        double xi = (a - b) / (c - b), phi = (fa - fb) / (fc - fb);
        int trusted = phi * phi < xi && (1.0 - phi) * (1.0 - phi) < 1.0 - xi;
        share = trusted ? fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb) : 0.5;
        share = fmin(fmax(share, least), 1.0 - least);
    }
    place[1] = fabs(fa) <= fabs(fb) ? b : a;
    return fabs(fa) <= fabs(fb) ? a : b;
}

/* A free carriage rests where it rolls back from just ahead and ahead from just behind; another point load there makes the
 * two differ. At an end of its span only one side is asked. */
static double free_off(const tw_section *section, const tw_load *load)
{
    double force[3], before[3], beyond[3];
    size_t span = load->carriage_span;
    double s = section->carriage_m, start = section->start_m[span], end = section->start_m[span + 1];
    double margin = ROLL_MARGIN * (end - start);
    tw_section_load_vector(section, section->condition, load, span, force);
    if (tw_norm(force) == 0.0) {
        return 0.0;
    }
    tw_section_beside(section, s, before, beyond);
    double size = fmax(tw_norm(before), tw_norm(beyond));
    double ahead = s <= start + margin ? 0.0 : drive(before, force);
    tw_axpy(beyond, 1.0, force, beyond);
    double back = s >= end - margin ? 0.0 : -drive(beyond, force);
    return fmax(fmax(ahead, back), 0.0) / size;
}

double tw_section_carriage_off(const tw_section *section)
{
    const tw_load *load = section->condition == TW_NONE ? NULL : carriage_of(section->project, section->condition);
    double place[3];
    if (!load) {
        return 0.0;
    }
    if (load->carriage == TW_CARRIAGE_FREE) {
        return free_off(section, load);
    }
    tw_section_at(section, section->carriage_m, place, NULL);
    double station = tw_section_station(section, section->carriage_m, place);
    return fabs(station - load->from_m) / section->length_m[load->carriage_span];
}

static tw_status roll(rolling *run)
{
    tw_section *section = run->section;
    size_t span = run->load->carriage_span;
    int held = run->load->carriage == TW_CARRIAGE_HELD;
    tw_section_load_vector(section, run->condition, run->load, span, run->force);
    run->status = tw_section_load(section, run->condition, run->length_m, run->strung, run->with_addition);
    if (run->status != TW_OK || tw_norm(run->force) == 0.0) {
        return run->status != TW_OK ? run->status : solve_runs(section, run->options, run->warm, &run->steps);
    }
    double start = section->start_m[span], length = section->length_m[span];
    double low = start + ROLL_MARGIN * length, high = start + length - ROLL_MARGIN * length;
    double place[2] = {fmin(fmax(section->carriage_m, low), high), 0.0}, miss[2], at;
    if (bracket_place(run, low, high, place, miss)) {
        at = narrow_place(run, place, miss, ROLL_STEP * length);
    } else {
        at = place[1] == high ? section->start_m[span + 1] : start;
        run->status = run->status == TW_OK && held ? TW_ERROR_PLACE : run->status;
    }
    if (run->status == TW_OK && section->carriage_m != at) {
        roll_to(run, at);
    }
    if (run->status == TW_OK && !(tw_section_carriage_off(section) <= TW_SECTION_OFF_MOST)) {
        roll_to(run, place[1]); /* beside another point load only one side of the bracket is at rest */
    }
    return run->status == TW_OK && !(tw_section_carriage_off(section) <= TW_SECTION_OFF_MOST) ? TW_NOT_SETTLED : run->status;
}

tw_status tw_section_hang(tw_section *section, size_t condition, const double *length_m, const tw_section *strung,
                          int with_addition, const tw_options *options, int warm)
{
    rolling run = {.section = section, .condition = condition, .length_m = length_m, .strung = strung,
                   .with_addition = with_addition, .options = options, .warm = warm};
    run.load = condition == TW_NONE ? NULL : carriage_of(section->project, condition);
    if (!warm) {
        section->carriage_m = (double)NAN;
        section->run_pieces = 0;
    }
    if (run.load) {
        run.status = roll(&run);
    } else {
        run.status = tw_section_load(section, condition, length_m, strung, with_addition);
        if (run.status == TW_OK) {
            run.status = solve_runs(section, options, warm, &run.steps);
        }
    }
    section->steps = run.steps;
    return run.status;
}
