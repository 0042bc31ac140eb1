/* A crew's numbers against the sections that they are read from, and against what they must add up to. */
#include "crew.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "vector.h"
#include "wave.h"

static tw_crew *sheet(const tw_case *c, tw_trial *trial, const double *degC, size_t count)
{
    tw_crew *crew = tw_crew_create(&c->project, count);
    memcpy(crew->temperature_degC, degC, count * sizeof(double));
    CHECK(tw_crew_fill(crew, trial, &c->options) == TW_OK);
    return crew;
}

static void test_offsets_add_up(void)
{
    tw_case c;
    case_hill(&c);
    tw_trial *trial = case_trial(&c, 18e3);
    const double at[] = {-10.0, 15.0};
    tw_crew *crew = sheet(&c, trial, at, 2);
    const tw_section *blocks = trial->pulling->blocks;
    double block = 0.0, plumb = 0.0;
    CHECK(crew->over_sheaves && !crew->rubs && crew->pull_N == 18e3);
    for (size_t j = 0; j <= 5; j++) {
        CHECK_NEAR(crew->supports[j].offset_m, plumb - block, 3e-13);
        block += j < 5 ? blocks->length_m[j] : 0.0;
        plumb += j < 5 ? trial->length_m[j] : 0.0;
    }
    CHECK(crew->supports[0].offset_m == 0.0 && crew->supports[3].offset_m == 0.0 && crew->supports[5].offset_m == 0.0);
    CHECK(fabs(crew->supports[2].offset_m) > 0.05);
    CHECK_REL(crew->supports[2].offset_stretched_m / crew->supports[2].offset_m - 1.0,
              tw_norm(blocks->pull + 6) / 34.7e6, 1e-9);
    for (size_t j = 1; j < 5; j++) {
        tw_support_state state;
        tw_section_support_state(blocks, j, &state);
        CHECK(crew->supports[j].block_across_N == state.across_N);
        CHECK_REL(crew->supports[j].block_resultant_N, hypot(state.along_N, crew->supports[j].block_down_N), 1e-12);
    }
    CHECK(isnan(crew->supports[3].block_swing_rad) && crew->supports[1].block_swing_rad > 0.01);
    for (size_t k = 0; k < 5; k++) {
        CHECK(crew->lengths[k].natural_m == trial->length_m[k]);
        CHECK_REL(crew->lengths[k].marked_m, trial->length_m[k] * (1.0 + 18e3 / 34.7e6), 1e-15);
        CHECK_REL(crew->over[5 + k].sag_m, crew->over[10 + k].sag_m, 1e-12); /* 15 degC is that of the stringing */
        CHECK(crew->over[k].sag_m < crew->over[5 + k].sag_m);
        CHECK(isnan(crew->first[k].sag_m) && isnan(crew->last[k].sag_m));
    }
    CHECK_REL(crew->over[10].horizontal_tension_N, 18e3, 1e-12); /* the same length, so the same pull */
    tw_crew_free(crew);
    tw_trial_free(trial);
}

/* Clamped at a temperature: the line that any condition of that temperature settles to. */
static void test_clamped_states(void)
{
    tw_case c;
    case_hill(&c);
    case_condition(&c, -10.0);
    case_ready(&c);
    tw_trial *trial = case_trial(&c, 18e3);
    const double at[] = {-10.0};
    tw_crew *crew = sheet(&c, trial, at, 1);
    const tw_section *section;
    CHECK(tw_trial_section(trial, 1, &c.options, &section) == TW_OK);
    for (size_t k = 0; k < 5; k++) {
        tw_span_state state;
        tw_section_span_state(section, k, &state);
        CHECK_REL(crew->clamped[k].sag_m, state.sag_m, 1e-11);
        CHECK_REL(crew->clamped[k].horizontal_tension_N, state.horizontal_tension_N, 1e-11);
        CHECK_REL(crew->clamped[k].tension_max_N, state.tension_max_N, 1e-11);
        CHECK_REL(crew->clamped[k].return_parabola_s, tw_wave_parabola_s(state.sag_m), 1e-11);
        CHECK_REL(crew->clamped[k].return_s, crew->clamped[k].return_parabola_s, 2e-3);
    }
    tw_crew_free(crew);
    tw_trial_free(trial);
}

/* Pulled from the first end tension is lost on the way ahead, from the last end on the way back; the pulling end has what it
 * has without friction. */
static void test_friction(void)
{
    tw_case c;
    case_hill(&c);
    c.project.stringing.friction = 0.03;
    case_ready(&c);
    tw_trial *trial = case_trial(&c, 18e3);
    tw_crew *crew = sheet(&c, trial, &(double){0.0}, 0);
    CHECK(crew->rubs);
    CHECK_REL(crew->first[0].horizontal_tension_N, 18e3, 1e-12);
    CHECK_REL(crew->first[3].horizontal_tension_N, 18e3, 1e-12);
    CHECK_REL(crew->last[2].horizontal_tension_N, crew->over[2].horizontal_tension_N, 1e-10);
    CHECK_REL(crew->last[4].horizontal_tension_N, crew->over[4].horizontal_tension_N, 1e-10);
    for (size_t k = 0; k < 5; k++) {
        int begins = k == 0 || k == 3, ends = k == 2 || k == 4;
        CHECK(begins || crew->first[k].horizontal_tension_N < crew->over[k].horizontal_tension_N - 10.0);
        CHECK(ends || crew->last[k].horizontal_tension_N < crew->over[k].horizontal_tension_N - 10.0);
        CHECK(begins || crew->first[k].sag_m > crew->over[k].sag_m);
    }
    tw_crew_free(crew);
    tw_trial_free(trial);
}

static int stop(void *data)
{
    return *(int *)data;
}

static void test_without_sheaves_and_cancelled(void)
{
    tw_case c;
    int now = 1;
    case_hill(&c);
    c.project.stringing.method = TW_METHOD_CLAMPED;
    tw_trial *trial = case_trial(&c, 18e3);
    tw_crew *crew = sheet(&c, trial, &(double){0.0}, 0);
    CHECK(!crew->over_sheaves && isnan(crew->over[0].sag_m) && isnan(crew->supports[1].offset_m));
    CHECK_REL(crew->clamped[4].horizontal_tension_N, 18e3, 1e-11);
    c.options.poll = stop;
    c.options.poll_data = &now;
    CHECK(tw_crew_fill(crew, trial, &c.options) == TW_CANCELLED);
    now = TW_DEADLINE;
    CHECK(tw_crew_fill(crew, trial, &c.options) == TW_DEADLINE);
    tw_crew_free(crew);
    tw_trial_free(trial);
    tw_crew_free(NULL);
    tw_pulling_free(NULL);
}

int main(void)
{
    test_offsets_add_up();
    test_clamped_states();
    test_friction();
    test_without_sheaves_and_cancelled();
    return check_end("test_crew");
}
