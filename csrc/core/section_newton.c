#include "section_newton.h"

#include <float.h>
#include <math.h>
#include <string.h>

#include "couple.h"
#include "hold.h"
#include "vector.h"

static const double NEAR_REST = 1e-8; /* closing error over the longest chord */
static const double CUT_SHORT = 0.02; /* share of a Newton step below which a hanger's kink is suspected */

tw_section_scratch tw_section_carve(const tw_section *section)
{
    size_t n = section->span_count;
    tw_section_scratch s;
    s.error = section->work;
    s.step = s.error + 3 * n;
    s.before = s.step + 3 * n;
    s.end = s.before + 3 * n;
    s.far = s.end + 3 * n;
    s.bend = s.far + 3 * n;
    s.diag = s.bend + 6 * n;
    s.off = s.diag + 9 * n;
    s.swing = s.off + 9 * n;
    s.reach = s.swing + 3 * (n + 1);
    s.runs = 0;
    return s;
}

static void divide_into_runs(tw_section *section, tw_section_scratch *s)
{
    s->runs = 0;
    for (size_t k = 0; k < section->span_count; k++) {
        if (k == 0 || !section->slack[k]) {
            section->run_first[s->runs++] = k;
        }
    }
    section->run_first[s->runs] = section->span_count;
}

/* F_j = t_{j-1}(S) - R_j - G_j; nothing at a slack hanger. */
static void balance_holds(tw_section *section, const tw_section_scratch *s)
{
    for (size_t j = 0; j <= section->span_count; j++) {
        double *F = section->hold_force + 3 * j;
        for (int i = 0; i < 3; i++) {
            double behind = j > 0 ? s->far[3 * (j - 1) + (size_t)i] : 0.0;
            double ahead = j < section->span_count ? section->pull[3 * j + (size_t)i] : 0.0;
            F[i] = section->slack[j] ? 0.0 : behind - ahead - section->clamp_load[3 * j + (size_t)i];
        }
        tw_hold_swing(&section->project->supports[j], section->ahead + 2 * j, F, section->soft_N, s->swing + 3 * j);
    }
}

/* Hang the spans of a run one after the other; past a slack hanger the tension goes on, less the load at the clamp. */
static void hang_run(tw_section *section, const tw_section_scratch *s, size_t run, double *bend)
{
    double place[3] = {0.0, 0.0, 0.0}, end[3], span_bend[6];
    for (int i = 0; bend && i < 6; i++) {
        bend[i] = 0.0;
    }
    for (size_t k = section->run_first[run]; k < section->run_first[run + 1]; k++) {
        size_t first = section->piece_first[k];
        if (k > section->run_first[run]) {
            tw_copy(place, s->reach + 3 * k);
            tw_axpy(s->far + 3 * (k - 1), -1.0, section->clamp_load + 3 * k, section->pull + 3 * k);
        }
        tw_span_hang(&section->materials[k], section->pieces + first, section->piece_first[k + 1] - first, place,
                     section->pull + 3 * k, end, s->far + 3 * k, bend ? span_bend : NULL);
        tw_copy(end, place);
        for (int i = 0; bend && i < 6; i++) {
            bend[i] += span_bend[i];
        }
    }
    tw_copy(place, s->end + 3 * run);
}

/* Closing error of every run at the present pulls; its largest size. */
static double close_up(tw_section *section, const tw_section_scratch *s)
{
    double worst = 0.0;
    for (size_t r = 0; r < s->runs; r++) {
        hang_run(section, s, r, s->bend + 6 * r);
    }
    balance_holds(section, s);
    for (size_t r = 0; r < s->runs; r++) {
        double chord[3];
        double *error = s->error + 3 * r;
        size_t from = section->run_first[r], to = section->run_first[r + 1];
        tw_hold_chord(&section->project->supports[from], &section->project->supports[to], chord);
        for (size_t i = 0; i < 3; i++) {
            error[i] = s->end[3 * r + i] - chord[i] + (s->swing[3 * from + i] - s->swing[3 * to + i]);
        }
        double size = tw_norm(error);
        worst = size > worst || !isfinite(size) ? size : worst;
    }
    return worst;
}

static int newton_step(tw_section *section, const tw_section_scratch *s)
{
    size_t n = s->runs;
    memset(s->off, 0, 9 * n * sizeof(double));
    for (size_t r = 0; r < n; r++) {
        const double *b = s->bend + 6 * r;
        const double block[9] = {b[0], b[1], b[2], b[1], b[3], b[4], b[2], b[4], b[5]};
        double *diag = s->diag + 9 * r;
        const size_t ends[2] = {section->run_first[r], section->run_first[r + 1]};
        memcpy(diag, block, sizeof block);
        for (int e = 0; e < 2; e++) {
            tw_hold_flexibility(&section->project->supports[ends[e]], section->ahead + 2 * ends[e],
                                section->hold_force + 3 * ends[e], section->soft_N, 1.0, diag);
        }
        if (r + 1 < n) {
            tw_hold_flexibility(&section->project->supports[ends[1]], section->ahead + 2 * ends[1],
                                section->hold_force + 3 * ends[1], section->soft_N, -1.0, s->off + 9 * r);
        }
    }
    if (!tw_couple_factor(s->diag, s->off, n)) {
        return 0;
    }
    for (size_t i = 0; i < 3 * n; i++) {
        s->step[i] = -s->error[i];
    }
    tw_couple_solve(s->diag, s->off, n, s->step);
    return 1;
}

static double slope_along(const tw_section_scratch *s)
{
    double slope = 0.0;
    for (size_t i = 0; i < 3 * s->runs; i++) {
        slope += s->step[i] * s->error[i];
    }
    return slope;
}

/* Go along the step until the slope of -D there turns upwards by no more than a share of how it went down at the start:
 * -D is convex, so such a point lies lower. Close to rest, where rounding decides the slope's sign, most of it is allowed.
 * Returns the closing error, or infinity, and the share of the step taken. */
static double advance(tw_section *section, const tw_section_scratch *s, double upwards, double *share)
{
    double slope = fabs(slope_along(s));
    *share = 1.0;
    for (size_t r = 0; r < s->runs; r++) {
        tw_copy(section->pull + 3 * section->run_first[r], s->before + 3 * r);
    }
    for (int cut = 0; cut < 60; cut++, *share *= 0.5) {
        for (size_t r = 0; r < s->runs; r++) {
            tw_axpy(s->before + 3 * r, *share, s->step + 3 * r, section->pull + 3 * section->run_first[r]);
        }
        double worst = close_up(section, s);
        if (isfinite(worst) && slope_along(s) <= upwards * slope + DBL_MIN) {
            return worst;
        }
    }
    return INFINITY;
}

/* Newton from the pulls that stand. */
tw_status tw_section_iterate(tw_section *section, const tw_options *options, tw_section_scratch *s,
                             const tw_section_patience *how)
{
    double wanted = options->closing_relative * how->scale;
    double enough = 1e-10 * how->scale;
    size_t first = section->steps;
    divide_into_runs(section, s);
    double worst = close_up(section, s);
    while (worst > wanted || section->steps == first) {
        double before = worst, share;
        if (section->steps - first >= how->steps || !isfinite(worst) || !newton_step(section, s)) {
            return TW_NOT_SETTLED;
        }
        worst = advance(section, s, worst > NEAR_REST * how->scale ? 0.1 : 0.9, &share);
        section->steps++;
        section->closing_m = worst;
        if (!isfinite(worst) || (!how->patient && share < CUT_SHORT)) {
            return TW_NOT_SETTLED;
        }
        tw_status asked = tw_options_ask(options);
        if (asked != TW_OK) {
            return asked;
        }
        if (before <= enough && worst > 0.25 * before) {
            break; /* at the floor of rounding */
        }
    }
    return TW_OK;
}
