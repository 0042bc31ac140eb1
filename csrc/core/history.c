#include "history.h"

#include <math.h>
#include <string.h>

#include "alloc.h"

int tw_history_needed(const tw_project *project)
{
    for (size_t c = 0; c < project->condition_count; c++) {
        if (project->conditions[c].state != TW_STATE_INITIAL) {
            return 1;
        }
    }
    return 0;
}

int tw_history_met(const tw_project *project, size_t condition)
{
    return !project->history.met || project->history.met[condition];
}

tw_history *tw_history_create(const tw_project *project)
{
    tw_history *history = tw_calloc(1, sizeof *history);
    if (!history) {
        return NULL;
    }
    history->project = project;
    history->section = tw_section_create(project);
    history->heaviest = tw_calloc(project->support_count - 1, sizeof *history->heaviest);
    history->crept = tw_calloc(project->support_count - 1, sizeof *history->crept);
    history->lived = tw_calloc(2 * TW_PARTS_MOST * (project->support_count - 1), sizeof *history->lived);
    if (!history->section || !history->heaviest || !history->crept || !history->lived) {
        tw_history_free(history);
        return NULL;
    }
    return history;
}

void tw_history_free(tw_history *history)
{
    if (history) {
        tw_section_free(history->section);
        tw_free(history->heaviest);
        tw_free(history->crept);
        tw_free(history->lived);
        tw_free(history);
    }
}

void tw_history_begin(tw_history *history)
{
    static const tw_lived nothing = {NAN, NAN, 0.0, TW_NONE, 0};
    size_t spans = history->project->support_count - 1;
    history->ready = 0;
    for (size_t k = 0; k < spans; k++) {
        history->heaviest[k] = tw_permanent_none();
    }
    for (size_t i = 0; i < 2 * TW_PARTS_MOST * spans; i++) {
        history->lived[i] = nothing;
    }
}

tw_status tw_history_settle(tw_history *history, size_t condition, const double *length_m, const tw_section *strung,
                            int creeping, const tw_options *options)
{
    history->section->creeping = creeping;
    return tw_section_hang(history->section, condition, length_m, strung, 1, options, 0);
}

static double mean_stretch(const tw_section *section, size_t span)
{
    double length = 0.0;
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        double part;
        tw_piece_energy(&section->materials[span], &section->pieces[p], NULL, NULL, &part);
        length += part;
    }
    return length / section->length_m[span];
}

/* lived: where what is permanent is from, written anew where this leaves more. */
static void take(tw_permanent *permanent, tw_lived *lived, const tw_section *section, size_t condition, int creeping)
{
    const tw_line *line = &section->project->line;
    double reference = section->project->stringing.temperature_degC;
    double temperature = condition == TW_NONE ? reference : section->project->conditions[condition].temperature_degC;
    for (size_t k = 0; k < section->span_count; k++) {
        double stretch = mean_stretch(section, k);
        for (size_t i = 0; i < line->part_count; i++) {
            double strain = tw_part_strain(line, i, stretch, temperature, reference);
            double before = permanent[k].part[i];
            tw_permanent_take(&permanent[k], line, i, strain, creeping);
            if (permanent[k].part[i] > before) {
                const tw_lived now = {NAN, strain, permanent[k].part[i], condition, creeping};
                lived[k * TW_PARTS_MOST + i] = now;
            }
        }
    }
}

void tw_history_meet(tw_history *history, const tw_section *section, size_t condition)
{
    take(history->heaviest, history->lived, section, condition, 0);
}

void tw_history_end(tw_history *history, int crept)
{
    const tw_project *project = history->project;
    size_t everyday = project->history.creep_condition;
    size_t spans = project->support_count - 1;
    tw_lived *lived = history->lived + spans * TW_PARTS_MOST;
    memcpy(history->crept, history->heaviest, spans * sizeof *history->crept);
    memcpy(lived, history->lived, spans * TW_PARTS_MOST * sizeof *lived);
    if (crept) {
        take(history->crept, lived, history->section, everyday, 1);
    }
    for (size_t k = 0; k < spans; k++) {
        history->heaviest[k].strain = project->line.bedding_in_strain;
        history->crept[k].strain = project->line.bedding_in_strain + tw_curve_given_creep(&project->line);
    }
    history->ready = 1;
}

const tw_lived *tw_history_lived(const tw_history *history, tw_state state, size_t span)
{
    if (!history->ready || state == TW_STATE_INITIAL) {
        return NULL;
    }
    size_t after_creep = state == TW_STATE_AFTER_CREEP ? history->project->support_count - 1 : 0;
    return history->lived + (after_creep + span) * TW_PARTS_MOST;
}

const tw_permanent *tw_history_of(const tw_history *history, tw_state state)
{
    switch (state) {
    case TW_STATE_INITIAL: return NULL;
    case TW_STATE_FINAL: return history->heaviest;
    case TW_STATE_AFTER_CREEP: return history->crept;
    }
    return NULL;
}
