/* window_scan: rows at a pull, the scan with its islands, and the boundaries of the open stretches. */
#include <math.h>
#include <string.h>

#include "clock.h"
#include "stringing.h"
#include "window_search.h"

static const double UNSETTLED = 1000.0;    /* utilisation of a row that cannot be settled at a pull */
static const double LOG_STEP = 1e-6;       /* forward differences in log(pull): candidates are polished without them */
static const double NEAR_EDGE = 0.8;       /* a bump of f above this is looked at more closely */
static const double HOLDS = 1.0 + 1e-9;    /* utilisation that counts as held */

double tw_window_worst(const tw_window_run *run, const double *u, size_t *row)
{
    double worst = 0.0;
    size_t at = TW_NONE;
    for (size_t r = 0; r < run->window->row_count; r++) {
        if (!run->masked[r] && (at == TW_NONE || u[r] > worst)) {
            worst = u[r];
            at = r;
        }
    }
    if (row) {
        *row = at;
    }
    return worst;
}

static void latch(tw_window_run *run, tw_status status)
{
    if (run->stop == TW_OK && (status < 0 || status == TW_CANCELLED || status == TW_DEADLINE)) {
        run->stop = status;
    }
}

/* Strings to a pull; 0 when nothing can be judged there. */
static int string_to(tw_window_run *run, double pull_N)
{
    latch(run, tw_clock_check(run->options, run->deadline));
    if (run->stop != TW_OK) {
        return 0;
    }
    tw_status status = tw_trial_string(run->trial, pull_N);
    latch(run, status);
    return status == TW_OK;
}

double tw_window_row(tw_window_run *run, size_t row, tw_verdict *verdict)
{
    tw_verdict own = {.span = TW_NONE, .support = TW_NONE, .station_m = (double)NAN};
    tw_status status = run->stop;
    if (status == TW_OK) {
        status = tw_trial_judge(run->trial, run->window->row_limit[row], run->window->row_condition[row], run->options,
                                &own);
        latch(run, status);
    }
    if (verdict) {
        *verdict = own;
    }
    if (status != TW_OK || !isfinite(own.utilisation)) {
        return UNSETTLED;
    }
    return own.judged ? fmin(own.utilisation, UNSETTLED) : 0.0;
}

double tw_window_try(tw_window_run *run, double pull_N, double *u)
{
    int strung = string_to(run, pull_N);
    double worst = 0.0;
    for (size_t r = 0; r < run->window->row_count; r++) {
        u[r] = strung ? tw_window_row(run, r, NULL) : UNSETTLED;
        worst = fmax(worst, u[r]);
    }
    if (!run->moved && run->stop == TW_OK && worst < run->best_f) {
        run->best_f = worst;
        run->best_pull_N = pull_N;
    }
    return tw_window_worst(run, u, NULL);
}

static double *curve_row(const tw_window_run *run, size_t k)
{
    return run->window->curve + k * run->window->row_count;
}

static double curve_f(const tw_window_run *run, size_t k)
{
    return tw_window_worst(run, curve_row(run, k), NULL);
}

/* Try a pull and keep it on the curve, in order. */
static void add_to_curve(tw_window_run *run, double pull_N)
{
    tw_window *w = run->window;
    size_t k = w->curve_count;
    if (k >= run->curve_capacity) {
        return;
    }
    tw_window_try(run, pull_N, run->u);
    while (k > 0 && w->curve_pull_N[k - 1] > pull_N) {
        k--;
    }
    memmove(w->curve_pull_N + k + 1, w->curve_pull_N + k, (w->curve_count - k) * sizeof(double));
    memmove(curve_row(run, k + 1), curve_row(run, k), (w->curve_count - k) * w->row_count * sizeof(double));
    w->curve_pull_N[k] = pull_N;
    memcpy(curve_row(run, k), run->u, w->row_count * sizeof(double));
    w->curve_count++;
}

/* The optimiser's view: rows as functions of z in [0, 1], pull = low (high/low)^z, seen at pull * factor. */
typedef struct view {
    tw_window_run *run;
    double low, ratio; /* ratio: log(high/low) */
    size_t row[TW_WINDOW_WORKING_MOST];
    double factor[TW_WINDOW_WORKING_MOST];
    size_t count;
    int epigraph; /* 1: variables (z, t), u <= t; 0: variable z, u <= 1 */
} view;

static double view_pull(const view *v, double z)
{
    return v->low * exp(v->ratio * z);
}

static double row_at(tw_window_run *run, size_t row, double pull_N)
{
    return string_to(run, pull_N) ? tw_window_row(run, row, NULL) : UNSETTLED;
}

static void constrain(void *data, const double *x, double *values, double *gradient)
{
    view *v = data;
    size_t n = v->epigraph ? 2 : 1;
    for (size_t i = 0; i < v->count; i++) {
        double pull = view_pull(v, x[0]) * v->factor[i];
        double here = row_at(v->run, v->row[i], pull);
        values[i] = here - (v->epigraph ? x[1] : 1.0);
        if (gradient) {
            double up = row_at(v->run, v->row[i], pull * exp(LOG_STEP));
            gradient[n * i] = (up - here) / LOG_STEP * v->ratio;
            if (v->epigraph) {
                gradient[n * i + 1] = -1.0;
            }
        }
    }
}

static double least_t(void *data, const double *x, double *gradient)
{
    (void)data;
    if (gradient) {
        gradient[0] = 0.0;
        gradient[1] = 1.0;
    }
    return x[1];
}

static double furthest(void *data, const double *x, double *gradient)
{
    (void)data;
    if (gradient) {
        gradient[0] = -1.0;
    }
    return -x[0];
}

static int finished(void *data)
{
    return ((view *)data)->run->stop != TW_OK;
}

static double call_optimiser(view *v, double start)
{
    const double low[2] = {0.0, 0.0};
    const double high[2] = {1.0, UNSETTLED};
    double x[2] = {start, 0.0};
    double values[TW_WINDOW_WORKING_MOST];
    tw_optimise_problem problem = {
        .variables = v->epigraph ? 2 : 1,
        .constraints = v->count,
        .evaluations_most = 100,
        .x_tolerance = v->epigraph ? 1e-9 : 1e-6,
        .low = low,
        .high = high,
        .objective = v->epigraph ? least_t : furthest,
        .constrain = constrain,
        .finished = finished,
        .data = v,
    };
    if (v->epigraph) {
        constrain(v, x, values, NULL);
        for (size_t i = 0; i < v->count; i++) {
            x[1] = fmax(x[1], fmin(values[i], UNSETTLED));
        }
    }
    latch(v->run, v->run->optimiser(&problem, x, &v->run->window->evaluations));
    return isfinite(x[0]) ? fmin(fmax(x[0], 0.0), 1.0) : start;
}

static int add_to_view(view *v, size_t row, double factor)
{
    for (size_t i = 0; i < v->count; i++) {
        if (v->row[i] == row && v->factor[i] == factor) {
            return 0;
        }
    }
    if (row == TW_NONE || v->count == TW_WINDOW_WORKING_MOST) {
        return 0;
    }
    v->row[v->count] = row;
    v->factor[v->count++] = factor;
    return 1;
}

/* f over the tolerance: judged at both of its ends on every row (f is unimodal between the islands of the scan).
 * Adds each end's worst row to the view and counts those that were new. */
static double judge_tolerance(tw_window_run *run, double pull_N, double tolerance, view *v, int *added)
{
    const double factors[2] = {1.0 - tolerance, 1.0 + tolerance};
    double worst = 0.0;
    for (int i = 0; i < (tolerance > 0.0 ? 2 : 1); i++) {
        size_t row;
        tw_window_try(run, pull_N * factors[i], run->u);
        worst = fmax(worst, tw_window_worst(run, run->u, &row));
        if (v) {
            *added += add_to_view(v, row, factors[i]);
        }
    }
    return worst;
}

/* Golden section on the judged f: the way that does without the optimiser. */
static double golden(tw_window_run *run, double low_N, double high_N, double tolerance, double *pull_N)
{
    const double g = 0.61803398874989485;
    double a = log(low_N), b = log(high_N);
    double c = b - g * (b - a), d = a + g * (b - a);
    double fc = judge_tolerance(run, exp(c), tolerance, NULL, NULL);
    double fd = judge_tolerance(run, exp(d), tolerance, NULL, NULL);
    for (int i = 0; i < 60 && b - a > 1e-10 && run->stop == TW_OK; i++) {
        if (fc < fd) {
            b = d;
            d = c;
            fd = fc;
            c = b - g * (b - a);
            fc = judge_tolerance(run, exp(c), tolerance, NULL, NULL);
        } else {
            a = c;
            c = d;
            fc = fd;
            d = a + g * (b - a);
            fd = judge_tolerance(run, exp(d), tolerance, NULL, NULL);
        }
    }
    *pull_N = exp(fc < fd ? c : d);
    return fmin(fc, fd);
}

/* 1: a step of 1e-4 either way lowers the worst of the view's rows: what the optimiser gave is no minimum. (Where that
 * rises, f rises: it lies on or above those rows.) */
static int not_lowest(view *v, double low_N, double high_N, double pull_N, double f)
{
    const double sides[2] = {fmax(low_N, pull_N * (1.0 - 1e-4)), fmin(high_N, pull_N * (1.0 + 1e-4))};
    for (int i = 0; i < 2; i++) {
        double worst = 0.0;
        for (size_t k = 0; k < v->count; k++) {
            worst = fmax(worst, row_at(v->run, v->row[k], sides[i] * v->factor[k]));
        }
        if (worst < f - 1e-9) {
            return 1;
        }
    }
    return 0;
}

/* First rows of the view: the worst of the curve at the two ends of the stretch. */
static void first_rows(view *v, double low_N, double high_N, double tolerance)
{
    const tw_window *w = v->run->window;
    size_t low = 0, high = w->curve_count - 1, row;
    while (low + 1 < w->curve_count && w->curve_pull_N[low + 1] <= low_N) {
        low++;
    }
    while (high > 0 && w->curve_pull_N[high - 1] >= high_N) {
        high--;
    }
    tw_window_worst(v->run, curve_row(v->run, low), &row);
    add_to_view(v, row, 1.0 - tolerance);
    tw_window_worst(v->run, curve_row(v->run, high), &row);
    add_to_view(v, row, 1.0 + tolerance);
}

double tw_window_minimax(tw_window_run *run, double low_N, double high_N, double tolerance, double *pull_N)
{
    view v = {.run = run, .low = low_N, .ratio = log(high_N / low_N), .epigraph = 1};
    int added = 1;
    double best = INFINITY;
    double start = 0.5;
    *pull_N = low_N;
    if (!(v.ratio > 0.0)) {
        return judge_tolerance(run, low_N, tolerance, NULL, NULL);
    }
    first_rows(&v, low_N, high_N, tolerance);
    for (int round = 0; round < 8 && added > 0 && run->stop == TW_OK; round++) {
        double z = call_optimiser(&v, start);
        double pull = view_pull(&v, z);
        added = 0;
        double f = judge_tolerance(run, pull, tolerance, &v, &added);
        if (f < best) {
            best = f;
            *pull_N = pull;
        }
        start = z;
    }
    if (not_lowest(&v, low_N, high_N, *pull_N, best)) {
        double other;
        double f = golden(run, low_N, high_N, tolerance, &other);
        if (f < best) {
            best = f;
            *pull_N = other;
        }
    }
    return best;
}

/* Worst of the view's rows at z, less 1. */
static double excess(view *v, double z)
{
    double worst = -1.0;
    for (size_t i = 0; i < v->count; i++) {
        worst = fmax(worst, row_at(v->run, v->row[i], view_pull(v, z)) - 1.0);
    }
    return worst;
}

/* Shrinks a bracket with excess(low) <= 0 < excess(high) to rounding (Illinois rule, halved every third step). */
static double last_that_holds(view *v, double low, double high, double at_low, double at_high)
{
    int side = 0;
    for (int i = 0; i < 80 && high - low > 1e-13 && v->run->stop == TW_OK; i++) {
        double z = low + (high - low) * (at_low < at_high ? -at_low / (at_high - at_low) : 0.5);
        z = i % 3 == 2 || !(z > low && z < high) ? 0.5 * (low + high) : z;
        double value = excess(v, z);
        if (value <= 0.0) {
            low = z;
            at_low = value;
            at_high *= side < 0 ? 0.5 : 1.0;
            side = -1;
            if (value > -1e-13) {
                break;
            }
        } else {
            high = z;
            at_high = value;
            at_low *= side > 0 ? 0.5 : 1.0;
            side = 1;
        }
    }
    return low;
}

/* Narrows the bracket around what the optimiser gave, and believes it only as far as the signs agree. */
static double polish(view *v, double candidate)
{
    double low = 0.0, high = 1.0;
    double at_low = excess(v, low), at_high = excess(v, high);
    const double near[2] = {candidate - 1e-7, candidate + 1e-7};
    for (int i = 0; i < 2; i++) {
        if (near[i] > low && near[i] < high) {
            double value = excess(v, near[i]);
            if (value <= 0.0) {
                low = near[i];
                at_low = value;
            } else {
                high = near[i];
                at_high = value;
                break;
            }
        }
    }
    return last_that_holds(v, low, high, at_low, at_high);
}

double tw_window_boundary(tw_window_run *run, double holds_N, double fails_N)
{
    double pull = holds_N;
    view v = {.run = run, .low = holds_N, .ratio = log(fails_N / holds_N)};
    for (int round = 0; round < 12 && run->stop == TW_OK; round++) {
        size_t row;
        double f = tw_window_try(run, round == 0 ? fails_N : pull, run->u);
        tw_window_worst(run, run->u, &row);
        if (f <= HOLDS || !add_to_view(&v, row, 1.0)) {
            break; /* every row holds at the boundary found */
        }
        pull = view_pull(&v, polish(&v, call_optimiser(&v, 0.0)));
    }
    return pull;
}

/* A local extreme of f between curve points: SLSQP for a dip, golden section on -f for a bump. */
static void look_for_dip(tw_window_run *run, size_t k)
{
    const double *pull = run->window->curve_pull_N;
    double at;
    size_t last = run->window->curve_count - 1;
    tw_window_minimax(run, pull[k > 0 ? k - 1 : 0], pull[k < last ? k + 1 : last], 0.0, &at);
    add_to_curve(run, at);
}

static void look_for_bump(tw_window_run *run, size_t k)
{
    const double *pull = run->window->curve_pull_N;
    double a = log(pull[k - 1]), b = log(pull[k + 1]);
    double best = curve_f(run, k), at = pull[k];
    for (int i = 1; i < 8; i++) {
        double p = exp(a + (b - a) * i / 8.0);
        double f = tw_window_try(run, p, run->u);
        if (f > best) {
            best = f;
            at = p;
        }
    }
    if (at != pull[k]) {
        add_to_curve(run, at);
    }
}

static void look_between(tw_window_run *run)
{
    tw_window *w = run->window;
    for (size_t k = 0; k < w->curve_count && run->stop == TW_OK; k++) {
        size_t before = w->curve_count;
        double f = curve_f(run, k);
        double left = k > 0 ? curve_f(run, k - 1) : INFINITY;
        double right = k + 1 < w->curve_count ? curve_f(run, k + 1) : INFINITY;
        if (f > 1.0 && f <= left && f < right) {
            look_for_dip(run, k);
        } else if (f <= 1.0 && f > NEAR_EDGE && f >= left && f > right && isfinite(left) && isfinite(right)) {
            look_for_bump(run, k);
        }
        k += w->curve_count - before;
    }
}

void tw_window_scan(tw_window_run *run)
{
    tw_window *w = run->window;
    size_t points = run->options->scan_points;
    w->curve_count = 0;
    for (size_t k = 0; k < points && run->stop == TW_OK; k++) {
        double share = (double)k / (double)(points - 1);
        add_to_curve(run, w->range_low_N * pow(w->range_high_N / w->range_low_N, share));
    }
    look_between(run);
}

size_t tw_window_intervals(tw_window_run *run, double *interval, size_t most)
{
    tw_window *w = run->window;
    size_t count = 0;
    int inside = 0;
    for (size_t k = 0; k < w->curve_count && count < most && run->stop == TW_OK; k++) {
        int holds = curve_f(run, k) <= HOLDS;
        double pull = w->curve_pull_N[k];
        if (holds && !inside) {
            interval[2 * count] = k == 0 ? pull : tw_window_boundary(run, pull, w->curve_pull_N[k - 1]);
        } else if (!holds && inside) {
            interval[2 * count + 1] = tw_window_boundary(run, w->curve_pull_N[k - 1], pull);
            count++;
        }
        inside = holds;
    }
    if (inside && count < most) {
        interval[2 * count + 1] = w->curve_pull_N[w->curve_count - 1];
        count++;
    }
    return count;
}
