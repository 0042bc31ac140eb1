/* The workspace of all searches: what is solved once is kept, what is strung anew is forgotten, and order never matters. */
#include "trial.h"

#include "cases.h"
#include "expect.h"

static void make(tw_case *c)
{
    case_route(c);
    case_limit(c, TW_LIMIT_TENSION, NAN, 60e3);
    case_limit(c, TW_LIMIT_SWING, NAN, 0.9);
    case_ready(c);
}

static void test_a_condition_is_solved_once(void)
{
    tw_case c;
    const tw_section *a, *b;
    make(&c);
    tw_trial *trial = case_trial(&c, 21e3);
    CHECK(tw_trial_section(trial, 2, &c.options, &a) == TW_OK && trial->settles == 1);
    CHECK(tw_trial_section(trial, 2, &c.options, &b) == TW_OK && trial->settles == 1 && a == b);
    CHECK(tw_trial_section(trial, 0, &c.options, &b) == TW_OK && trial->settles == 2 && a != b);
    CHECK(tw_trial_string(trial, 22e3, &c.options) == TW_OK);
    CHECK(tw_trial_section(trial, 2, &c.options, &a) == TW_OK && trial->settles == 3);
    tw_trial_free(trial);
}

static void test_strung_line_is_solved_on_demand_and_once(void)
{
    tw_case c;
    const tw_section *s;
    make(&c);
    case_point(&c, TW_PLACE_STATION, 500.0, 0.0, 0.0, -500.0); /* of the last condition */
    tw_trial *trial = case_trial(&c, 21e3);
    CHECK(tw_trial_section(trial, 0, &c.options, &s) == TW_OK && trial->settles == 1 && !trial->strung_ready);
    CHECK(tw_trial_section(trial, 3, &c.options, &s) == TW_OK && trial->settles == 3 && trial->strung_ready);
    CHECK(tw_trial_strung(trial, &c.options, &s) == TW_OK && trial->settles == 3);
    for (size_t k = 0; k < 4; k++) {
        tw_span_state state;
        tw_section_span_state(s, k, &state);
        CHECK_REL(state.horizontal_tension_N, 21e3, 1e-7);
    }
    tw_trial_free(trial);
}

/* From far above, far below and through other conditions: the answer of a cold start, but for rounding. */
static void test_where_it_came_from_does_not_matter(void)
{
    const double through[] = {5e3, 90e3, 20.9e3, 21.1e3, 300.0};
    tw_case c;
    make(&c);
    tw_trial *warm = case_trial(&c, 40e3);
    for (int i = 0; i < 5; i++) {
        const tw_section *a, *b;
        for (size_t k = 0; k < 4; k++) {
            CHECK(tw_trial_string(warm, through[i], &c.options) == TW_OK);
            CHECK(tw_trial_section(warm, k, &c.options, &a) == TW_OK);
            CHECK(tw_trial_string(warm, 21e3, &c.options) == TW_OK);
            tw_trial *cold = case_trial(&c, 21e3);
            CHECK(tw_trial_section(warm, k, &c.options, &a) == TW_OK);
            CHECK(tw_trial_section(cold, k, &c.options, &b) == TW_OK);
            for (int x = 0; x < 12; x++) {
                CHECK_NEAR(a->pull[x], b->pull[x], 1e-6);
            }
            CHECK_REL(a->energy_lower_J, b->energy_lower_J, 1e-11);
            tw_trial_free(cold);
        }
    }
    tw_trial_free(warm);
}

static void test_bare_is_the_same_section_without_an_addition(void)
{
    tw_case c;
    const tw_section *s, *bare;
    make(&c);
    tw_trial *trial = case_trial(&c, 21e3);
    CHECK(tw_trial_section(trial, 1, &c.options, &s) == TW_OK);
    CHECK(tw_trial_bare(trial, 1, &c.options, &bare) == TW_OK && bare == s && trial->settles == 1);
    CHECK(tw_trial_bare(trial, 0, &c.options, &bare) == TW_OK && bare != s && trial->settles == 2);
    CHECK(tw_trial_bare(trial, 0, &c.options, &bare) == TW_OK && trial->settles == 2);
    CHECK(tw_trial_section(trial, 0, &c.options, &s) == TW_OK);
    CHECK(s->pieces[0].load[2] < bare->pieces[0].load[2]);
    tw_trial_free(trial);
}

static void test_judging_a_swing_takes_the_bare_section(void)
{
    tw_case c;
    tw_verdict verdict;
    const tw_section *bare;
    make(&c);
    tw_trial *trial = case_trial(&c, 21e3);
    CHECK(tw_trial_judge(trial, 0, 0, &c.options, &verdict) == TW_OK && trial->settles == 1);
    CHECK(verdict.judged && verdict.span != TW_NONE);
    CHECK(tw_trial_judge(trial, 1, 0, &c.options, &verdict) == TW_OK && trial->settles == 2);
    CHECK(tw_trial_bare(trial, 0, &c.options, &bare) == TW_OK);
    tw_support_state state;
    tw_section_support_state(bare, verdict.support, &state);
    CHECK(verdict.value == state.swing_rad);
    tw_trial_free(trial);
}

static void test_the_projects_rule_is_used_without_a_pull(void)
{
    tw_case c;
    make(&c);
    tw_trial *trial = case_trial(&c, NAN);
    CHECK(trial->pull_N == 20e3);
    c.project.stringing.rule = TW_STRING_SPAN_LENGTHS;
    CHECK(tw_trial_string(trial, NAN, &c.options) == TW_OK && isnan(trial->pull_N));
    CHECK(trial->length_m[2] == c.lengths_m[2]);
    c.project.stringing.rule = TW_STRING_NONE;
    CHECK(tw_trial_string(trial, NAN, &c.options) == TW_ERROR_RANGE);
    tw_trial_free(trial);
}

static int cancel(void *data)
{
    (void)data;
    return 1;
}

/* What fails is not kept: the next call is right. */
static void test_a_failure_is_passed_on_and_not_kept(void)
{
    tw_case c;
    const tw_section *s;
    tw_verdict verdict;
    make(&c);
    case_point(&c, TW_PLACE_STATION, 500.0, 0.0, 0.0, -500.0);
    tw_trial *trial = case_trial(&c, 21e3);
    c.options.poll = cancel;
    CHECK(tw_trial_section(trial, 0, &c.options, &s) == TW_CANCELLED);
    CHECK(tw_trial_section(trial, 3, &c.options, &s) == TW_CANCELLED);
    CHECK(tw_trial_bare(trial, 0, &c.options, &s) == TW_CANCELLED);
    CHECK(tw_trial_judge(trial, 1, 0, &c.options, &verdict) == TW_CANCELLED);
    c.options.poll = NULL;
    CHECK(tw_trial_judge(trial, 1, 0, &c.options, &verdict) == TW_OK);
    CHECK(tw_trial_section(trial, 3, &c.options, &s) == TW_OK);
    c.loads[0].from_m = 5000.0;
    CHECK(tw_trial_string(trial, 21e3, &c.options) == TW_OK);
    CHECK(tw_trial_section(trial, 3, &c.options, &s) == TW_ERROR_PLACE);
    CHECK(tw_trial_judge(trial, 0, 3, &c.options, &verdict) == TW_ERROR_PLACE);
    tw_trial_free(trial);
    tw_trial_free(NULL);
}

int main(void)
{
    test_a_condition_is_solved_once();
    test_strung_line_is_solved_on_demand_and_once();
    test_where_it_came_from_does_not_matter();
    test_bare_is_the_same_section_without_an_addition();
    test_judging_a_swing_takes_the_bare_section();
    test_the_projects_rule_is_used_without_a_pull();
    test_a_failure_is_passed_on_and_not_kept();
    return check_end("test_trial");
}
