#include "section.h"

#include <math.h>

#include "alloc.h"
#include "section_feed.h"

static size_t loads_most(const tw_project *project)
{
    size_t most = 0;
    for (size_t c = 0; c < project->condition_count; c++) {
        if (project->conditions[c].load_count > most) {
            most = project->conditions[c].load_count;
        }
    }
    return most;
}

static int has_run_load(const tw_project *project)
{
    for (size_t i = 0; i < project->load_count; i++) {
        if (project->loads[i].is_run) {
            return 1;
        }
    }
    return 0;
}

/* Room for the run loads of any condition; 0 without memory. */
static int create_run(tw_section *section)
{
    if (!has_run_load(section->project)) {
        return 1;
    }
    section->piece_capacity += TW_SECTION_RUN_PIECES * section->span_count;
    section->run_vector = tw_calloc(3 * section->piece_capacity, sizeof(double));
    section->run_share = tw_calloc(2 * section->piece_capacity, sizeof(double));
    return section->run_vector && section->run_share;
}

tw_section *tw_section_create(const tw_project *project)
{
    size_t spans = project->support_count - 1;
    size_t loads = loads_most(project);
    tw_section *section = tw_calloc(1, sizeof *section);
    if (!section) {
        return NULL;
    }
    section->project = project;
    section->span_count = spans;
    section->carriage_m = (double)NAN;
    section->condition = TW_NONE;
    section->piece_capacity = spans + 2 * loads;
    section->materials = tw_calloc(spans, sizeof *section->materials);
    section->curves = project->line.part_count > 0 ? tw_calloc(spans, sizeof *section->curves) : NULL;
    if (!section->materials || (project->line.part_count > 0 && !section->curves) || !create_run(section)) {
        tw_section_free(section);
        return NULL;
    }
    section->pieces = tw_calloc(section->piece_capacity, sizeof *section->pieces);
    section->piece_first = tw_calloc(spans + 1, sizeof *section->piece_first);
    section->cut_m = tw_calloc(2 * loads + TW_SECTION_RUN_PIECES + 1, sizeof(double));
    section->slack = tw_calloc(spans + 1, 1);
    section->run_first = tw_calloc(spans + 1, sizeof *section->run_first);
    section->length_m = tw_calloc(spans, sizeof(double));
    section->start_m = tw_calloc(spans + 1, sizeof(double));
    section->pull = tw_calloc(3 * spans, sizeof(double));
    section->clamp = tw_calloc(3 * (spans + 1), sizeof(double));
    section->clamp_load = tw_calloc(3 * (spans + 1), sizeof(double));
    section->link_load = tw_calloc(3 * (spans + 1), sizeof(double));
    section->hold_force = tw_calloc(3 * (spans + 1), sizeof(double));
    section->ahead = tw_calloc(2 * (spans + 1), sizeof(double));
    section->load_length_m = tw_calloc(loads + 1, sizeof(double));
    section->load_from_m = tw_calloc(loads + 1, sizeof(double));
    section->load_to_m = tw_calloc(loads + 1, sizeof(double));
    section->feed = tw_calloc(spans + 1, sizeof *section->feed);
    section->moved_m = tw_calloc(spans + 1, sizeof(double));
    section->winch_N = tw_calloc(spans + 1, sizeof(double));
    section->feed_runs = tw_calloc(spans + 1, sizeof *section->feed_runs);
    section->feed_work = tw_calloc(TW_SECTION_FEED_PER_SPAN * spans, sizeof(double));
    section->work = tw_calloc(TW_SECTION_WORK_PER_SPAN * spans + 3, sizeof(double));
    if (!section->pieces || !section->piece_first || !section->cut_m || !section->slack
        || !section->run_first || !section->start_m || !section->length_m || !section->pull
        || !section->clamp || !section->clamp_load || !section->link_load || !section->hold_force || !section->ahead || !section->load_length_m
        || !section->load_from_m || !section->load_to_m || !section->work || !section->feed || !section->moved_m
        || !section->winch_N || !section->feed_work || !section->feed_runs) {
        tw_section_free(section);
        return NULL;
    }
    tw_section_feed_by_holds(section);
    return section;
}

void tw_section_free(tw_section *section)
{
    if (!section) {
        return;
    }
    tw_free(section->materials);
    tw_free(section->curves);
    tw_free(section->pieces);
    tw_free(section->piece_first);
    tw_free(section->cut_m);
    tw_free(section->slack);
    tw_free(section->run_first);
    tw_free(section->length_m);
    tw_free(section->start_m);
    tw_free(section->pull);
    tw_free(section->clamp);
    tw_free(section->clamp_load);
    tw_free(section->link_load);
    tw_free(section->hold_force);
    tw_free(section->ahead);
    tw_free(section->load_length_m);
    tw_free(section->load_from_m);
    tw_free(section->load_to_m);
    tw_free(section->feed);
    tw_free(section->moved_m);
    tw_free(section->winch_N);
    tw_free(section->feed_work);
    tw_free(section->feed_runs);
    tw_free(section->work);
    tw_free(section->run_vector);
    tw_free(section->run_share);
    tw_free(section);
}
