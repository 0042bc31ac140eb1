#include "section_feed.h"

#include <math.h>
#include <string.h>

#include "couple_feed.h"
#include "hold.h"
#include "vector.h"

enum { HALVINGS_MOST = 40, SIZE = TW_COUPLE_FEED_SIZE, BLOCK = TW_COUPLE_FEED_BLOCK };

static const double BALANCED = 2e-15;       /* relative difference of tensions that rounding leaves */
static const double AT_FLOOR = 1e-10;       /* below it closing errors may decide: a step that gains nothing is the last */
static const double BALANCED_ENOUGH = 3e-10;
static const double LEAST_SHARE = 1e-3;     /* of a span's end piece, that a step leaves */

/* One solve at work; the arrays lie in section->feed_work and count the spans. */
typedef struct feed_run {
    tw_section *section;
    const tw_options *options;
    tw_section_scratch *s;
    double *lower, *diag, *upper; /* [16 runs] */
    double *step;                 /* [4 runs] change of pull and of moved length of each run */
    double *first, *last, *whole; /* natural length of a span's first and last piece and of all, with nothing moved */
    double *pull, *moved;         /* before the step */
    double *miss;                 /* of the equation in m_j, else 0 */
    size_t *run_first;            /* the runs that the step is of: coming to rest may join or part them */
    int overran;                  /* a step was cut short by a piece that would have run over a sheave */
} feed_run;

void tw_section_feed_by_holds(tw_section *section)
{
    section->drag = 0;
    for (size_t j = 0; j <= section->span_count; j++) {
        section->feed[j] = section->project->supports[j].hold == TW_HOLD_SHEAVE ? TW_FEED_SHEAVE : TW_FEED_NONE;
    }
}

int tw_section_feeds(const tw_section *section)
{
    for (size_t j = 0; j < section->span_count; j++) {
        if (section->feed[j] != TW_FEED_NONE) {
            return 1;
        }
    }
    return 0;
}

static feed_run begin(tw_section *section, const tw_options *options, tw_section_scratch *s)
{
    size_t n = section->span_count;
    feed_run run = {.section = section, .options = options, .s = s};
    run.lower = section->feed_work;
    run.diag = run.lower + BLOCK * n;
    run.upper = run.diag + BLOCK * n;
    run.step = run.upper + BLOCK * n;
    run.first = run.step + SIZE * n;
    run.last = run.first + n;
    run.whole = run.last + n;
    run.pull = run.whole + n;
    run.moved = run.pull + 3 * n;
    run.miss = run.moved + n;
    run.run_first = section->feed_runs;
    return run;
}

static tw_piece *first_piece(const tw_section *section, size_t span)
{
    return &section->pieces[section->piece_first[span]];
}

static tw_piece *last_piece(const tw_section *section, size_t span)
{
    return &section->pieces[section->piece_first[span + 1] - 1];
}

/* Natural length that leaves the end of a span. */
static double leaves(const tw_section *section, size_t span)
{
    size_t j = span + 1;
    return j < section->span_count && section->feed[j] != TW_FEED_WINCH ? section->moved_m[j] : 0.0;
}

/* The lengths as loaded, of which moved_m is counted. */
static void note_lengths(const feed_run *run)
{
    tw_section *section = run->section;
    for (size_t k = 0; k < section->span_count; k++) {
        double in = section->fed ? section->moved_m[k] : 0.0, out = section->fed ? leaves(section, k) : 0.0;
        int one = first_piece(section, k) == last_piece(section, k);
        run->first[k] = first_piece(section, k)->length_m - in + (one ? out : 0.0);
        run->last[k] = last_piece(section, k)->length_m + out - (one ? in : 0.0);
        run->whole[k] = section->length_m[k] - in + out;
    }
}

/* A load that varies stays where it is on the line: the first piece of a span begins elsewhere along it. */
static void shift_ramp(tw_section *section, size_t span, double by_m)
{
    tw_piece *piece = first_piece(section, span);
    tw_axpy(piece->load, by_m, piece->ramp, piece->load);
    if (section->run_vector) {
        double *share = section->run_share + 2 * section->piece_first[span];
        share[0] += by_m * share[1];
    }
}

/* The load at the very end of a span. */
static void end_load(const tw_section *section, size_t span, double load[3])
{
    const tw_piece *piece = last_piece(section, span);
    tw_piece_load(piece, piece->length_m, load);
}

/* Puts moved_m on the pieces; 0, and leaves them as they are, where a piece would be used up. */
static int apply_moved(feed_run *run)
{
    tw_section *section = run->section;
    for (size_t k = 0; k < section->span_count; k++) {
        double in = section->moved_m[k], out = leaves(section, k);
        int one = first_piece(section, k) == last_piece(section, k);
        double first = run->first[k] + in - (one ? out : 0.0), last = run->last[k] - out + (one ? in : 0.0);
        if (!(first >= LEAST_SHARE * fmin(run->first[k], first_piece(section, k)->length_m)
              && last >= LEAST_SHARE * fmin(run->last[k], last_piece(section, k)->length_m))) {
            run->overran |= !one; /* one piece alone: the line itself runs off */
            return 0;
        }
    }
    double s0 = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        double in = section->moved_m[k], out = leaves(section, k);
        int one = first_piece(section, k) == last_piece(section, k);
        first_piece(section, k)->length_m = run->first[k] + in - (one ? out : 0.0);
        last_piece(section, k)->length_m = run->last[k] - out + (one ? in : 0.0);
        section->length_m[k] = run->whole[k] + in - out;
        shift_ramp(section, k, s0 - section->start_m[k]); /* no winch where a load varies: s is that of the line itself */
        section->start_m[k] = s0;
        s0 += section->length_m[k];
    }
    section->start_m[section->span_count] = s0;
    section->fed = 1;
    return 1;
}

static double friction_at(const tw_section *section, size_t j)
{
    double own = section->project->supports[j].sheave_friction;
    int has = section->project->supports[j].hold == TW_HOLD_SHEAVE && !isnan(own);
    return has ? own : section->project->stringing.friction;
}

/* Angle from a to b, and its gradient in a, for unit vectors; the gradient is 0 where it has none. */
static double angle_between(const double a[3], const double b[3], double gradient[3])
{
    double aside[3];
    double cosine = tw_dot(a, b);
    tw_axpy(b, -cosine, a, aside);
    double sine = tw_norm(aside);
    for (int i = 0; i < 3; i++) {
        gradient[i] = sine > 1e-12 ? -aside[i] / sine : 0.0;
    }
    return atan2(sine, cosine);
}

/* ln |t|, or ln of its horizontal part, and the gradient in t. */
static double log_tension(const double t[3], int horizontal, double gradient[3])
{
    const double part[3] = {t[0], t[1], horizontal ? 0.0 : t[2]};
    double square = tw_dot(part, part);
    for (int i = 0; i < 3; i++) {
        gradient[i] = part[i] / square;
    }
    return 0.5 * log(square);
}

/* Friction of a sheave: drag mu theta, taken from the equation and its gradients. */
static double drag_at(const tw_section *section, size_t j, const double ahead[3], const double behind[3], double in_ahead[3],
                      double in_behind[3])
{
    double factor = section->drag * friction_at(section, j);
    double a = tw_norm(ahead), b = tw_norm(behind);
    double unit_a[3], unit_b[3], gradient[3];
    if (factor == 0.0) {
        return 0.0;
    }
    for (int i = 0; i < 3; i++) {
        unit_a[i] = ahead[i] / a;
        unit_b[i] = behind[i] / b;
    }
    angle_between(unit_b, unit_a, gradient);
    tw_axpy(in_behind, -factor / b, gradient, in_behind);
    double theta = angle_between(unit_a, unit_b, gradient);
    tw_axpy(in_ahead, -factor / a, gradient, in_ahead);
    return factor * theta;
}

/* What the equation in m_j misses, and its gradients in the tension ahead (R_j) and behind (t_j) of the support. */
static double miss_at(const feed_run *run, size_t j, double in_ahead[3], double in_behind[3])
{
    const tw_section *section = run->section;
    const double *ahead = section->pull + 3 * j;
    double miss = log_tension(ahead, section->feed[j] != TW_FEED_SHEAVE, in_ahead);
    if (section->feed[j] == TW_FEED_WINCH) {
        in_behind[0] = in_behind[1] = in_behind[2] = 0.0;
        return miss - log(section->winch_N[j]);
    }
    const double *behind = run->s->far + 3 * (j - 1);
    miss -= log_tension(behind, section->feed[j] != TW_FEED_SHEAVE, in_behind);
    for (int i = 0; i < 3; i++) {
        in_behind[i] = -in_behind[i];
    }
    return section->feed[j] == TW_FEED_SHEAVE ? miss - drag_at(section, j, ahead, behind, in_ahead, in_behind) : miss;
}

/* Every equation in m; the root of the sum of squares. */
static double find_misses(const feed_run *run)
{
    double square = 0.0, in_ahead[3], in_behind[3];
    for (size_t j = 0; j < run->section->span_count; j++) {
        run->miss[j] = run->section->feed[j] == TW_FEED_NONE ? 0.0 : miss_at(run, j, in_ahead, in_behind);
        square += run->miss[j] * run->miss[j];
    }
    return sqrt(square);
}

static void add_product(const double block[9], double factor, const double v[3], double out[3])
{
    for (size_t i = 0; i < 3; i++) {
        out[i] += factor * tw_dot(block + 3 * i, v);
    }
}

/* What moves into and out of a run: per natural metre, what it does to the run's end. */
static void end_per_length(const feed_run *run, size_t r, double in[3], double out[3])
{
    const tw_section *section = run->section;
    size_t from = section->run_first[r], last = section->run_first[r + 1] - 1;
    const double *b = run->s->bend + 6 * r;
    const double bend[9] = {b[0], b[1], b[2], b[1], b[3], b[4], b[2], b[4], b[5]};
    const double *ahead = section->pull + 3 * from, *far = run->s->far + 3 * last;
    double T = tw_norm(ahead), t = tw_norm(far);
    for (int i = 0; i < 3; i++) {
        in[i] = ahead[i] * tw_material_stretch(&section->materials[from], T) / T;
        out[i] = -far[i] * tw_material_stretch(&section->materials[last], t) / t;
    }
    add_product(bend, -1.0, first_piece(section, from)->load, in); /* what comes in is carried by all that follows */
}

static void put_column(double *block, int column, const double v[3])
{
    for (int i = 0; i < 3; i++) {
        block[SIZE * i + column] += v[i];
    }
}

static void put_block(double *block, double factor, const double a[9])
{
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j < 3; j++) {
            block[SIZE * i + j] += factor * a[3 * i + j];
        }
    }
}

/* The closing error of run r: its own pull and lengths, and the two holds that see the forces of its neighbours.
 * swing_j follows F_j = t_j - R_j - G_j by -flexibility; t_j grows by q per metre that leaves, falls by q per metre that
 * comes in at the start of its run. */
static void put_closing(const feed_run *run, size_t r)
{
    const tw_section *section = run->section;
    const size_t ends[2] = {section->run_first[r], section->run_first[r + 1]};
    const double *b = run->s->bend + 6 * r;
    const double bend[9] = {b[0], b[1], b[2], b[1], b[3], b[4], b[2], b[4], b[5]};
    double in[3], out[3];
    double *lower = run->lower + BLOCK * r, *diag = run->diag + BLOCK * r, *upper = run->upper + BLOCK * r;
    double near[9] = {0.0}, far[9] = {0.0}, column[3] = {0.0, 0.0, 0.0};
    tw_hold_flexibility(&section->project->supports[ends[0]], section->ahead + 2 * ends[0], section->hold_force + 3 * ends[0],
                        section->soft_N, 1.0, near);
    tw_hold_flexibility(&section->project->supports[ends[1]], section->ahead + 2 * ends[1], section->hold_force + 3 * ends[1],
                        section->soft_N, 1.0, far);
    const double *q_in = first_piece(section, ends[0])->load;
    double q_out[3], q_behind[3];
    end_load(section, ends[1] - 1, q_out);
    end_per_length(run, r, in, out);
    put_block(diag, 1.0, bend);
    put_block(diag, 1.0, near);
    put_block(diag, 1.0, far);
    put_block(lower, -1.0, near);
    put_block(upper, -1.0, far);
    add_product(far, -1.0, q_in, in);
    if (section->feed[ends[0]] != TW_FEED_WINCH && r > 0) {
        end_load(section, ends[0] - 1, q_behind);
        add_product(near, -1.0, q_behind, in);
    }
    put_column(diag, 3, in);
    if (r > 0) {
        add_product(near, 1.0, first_piece(section, section->run_first[r - 1])->load, column);
        put_column(lower, 3, column);
    }
    if (ends[1] < section->span_count && section->feed[ends[1]] != TW_FEED_WINCH) {
        add_product(far, 1.0, q_out, out);
        put_column(upper, 3, out);
    }
}

/* The equation in m at the start of run r; m = 0 where there is none. */
static void put_feed(const feed_run *run, size_t r)
{
    const tw_section *section = run->section;
    size_t j = section->run_first[r];
    double in_ahead[3], in_behind[3], q_behind[3];
    double *lower = run->lower + BLOCK * r + 3 * SIZE, *diag = run->diag + BLOCK * r + 3 * SIZE;
    run->step[SIZE * r + 3] = -run->miss[j];
    if (section->feed[j] == TW_FEED_NONE) {
        diag[3] = 1.0;
        return;
    }
    miss_at(run, j, in_ahead, in_behind);
    memcpy(diag, in_ahead, sizeof in_ahead);
    if (section->feed[j] != TW_FEED_WINCH) {
        memcpy(lower, in_behind, sizeof in_behind);
        lower[3] = -tw_dot(in_behind, first_piece(section, section->run_first[r - 1])->load);
        end_load(section, j - 1, q_behind);
        diag[3] = tw_dot(in_behind, q_behind);
    }
}

/* The step in all pulls and moved lengths, with every run at rest; 0 where there is none. */
static int newton_step(const feed_run *run)
{
    size_t runs = run->s->runs;
    memset(run->lower, 0, 3 * BLOCK * run->section->span_count * sizeof(double));
    for (size_t r = 0; r < runs; r++) {
        put_closing(run, r);
        for (size_t i = 0; i < 3; i++) {
            run->step[SIZE * r + i] = -run->s->error[3 * r + i];
        }
    }
    for (size_t r = 0; r < runs; r++) {
        put_feed(run, r);
    }
    return tw_couple_feed_solve(run->lower, run->diag, run->upper, runs, run->step);
}

/* A share of the step from where the solve stood, brought to rest; what the equations in m then miss, or infinity. */
static double take_share(feed_run *run, const size_t *run_first, size_t runs, double share, tw_status *status)
{
    tw_section *section = run->section;
    memcpy(section->pull, run->pull, 3 * section->span_count * sizeof(double));
    memcpy(section->moved_m, run->moved, section->span_count * sizeof(double));
    for (size_t r = 0; r < runs; r++) {
        tw_axpy(section->pull + 3 * run_first[r], share, run->step + SIZE * r, section->pull + 3 * run_first[r]);
        section->moved_m[run_first[r]] += share * run->step[SIZE * r + 3];
    }
    *status = TW_NOT_SETTLED;
    if (!apply_moved(run)) {
        memcpy(section->moved_m, run->moved, section->span_count * sizeof(double));
        return INFINITY;
    }
    *status = tw_section_rest(section, run->options, run->s, 1);
    return *status == TW_OK ? find_misses(run) : INFINITY;
}

/* Halve the step until the equations in m miss by less; by how much, or infinity where they do not. */
static double advance(feed_run *run, double before, tw_status *status)
{
    size_t runs = run->s->runs;
    tw_section *section = run->section;
    memcpy(run->run_first, section->run_first, runs * sizeof *run->run_first);
    memcpy(run->pull, section->pull, 3 * section->span_count * sizeof(double));
    memcpy(run->moved, section->moved_m, section->span_count * sizeof(double));
    run->overran = 0;
    double share = 1.0;
    for (int cut = 0; cut < HALVINGS_MOST; cut++, share *= 0.5) {
        double miss = take_share(run, run->run_first, runs, share, status);
        if (tw_status_stops(*status) || miss <= (1.0 - 1e-4 * share) * before || before <= AT_FLOOR) {
            return miss;
        }
    }
    return INFINITY;
}

/* Newton from the lengths that stand, with their pulls at rest. */
static tw_status iterate(feed_run *run)
{
    double miss = find_misses(run);
    for (size_t step = 0; step < run->options->newton_most && miss > BALANCED; step++) {
        tw_status status = TW_NOT_SETTLED;
        double before = miss;
        if (!isfinite(miss) || !newton_step(run)) {
            return TW_NOT_SETTLED;
        }
        miss = advance(run, before, &status);
        if (tw_status_stops(status)) {
            return status;
        }
        if (before <= AT_FLOOR && !(miss < 0.25 * before)) {
            break; /* at the floor of rounding */
        }
        if (!isfinite(miss)) {
            return run->overran ? TW_OVER_SHEAVE : TW_NOT_SETTLED;
        }
    }
    return miss <= BALANCED_ENOUGH ? TW_OK : TW_NOT_SETTLED;
}

static tw_status attempt(feed_run *run, int warm)
{
    tw_section *section = run->section;
    if (!warm) {
        memset(section->moved_m, 0, (section->span_count + 1) * sizeof(double));
    }
    if (!apply_moved(run)) {
        return TW_NOT_SETTLED;
    }
    tw_status status = tw_section_rest(section, run->options, run->s, warm);
    return status == TW_OK ? iterate(run) : status;
}

tw_status tw_section_run_over(tw_section *section, const tw_options *options, tw_section_scratch *s, int warm)
{
    feed_run run = begin(section, options, s);
    note_lengths(&run);
    tw_status status = warm ? attempt(&run, 1) : TW_NOT_SETTLED;
    if (status == TW_NOT_SETTLED || (warm && status == TW_OVER_SHEAVE)) {
        status = attempt(&run, 0);
    }
    return status;
}

double tw_section_imbalance(const tw_section *section)
{
    double most = 0.0;
    for (size_t j = 1; j < section->span_count; j++) {
        if (section->project->supports[j].hold == TW_HOLD_SHEAVE) {
            const tw_piece *piece = last_piece(section, j - 1);
            double far[3];
            tw_piece_tension(piece, piece->length_m, far);
            most = fmax(most, fabs(tw_norm(first_piece(section, j)->tension) - tw_norm(far)));
        }
    }
    return most;
}
