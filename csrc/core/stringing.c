#include "stringing.h"

#include <math.h>
#include <string.h>

#include "hold.h"
#include "uniform_curved.h"
#include "route.h"
#include "uniform.h"
#include "vector.h"

/* The clamps of the strung line, measured from the supports, and what each span is like at one pull. */
typedef struct strung {
    const tw_project *project;
    size_t span_count;
    tw_material material; /* as strung */
    double *swing;    /* [3 (span_count + 1)] */
    double *length_m; /* [span_count] */
    double *pull;     /* [3 span_count] tension vector at each span's start */
    const tw_stringing_way *way; /* NULL: equal horizontal tension, hangers plumb */
    double *lifted;   /* [span_count + 1] 1: the line would lift this hanger; kept once found, or it could flip for ever */
} strung;

/* curve: room for the law of a curved line, for as long as the strung line is used. */
static strung strung_on(const tw_project *project, double *length_m, double *work, tw_curve *curve)
{
    double reference = project->stringing.temperature_degC;
    strung line = {.project = project, .span_count = project->support_count - 1, .length_m = length_m};
    line.material = tw_material_after(&project->line, reference, reference, NULL, curve);
    line.swing = work;
    line.pull = work + 3 * project->support_count;
    line.lifted = work + 6 * project->support_count;
    return line;
}

static void hang_plumb(strung *line)
{
    for (size_t j = 0; j <= line->span_count; j++) {
        const tw_support *support = &line->project->supports[j];
        line->lifted[j] = 0.0;
        line->swing[3 * j] = line->swing[3 * j + 1] = 0.0;
        line->swing[3 * j + 2] = -tw_hold_drop(support);
    }
}

/* Plan run, rise and plan direction between the clamps of a span. */
static void chord_of(const strung *line, size_t span, double *run, double *rise, double u[2])
{
    double near[3], far[3];
    tw_hold_attachment(&line->project->supports[span], near);
    tw_hold_attachment(&line->project->supports[span + 1], far);
    tw_axpy(near, 1.0, line->swing + 3 * span, near);
    tw_axpy(far, 1.0, line->swing + 3 * span + 3, far);
    *run = hypot(far[0] - near[0], far[1] - near[1]);
    *rise = far[2] - near[2];
    u[0] = (far[0] - near[0]) / *run;
    u[1] = (far[1] - near[1]) / *run;
}

static tw_status lengths_between_clamps(strung *line, double pull_N)
{
    const tw_line *data = &line->project->line;
    for (size_t k = 0; k < line->span_count; k++) {
        double run, rise, u[2], v;
        chord_of(line, k, &run, &rise, u);
        const tw_uniform span = {run, -rise, data->weight_N_per_m, line->material.stiffness_N, 0.0};
        tw_status status = tw_uniform_length(&span, pull_N, &line->length_m[k], &v);
        if (status == TW_OK && line->material.curve) {
            status = tw_uniform_curved_length(&line->material, &span, pull_N, &line->length_m[k], &v);
        }
        if (status != TW_OK) {
            return status;
        }
        line->pull[3 * k] = pull_N * u[0];
        line->pull[3 * k + 1] = pull_N * u[1];
        line->pull[3 * k + 2] = -v;
    }
    return TW_OK;
}

/* Where posts lean and the route turns, the clamps follow their hold forces, by a share of the way; a hanger that the line
 * would lift is held down plumb, as the rule says. Returns the largest move. */
static double follow_holds(strung *line, double share)
{
    double weight = line->project->line.weight_N_per_m;
    double moved = 0.0;
    for (size_t j = 0; j <= line->span_count; j++) {
        const tw_support *support = &line->project->supports[j];
        double F[3] = {0.0, 0.0, tw_hold_link_m(support) > 0.0 ? 0.5 * support->hanger_weight_N : 0.0};
        double swing[3], ahead[2];
        if (j > 0) {
            tw_axpy(F, 1.0, line->pull + 3 * (j - 1), F);
            F[2] += weight * line->length_m[j - 1];
        }
        if (j < line->span_count) {
            tw_axpy(F, -1.0, line->pull + 3 * j, F);
        }
        line->lifted[j] = line->lifted[j] > 0.0 || F[2] <= 0.0 ? 1.0 : 0.0;
        if (tw_hold_link_m(support) > 0.0 && line->lifted[j] > 0.0) {
            F[0] = F[1] = 0.0;
            F[2] = 1.0;
        }
        tw_route_ahead(line->project, j, ahead);
        tw_hold_swing(support, ahead, F, 0.0, swing);
        tw_axpy(swing, -1.0, line->swing + 3 * j, swing);
        moved = fmax(moved, tw_norm(swing));
        tw_axpy(line->swing + 3 * j, share, swing, line->swing + 3 * j);
    }
    return moved;
}

/* Fixed point of the clamps under their own hold forces; straight routes are there at once, sharp bends want shorter steps,
 * and the last of those are taken as they stand within 1e-8 m. */
static tw_status string_plumb(strung *line, double pull_N)
{
    double share = 1.0, before = INFINITY;
    hang_plumb(line);
    for (int i = 0; i < 600; i++) {
        tw_status status = lengths_between_clamps(line, pull_N);
        if (status != TW_OK) {
            return status;
        }
        double moved = follow_holds(line, share);
        if (moved < (i < 300 ? 1e-11 : 1e-8)) {
            return TW_OK;
        }
        share = moved > 0.9 * before ? fmax(0.1, 0.7 * share) : share;
        before = moved;
    }
    return TW_NOT_SETTLED;
}

static tw_status string_to(strung *line, double pull_N)
{
    tw_status status = string_plumb(line, pull_N);
    return status == TW_OK && line->way ? line->way->string(line->way->data, pull_N, line->length_m, line->pull, line->swing)
                                        : status;
}

tw_status tw_stringing_at_pull(const tw_project *project, double pull_N, double *length_m, double *work)
{
    tw_curve curve;
    strung line = strung_on(project, length_m, work, &curve);
    return string_to(&line, pull_N);
}

static double tension_beside(const strung *line, size_t support)
{
    double weight = line->project->line.weight_N_per_m;
    double largest = 0.0;
    if (support > 0) {
        double far[3];
        tw_copy(line->pull + 3 * (support - 1), far);
        far[2] += weight * line->length_m[support - 1];
        largest = tw_norm(far);
    }
    if (support < line->span_count) {
        largest = fmax(largest, tw_norm(line->pull + 3 * support));
    }
    return largest;
}

static double sag_of(const strung *line, size_t span)
{
    const tw_line *data = &line->project->line;
    double run, rise, u[2], end[3], far[3], at;
    const double zero[3] = {0.0, 0.0, 0.0};
    tw_piece piece = {.length_m = line->length_m[span], .load = {0.0, 0.0, -data->weight_N_per_m}};
    chord_of(line, span, &run, &rise, u);
    const double down[3] = {rise / run * u[0], rise / run * u[1], -1.0};
    tw_span_hang(&line->material, &piece, 1, zero, line->pull + 3 * span, end, far, NULL);
    return tw_span_extreme(&line->material, &piece, 1, down, zero, &at);
}

/* What the rule measures at a pull, less what it asks for; falls with the pull, but for the tension rule. */
static tw_status measure(strung *line, double pull_N, double *miss)
{
    const tw_stringing *rule = &line->project->stringing;
    tw_status status = string_to(line, pull_N);
    if (status != TW_OK) {
        return status;
    }
    switch (rule->rule) {
    case TW_STRING_TENSION: *miss = rule->value - tension_beside(line, rule->index); break;
    case TW_STRING_SAG: *miss = sag_of(line, rule->index) - rule->value; break;
    case TW_STRING_TOTAL_LENGTH:
        *miss = -rule->value;
        for (size_t k = 0; k < line->span_count; k++) {
            *miss += line->length_m[k];
        }
        break;
    case TW_STRING_PULL:
    case TW_STRING_SPAN_LENGTHS:
    case TW_STRING_NONE: return TW_ERROR_RANGE;
    }
    return TW_OK;
}

/* A bracket inside pulls that can be strung: too slack a line cannot, nor one whose springs bring its supports together. */
static tw_status reach_rule(strung *line, double *low, double *high, double *miss_low, double *miss_high)
{
    tw_status status = measure(line, *low, miss_low);
    while (status == TW_NOT_SETTLED && *low < 0.5 * *high) {
        *low *= 1.5;
        status = measure(line, *low, miss_low);
    }
    if (status != TW_OK) {
        return status;
    }
    double broken = *high;
    status = measure(line, *high, miss_high);
    while (status != TW_OK && *high > 1.5 * *low) {
        broken = *high;
        *high /= 1.5;
        status = measure(line, *high, miss_high);
    }
    for (int i = 0; i < 40 && status == TW_OK && *miss_high > 0.0 && *high < broken; i++) {
        double further, middle = 0.5 * (*high + broken);
        if (measure(line, middle, &further) == TW_OK) {
            *high = middle;
            *miss_high = further;
        } else {
            broken = middle;
        }
    }
    return status;
}

/* The bracket narrows by the Illinois rule on the logarithm of the pull; it keeps a sign change, so it cannot leave. */
static tw_status solve_rule(strung *line, double low, double high, double *pull_N)
{
    double miss_low, miss_high, miss;
    tw_status status = reach_rule(line, &low, &high, &miss_low, &miss_high);
    if (status != TW_OK) {
        return status;
    }
    if (!(miss_low >= 0.0 && miss_high <= 0.0)) {
        return TW_OUT_OF_REACH;
    }
    int side = 0;
    for (int i = 0; i < 200 && high / low - 1.0 > 4e-16; i++) {
        double a = log(low), b = log(high);
        double middle = miss_low > miss_high ? a + (b - a) * miss_low / (miss_low - miss_high) : 0.5 * (a + b);
        *pull_N = i % 3 == 2 ? exp(0.5 * (a + b)) : fmin(fmax(exp(middle), low), high);
        status = measure(line, *pull_N, &miss);
        if (status != TW_OK || fabs(miss) <= 2e-16 * line->project->stringing.value) {
            return status;
        }
        if (miss > 0.0) {
            low = *pull_N;
            miss_low = miss;
            miss_high *= side > 0 ? 0.5 : 1.0;
            side = 1;
        } else {
            high = *pull_N;
            miss_high = miss;
            miss_low *= side < 0 ? 0.5 : 1.0;
            side = -1;
        }
    }
    return measure(line, *pull_N, &miss);
}

static double longest_span(const tw_project *project)
{
    double longest = 0.0;
    for (size_t k = 0; k + 1 < project->support_count; k++) {
        const tw_support *near = &project->supports[k];
        longest = fmax(longest, hypot(near[1].station_m - near->station_m, near[1].offset_m - near->offset_m));
    }
    return longest;
}

void tw_stringing_range(const tw_project *project, double *low_N, double *high_N)
{
    double weight = project->line.weight_N_per_m;
    double high = project->line.breaking_strength_N;
    *low_N = 0.2 * weight * longest_span(project);
    if (isnan(high)) {
        high = 0.0;
        for (size_t i = 0; i < project->limit_count; i++) {
            const tw_limit *limit = &project->limits[i];
            double most = isnan(limit->most) ? 0.0 : 2.0 * limit->most;
            if (limit->kind == TW_LIMIT_TENSION) {
                high = fmax(high, most);
            } else if (limit->kind == TW_LIMIT_CATENARY_CONSTANT) {
                high = fmax(high, most * weight);
            }
        }
    }
    *high_N = high > *low_N ? high : fmax(0.02 * project->line.stiffness_N, 10.0 * *low_N);
    *low_N = fmax(*low_N, 1e-12 * *high_N); /* a line that weighs next to nothing */
}

/* The pull at which a support's tension is least: on a steep span far below that of a level one. */
static double least_tension_pull(strung *line, double low)
{
    double at_low, lower;
    for (int i = 0; i < 60; i++) {
        if (measure(line, low, &at_low) != TW_OK || measure(line, 0.7 * low, &lower) != TW_OK || lower <= at_low) {
            break;
        }
        low *= 0.7;
    }
    return low;
}

/* A support's tension falls with the pull until the line is about 1.5 spans deep; only the taut branch is meant. */
static tw_status lengths_by_rule(strung *line, double *pull_N)
{
    const tw_project *project = line->project;
    double low, high;
    tw_stringing_range(project, &low, &high);
    if (project->stringing.rule == TW_STRING_TENSION) {
        high = project->stringing.value;
        low = fmin(0.42 * project->line.weight_N_per_m * longest_span(project), 0.9 * high);
        low = least_tension_pull(line, fmax(low, 1e-6 * high));
    } else {
        low *= 0.3;
        high = fmax(high, 0.3 * project->line.stiffness_N);
    }
    return solve_rule(line, low, high, pull_N);
}

/* A bracket around the pull by another way, from that of equal horizontal tension: the two are not far apart. */
static tw_status rule_by_way(strung *line, const tw_stringing_way *way, double *pull_N)
{
    double near, miss;
    tw_status status = lengths_by_rule(line, pull_N);
    line->way = way;
    if (status == TW_OK) {
        status = measure(line, *pull_N, &miss);
    }
    if (status != TW_OK) {
        return status;
    }
    double from = *pull_N, step = miss > 0.0 ? 1.01 : 1.0 / 1.01;
    do {
        near = from;
        from *= step;
        step *= step;
        status = measure(line, from, &miss);
    } while (status == TW_OK && (miss > 0.0) == (step > 1.0) && from < 1e3 * *pull_N && from > 1e-3 * *pull_N);
    return status == TW_OK ? solve_rule(line, fmin(near, from), fmax(near, from), pull_N) : status;
}

tw_status tw_stringing_by(const tw_project *project, const tw_stringing_way *way, double *length_m, double *pull_N,
                          double *work)
{
    const tw_stringing *rule = &project->stringing;
    tw_curve curve;
    strung line = strung_on(project, length_m, work, &curve);
    if (!isnan(*pull_N) || rule->rule == TW_STRING_PULL) {
        *pull_N = isnan(*pull_N) ? rule->value : *pull_N;
        line.way = way;
        return string_to(&line, *pull_N);
    }
    return rule->rule == TW_STRING_TENSION || rule->rule == TW_STRING_SAG || rule->rule == TW_STRING_TOTAL_LENGTH
               ? rule_by_way(&line, way, pull_N)
               : TW_ERROR_RANGE;
}

tw_status tw_stringing_lengths(const tw_project *project, double *length_m, double *pull_N, double *work)
{
    const tw_stringing *rule = &project->stringing;
    tw_curve curve;
    strung line = strung_on(project, length_m, work, &curve);
    *pull_N = rule->rule == TW_STRING_PULL ? rule->value : (double)NAN;
    switch (rule->rule) {
    case TW_STRING_PULL: return string_to(&line, rule->value);
    case TW_STRING_TENSION:
    case TW_STRING_SAG:
    case TW_STRING_TOTAL_LENGTH: return lengths_by_rule(&line, pull_N);
    case TW_STRING_SPAN_LENGTHS:
        memcpy(length_m, rule->lengths_m, line.span_count * sizeof(double));
        return TW_OK;
    case TW_STRING_NONE: break;
    }
    return TW_ERROR_RANGE;
}
