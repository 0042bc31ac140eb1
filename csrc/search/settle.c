#include "settle.h"

#include <float.h>
#include <math.h>
#include <string.h>

#include "alloc.h"
#include "clock.h"
#include "energy.h"
#include "section_feed.h"
#include "vector.h"

static const double link_excess_most = 1e-9;
static const double gap_below_most = 1e-9; /* a bracket turned over by more than this and rounding is no bracket */
static const double imbalance_most = 1e-9;  /* of the tension, across a sheave */
static const double rounding_of_strain = 16.0 * DBL_EPSILON;
static const double worth_refining = 0.9; /* a finer mesh that leaves more of the gap than this did not help */
enum { GAIN_ROUNDINGS = 16, HALVINGS_MOST = 40, STALL_EVALUATIONS = 12, STALL_STEPS = 3, STALL_MESHES = 8 };

/* One mesh at work. */
typedef struct settle_run {
    const tw_section *section;
    const tw_options *options;
    tw_minimise_function optimiser;
    tw_settled *out;
    double deadline;
    tw_energy *energy;
    tw_blocktri *matrix;
    size_t count;             /* unknowns */
    double *work;             /* owned; the next four point into it */
    double *best;             /* displacements */
    double *trial;
    double *gradient;
    double *step;             /* Newton step, or the optimiser's y */
    tw_energy_state state;    /* of best */
    double start_J;           /* of the optimiser */
    double mark_J;            /* best when it last gained one per cent of all that it has gained */
    size_t since_mark;        /* evaluations */
    int at_rounding;          /* what is left to gain, |g_y|^2 / 2, is rounding of the energy */
    double gap_least;         /* relative, of all meshes so far; infinity at first */
    size_t gap_stalls;        /* meshes in a row that did not lower it */
    tw_status stop;           /* why the optimiser was stopped; TW_OK: it was not */
} settle_run;

static double residual_allowed(const settle_run *run, const tw_energy_state *state)
{
    return run->options->residual_relative * state->tension_N +
           rounding_of_strain * run->section->stiffness_N;
}

static int is_balanced(const settle_run *run, const tw_energy_state *state)
{
    return state->residual_N <= residual_allowed(run, state);
}

static int is_finite(const tw_energy_state *state)
{
    return isfinite(state->potential_J) && isfinite(state->residual_N);
}

/* Asks the poll and the clock, and keeps to their first word. */
static int is_interrupted(settle_run *run)
{
    if (!tw_status_stops(run->stop)) {
        tw_status status = tw_clock_check(run->options, run->deadline);
        run->stop = status != TW_OK ? status : run->stop;
    }
    return tw_status_stops(run->stop);
}

static void close_mesh(settle_run *run)
{
    tw_energy_free(run->energy);
    tw_blocktri_free(run->matrix);
    tw_free(run->work);
    run->energy = NULL;
    run->matrix = NULL;
    run->work = NULL;
}

static tw_status open_mesh(settle_run *run, size_t per_span)
{
    run->energy = tw_energy_create(run->section, per_span);
    if (run->energy == NULL) {
        goto fail;
    }
    run->count = TW_BLOCKTRI_SIZE * (run->energy->element_count + 1);
    run->matrix = tw_blocktri_create(run->energy->element_count + 1);
    run->work = tw_calloc(4 * run->count, sizeof(double));
    if (run->matrix == NULL || run->work == NULL) {
        goto fail;
    }
    run->best = run->work;
    run->trial = run->best + run->count;
    run->gradient = run->trial + run->count;
    run->step = run->gradient + run->count;
    return TW_OK;
fail:
    close_mesh(run);
    return TW_ERROR_MEMORY;
}

/* Factor of the Hessian at best; where the line is slack, with a floor that is raised until it is definite. */
static tw_status factor(settle_run *run)
{
    double stiffness = run->section->stiffness_N;
    double floor_N = 0.0;
    tw_status status;
    do {
        tw_energy_hessian(run->energy, run->best, floor_N, run->matrix);
        status = tw_blocktri_factor(run->matrix);
        floor_N = floor_N > 0.0 ? 100.0 * floor_N : 1e-9 * stiffness;
    } while (status == TW_SLACK && floor_N <= stiffness);
    return status;
}

static void keep_trial(settle_run *run, const tw_energy_state *state)
{
    double *old = run->best;
    run->best = run->trial;
    run->trial = old;
    run->state = *state;
}

/* An optimiser that gains nothing more is at rounding; Newton's steps do the rest. */
static void mark_progress(settle_run *run)
{
    double gain = run->mark_J - run->state.potential_J;
    run->since_mark++;
    if (gain > 0.01 * (run->start_J - run->state.potential_J)) {
        run->mark_J = run->state.potential_J;
        run->since_mark = 0;
    }
}

static int whitened_finished(void *data)
{
    const settle_run *run = data;
    return run->stop != TW_OK || run->at_rounding || run->since_mark >= STALL_EVALUATIONS
           || is_balanced(run, &run->state);
}

/* In whitened variables the Hessian is the identity: a step along -g_y gains |g_y|^2 / 2. */
static double gain_left(const settle_run *run, const double *gradient)
{
    double square = 0.0;
    for (size_t i = 0; i < run->count; i++) {
        square += gradient[i] * gradient[i];
    }
    return 0.5 * square;
}

/* The whitened objective: y -> x = L^-T y and back, g_y = L^-1 g_x. */
static double whitened_objective(void *data, const double *y, double *gradient)
{
    settle_run *run = data;
    size_t bytes = run->count * sizeof(double);
    if (!is_interrupted(run) && run->out->evaluations >= run->options->evaluations_most) {
        run->stop = TW_EVALUATION_LIMIT;
    }
    if (whitened_finished(run)) { /* NLopt comes back a few times after it was told to stop */
        memset(gradient, 0, bytes);
        return HUGE_VAL;
    }
    memcpy(run->trial, y, bytes);
    tw_blocktri_backward(run->matrix, run->trial);
    tw_energy_state state = tw_energy_evaluate(run->energy, run->trial, gradient);
    run->out->evaluations++;
    if (!is_finite(&state)) {
        run->stop = TW_NOT_FINITE;
        memset(gradient, 0, bytes);
        return HUGE_VAL;
    }
    tw_blocktri_forward(run->matrix, gradient);
    run->at_rounding = gain_left(run, gradient) <= GAIN_ROUNDINGS * DBL_EPSILON * fabs(state.potential_J);
    if (state.potential_J < run->state.potential_J || is_balanced(run, &state)) {
        keep_trial(run, &state);
    }
    mark_progress(run);
    return state.potential_J;
}

/* Optimiser from the exact line's shape. Its own claims are not used: whitened_objective kept the best point. */
static tw_status minimise(settle_run *run)
{
    tw_minimise_problem problem = {
        .count = run->count,
        .evaluations_most = run->options->evaluations_most,
        .resolution = DBL_EPSILON * fabs(run->state.potential_J),
        .objective = whitened_objective,
        .finished = whitened_finished,
        .data = run,
    };
    tw_status status = factor(run);
    if (status != TW_OK) {
        return TW_OK; /* nothing to whiten with: Newton's steps will say */
    }
    memset(run->step, 0, run->count * sizeof(double));
    run->start_J = run->mark_J = run->state.potential_J;
    run->since_mark = 0;
    run->at_rounding = 0;
    status = run->optimiser(&problem, run->step);
    return status < 0 ? status : TW_OK;
}

static double slope_along(const settle_run *run)
{
    double slope = 0.0;
    for (size_t i = 0; i < run->count; i++) {
        slope += run->gradient[i] * run->step[i];
    }
    return slope;
}

/* Halve the step until the energy, convex, no longer rises steeply there: a test on slopes, which rounding spares. */
static int search_line(settle_run *run, double slope)
{
    double size = 1.0;
    for (int cut = 0; cut < HALVINGS_MOST; cut++, size *= 0.5) {
        for (size_t i = 0; i < run->count; i++) {
            run->trial[i] = run->best[i] + size * run->step[i];
        }
        tw_energy_state state = tw_energy_evaluate(run->energy, run->trial, run->gradient);
        if (is_finite(&state) &&
            (slope_along(run) <= 0.5 * fabs(slope) || state.residual_N < run->state.residual_N)) {
            keep_trial(run, &state);
            return 1;
        }
    }
    return 0;
}

/* One Newton step from best; 0 when there is none to be had. The gradient is that of best on entry and on success. */
static int newton_step(settle_run *run)
{
    if (factor(run) != TW_OK) {
        return 0;
    }
    for (size_t i = 0; i < run->count; i++) {
        run->step[i] = -run->gradient[i];
    }
    tw_blocktri_solve(run->matrix, run->step);
    run->out->newton_steps++;
    return search_line(run, slope_along(run));
}

/* Newton steps until every node is in balance, or no step gains anything. */
static void finish(settle_run *run)
{
    size_t stalled = 0;
    if (is_balanced(run, &run->state)) {
        return;
    }
    run->state = tw_energy_evaluate(run->energy, run->best, run->gradient);
    for (size_t step = 0; step < run->options->newton_most && !is_balanced(run, &run->state); step++) {
        tw_energy_state before = run->state;
        if (is_interrupted(run) || !newton_step(run)) {
            return;
        }
        double gain = before.potential_J - run->state.potential_J;
        int gained = gain > 4.0 * DBL_EPSILON * fabs(before.potential_J) ||
                     run->state.residual_N < 0.5 * before.residual_N;
        stalled = gained ? 0 : stalled + 1;
        if (stalled == STALL_STEPS) {
            return;
        }
    }
}

static double relative_gap(const tw_section *section, const tw_energy_parts *parts)
{
    return (parts->potential_J - section->energy_lower_J) / (fabs(parts->stored_J) + fabs(parts->work_J));
}

/* What rounding can do to either energy: both are sums of force times place in route coordinates. */
static double energy_rounding(const tw_section *section)
{
    double size = 0.0;
    for (size_t j = 0; j <= section->span_count; j++) {
        size += tw_norm(section->hold_force + 3 * j) * tw_norm(section->clamp + 3 * j);
    }
    return 4.0 * DBL_EPSILON * size;
}

/* The bracket stands the right way round and is narrow enough. NaN is neither. */
static int is_closed(const settle_run *run, double gap_J, double gap_relative)
{
    return gap_relative <= run->options->gap_relative &&
           (gap_relative >= -gap_below_most || gap_J >= -energy_rounding(run->section));
}

/* Everything that is reported, found afresh from the displacements alone. */
static tw_status judge(settle_run *run)
{
    tw_settled *out = run->out;
    tw_energy_state state = tw_energy_evaluate(run->energy, run->best, run->gradient);
    tw_energy_parts parts = tw_energy_bound(run->energy, run->best);
    out->elements = run->energy->element_count;
    out->residual_N = state.residual_N;
    out->energy_J = parts.potential_J;
    out->energy_lower_J = run->section->energy_lower_J;
    out->gap_J = out->energy_J - out->energy_lower_J;
    out->gap_relative = relative_gap(run->section, &parts);
    if (!is_finite(&state) || !isfinite(out->gap_relative)) {
        return TW_NOT_FINITE;
    }
    if (state.tension_N <= 0.0) {
        return TW_SLACK;
    }
    if (!is_balanced(run, &state)) {
        return out->evaluations >= run->options->evaluations_most ? TW_EVALUATION_LIMIT : TW_NOT_SETTLED;
    }
    if (!is_closed(run, out->gap_J, out->gap_relative)) {
        return TW_GAP_TOO_WIDE;
    }
    out->sheave_imbalance_N = tw_section_imbalance(run->section);
    double runs = tw_section_runs_off(run->section), carriage = tw_section_carriage_off(run->section);
    out->load_mismatch = carriage > runs || isnan(carriage) ? carriage : runs;
    if (!(out->sheave_imbalance_N <= imbalance_most * state.tension_N) || !(out->load_mismatch <= TW_SECTION_OFF_MOST)) {
        return TW_NOT_SETTLED;
    }
    return parts.link_excess <= link_excess_most ? TW_OK : TW_NOT_SETTLED;
}

/* Minimise, finish and judge on one mesh; what stopped the search early outranks the verdict. */
static tw_status settle_mesh(settle_run *run)
{
    tw_status status = TW_OK;
    run->state = tw_energy_evaluate(run->energy, run->best, run->gradient);
    if (is_finite(&run->state) && !is_balanced(run, &run->state) && !is_interrupted(run)) {
        status = minimise(run);
        if (status == TW_OK && !is_interrupted(run)) {
            finish(run);
        }
    }
    tw_status verdict = judge(run);
    if (run->stop == TW_CANCELLED || (run->stop == TW_DEADLINE && verdict != TW_OK)) {
        return run->stop;
    }
    return status != TW_OK ? status : verdict;
}

/* The mesh to begin with: as asked, but within elements_most where the pieces allow it. */
static size_t first_mesh(const tw_section *section, const tw_options *options)
{
    size_t per_span = options->elements_per_span > 0 ? options->elements_per_span : 1;
    while (per_span > 1 && tw_energy_elements(section, per_span) > options->elements_most) {
        per_span /= 2;
    }
    return per_span;
}

/* A gap that a mesh twice as fine may close: there is room for it, and the meshes before got somewhere. */
static int may_refine(settle_run *run, size_t per_span, double gap)
{
    run->gap_stalls = gap < worth_refining * run->gap_least ? 0 : run->gap_stalls + 1;
    run->gap_least = fmin(run->gap_least, gap);
    return gap > run->options->gap_relative && run->gap_stalls < STALL_MESHES &&
           tw_energy_elements(run->section, 2 * per_span) <= run->options->elements_most;
}

/* The start shape's own gap is nearly that of the settled one (the discretisation's part in it is the same), so a mesh
 * that is too coarse is known before any work is done on it. */
static int is_too_coarse(settle_run *run, size_t per_span)
{
    tw_energy_parts parts = tw_energy_bound(run->energy, run->best);
    double gap = relative_gap(run->section, &parts);
    return gap > 1.01 * run->options->gap_relative && may_refine(run, per_span, gap);
}

/* One mesh from opening to closing; 1 when a finer one is to follow. Once there is a result, an interruption leaves it. */
static int try_mesh(settle_run *run, size_t per_span)
{
    int refine = 0;
    run->stop = TW_OK;
    if (run->out->elements > 0 && is_interrupted(run)) {
        run->out->status = run->stop;
        return 0;
    }
    tw_status status = open_mesh(run, per_span);
    if (status == TW_OK) {
        refine = !is_interrupted(run) && is_too_coarse(run, per_span);
        if (!refine) {
            status = settle_mesh(run);
            refine = status == TW_GAP_TOO_WIDE && may_refine(run, per_span, run->out->gap_relative);
        }
    }
    close_mesh(run);
    run->out->status = status;
    return refine;
}

tw_status tw_settle_with(const tw_section *section, const tw_options *options, tw_minimise_function optimiser,
                         tw_settled *out)
{
    settle_run run = {.section = section, .options = options, .optimiser = optimiser, .out = out};
    size_t per_span = first_mesh(section, options);
    run.deadline = tw_clock_deadline(options->seconds_most);
    run.gap_least = INFINITY;
    out->energy_J = out->energy_lower_J = out->gap_J = out->gap_relative = out->residual_N = (double)NAN;
    out->sheave_imbalance_N = out->load_mismatch = (double)NAN;
    out->elements = out->evaluations = out->newton_steps = 0;
    while (try_mesh(&run, per_span)) {
        per_span *= 2;
    }
    return out->status;
}

tw_status tw_settle(const tw_section *section, const tw_options *options, tw_settled *out)
{
    return tw_settle_with(section, options, tw_minimise_lbfgs, out);
}
