/* window_scan: rows at a pull, the scan with its islands, and the open stretches. */
#include <math.h>
#include <string.h>

#include "clock.h"
#include "stringing.h"
#include "window_search.h"

static const double NEAR_EDGE = 0.8;       /* a bump of f above this is looked at more closely */

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

/* A place off the line spoils one pull, or one move of a support, not the search. */
void tw_window_latch(tw_window_run *run, tw_status status)
{
    if (run->stop == TW_OK && status != TW_ERROR_PLACE && (status < 0 || tw_status_stops(status))) {
        run->stop = status;
    }
}

/* Strings to a pull; 0 when nothing can be judged there. */
static int string_to(tw_window_run *run, double pull_N)
{
    tw_window_latch(run, tw_clock_check(run->options, run->deadline));
    if (run->stop != TW_OK) {
        return 0;
    }
    tw_status status = tw_trial_string(run->trial, pull_N, run->options);
    tw_window_latch(run, status);
    return status == TW_OK;
}

double tw_window_row(tw_window_run *run, size_t row, tw_verdict *verdict)
{
    tw_verdict own = {0, NAN, NAN, NAN, NAN, TW_NONE, TW_NONE, NAN, NAN, {NAN, NAN, NAN}};
    tw_status status = run->stop;
    if (status == TW_OK) {
        status = tw_trial_judge(run->trial, run->window->row_limit[row], run->window->row_condition[row], run->options,
                                &own);
        tw_window_latch(run, status);
        run->judged[row] |= status == TW_OK && own.judged;
        run->astray[row] += !run->moved && status == TW_ERROR_PLACE;
    }
    if (verdict) {
        *verdict = own;
    }
    if (status == TW_OK && !own.judged) {
        return 0.0;
    }
    return status == TW_OK && isfinite(own.utilisation) ? fmin(own.utilisation, TW_WINDOW_UNSETTLED) : TW_WINDOW_UNSETTLED;
}

double tw_window_try(tw_window_run *run, double pull_N, double *u)
{
    int strung = string_to(run, pull_N);
    double worst = 0.0;
    for (size_t r = 0; r < run->window->row_count; r++) {
        u[r] = strung ? tw_window_row(run, r, NULL) : TW_WINDOW_UNSETTLED;
        worst = fmax(worst, u[r]);
    }
    if (!run->moved && run->stop == TW_OK && worst < run->best_f) {
        run->best_f = worst;
        run->best_pull_N = pull_N;
    }
    return tw_window_worst(run, u, NULL);
}

double tw_window_row_at(tw_window_run *run, size_t row, double pull_N)
{
    return string_to(run, pull_N) ? tw_window_row(run, row, NULL) : TW_WINDOW_UNSETTLED;
}

static double *curve_row(const tw_window_run *run, size_t k)
{
    return run->window->curve + k * run->window->row_count;
}

double tw_window_curve_f(const tw_window_run *run, size_t k)
{
    return tw_window_worst(run, curve_row(run, k), NULL);
}

size_t tw_window_curve_best(const tw_window_run *run, double low_N, double high_N)
{
    const tw_window *w = run->window;
    size_t best = TW_NONE;
    for (size_t k = 0; k < w->curve_count; k++) {
        int inside = w->curve_pull_N[k] >= low_N && w->curve_pull_N[k] <= high_N;
        if (inside && (best == TW_NONE || tw_window_curve_f(run, k) < tw_window_curve_f(run, best))) {
            best = k;
        }
    }
    return best;
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

/* A local extreme of f between curve points. */
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
    double at;
    size_t last = run->window->curve_count - 1;
    if (tw_window_peak(run, pull[k > 0 ? k - 1 : 0], pull[k < last ? k + 1 : last], &at) > 1.0) {
        add_to_curve(run, at);
    }
}

static void look_between(tw_window_run *run)
{
    tw_window *w = run->window;
    for (size_t k = 0; k < w->curve_count && run->stop == TW_OK; k++) {
        size_t before = w->curve_count;
        double f = tw_window_curve_f(run, k);
        double left = k > 0 ? tw_window_curve_f(run, k - 1) : INFINITY;
        double right = k + 1 < w->curve_count ? tw_window_curve_f(run, k + 1) : INFINITY;
        if (f > 1.0 && f <= left && f < right) {
            look_for_dip(run, k);
        } else if (f <= 1.0 && f > NEAR_EDGE && (k == 0 || f >= left) && (k + 1 == w->curve_count || f > right)) {
            look_for_bump(run, k);
        }
        k += w->curve_count - before;
    }
}

tw_status tw_window_scan(tw_window_run *run)
{
    tw_window *w = run->window;
    size_t points = run->options->scan_points;
    w->curve_count = 0;
    for (size_t k = 0; k < points && run->stop == TW_OK; k++) {
        double share = (double)k / (double)(points - 1);
        add_to_curve(run, w->range_low_N * pow(w->range_high_N / w->range_low_N, share));
    }
    for (size_t r = 0; r < w->row_count && run->stop == TW_OK; r++) {
        if (2 * run->astray[r] > w->curve_count) {
            return TW_ERROR_PLACE;
        }
        if (!run->judged[r] && w->curve[r] == 0.0) {
            return TW_UNDECIDED;
        }
    }
    look_between(run);
    return run->stop;
}

size_t tw_window_intervals(tw_window_run *run, double *interval, size_t most)
{
    tw_window *w = run->window;
    size_t count = 0;
    int inside = 0;
    for (size_t k = 0; k < w->curve_count && count < most && run->stop == TW_OK; k++) {
        int holds = tw_window_curve_f(run, k) <= TW_WINDOW_HOLDS;
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
