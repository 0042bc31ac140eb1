#include "report.h"

#include <math.h>

#include "settle.h"
#include "vector.h"

static void mark_at(const tw_section *section, double s, tw_mark_state *state)
{
    double tension[3];
    state->at_length_m = s;
    tw_section_at(section, s, state->position_m, tension);
    state->tension_N = state->tension_beyond_N = tw_norm(tension);
    state->station_m = tw_section_station(section, s, state->position_m);
}

/* A point load: the tension on both its sides. */
static void load_at(const tw_section *section, double s, tw_mark_state *state)
{
    double before[3], beyond[3];
    mark_at(section, s, state);
    tw_section_beside(section, s, before, beyond);
    state->tension_N = tw_norm(before);
    state->tension_beyond_N = tw_norm(beyond);
}

static double line_length(const tw_section *section)
{
    double total = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        total += section->length_m[k];
    }
    return total;
}

static tw_status report_marks(tw_trial *trial, const tw_section *section, const tw_options *options, tw_settled *out)
{
    const tw_project *project = trial->project;
    for (size_t i = 0; i < project->mark_count; i++) {
        double s = project->marks[i].at_m;
        if (project->marks[i].place == TW_PLACE_STATION) {
            const tw_section *strung;
            tw_status status = tw_trial_strung(trial, options, &strung);
            if (status == TW_OK) {
                status = tw_section_at_station(strung, project->marks[i].at_m, &s);
            }
            if (status != TW_OK) {
                return status;
            }
        } else if (!(s >= 0.0 && s <= line_length(section) * (1.0 + 1e-12))) {
            return TW_ERROR_PLACE;
        }
        mark_at(section, s, &out->marks[i]);
    }
    return TW_OK;
}

static void report_loads(const tw_section *section, size_t count, tw_settled *out)
{
    for (size_t i = 0; i < count; i++) {
        if (isnan(section->load_length_m[i])) {
            const tw_mark_state nowhere = {NAN, NAN, NAN, NAN, {NAN, NAN, NAN}};
            out->loads[i] = nowhere;
        } else {
            load_at(section, section->load_length_m[i], &out->loads[i]);
        }
    }
}

/* Swing counts the loads without the resultant addition. */
static tw_status report_supports(tw_trial *trial, size_t condition, const tw_section *section,
                                 const tw_options *options, tw_settled *out)
{
    const tw_section *bare = section;
    tw_status status = tw_trial_bare(trial, condition, options, &bare);
    for (size_t j = 0; status == TW_OK && j < trial->project->support_count; j++) {
        tw_support_state swing;
        tw_section_support_state(section, j, &out->supports[j]);
        tw_section_support_state(bare, j, &swing);
        out->supports[j].swing_rad = swing.swing_rad;
        out->supports[j].swing_along_rad = swing.swing_along_rad;
        out->supports[j].swing_across_rad = swing.swing_across_rad;
    }
    return status;
}

/* What each part of a span has kept of its history, and how far it is strained now. */
static void report_lived(const tw_trial *trial, const tw_section *section, size_t condition, size_t span,
                         tw_span_state *out)
{
    static const tw_lived nothing = {NAN, NAN, 0.0, TW_NONE, 0};
    const tw_project *project = trial->project;
    const tw_condition *state = &project->conditions[condition];
    const tw_lived *lived = trial->history ? tw_history_lived(trial->history, state->state, span) : NULL;
    double given = section->permanent ? section->permanent[span].strain : 0.0;
    double stretch = out->line_length_m / out->natural_length_m - given;
    for (size_t i = 0; i < TW_PARTS_MOST; i++) {
        out->lived[i] = lived ? lived[i] : nothing;
        if (i < project->line.part_count) {
            out->lived[i].strain = tw_part_strain(&project->line, i, stretch, state->temperature_degC,
                                                  project->stringing.temperature_degC);
        }
    }
}

tw_status tw_report_condition(tw_trial *trial, size_t condition, const tw_options *options, tw_settled *out)
{
    const tw_section *section;
    tw_status status = tw_trial_section(trial, condition, options, &section);
    if (status == TW_OK) {
        status = report_supports(trial, condition, section, options, out);
    }
    if (status == TW_OK) {
        status = report_marks(trial, section, options, out);
    }
    if (status != TW_OK) {
        out->status = status;
        return status;
    }
    for (size_t k = 0; k < section->span_count; k++) {
        tw_section_span_state(section, k, &out->spans[k]);
        report_lived(trial, section, condition, k, &out->spans[k]);
    }
    report_loads(section, trial->project->conditions[condition].load_count, out);
    out->exact_steps = section->steps;
    out->closing_m = section->closing_m;
    return tw_settle(section, options, out);
}
