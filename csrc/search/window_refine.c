/* window_refine: where a stretch of pulls has its lowest f, and where it stops to hold: SLSQP for a candidate, then signs
 * and judged values alone. */
#include <math.h>

#include "window_search.h"

static const double JUMP = 1e-6;        /* excess that a smooth row cannot have this close to its edge */
static const double LOG_STEP = 1e-6;    /* forward differences in log(pull): candidates are polished without them */

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

static void constrain(void *data, const double *x, double *values, double *gradient)
{
    view *v = data;
    size_t n = v->epigraph ? 2 : 1;
    for (size_t i = 0; i < v->count; i++) {
        double pull = view_pull(v, x[0]) * v->factor[i];
        double here = tw_window_row_at(v->run, v->row[i], pull);
        values[i] = here - (v->epigraph ? x[1] : 1.0);
        if (gradient) {
            double up = tw_window_row_at(v->run, v->row[i], pull * exp(LOG_STEP));
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
    const double high[2] = {1.0, TW_WINDOW_UNSETTLED};
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
            x[1] = fmax(x[1], fmin(values[i], TW_WINDOW_UNSETTLED));
        }
    }
    tw_window_latch(v->run, v->run->optimiser(&problem, x, &v->run->window->evaluations));
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

/* f over the tolerance: judged at both of its ends on every row, and known at the curve's points between them. Adds each
 * end's worst row to the view and counts those that were new. */
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
    for (size_t k = 0; tolerance > 0.0 && k < run->window->curve_count && !run->moved; k++) {
        double at = run->window->curve_pull_N[k];
        if (at > pull_N * factors[0] && at < pull_N * factors[1]) {
            worst = fmax(worst, tw_window_curve_f(run, k));
        }
    }
    return worst;
}

/* Golden section on the judged f, for its lowest (sign 1) or its highest (sign -1): the way without the optimiser. */
static double golden(tw_window_run *run, double low_N, double high_N, double tolerance, double sign, double *pull_N)
{
    const double g = 0.61803398874989485;
    double a = log(low_N), b = log(high_N);
    double c = b - g * (b - a), d = a + g * (b - a);
    double fc = sign * judge_tolerance(run, exp(c), tolerance, NULL, NULL);
    double fd = sign * judge_tolerance(run, exp(d), tolerance, NULL, NULL);
    for (int i = 0; i < 60 && b - a > 1e-10 && run->stop == TW_OK; i++) {
        if (fc < fd) {
            b = d;
            d = c;
            fd = fc;
            c = b - g * (b - a);
            fc = sign * judge_tolerance(run, exp(c), tolerance, NULL, NULL);
        } else {
            a = c;
            c = d;
            fc = fd;
            d = a + g * (b - a);
            fd = sign * judge_tolerance(run, exp(d), tolerance, NULL, NULL);
        }
    }
    *pull_N = exp(fc < fd ? c : d);
    return sign * fmin(fc, fd);
}

double tw_window_peak(tw_window_run *run, double low_N, double high_N, double *pull_N)
{
    return golden(run, low_N, high_N, 0.0, -1.0, pull_N);
}

/* 1: a step of 1e-4 either way lowers the worst of the view's rows: what the optimiser gave is no minimum. (Where that
 * rises, f rises: it lies on or above those rows.) */
static int not_lowest(view *v, double low_N, double high_N, double pull_N, double f)
{
    const double sides[2] = {fmax(low_N, pull_N * (1.0 - 1e-4)), fmin(high_N, pull_N * (1.0 + 1e-4))};
    for (int i = 0; i < 2; i++) {
        double worst = 0.0;
        for (size_t k = 0; k < v->count; k++) {
            worst = fmax(worst, tw_window_row_at(v->run, v->row[k], sides[i] * v->factor[k]));
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
    tw_window_worst(v->run, w->curve + low * w->row_count, &row);
    add_to_view(v, row, 1.0 - tolerance);
    tw_window_worst(v->run, w->curve + high * w->row_count, &row);
    add_to_view(v, row, 1.0 + tolerance);
}

double tw_window_minimax(tw_window_run *run, double low_N, double high_N, double tolerance, double *pull_N)
{
    const tw_window *w = run->window;
    view v = {.run = run, .low = low_N, .ratio = log(high_N / low_N), .epigraph = 1};
    size_t k = run->moved ? TW_NONE : tw_window_curve_best(run, low_N, high_N);
    int added = 1;
    *pull_N = k == TW_NONE ? sqrt(low_N * high_N) : w->curve_pull_N[k];
    if (!(v.ratio > 0.0)) {
        return judge_tolerance(run, *pull_N = low_N, tolerance, NULL, NULL);
    }
    first_rows(&v, low_N, high_N, tolerance);
    double best = judge_tolerance(run, *pull_N, tolerance, &v, &added);
    for (int round = 0; round < 8 && added > 0 && run->stop == TW_OK; round++) {
        double pull = view_pull(&v, call_optimiser(&v, log(*pull_N / low_N) / v.ratio));
        added = 0;
        double f = judge_tolerance(run, pull, tolerance, &v, &added);
        if (f < best) {
            best = f;
            *pull_N = pull;
        }
    }
    if (not_lowest(&v, low_N, high_N, *pull_N, best)) {
        double other;
        double from = k != TW_NONE && k > 0 ? fmax(low_N, w->curve_pull_N[k - 1]) : low_N;
        double to = k != TW_NONE && k + 1 < w->curve_count ? fmin(high_N, w->curve_pull_N[k + 1]) : high_N;
        double f = golden(run, from, to, tolerance, 1.0, &other);
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
        worst = fmax(worst, tw_window_row_at(v->run, v->row[i], view_pull(v, z)) - 1.0);
    }
    return worst;
}

/* Shrinks a bracket with excess(low) <= 0 < excess(high) to rounding (Illinois rule, halved every third step). Where the
 * excess jumps there, as when a hanger lifts off, the last place that holds is taken a little before: at the jump itself
 * rounding decides. */
static double last_that_holds(view *v, double low, double high, double at_low, double at_high)
{
    double beyond = at_high;
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
                return low;
            }
        } else {
            high = z;
            at_high = beyond = value;
            at_low *= side > 0 ? 0.5 : 1.0;
            side = 1;
        }
    }
    return beyond > JUMP ? fmax(0.0, low - 1e-7) : low;
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
        if (f <= TW_WINDOW_HOLDS || !add_to_view(&v, row, 1.0)) {
            break; /* every row holds at the boundary found */
        }
        pull = view_pull(&v, polish(&v, call_optimiser(&v, 0.0)));
    }
    return pull;
}
