/* fit_model: the bare line at the survey's temperatures as a function of the unknowns. */
#include <math.h>
#include <string.h>

#include "alloc.h"
#include "clock.h"
#include "fit_search.h"
#include "hold.h"
#include "pulling.h"
#include "route.h"
#include "stringing.h"
#include "uniform.h"

/* The chord between the clamps of a span when its hangers are plumb and its posts upright. */
static void plumb_chord(const tw_project *project, size_t span, double near[3], double chord[3])
{
    const tw_support *a = &project->supports[span];
    tw_hold_attachment(a, near);
    tw_hold_chord(a, a + 1, chord);
    near[2] -= tw_hold_drop(a);
    chord[2] += tw_hold_drop(a) - tw_hold_drop(a + 1);
}

static tw_uniform lone_span(const tw_project *project, size_t span)
{
    double near[3], chord[3];
    plumb_chord(project, span, near, chord);
    const tw_uniform alone = {hypot(chord[0], chord[1]), -chord[2], project->line.weight_N_per_m,
                              project->line.stiffness_N, 0.0};
    return alone;
}

size_t tw_fit_span_of(const tw_project *project, double station_m)
{
    size_t k = 0, beyond = project->support_count - 1;
    while (beyond - k > 1) {
        size_t middle = k + (beyond - k) / 2;
        if (station_m < tw_route_support_station(project, middle)) {
            beyond = middle;
        } else {
            k = middle;
        }
    }
    double from = tw_route_support_station(project, k), to = tw_route_support_station(project, k + 1);
    double edge = TW_FIT_INNER * (to - from);
    return station_m > from + edge && station_m < to - edge ? k : TW_NONE;
}

/* One bare condition for each temperature that occurs. */
static size_t gather_conditions(tw_fit_model *model)
{
    size_t found = 0;
    for (size_t i = 0; i < model->count; i++) {
        size_t c = 0;
        while (c < found && model->conditions[c].temperature_degC != model->seen[i].temperature_degC) {
            c++;
        }
        if (c == found) {
            model->conditions[found++] = tw_line_bare(model->seen[i].temperature_degC);
        }
        model->condition[i] = c;
    }
    return found;
}

static void measure_scales(tw_fit_model *model)
{
    model->sigma_m = isnan(model->seen[0].sigma_m) ? 1.0 : INFINITY;
    model->row_count = model->count;
    for (size_t i = 0; i < model->count; i++) {
        model->row_count += isnan(model->seen[i].offset_m) ? 0 : 1;
        model->sigma_m = fmin(model->sigma_m, model->seen[i].sigma_m); /* fmin passes over NaN */
    }
    for (size_t k = 0; k < model->span_count; k++) {
        model->scale_m = fmax(model->scale_m, lone_span(model->given, k).span);
    }
}

tw_status tw_fit_open(tw_fit_model *model)
{
    model->span_count = model->given->support_count - 1;
    model->deadline = tw_clock_deadline(model->options->seconds_most);
    model->conditions = tw_calloc(model->count, sizeof *model->conditions);
    model->condition = tw_calloc(model->count, sizeof *model->condition);
    model->length_m = tw_calloc(model->span_count, sizeof(double));
    model->work = tw_calloc(TW_STRINGING_WORK(model->given), sizeof(double));
    model->sums = tw_calloc(2 * model->span_count, sizeof(double));
    model->pulling = tw_pulling_applies(model->given) ? tw_pulling_create(model->given) : NULL;
    measure_scales(model);
    model->side = tw_calloc(2 * model->row_count, sizeof(double));
    if (!model->conditions || !model->condition || !model->length_m || !model->work || !model->sums || !model->side
        || (tw_pulling_applies(model->given) && !model->pulling)) {
        return TW_ERROR_MEMORY;
    }
    model->bare = *model->given;
    model->bare.condition_count = gather_conditions(model);
    model->bare.conditions = model->conditions;
    model->bare.load_count = model->bare.mark_count = model->bare.limit_count = 0;
    model->bare.stringing.rule = TW_STRING_SPAN_LENGTHS;
    model->bare.stringing.lengths_m = model->length_m;
    model->trial = tw_trial_create(&model->bare);
    return model->trial ? TW_OK : TW_ERROR_MEMORY;
}

void tw_fit_close(tw_fit_model *model)
{
    tw_trial_free(model->trial);
    tw_pulling_free(model->pulling);
    tw_free(model->conditions);
    tw_free(model->condition);
    tw_free(model->length_m);
    tw_free(model->work);
    tw_free(model->sums);
    tw_free(model->side);
}

tw_status tw_fit_lengths(tw_fit_model *model, const double *q)
{
    tw_status status = TW_OK;
    if (model->unknown == TW_FIT_PULL) {
        double pull = exp(q[0]);
        return model->pulling ? tw_pulling_lengths(model->pulling, &pull, model->length_m, model->options)
                              : tw_stringing_at_pull(model->given, pull, model->length_m, model->work);
    }
    for (size_t u = 0; status == TW_OK && u < model->unknown_count; u++) {
        tw_uniform alone = lone_span(model->given, model->span[u]);
        double length, v;
        status = tw_uniform_length(&alone, exp(q[u]), &length, &v);
        model->length_m[model->span[u]] = length;
        status = status == TW_OK && !isfinite(length) ? TW_NOT_FINITE : status;
    }
    return status;
}

/* Natural length at which the line passes a station; a support that gives may have drawn its end past the point, which then
 * is the end's. */
static tw_status length_at(const tw_section *section, double station_m, double *s)
{
    size_t last = section->span_count;
    const tw_route_leg first = tw_route_leg_of(section->project, 0);
    const tw_route_leg final = tw_route_leg_of(section->project, last - 1);
    if (tw_section_at_station(section, station_m, s) == TW_OK) {
        return TW_OK;
    }
    *s = station_m <= tw_route_station(&first, section->clamp) ? 0.0 : section->start_m[last];
    return *s == 0.0 || station_m >= tw_route_station(&final, section->clamp + 3 * last) ? TW_OK : TW_NOT_SETTLED;
}

/* Where the line passes a station: elevation, and distance left of the route. */
static tw_status place_at(const tw_section *section, double station_m, double *elevation_m, double *left_m)
{
    double s, within, position[3];
    size_t span;
    tw_status status = length_at(section, station_m, &s);
    if (status != TW_OK) {
        return status;
    }
    tw_section_at(section, s, position, NULL);
    tw_section_locate(section, s, &span, &within);
    const tw_route_leg leg = tw_route_leg_of(section->project, span);
    *elevation_m = position[2];
    *left_m = tw_route_left(&leg, position);
    return isfinite(position[0] + position[1] + position[2]) ? TW_OK : TW_NOT_FINITE;
}

tw_status tw_fit_clock(const tw_fit_model *model)
{
    return tw_clock_check(model->options, model->deadline);
}

tw_status tw_fit_residuals(tw_fit_model *model, const double *q, double *out)
{
    size_t offsets = 0;
    tw_status status = tw_fit_lengths(model, q);
    model->evaluations++;
    if (status == TW_OK) {
        status = tw_trial_string(model->trial, (double)NAN, model->options);
    }
    for (size_t i = 0; status == TW_OK && i < model->count; i++) {
        const tw_observation *seen = &model->seen[i];
        const tw_section *section;
        double elevation_m, left_m;
        status = tw_fit_clock(model);
        if (status == TW_OK) {
            status = tw_trial_section(model->trial, model->condition[i], model->options, &section);
        }
        if (status == TW_OK) {
            status = place_at(section, seen->station_m, &elevation_m, &left_m);
        }
        if (status != TW_OK) {
            break;
        }
        double sigma = isnan(seen->sigma_m) ? 1.0 : seen->sigma_m;
        out[i] = (seen->elevation_m - elevation_m) * (model->sigma_m / sigma);
        if (!isnan(seen->offset_m)) {
            out[model->count + offsets++] = (seen->offset_m - left_m) * (model->sigma_m / sigma);
        }
    }
    return status;
}

tw_status tw_fit_derivatives(tw_fit_model *model, double *q, double step, double *out)
{
    size_t rows = model->row_count, n = model->unknown_count;
    tw_status status = TW_OK;
    double *side = model->side;
    for (size_t u = 0; status == TW_OK && u < n; u++) {
        double at = q[u];
        double up = at + step, down = at - step;
        q[u] = up;
        status = tw_fit_residuals(model, q, side);
        q[u] = down;
        if (status == TW_OK) {
            status = tw_fit_residuals(model, q, side + rows);
        }
        q[u] = at;
        for (size_t r = 0; r < rows; r++) {
            out[r * n + u] = (side[r] - side[rows + r]) / (up - down);
        }
    }
    return status;
}

/* A point's part in its span's sums of the parabola z = chord - x (l - x) w c / (2 H), c the slant of the chord: of sag times
 * that, and of its square. */
static void add_parabola(const tw_fit_model *model, size_t span, const tw_observation *seen, double sums[2])
{
    double near[3], chord[3];
    plumb_chord(model->given, span, near, chord);
    double from = tw_route_support_station(model->given, span);
    double run = tw_route_support_station(model->given, span + 1) - from;
    double slant = sqrt(1.0 + chord[2] * chord[2] / (chord[0] * chord[0] + chord[1] * chord[1]));
    double x = seen->station_m - from;
    double sag = near[2] + chord[2] * x / run - seen->elevation_m;
    double shape = 0.5 * model->given->line.weight_N_per_m * slant * x * (run - x);
    sums[0] += sag * shape;
    sums[1] += shape * shape;
}

/* Logarithm of the parabola's pull, kept between a deep sag and a tenth of EA. */
static double parabola_pull(const tw_fit_model *model, const double sums[2])
{
    double most = 0.1 * model->given->line.stiffness_N;
    double least = fmin(0.1 * model->given->line.weight_N_per_m * model->scale_m, 0.1 * most);
    double pull = sums[0] > 0.0 ? sums[1] / sums[0] : 0.01 * model->given->line.stiffness_N;
    return log(fmin(fmax(pull, fmax(least, 1e-9 * most)), most));
}

void tw_fit_start(const tw_fit_model *model, double *q)
{
    double all[2] = {0.0, 0.0};
    memset(model->sums, 0, 2 * model->span_count * sizeof(double));
    for (size_t i = 0; i < model->count; i++) {
        if (model->place[i] != TW_NONE) {
            add_parabola(model, model->place[i], &model->seen[i], model->sums + 2 * model->place[i]);
        }
    }
    for (size_t k = 0; k < model->span_count; k++) {
        all[0] += model->sums[2 * k];
        all[1] += model->sums[2 * k + 1];
    }
    for (size_t u = 0; u < model->unknown_count; u++) {
        const double *own = model->unknown == TW_FIT_LENGTHS ? model->sums + 2 * model->span[u] : all;
        q[u] = parabola_pull(model, own[0] > 0.0 ? own : all);
    }
}
