#include "window.h"

#include <math.h>
#include <string.h>

#include "alloc.h"
#include "clock.h"
#include "route.h"
#include "settle.h"
#include "stringing.h"
#include "window_search.h"

static const double STILL_HOLDS = 1.0 + 2e-9; /* utilisation of an answer judged again */
static const double USED_UP = 1.0 - 1e-6;     /* utilisation of a limit that may be named for an end */
static const double BEYOND = 1e-6;            /* step past an end, of the range's logarithm: longer than what is left
                                                 before a jump */

static size_t count_rows(const tw_project *project)
{
    size_t rows = 0;
    for (size_t i = 0; i < project->limit_count * project->condition_count; i++) {
        rows += project->limit_applies[i] != 0;
    }
    return rows;
}

static size_t curve_capacity(const tw_options *options)
{
    return 2 * options->scan_points + 8;
}

static void list_rows(const tw_project *project, tw_window *window)
{
    size_t r = 0;
    for (size_t i = 0; i < project->limit_count; i++) {
        for (size_t c = 0; c < project->condition_count; c++) {
            if (project->limit_applies[i * project->condition_count + c]) {
                window->row_limit[r] = i;
                window->row_condition[r++] = c;
            }
        }
    }
}

tw_window *tw_window_create(const tw_project *project, const tw_options *options)
{
    size_t rows = count_rows(project);
    size_t room = rows ? rows : 1;
    size_t pulls = curve_capacity(options);
    tw_window *window = tw_calloc(1, sizeof *window);
    if (!window) {
        return NULL;
    }
    window->row_count = rows;
    window->curve_capacity = pulls;
    window->interval_N = tw_calloc(2 * pulls, sizeof(double));
    window->conflict = tw_calloc(2 * room, sizeof *window->conflict);
    window->relax = tw_calloc(project->limit_count + 2 * TW_WINDOW_RELAX_SUPPORTS_MOST, sizeof *window->relax);
    window->row_limit = tw_calloc(room, sizeof(size_t));
    window->row_condition = tw_calloc(room, sizeof(size_t));
    window->curve_pull_N = tw_calloc(pulls, sizeof(double));
    window->curve = tw_calloc(pulls * room, sizeof(double));
    if (!window->interval_N || !window->conflict || !window->relax || !window->row_limit || !window->row_condition
        || !window->curve_pull_N || !window->curve) {
        tw_window_free(window);
        return NULL;
    }
    list_rows(project, window);
    return window;
}

void tw_window_free(tw_window *window)
{
    if (!window) {
        return;
    }
    tw_free(window->interval_N);
    tw_free(window->conflict);
    tw_free(window->relax);
    tw_free(window->row_limit);
    tw_free(window->row_condition);
    tw_free(window->curve_pull_N);
    tw_free(window->curve);
    tw_free(window);
}

static void run_free(tw_window_run *run)
{
    tw_trial_free(run->trial);
    tw_free(run->supports);
    tw_free(run->route_m);
    tw_free(run->limits);
    tw_free(run->u);
    tw_free(run->masked);
    tw_free(run->judged);
    tw_free(run->astray);
}

static tw_status run_create(const tw_project *project, const tw_options *options, tw_optimiser optimiser,
                            tw_window *window, tw_window_run *run)
{
    memset(run, 0, sizeof *run);
    run->project = *project;
    run->options = options;
    run->optimiser = optimiser;
    run->window = window;
    run->curve_capacity = window->curve_capacity;
    run->best_f = INFINITY;
    run->best_pull_N = NAN;
    run->deadline = tw_clock_deadline(options->seconds_most);
    run->supports = tw_calloc(project->support_count, sizeof *run->supports);
    run->route_m = project->route_station_m ? tw_calloc(project->support_count, sizeof(double)) : NULL;
    run->limits = tw_calloc(project->limit_count + 1, sizeof *run->limits);
    run->u = tw_calloc(window->row_count + 1, sizeof(double));
    run->masked = tw_calloc(window->row_count + 1, 1);
    run->judged = tw_calloc(window->row_count + 1, 1);
    run->astray = tw_calloc(window->row_count + 1, sizeof(size_t));
    if (!run->supports || !run->limits || !run->u || !run->masked || !run->judged || !run->astray
        || (project->route_station_m && !run->route_m)) {
        goto fail;
    }
    memcpy(run->supports, project->supports, project->support_count * sizeof *run->supports);
    for (size_t i = 0; i < project->limit_count; i++) {
        run->limits[i] = project->limits[i];
    }
    run->project.supports = run->supports;
    run->project.limits = run->limits;
    if (run->route_m) {
        tw_route_measure(run->supports, project->support_count, run->route_m);
        run->project.route_station_m = run->route_m;
    }
    run->trial = tw_trial_create(&run->project);
    if (!run->trial) {
        goto fail;
    }
    return TW_OK;
fail:
    run_free(run);
    return TW_ERROR_MEMORY;
}

/* The row that governs at a pull, with its verdict; f there, judged on every row without the optimiser. */
static double govern(tw_window_run *run, double pull_N, size_t *limit, size_t *condition, tw_verdict *verdict)
{
    size_t row;
    double f = tw_window_try(run, pull_N, run->u);
    tw_window_worst(run, run->u, &row);
    *limit = *condition = TW_NONE;
    if (row != TW_NONE && run->stop == TW_OK) {
        tw_window_row(run, row, verdict);
        *limit = run->window->row_limit[row];
        *condition = run->window->row_condition[row];
    }
    return f;
}

static double fill_end(tw_window_run *run, double pull_N, int at_range_end, tw_window_end *end)
{
    end->pull_N = pull_N;
    end->why = TW_OK;
    double f = govern(run, pull_N, &end->limit, &end->condition, &end->verdict);
    if (at_range_end) {
        end->limit = end->condition = TW_NONE;
    }
    return f;
}

/* What becomes of the line at a pull: TW_OK if every row can be judged, and the row that fails there, or TW_NONE; else why
 * not, and the row that cannot be. */
static tw_status fate(tw_window_run *run, double pull_N, size_t *row)
{
    const tw_window *w = run->window;
    tw_status status = tw_trial_string(run->trial, pull_N, run->options);
    double worst = TW_WINDOW_HOLDS;
    *row = TW_NONE;
    for (size_t r = 0; r < w->row_count && status == TW_OK; r++) {
        tw_verdict own = {0};
        status = tw_trial_judge(run->trial, w->row_limit[r], w->row_condition[r], run->options, &own);
        if (status != TW_OK || (own.judged && own.utilisation > worst)) {
            worst = own.utilisation;
            *row = r;
        }
    }
    tw_window_latch(run, status);
    return status;
}

/* An end inside the range at which no limit is used up: pulls beyond it cannot be judged, or a limit jumps there. */
static void explain_end(tw_window_run *run, double side, tw_window_end *end)
{
    const tw_window *w = run->window;
    size_t row;
    if (end->limit == TW_NONE || end->verdict.utilisation > USED_UP) {
        return;
    }
    tw_status status = fate(run, end->pull_N * pow(w->range_high_N / w->range_low_N, side * BEYOND), &row);
    if (status == TW_OK && row != TW_NONE) {
        end->limit = w->row_limit[row];
        end->condition = w->row_condition[row];
        tw_window_try(run, end->pull_N, run->u);
        tw_window_row(run, row, &end->verdict);
        return;
    }
    end->limit = TW_NONE;
    end->condition = row == TW_NONE ? TW_NONE : w->row_condition[row];
    end->why = status == TW_OK ? TW_NOT_SETTLED : status;
}

static void no_end(tw_window_end *end)
{
    const tw_window_end nothing = {
        NAN, TW_NONE, TW_NONE,
        {.value = NAN, .allowed = NAN, .margin = NAN, .utilisation = NAN, .span = TW_NONE, .support = TW_NONE, .station_m = NAN},
        TW_OK};
    *end = nothing;
}

/* The interval with the lowest worst utilisation over the tolerance is the window. What it says is judged once more on
 * every row: what does not hold is no window. */
static tw_status choose(tw_window_run *run)
{
    tw_window *w = run->window;
    double tolerance = run->project.stringing.tolerance;
    size_t chosen = 0;
    w->specify.worst_utilisation = INFINITY;
    w->specify.tolerance = tolerance;
    for (size_t i = 0; i < w->interval_count && run->stop == TW_OK; i++) {
        double pull;
        double f = tw_window_minimax(run, w->interval_N[2 * i], w->interval_N[2 * i + 1], tolerance, &pull);
        if (f < w->specify.worst_utilisation) {
            w->specify.worst_utilisation = f;
            w->specify.pull_N = pull;
            chosen = i;
        }
    }
    double low = w->interval_N[2 * chosen], high = w->interval_N[2 * chosen + 1];
    double f = fill_end(run, low, low <= w->range_low_N, &w->low);
    f = fmax(f, fill_end(run, high, high >= w->range_high_N * (1.0 - 1e-12), &w->high));
    explain_end(run, -1.0, &w->low);
    explain_end(run, 1.0, &w->high);
    f = fmax(f, tw_window_try(run, w->specify.pull_N, run->u));
    fill_end(run, w->specify.pull_N * (1.0 - tolerance), 0, &w->specify.edge[0]);
    fill_end(run, w->specify.pull_N * (1.0 + tolerance), 0, &w->specify.edge[1]);
    return run->stop != TW_OK ? run->stop : f <= STILL_HOLDS ? TW_OK : TW_NOT_SETTLED;
}

/* Every condition at one pull, settled with its bracket. */
static tw_status verify_pull(tw_window_run *run, double pull_N)
{
    tw_window *w = run->window;
    tw_options options = *run->options;
    tw_status status = tw_trial_string(run->trial, pull_N, &options);
    for (size_t c = 0; status == TW_OK && c < run->project.condition_count; c++) {
        const tw_section *section;
        tw_settled settled = {0};
        options.seconds_most = run->deadline - tw_clock_now(); /* what is left of the whole search's time */
        status = tw_clock_check(&options, run->deadline);
        if (status == TW_OK) {
            status = tw_trial_section(run->trial, c, &options, &section);
        }
        if (status == TW_OK) {
            status = tw_settle(section, &options, &settled);
            w->gap_relative = isnan(w->gap_relative) ? settled.gap_relative : fmax(w->gap_relative, settled.gap_relative);
        }
    }
    return status;
}

static tw_status verify(tw_window_run *run)
{
    tw_window *w = run->window;
    const double pulls[3] = {w->low.pull_N, w->high.pull_N, w->specify.pull_N};
    tw_status status = TW_OK;
    for (int i = 0; status == TW_OK && i < 3; i++) {
        status = verify_pull(run, pulls[i]);
    }
    w->verified = status == TW_OK;
    return status;
}

static void reset(const tw_window_run *run)
{
    tw_window *w = run->window;
    w->interval_count = w->price_count = w->conflict_count = w->relax_count = w->curve_count = 0;
    w->evaluations = w->settles = 0;
    w->verified = 0;
    w->gap_relative = NAN;
    w->specify.pull_N = w->specify.worst_utilisation = NAN;
    no_end(&w->low);
    no_end(&w->high);
    no_end(&w->specify.edge[0]);
    no_end(&w->specify.edge[1]);
    tw_stringing_range(&run->project, &w->range_low_N, &w->range_high_N);
}

/* A search that was stopped hands over the best pull it tried, and no window. */
static void best_so_far(tw_window_run *run)
{
    tw_window *w = run->window;
    w->interval_count = w->conflict_count = w->relax_count = w->price_count = 0;
    w->specify.pull_N = run->best_pull_N;
    w->specify.worst_utilisation = isfinite(run->best_f) ? run->best_f : (double)NAN;
    w->specify.tolerance = 0.0;
    no_end(&w->low);
    no_end(&w->high);
    no_end(&w->specify.edge[0]);
    no_end(&w->specify.edge[1]);
    w->verified = 0;
}

static tw_status search(tw_window_run *run)
{
    tw_window *w = run->window;
    tw_status scanned = tw_window_scan(run);
    if (scanned != TW_OK) {
        return scanned;
    }
    w->interval_count = tw_window_intervals(run, w->interval_N, run->curve_capacity);
    if (run->stop != TW_OK) {
        return run->stop;
    }
    if (w->interval_count == 0) {
        return tw_window_explain_shut(run);
    }
    tw_status status = choose(run);
    if (status == TW_OK) {
        tw_window_prices(run);
        status = run->stop;
    }
    return status == TW_OK && run->options->verify ? verify(run) : status;
}

tw_status tw_window_search_with(const tw_project *project, const tw_options *options, tw_optimiser optimiser,
                                tw_window *window)
{
    tw_window_run run;
    window->status = run_create(project, options, optimiser, window, &run);
    if (window->status != TW_OK) {
        return window->status;
    }
    reset(&run);
    window->status = search(&run);
    if (window->status != TW_OK && window->status != TW_SHUT) {
        best_so_far(&run);
    }
    window->settles = run.trial->settles;
    run_free(&run);
    return window->status;
}

tw_status tw_window_search(const tw_project *project, const tw_options *options, tw_window *window)
{
    return tw_window_search_with(project, options, tw_optimise_slsqp, window);
}
