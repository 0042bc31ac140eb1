#include "pulling.h"

#include <math.h>
#include <string.h>

#include "alloc.h"
#include "hold.h"
#include "stringing.h"
#include "vector.h"

int tw_pulling_applies(const tw_project *project)
{
    if (project->stringing.method == TW_METHOD_OVER_SHEAVES) {
        return 1;
    }
    for (size_t j = 0; j < project->support_count; j++) {
        if (project->supports[j].hold == TW_HOLD_SHEAVE) {
            return 1;
        }
    }
    return 0;
}

int tw_pulling_begins(const tw_project *project, size_t j)
{
    return j == 0 || (j + 1 < project->support_count && project->supports[j].hold == TW_HOLD_ANCHOR);
}

tw_pulling *tw_pulling_create(const tw_project *project)
{
    tw_pulling *pulling = tw_calloc(1, sizeof *pulling);
    if (!pulling) {
        return NULL;
    }
    pulling->project = project;
    pulling->held = *project;
    pulling->supports = tw_calloc(project->support_count, sizeof *pulling->supports);
    if (!pulling->supports) {
        tw_pulling_free(pulling);
        return NULL;
    }
    memcpy(pulling->supports, project->supports, project->support_count * sizeof *pulling->supports);
    pulling->held.supports = pulling->supports;
    pulling->blocks = tw_section_create(&pulling->held);
    pulling->clamped = tw_section_create(&pulling->held);
    pulling->work = tw_calloc(TW_STRINGING_WORK(project), sizeof(double));
    if (!pulling->blocks || !pulling->clamped || !pulling->work) {
        tw_pulling_free(pulling);
        return NULL;
    }
    return pulling;
}

void tw_pulling_free(tw_pulling *pulling)
{
    if (!pulling) {
        return;
    }
    tw_section_free(pulling->blocks);
    tw_section_free(pulling->clamped);
    tw_free(pulling->work);
    tw_free(pulling->supports);
    tw_free(pulling);
}

/* `clamps`: what natural length does at the hangers and posts between the anchors. */
static void set_feeds(tw_section *section, const tw_project *project, tw_feed clamps)
{
    for (size_t j = 0; j <= section->span_count; j++) {
        int between = j > 0 && j < section->span_count && !tw_pulling_begins(project, j);
        int sheave = project->supports[j].hold == TW_HOLD_SHEAVE;
        section->feed[j] = !between ? TW_FEED_NONE : sheave ? TW_FEED_SHEAVE : clamps;
    }
}

void tw_pulling_over_sheaves(tw_section *section)
{
    set_feeds(section, section->project, TW_FEED_SHEAVE);
}

/* The supports as they stand now: a search may have moved them. With equal horizontal tension the line would lift some
 * hangers: they become fixed points at their plumb ends. */
static void hold_down(tw_pulling *pulling, const double *length_m, const double *pull)
{
    double weight = pulling->project->line.weight_N_per_m;
    size_t count = pulling->project->support_count;
    memcpy(pulling->supports, pulling->project->supports, count * sizeof *pulling->supports);
    for (size_t j = 1; j + 1 < count; j++) {
        tw_support *support = &pulling->supports[j];
        double link = tw_hold_link_m(support);
        double down = pull[3 * j - 1] + weight * length_m[j - 1] - pull[3 * j + 2];
        if (link > 0.0 && down + 0.5 * support->hanger_weight_N <= 0.0) {
            support->sheave_friction = support->hold == TW_HOLD_SHEAVE ? support->sheave_friction : (double)NAN;
            support->hold = TW_HOLD_SHEAVE;
            support->elevation_m -= link;
            support->hanger_length_m = 0.0;
        }
    }
}

/* From the spans of equal horizontal tension to those over sheaves, pulled in. */
static tw_status pull_in(void *data, double pull_N, double *length_m, double *pull, double *swing)
{
    tw_pulling *pulling = data;
    tw_section *blocks = pulling->blocks;
    size_t n = blocks->span_count;
    int over = pulling->project->stringing.method == TW_METHOD_OVER_SHEAVES;
    hold_down(pulling, length_m, pull);
    set_feeds(blocks, pulling->project, over ? TW_FEED_SHEAVE : TW_FEED_PLUMB);
    for (size_t j = 0; j < n; j++) {
        blocks->feed[j] = tw_pulling_begins(pulling->project, j) ? TW_FEED_WINCH : blocks->feed[j];
        blocks->winch_N[j] = pull_N;
    }
    tw_status status = tw_section_load(blocks, TW_NONE, length_m, NULL, 0);
    if (status != TW_OK) {
        return status;
    }
    memcpy(blocks->pull, pull, 3 * n * sizeof(double));
    memset(blocks->moved_m, 0, (n + 1) * sizeof(double));
    memset(blocks->slack, 0, n + 1);
    status = tw_section_solve(blocks, pulling->options, 1);
    if (status != TW_OK) {
        return status;
    }
    memcpy(length_m, blocks->length_m, n * sizeof(double));
    memcpy(pull, blocks->pull, 3 * n * sizeof(double));
    for (size_t j = 0; j <= n; j++) {
        double a[3];
        tw_hold_attachment(&pulling->project->supports[j], a);
        tw_axpy(blocks->clamp + 3 * j, -1.0, a, swing + 3 * j);
    }
    return TW_OK;
}

/* The same natural length between the anchors, hangers plumb. */
static tw_status clamp_plumb(tw_pulling *pulling, double *length_m)
{
    tw_section *clamped = pulling->clamped;
    size_t n = clamped->span_count;
    set_feeds(clamped, pulling->project, TW_FEED_PLUMB);
    tw_status status = tw_section_load(clamped, TW_NONE, pulling->blocks->length_m, NULL, 0);
    if (status != TW_OK) {
        return status;
    }
    memcpy(clamped->pull, pulling->blocks->pull, 3 * n * sizeof(double));
    memset(clamped->moved_m, 0, (n + 1) * sizeof(double));
    memset(clamped->slack, 0, n + 1);
    status = tw_section_solve(clamped, pulling->options, 1);
    memcpy(length_m, clamped->length_m, n * sizeof(double));
    return status;
}

tw_status tw_pulling_lengths(tw_pulling *pulling, double *pull_N, double *length_m, const tw_options *options)
{
    const tw_stringing *rule = &pulling->project->stringing;
    const tw_stringing_way way = {pull_in, pulling};
    pulling->options = options;
    tw_status status = tw_stringing_by(pulling->project, &way, length_m, pull_N, pulling->work);
    if (status == TW_OK && rule->method == TW_METHOD_OVER_SHEAVES && rule->clip == TW_CLIP_PLUMB) {
        status = clamp_plumb(pulling, length_m);
    }
    return status;
}
