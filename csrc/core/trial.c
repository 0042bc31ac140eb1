#include "trial.h"

#include <math.h>
#include <string.h>

#include "alloc.h"
#include "stringing.h"

tw_trial *tw_trial_create(const tw_project *project)
{
    size_t conditions = project->condition_count;
    tw_trial *trial = tw_calloc(1, sizeof *trial);
    if (!trial) {
        return NULL;
    }
    trial->project = project;
    trial->bare_condition = TW_NONE;
    trial->length_m = tw_calloc(project->support_count, sizeof(double));
    trial->string_work = tw_calloc(TW_STRINGING_WORK(project), sizeof(double));
    trial->pulling = tw_pulling_applies(project) ? tw_pulling_create(project) : NULL;
    trial->strung = tw_section_create(project);
    trial->bare = tw_section_create(project);
    trial->sections = tw_calloc(conditions, sizeof(tw_section *));
    trial->solved = tw_calloc(conditions, sizeof(int));
    trial->warm = tw_calloc(conditions, sizeof(int));
    trial->at_N = tw_calloc(conditions, sizeof(double));
    trial->before_N = tw_calloc(conditions, sizeof(double));
    trial->before = tw_calloc(conditions, sizeof(double *));
    if (!trial->length_m || !trial->string_work || !trial->strung || !trial->bare
        || (tw_pulling_applies(project) && !trial->pulling) || !trial->sections || !trial->solved
        || !trial->warm || !trial->at_N || !trial->before_N || !trial->before) {
        goto fail;
    }
    if (tw_history_needed(project) && !(trial->history = tw_history_create(project))) {
        goto fail;
    }
    for (size_t c = 0; c < conditions; c++) {
        trial->sections[c] = tw_section_create(project);
        trial->before[c] = tw_calloc(3 * (project->support_count - 1), sizeof(double));
        if (!trial->sections[c] || !trial->before[c]) {
            goto fail;
        }
    }
    return trial;
fail:
    tw_trial_free(trial);
    return NULL;
}

void tw_trial_free(tw_trial *trial)
{
    if (!trial) {
        return;
    }
    for (size_t c = 0; c < trial->project->condition_count; c++) {
        tw_section_free(trial->sections ? trial->sections[c] : NULL);
        tw_free(trial->before ? trial->before[c] : NULL);
    }
    tw_pulling_free(trial->pulling);
    tw_history_free(trial->history);
    tw_section_free(trial->strung);
    tw_section_free(trial->bare);
    tw_free(trial->length_m);
    tw_free(trial->string_work);
    tw_free(trial->sections);
    tw_free(trial->solved);
    tw_free(trial->warm);
    tw_free(trial->at_N);
    tw_free(trial->before_N);
    tw_free(trial->before);
    tw_free(trial);
}

tw_status tw_trial_string(tw_trial *trial, double pull_N, const tw_options *options)
{
    trial->strung_ready = 0;
    trial->bare_condition = TW_NONE;
    if (trial->history) {
        trial->history->ready = 0;
    }
    memset(trial->solved, 0, trial->project->condition_count * sizeof(int));
    trial->pull_N = pull_N;
    if (trial->pulling && !(isnan(pull_N) && trial->project->stringing.rule == TW_STRING_SPAN_LENGTHS)) {
        return tw_pulling_lengths(trial->pulling, &trial->pull_N, trial->length_m, options);
    }
    if (isnan(pull_N)) {
        return tw_stringing_lengths(trial->project, trial->length_m, &trial->pull_N, trial->string_work);
    }
    return tw_stringing_at_pull(trial->project, pull_N, trial->length_m, trial->string_work);
}

tw_status tw_trial_strung(tw_trial *trial, const tw_options *options, const tw_section **section)
{
    *section = trial->strung;
    if (trial->strung_ready) {
        return TW_OK;
    }
    tw_status status = tw_section_load(trial->strung, TW_NONE, trial->length_m, NULL, 0);
    if (status == TW_OK) {
        status = tw_section_solve(trial->strung, options, 0);
        trial->settles++;
    }
    trial->strung_ready = status == TW_OK;
    return status;
}

static int needs_strung(const tw_project *project, size_t condition)
{
    const tw_condition *state = &project->conditions[condition];
    for (size_t i = 0; i < state->load_count; i++) {
        if (project->loads[state->load_first + i].place == TW_PLACE_STATION) {
            return 1;
        }
    }
    return 0;
}

static tw_status live_through(tw_trial *trial, const tw_options *options);

/* What its history has left in the line before a condition. */
static tw_status bring_to_state(tw_trial *trial, tw_section *section, size_t condition, const tw_options *options)
{
    tw_state state = trial->project->conditions[condition].state;
    if (state == TW_STATE_INITIAL) {
        return TW_OK;
    }
    tw_status status = trial->history->ready ? TW_OK : live_through(trial, options);
    section->permanent = status == TW_OK ? tw_history_of(trial->history, state) : NULL;
    return status;
}

static tw_status solve_into(tw_trial *trial, tw_section *section, size_t condition, const tw_options *options, int warm,
                            int with_addition)
{
    const tw_section *strung = NULL;
    tw_status status = TW_OK;
    if (needs_strung(trial->project, condition)) {
        status = tw_trial_strung(trial, options, &strung);
    }
    section->permanent = NULL;
    if (status == TW_OK) {
        status = bring_to_state(trial, section, condition, options);
    }
    if (status == TW_OK) {
        status = tw_section_hang(section, condition, trial->length_m, strung, with_addition, options, warm);
        trial->settles++;
    }
    return status;
}

/* Draw the pulls of the last two solves on to the present pull, where that is not far beyond them. */
static void draw_on(tw_trial *trial, size_t condition)
{
    double *pull = trial->sections[condition]->pull;
    double *before = trial->before[condition];
    double at = trial->at_N[condition];
    double share = (trial->pull_N - at) / (at - trial->before_N[condition]);
    int far = trial->warm[condition] < 2 || !(fabs(share) <= 2.0);
    for (size_t i = 0; i < 3 * (trial->project->support_count - 1); i++) {
        double last = pull[i];
        pull[i] += far ? 0.0 : share * (last - before[i]);
        before[i] = last;
    }
    trial->before_N[condition] = at;
}

tw_status tw_trial_section(tw_trial *trial, size_t condition, const tw_options *options, const tw_section **section)
{
    *section = trial->sections[condition];
    if (trial->solved[condition]) {
        return TW_OK;
    }
    int warm = trial->warm[condition];
    if (warm) {
        draw_on(trial, condition);
    }
    tw_status status = solve_into(trial, trial->sections[condition], condition, options, warm > 0, 1);
    trial->solved[condition] = status == TW_OK;
    trial->warm[condition] = status != TW_OK ? 0 : warm ? 2 : 1;
    trial->at_N[condition] = trial->pull_N;
    return status;
}

/* Settles a condition in the history's own section, whatever its state. */
static tw_status settle_apart(tw_trial *trial, size_t condition, int creeping, const tw_options *options)
{
    const tw_section *strung = NULL;
    tw_status status = TW_OK;
    if (condition != TW_NONE && needs_strung(trial->project, condition)) {
        status = tw_trial_strung(trial, options, &strung);
    }
    trial->settles++;
    return status == TW_OK ? tw_history_settle(trial->history, condition, trial->length_m, strung, creeping, options)
                           : status;
}

/* The history: every met condition as strung, those that are wanted so anyhow from where they stand; then creep. */
static tw_status live_through(tw_trial *trial, const tw_options *options)
{
    const tw_project *project = trial->project;
    const tw_line *line = &project->line;
    tw_status status = TW_OK;
    int curved = line->part_count > 0;
    tw_history_begin(trial->history);
    for (size_t c = 0; curved && status == TW_OK && c < project->condition_count; c++) {
        const tw_section *section = trial->history->section;
        if (!tw_history_met(project, c)) {
            continue;
        }
        status = project->conditions[c].state == TW_STATE_INITIAL ? tw_trial_section(trial, c, options, &section)
                                                                  : settle_apart(trial, c, 0, options);
        if (status == TW_OK) {
            tw_history_meet(trial->history, section, c);
        }
    }
    int creeps = curved && tw_curve_creeps(line);
    if (status == TW_OK && creeps) {
        status = settle_apart(trial, project->history.creep_condition, 1, options);
    }
    if (status == TW_OK) {
        tw_history_end(trial->history, creeps);
    }
    return status;
}

tw_status tw_trial_bare(tw_trial *trial, size_t condition, const tw_options *options, const tw_section **section)
{
    if (trial->project->conditions[condition].resultant_addition_N_per_m == 0.0) {
        return tw_trial_section(trial, condition, options, section);
    }
    *section = trial->bare;
    if (trial->bare_condition == condition) {
        return TW_OK;
    }
    tw_status status = solve_into(trial, trial->bare, condition, options, 0, 0);
    trial->bare_condition = status == TW_OK ? condition : TW_NONE;
    return status;
}

tw_status tw_trial_judge(tw_trial *trial, size_t limit, size_t condition, const tw_options *options,
                         tw_verdict *verdict)
{
    const tw_section *section = NULL;
    const tw_section *bare = NULL;
    tw_status status = tw_trial_section(trial, condition, options, &section);
    bare = section;
    if (status == TW_OK && trial->project->limits[limit].kind == TW_LIMIT_SWING) {
        status = tw_trial_bare(trial, condition, options, &bare);
    }
    if (status == TW_OK) {
        *verdict = tw_limit_judge(trial->project, limit, condition, section, bare);
    }
    const tw_limit *rule = &trial->project->limits[limit];
    if (status == TW_OK && rule->kind == TW_LIMIT_SPACING && rule->strung_course > 0) {
        const tw_section *strung;
        status = tw_trial_strung(trial, options, &strung);
        if (status == TW_OK) {
            tw_limit_judge_swap(trial->project, limit, condition, section, strung, verdict);
        }
    }
    return status;
}
