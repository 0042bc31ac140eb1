#include "fit.h"

#include <math.h>
#include <string.h>

#include "alloc.h"
#include "fit_search.h"

static const double step_of_search = 1e-4;   /* of the logarithm: errs by 1e-9 of the derivative, as its square */
static const double step_of_judgement = 3e-4;
static const double step_settled = 1e-12;    /* of the logarithm: relative, of the pull */
static const double step_accepted = 1e-8;
static const double shows_nothing = 1e-6;    /* metres a metre of the longest span, for a pull e times as large */
static const double damping_first = 1e-3, damping_least = 1e-9, damping_most = 1e9;
static const double step_largest = 2.0;

/* A search at work. Everything but the model points into one block. */
typedef struct fit_run {
    tw_fit_model model;
    tw_fit *fit;
    tw_fit_normal normal;
    double *block;    /* owned */
    double *q, *trial, *step;     /* [unknown_count] */
    double *rate;                 /* [unknown_count] of each value by its q */
    double *residual, *at_trial;  /* [row_count] of q and of trial */
    double *jacobian; /* [row_count unknown_count] */
    double square;    /* sum of residual^2 */
    double least;     /* pivot below which no point shows an unknown */
} fit_run;

/* Each point's span into fit->place, the spans that carry points into fit->span; how many. */
static size_t place_points(const tw_project *project, const tw_observation *seen, tw_fit *fit)
{
    size_t found = 0;
    for (size_t i = 0; i < fit->observation_count; i++) {
        fit->place[i] = tw_fit_span_of(project, seen[i].station_m);
        if (fit->place[i] != TW_NONE) {
            fit->span[fit->place[i]] = 1; /* for now a mark */
        }
    }
    for (size_t k = 0; k < fit->span_count; k++) {
        if (fit->span[k]) {
            fit->span[found++] = k;
        }
    }
    return found;
}

tw_fit *tw_fit_create(const tw_project *project, const tw_observation *observations, size_t count,
                      tw_fit_unknown unknown)
{
    tw_fit *fit = tw_calloc(1, sizeof *fit);
    if (!fit) {
        return NULL;
    }
    size_t spans = project->support_count - 1, n = 1;
    fit->status = TW_NOT_SETTLED;
    fit->span_count = spans;
    fit->observation_count = count;
    fit->undetermined = TW_NONE;
    fit->span = tw_calloc(spans, sizeof *fit->span);
    fit->place = tw_calloc(count, sizeof *fit->place);
    if (fit->span && fit->place) {
        n = place_points(project, observations, fit);
    }
    if (unknown == TW_FIT_PULL && fit->span) {
        fit->span[0] = TW_NONE;
        n = 1;
    }
    fit->unknown_count = n;
    fit->value = tw_calloc(n + 1, sizeof(double));
    fit->covariance = tw_calloc(n * n + 1, sizeof(double));
    fit->length_m = tw_calloc(spans, sizeof(double));
    fit->length_rate = tw_calloc(spans, sizeof(double));
    fit->residual_m = tw_calloc(2 * count, sizeof(double));
    fit->leverage = tw_calloc(2 * count, sizeof(double));
    if (!fit->span || !fit->place || !fit->value || !fit->covariance || !fit->length_m || !fit->length_rate || !fit->residual_m
        || !fit->leverage) {
        tw_fit_free(fit);
        return NULL;
    }
    return fit;
}

void tw_fit_free(tw_fit *fit)
{
    if (!fit) {
        return;
    }
    tw_free(fit->span);
    tw_free(fit->place);
    tw_free(fit->value);
    tw_free(fit->covariance);
    tw_free(fit->length_m);
    tw_free(fit->length_rate);
    tw_free(fit->residual_m);
    tw_free(fit->leverage);
    tw_free(fit);
}

static tw_status open_run(fit_run *run)
{
    tw_status status = tw_fit_open(&run->model);
    size_t n = run->fit->unknown_count > 0 ? run->fit->unknown_count : 1, rows = run->model.row_count;
    if (status != TW_OK) {
        return status;
    }
    run->block = tw_calloc(6 * n + 2 * n * n + 2 * rows + n * rows, sizeof(double));
    if (!run->block) {
        return TW_ERROR_MEMORY;
    }
    run->q = run->block;
    run->trial = run->q + n;
    run->step = run->trial + n;
    run->rate = run->step + n;
    run->normal.scale = run->rate + n;
    run->normal.gradient = run->normal.scale + n;
    run->normal.matrix = run->normal.gradient + n;
    run->normal.factor = run->normal.matrix + n * n;
    run->residual = run->normal.factor + n * n;
    run->at_trial = run->residual + rows;
    run->jacobian = run->at_trial + rows;
    run->least = shows_nothing * run->model.scale_m;
    run->square = INFINITY;
    return TW_OK;
}

static void close_run(fit_run *run)
{
    tw_fit_close(&run->model);
    tw_free(run->block);
}

static double sum_of_squares(const double *values, size_t count)
{
    double sum = 0.0;
    for (size_t r = 0; r < count; r++) {
        sum += values[r] * values[r];
    }
    return sum;
}

static double largest(const double *values, size_t count)
{
    double most = 0.0;
    for (size_t i = 0; i < count; i++) {
        most = fabs(values[i]) > most ? fabs(values[i]) : most;
    }
    return most;
}

static int stops(tw_status status)
{
    return tw_status_stops(status) || status < 0;
}

/* Residuals at trial; kept as the best where their squares are fewer, or in any case. */
static tw_status try_point(fit_run *run, int keep_anyway, int *kept)
{
    tw_status status = tw_fit_residuals(&run->model, run->trial, run->at_trial);
    double square = status == TW_OK ? sum_of_squares(run->at_trial, run->model.row_count) : INFINITY;
    run->fit->steps++;
    *kept = isfinite(square) && (square < run->square || keep_anyway);
    if (*kept) {
        double *other = run->residual;
        run->residual = run->at_trial;
        run->at_trial = other;
        run->square = square;
        memcpy(run->q, run->trial, run->model.unknown_count * sizeof(double));
    }
    return stops(status) ? status : TW_OK;
}

/* The parabola's start; where the exact line cannot hang so slack, ever tauter ones. */
static tw_status begin(fit_run *run)
{
    size_t n = run->model.unknown_count;
    int kept = 0;
    tw_fit_start(&run->model, run->trial);
    for (int i = 0; i < 12; i++) {
        tw_status status = try_point(run, 0, &kept);
        if (status != TW_OK || kept) {
            return status;
        }
        for (size_t u = 0; u < n; u++) {
            run->trial[u] += 0.7;
        }
    }
    return TW_NOT_SETTLED;
}

/* Derivatives at q and their normal equations, undamped: TW_UNDETERMINED names the unknown that no point shows. */
static tw_status differentiate(fit_run *run, double step)
{
    run->normal.count = run->model.unknown_count;
    tw_status status = tw_fit_derivatives(&run->model, run->q, step, run->jacobian);
    if (status != TW_OK) {
        return status;
    }
    size_t unknown;
    status = tw_fit_normal_form(&run->model, &run->normal, run->jacobian, run->residual);
    if (status == TW_OK) {
        status = tw_fit_normal_factor(&run->model, &run->normal, 0.0, run->least, &unknown);
    }
    if (status != TW_OK) {
        return status;
    }
    if (unknown != TW_NONE) {
        run->fit->undetermined = run->model.unknown == TW_FIT_LENGTHS ? run->model.span[unknown] : TW_NONE;
        return TW_UNDETERMINED;
    }
    tw_fit_normal_solve(&run->normal, run->normal.gradient, run->step);
    return isfinite(largest(run->step, run->model.unknown_count)) ? TW_OK : TW_NOT_FINITE;
}

static void set_trial(fit_run *run)
{
    size_t n = run->model.unknown_count;
    double most = largest(run->step, n);
    double share = most > step_largest ? step_largest / most : 1.0;
    for (size_t u = 0; u < n; u++) {
        run->trial[u] = run->q[u] + share * run->step[u];
    }
}

/* One step of Levenberg and Marquardt: damped until the squares are fewer. moved: it gained. */
static tw_status descend(fit_run *run, double *damping, int *moved)
{
    *moved = 0;
    while (!*moved && *damping <= damping_most) {
        if (run->fit->steps >= run->model.options->evaluations_most) {
            return TW_EVALUATION_LIMIT;
        }
        size_t unknown;
        tw_status status = tw_fit_normal_factor(&run->model, &run->normal, *damping, 0.0, &unknown);
        if (status == TW_OK && unknown == TW_NONE) {
            tw_fit_normal_solve(&run->normal, run->normal.gradient, run->step);
            set_trial(run);
            status = try_point(run, 0, moved);
        }
        if (status != TW_OK) {
            return status;
        }
        *damping = *moved ? fmax(0.1 * *damping, damping_least) : 10.0 * *damping;
        if (!*moved && largest(run->step, run->model.unknown_count) < step_settled) {
            break;
        }
    }
    return TW_OK;
}

/* Where the squares are flat to rounding, plain Gauss-Newton steps go on as long as they shrink. */
static tw_status polish(fit_run *run)
{
    double before = 1e-5;
    for (int i = 0; i < 20; i++) {
        int kept;
        tw_status status = differentiate(run, step_of_search);
        double most = largest(run->step, run->model.unknown_count);
        if (status != TW_OK || most <= step_settled || !(most < 0.5 * before)) {
            return status;
        }
        before = most;
        set_trial(run);
        status = try_point(run, 1, &kept);
        if (status != TW_OK) {
            return status;
        }
    }
    return TW_OK;
}

/* From the start to the least squares, whatever the unknowns. */
static tw_status minimise(fit_run *run)
{
    double damping = damping_first;
    int moved = 1;
    tw_status status = begin(run);
    while (status == TW_OK && moved) {
        status = differentiate(run, step_of_search);
        if (status == TW_OK && largest(run->step, run->model.unknown_count) < 1e-6) {
            break;
        }
        if (status == TW_OK) {
            status = descend(run, &damping, &moved);
        }
    }
    return status == TW_OK ? polish(run) : status;
}

/* Spans without points take the lengths of the one pull that fits best. */
static tw_status lengths_of_best_pull(fit_run *run)
{
    tw_fit_model *model = &run->model;
    model->unknown = TW_FIT_PULL;
    model->unknown_count = 1;
    tw_status status = minimise(run);
    if (status == TW_OK) {
        status = tw_fit_lengths(model, run->q);
    }
    model->unknown = TW_FIT_LENGTHS;
    model->unknown_count = run->fit->unknown_count;
    run->square = INFINITY;
    return status;
}

/* Is this the least? Asked anew, by other differences, of the residuals at the answer. The step that is left must be nothing
 * beside the pull, or beside what the points leave uncertain. */
static tw_status judge(fit_run *run)
{
    size_t n = run->model.unknown_count, rows = run->model.row_count;
    tw_status status = tw_fit_residuals(&run->model, run->q, run->residual);
    if (status != TW_OK) {
        return status;
    }
    run->square = sum_of_squares(run->residual, rows);
    status = differentiate(run, step_of_judgement);
    run->fit->step_relative = largest(run->step, n);
    if (status != TW_OK) {
        return status;
    }
    double spread = run->square / (double)rows;
    for (size_t u = 0; u < n; u++) {
        double column = run->normal.scale[u]; /* at best, one unknown is known to s / |column| */
        double allowed = step_accepted + 1e-5 * sqrt(spread) / column;
        status = fabs(run->step[u]) <= allowed ? status : TW_NOT_SETTLED;
    }
    return status;
}

/* d length / d logarithm of each unknown, and the values themselves. */
static tw_status publish_values(fit_run *run)
{
    tw_fit *fit = run->fit;
    tw_fit_model *model = &run->model;
    size_t n = model->unknown_count;
    const double sides[3] = {step_of_search, -step_of_search, 0.0};
    for (int side = 0; side < 3; side++) {
        for (size_t u = 0; u < n; u++) {
            run->trial[u] = run->q[u] + sides[side];
        }
        tw_status status = tw_fit_lengths(model, run->trial);
        if (status != TW_OK) {
            return status;
        }
        for (size_t k = 0; k < fit->span_count && side < 2; k++) {
            fit->length_rate[k] += model->length_m[k] / (2.0 * sides[side]);
        }
    }
    memcpy(fit->length_m, model->length_m, fit->span_count * sizeof(double));
    for (size_t u = 0; u < n; u++) {
        size_t k = fit->span[u];
        fit->value[u] = k == TW_NONE ? exp(run->q[u]) : fit->length_m[k];
        run->rate[u] = k == TW_NONE ? fit->value[u] : fit->length_rate[k];
    }
    for (size_t k = 0; k < fit->span_count; k++) {
        fit->length_rate[k] = model->unknown == TW_FIT_PULL ? fit->length_rate[k] / fit->value[0] : (double)NAN;
    }
    return TW_OK;
}

/* From the inverse of the normal matrix, column by column. */
static tw_status publish_covariance(fit_run *run, double variance)
{
    size_t n = run->model.unknown_count;
    tw_status status = TW_OK;
    for (size_t u = 0; status == TW_OK && u < n; u++) {
        status = tw_fit_clock(&run->model);
        memset(run->trial, 0, n * sizeof(double));
        run->trial[u] = -1.0;
        tw_fit_normal_solve(&run->normal, run->trial, run->step);
        for (size_t v = 0; v < n; v++) {
            run->fit->covariance[u * n + v] = run->step[v] * run->rate[u] * run->rate[v] * variance;
        }
    }
    if (status != TW_OK) {
        memset(run->fit->covariance, 0, n * n * sizeof(double));
    }
    return status;
}

/* j A^-1 j for one row j of the derivatives. */
static double leverage_of(fit_run *run, const double *row)
{
    size_t n = run->model.unknown_count;
    double part = 0.0;
    tw_fit_normal_solve(&run->normal, row, run->step);
    for (size_t v = 0; v < n; v++) {
        part -= row[v] * run->step[v];
    }
    return fmin(part, 1.0);
}

/* Residuals in metres, elevations then offsets; with the covariances known, leverages too. */
static void publish_rows(fit_run *run, int with_leverage)
{
    const tw_fit_model *model = &run->model;
    size_t row = 0;
    for (size_t i = 0; i < 2 * model->count; i++) {
        const tw_observation *seen = &model->seen[i % model->count];
        run->fit->residual_m[i] = run->fit->leverage[i] = (double)NAN;
        if (i < model->count || !isnan(seen->offset_m)) {
            double sigma = isnan(seen->sigma_m) ? 1.0 : seen->sigma_m;
            run->fit->residual_m[i] = run->residual[row] * (sigma / model->sigma_m);
            if (with_leverage) {
                run->fit->leverage[i] = leverage_of(run, run->jacobian + row * model->unknown_count);
            }
            row++;
        }
    }
}

/* What was found, or the best so far of a search that was stopped; everything at run->q. */
static tw_status publish(fit_run *run, tw_status status)
{
    const double sigma = isnan(run->model.seen[0].sigma_m) ? 1.0 : run->model.sigma_m;
    int stopped = tw_status_stops(status) || status == TW_EVALUATION_LIMIT;
    if (!(status == TW_OK || (stopped && isfinite(run->square)))) {
        return status;
    }
    tw_status lengths = publish_values(run);
    if (lengths != TW_OK) {
        return lengths;
    }
    if (status == TW_OK) {
        status = publish_covariance(run, sigma * sigma);
    }
    publish_rows(run, status == TW_OK);
    run->fit->chi2 = run->square / (sigma * sigma);
    run->fit->has_values = 1;
    return status;
}

tw_status tw_fit_search(const tw_project *project, const tw_observation *observations, size_t count,
                        tw_fit_unknown unknown, const tw_options *options, tw_fit *fit)
{
    fit_run run = {.fit = fit, .model = {.given = project, .seen = observations, .count = count, .unknown = unknown,
                                         .unknown_count = fit->unknown_count, .span = fit->span, .place = fit->place,
                                         .options = options}};
    tw_status status = open_run(&run);
    fit->row_count = run.model.row_count;
    if (status == TW_OK && (run.model.unknown_count < 1 || run.model.row_count < run.model.unknown_count)) {
        status = TW_UNDETERMINED;
    }
    if (status == TW_OK && unknown == TW_FIT_LENGTHS && fit->unknown_count < fit->span_count) {
        status = lengths_of_best_pull(&run);
    }
    if (status == TW_OK) {
        status = minimise(&run);
    }
    if (status == TW_OK) {
        status = judge(&run);
    }
    fit->status = publish(&run, status);
    fit->evaluations = run.model.evaluations;
    close_run(&run);
    return fit->status;
}
