/* What a line has lived through: worked out once, on demand, from the conditions as strung; forgotten when strung anew. */
#include "history.h"

#include "cases.h"
#include "expect.h"

static void make(tw_case *c)
{
    const tw_part part = {.loading_N = {-4e3, 40e6, -1.5e9}, .creep_N = {0.0, 28e6}, .valid_to = 0.005,
                          .final_stiffness_N = 42e6, .expansion_per_K = 18.9e-6};
    case_route(c);
    c->project.line.parts[0] = part;
    c->project.line.part_count = 1;
    c->project.line.test_temperature_degC = 15.0;
    c->project.line.bedding_in_strain = 1e-4;
    case_condition(c, 15.0)->state = TW_STATE_FINAL;
    case_condition(c, 15.0)->state = TW_STATE_AFTER_CREEP;
    c->project.history.creep_condition = TW_NONE;
    case_ready(c);
}

static void test_it_is_lived_through_once_and_on_demand(void)
{
    tw_case c;
    const tw_section *s;
    make(&c);
    size_t strung = c.project.condition_count - 2;
    CHECK(tw_history_needed(&c.project));
    tw_trial *trial = case_trial(&c, 21e3);
    CHECK(tw_trial_section(trial, 1, &c.options, &s) == TW_OK && trial->settles == 1 && !trial->history->ready);
    CHECK(tw_trial_section(trial, strung, &c.options, &s) == TW_OK && trial->history->ready);
    size_t after = trial->settles; /* the conditions as strung, the two in a state as strung, creep, and this one */
    CHECK(after == strung + 2 + 1 + 1);
    CHECK(tw_trial_section(trial, strung + 1, &c.options, &s) == TW_OK && trial->settles == after + 1);
    CHECK(tw_trial_string(trial, 22e3, &c.options) == TW_OK && !trial->history->ready);
    CHECK(tw_trial_section(trial, 0, &c.options, &s) == TW_OK && s->permanent == NULL);
    tw_trial_free(trial);
}

/* Longer in each later state, in every span; and the tension at the same temperature is less. */
static void test_each_state_is_longer_than_the_one_before(void)
{
    tw_case c;
    const tw_section *s;
    make(&c);
    size_t last = c.project.condition_count - 1;
    c.conditions[last - 2] = c.conditions[last];
    c.conditions[last - 2].state = TW_STATE_INITIAL;
    tw_trial *trial = case_trial(&c, 21e3);
    for (size_t k = 0; k < 4; k++) {
        double before = -1.0, tension = INFINITY;
        for (size_t condition = last - 2; condition <= last; condition++) {
            tw_span_state state;
            CHECK(tw_trial_section(trial, condition, &c.options, &s) == TW_OK);
            tw_section_span_state(s, k, &state);
            CHECK(state.permanent_strain > before);
            CHECK(state.horizontal_tension_N < tension);
            before = state.permanent_strain;
            tension = state.horizontal_tension_N;
        }
        CHECK(before > 1e-4 && before < 3e-3);
    }
    tw_trial_free(trial);
}

/* The span's mean strain in the heaviest met condition, on the loading curve, unloads to what is permanent. */
static void test_the_heaviest_met_condition_decides(void)
{
    static const unsigned char met[CASE_CONDITIONS] = {0, 1};
    tw_case c;
    const tw_section *s;
    make(&c);
    c.project.history.met = met;
    size_t final = c.project.condition_count - 2;
    tw_trial *trial = case_trial(&c, 21e3);
    CHECK(tw_trial_section(trial, final, &c.options, &s) == TW_OK);
    const tw_permanent *left = tw_history_of(trial->history, TW_STATE_FINAL);
    CHECK(tw_history_of(trial->history, TW_STATE_INITIAL) == NULL && left != NULL);
    CHECK(tw_trial_section(trial, 1, &c.options, &s) == TW_OK);
    for (size_t k = 0; k < 4; k++) {
        tw_span_state state;
        tw_section_span_state(s, k, &state);
        double stretch = state.line_length_m / state.natural_length_m;
        const tw_line *line = &c.project.line;
        double strain = tw_part_strain(line, 0, stretch, c.conditions[1].temperature_degC, 15.0);
        double force = tw_part_force(&line->parts[0], strain, 0);
        CHECK_REL(left[k].part[0], strain - force / line->parts[0].final_stiffness_N, 1e-12);
        CHECK(left[k].strain == 1e-4);
        const tw_lived *lived = tw_history_lived(trial->history, TW_STATE_FINAL, k);
        CHECK(lived[0].condition == 1 && !lived[0].crept);
        CHECK_REL(lived[0].met, strain, 1e-12);
        CHECK(lived[0].permanent == left[k].part[0]);
        CHECK(tw_history_lived(trial->history, TW_STATE_INITIAL, k) == NULL);
    }
    tw_trial_free(trial);
}

int main(void)
{
    test_it_is_lived_through_once_and_on_demand();
    test_each_state_is_longer_than_the_one_before();
    test_the_heaviest_met_condition_decides();
    return check_end("test_history");
}
