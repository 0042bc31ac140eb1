#include "crew.h"

#include <math.h>
#include <string.h>

#include "alloc.h"
#include "vector.h"
#include "wave.h"

enum { LAST_END_MOST = 60 };
static const double LAST_END_MISS = 1e-13; /* of the horizontal tension of a section's last span */

/* The project with one bare condition in the place of its own. */
typedef struct crew_run {
    tw_project bare;
    tw_condition condition;
    const tw_options *options;
    tw_trial *trial;
    tw_section *section; /* owned */
    tw_crew *crew;
} crew_run;

tw_crew *tw_crew_create(const tw_project *project, size_t temperature_count)
{
    size_t spans = project->support_count - 1, rows = (temperature_count + 1) * spans;
    tw_crew *crew = tw_calloc(1, sizeof *crew);
    if (!crew) {
        return NULL;
    }
    crew->span_count = spans;
    crew->temperature_count = temperature_count;
    crew->temperature_degC = tw_calloc(temperature_count + 1, sizeof(double));
    crew->over = tw_calloc(rows, sizeof *crew->over);
    crew->clamped = tw_calloc(rows, sizeof *crew->clamped);
    crew->first = tw_calloc(spans, sizeof *crew->first);
    crew->last = tw_calloc(spans, sizeof *crew->last);
    crew->lengths = tw_calloc(spans, sizeof *crew->lengths);
    crew->supports = tw_calloc(spans + 1, sizeof *crew->supports);
    if (!crew->temperature_degC || !crew->over || !crew->clamped || !crew->first || !crew->last || !crew->lengths
        || !crew->supports) {
        tw_crew_free(crew);
        return NULL;
    }
    return crew;
}

void tw_crew_free(tw_crew *crew)
{
    if (!crew) {
        return;
    }
    tw_free(crew->temperature_degC);
    tw_free(crew->over);
    tw_free(crew->clamped);
    tw_free(crew->first);
    tw_free(crew->last);
    tw_free(crew->lengths);
    tw_free(crew->supports);
    tw_free(crew);
}

static void forget_spans(tw_crew_span *rows, size_t count)
{
    static const tw_crew_span nothing = {NAN, NAN, NAN, NAN, NAN};
    for (size_t i = 0; i < count; i++) {
        rows[i] = nothing;
    }
}

/* What a crew measures on a hung section. */
static void read_spans(const tw_section *section, double mass_kg_per_m, tw_crew_span *rows)
{
    for (size_t k = 0; k < section->span_count; k++) {
        tw_span_state state;
        size_t first = section->piece_first[k];
        tw_section_span_state(section, k, &state);
        rows[k].horizontal_tension_N = state.horizontal_tension_N;
        rows[k].tension_max_N = state.tension_max_N;
        rows[k].sag_m = state.sag_m;
        rows[k].return_s = tw_wave_return_s(&section->materials[k], section->pieces + first,
                                            section->piece_first[k + 1] - first, mass_kg_per_m);
        rows[k].return_parabola_s = tw_wave_parabola_s(state.sag_m);
    }
}

static double mass_of(const crew_run *run)
{
    return run->bare.line.weight_N_per_m / TW_GRAVITY;
}

/* The bare line at one temperature with given natural lengths; a state that does not settle stays NaN. */
static tw_status hang_bare(crew_run *run, double temperature_degC, const double *length_m, tw_crew_span *rows)
{
    run->condition = tw_line_bare(temperature_degC);
    tw_status status = tw_section_load(run->section, 0, length_m, NULL, 0);
    if (status == TW_OK) {
        status = tw_section_solve(run->section, run->options, 0);
    }
    if (status == TW_OK) {
        read_spans(run->section, mass_of(run), rows);
    }
    return tw_status_stops(status) ? status : TW_OK;
}

/* Every temperature, in one state. */
static tw_status hang_all(crew_run *run, const double *length_m, tw_crew_span *rows)
{
    for (size_t t = 0; t <= run->crew->temperature_count; t++) {
        tw_status status = hang_bare(run, run->crew->temperature_degC[t], length_m, rows + t * run->crew->span_count);
        if (status != TW_OK) {
            return status;
        }
    }
    return TW_OK;
}

static void fill_lengths(crew_run *run)
{
    tw_crew *crew = run->crew;
    const tw_material *strung = run->section->materials; /* hung last at the stringing temperature */
    for (size_t k = 0; k < crew->span_count; k++) {
        double own = crew->clamped[crew->temperature_count * crew->span_count + k].horizontal_tension_N;
        double tension = isnan(crew->pull_N) ? own : crew->pull_N;
        crew->lengths[k].natural_m = run->trial->length_m[k];
        crew->lengths[k].marked_m = run->trial->length_m[k] * tw_material_stretch(&strung[k], tension);
    }
}

/* Offsets: both marks are natural lengths from the section's first support, where the line is held in both states. */
static void fill_supports(crew_run *run)
{
    const tw_section *blocks = run->trial->pulling->blocks;
    double plumb = 0.0;
    for (size_t j = 0; j <= run->crew->span_count; j++) {
        tw_crew_support *out = &run->crew->supports[j];
        tw_support_state state;
        int ends = j == run->crew->span_count || tw_pulling_begins(&run->bare, j);
        tw_section_support_state(blocks, j, &state);
        size_t span = j < run->crew->span_count ? j : j - 1;
        const double *beside = blocks->pull + 3 * span;
        out->offset_m = ends ? 0.0 : plumb - blocks->start_m[j];
        out->offset_stretched_m = out->offset_m * tw_material_stretch(&blocks->materials[span], tw_norm(beside));
        out->block_swing_rad = ends ? (double)NAN : state.swing_rad;
        out->block_down_N = state.down_N;
        out->block_across_N = state.across_N;
        out->block_resultant_N = state.resultant_N;
        plumb = ends ? blocks->start_m[j] : plumb;
        plumb += j < run->crew->span_count ? run->trial->length_m[j] : 0.0;
    }
}

static int rubs(const tw_section *blocks)
{
    for (size_t j = 1; j < blocks->span_count; j++) {
        const tw_support *support = &blocks->project->supports[j];
        int own = support->hold == TW_HOLD_SHEAVE && !isnan(support->sheave_friction);
        if (blocks->feed[j] == TW_FEED_SHEAVE
            && (own ? support->sheave_friction : blocks->project->stringing.friction) > 0.0) {
            return 1;
        }
    }
    return 0;
}

/* Bring the winches to what gives each section's last span its wanted horizontal tension; the largest relative miss. */
static double correct_winches(tw_section *blocks, const double *wanted_N)
{
    double worst = 0.0;
    size_t begin = 0;
    for (size_t k = 0; k < blocks->span_count; k++) {
        if (k + 1 == blocks->span_count || tw_pulling_begins(blocks->project, k + 1)) {
            double ratio = wanted_N[k] / hypot(blocks->pull[3 * k], blocks->pull[3 * k + 1]);
            blocks->winch_N[begin] *= ratio;
            worst = fmax(worst, fabs(ratio - 1.0));
            begin = k + 1;
        }
    }
    return worst;
}

/* Both directions of pull; free_run: the spans without friction. The blocks are not at rest without friction afterwards. */
static tw_status fill_friction(crew_run *run, const tw_crew_span *free_run)
{
    tw_section *blocks = run->trial->pulling->blocks;
    tw_crew *crew = run->crew;
    double *wanted_N = run->section->work; /* scratch of a section that is at rest */
    for (size_t k = 0; k < crew->span_count; k++) {
        wanted_N[k] = free_run[k].horizontal_tension_N;
    }
    blocks->drag = -1;
    tw_status status = tw_section_solve(blocks, run->options, 1);
    if (status == TW_OK) {
        read_spans(blocks, mass_of(run), crew->first);
    }
    blocks->drag = 1;
    double miss = INFINITY;
    for (int i = 0; i < LAST_END_MOST && miss > LAST_END_MISS && status == TW_OK; i++) {
        status = tw_section_solve(blocks, run->options, 1);
        miss = status == TW_OK ? correct_winches(blocks, wanted_N) : miss;
    }
    if (status == TW_OK && miss <= 1e-9) {
        read_spans(blocks, mass_of(run), crew->last);
    }
    blocks->drag = 0;
    return tw_status_stops(status) ? status : TW_OK;
}

static tw_status fill_over(crew_run *run)
{
    tw_crew *crew = run->crew;
    const tw_section *blocks = run->trial->pulling->blocks;
    run->bare.supports = run->trial->pulling->supports; /* with lifted hangers held down */
    tw_pulling_over_sheaves(run->section);
    tw_status status = hang_all(run, blocks->length_m, crew->over);
    if (status == TW_OK) {
        fill_supports(run);
    }
    return status;
}

static void forget_all(tw_crew *crew)
{
    static const tw_crew_support nothing = {NAN, NAN, NAN, NAN, NAN, NAN};
    size_t rows = (crew->temperature_count + 1) * crew->span_count;
    forget_spans(crew->over, rows);
    forget_spans(crew->clamped, rows);
    forget_spans(crew->first, crew->span_count);
    forget_spans(crew->last, crew->span_count);
    for (size_t j = 0; j <= crew->span_count; j++) {
        crew->supports[j] = nothing;
    }
}

tw_status tw_crew_fill(tw_crew *crew, tw_trial *trial, const tw_options *options)
{
    crew_run run = {.bare = *trial->project, .options = options, .trial = trial, .crew = crew};
    run.bare.conditions = &run.condition;
    run.bare.condition_count = 1;
    run.section = tw_section_create(&run.bare);
    if (!run.section) {
        return TW_ERROR_MEMORY;
    }
    forget_all(crew);
    crew->pull_N = trial->pull_N;
    crew->over_sheaves = trial->project->stringing.method == TW_METHOD_OVER_SHEAVES;
    crew->rubs = trial->pulling && !isnan(trial->pull_N) && rubs(trial->pulling->blocks);
    crew->temperature_degC[crew->temperature_count] = run.bare.stringing.temperature_degC;
    tw_status status = hang_all(&run, trial->length_m, crew->clamped);
    if (status == TW_OK) {
        fill_lengths(&run);
        status = crew->over_sheaves ? fill_over(&run) : TW_OK;
    }
    if (status == TW_OK && crew->rubs) {
        const tw_crew_span *rows = crew->over_sheaves ? crew->over : crew->clamped;
        status = fill_friction(&run, rows + crew->temperature_count * crew->span_count);
    }
    tw_section_free(run.section);
    return status;
}
