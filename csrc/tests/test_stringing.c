/* Each stringing rule, put back into the line that it gives; what no pull reaches; the pulls that a search looks at. */
#include "stringing.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "hold.h"
#include "vector.h"

static tw_status lengths_of(tw_case *c, double *pull)
{
    double work[7 * CASE_SUPPORTS];
    return tw_stringing_lengths(&c->project, c->lengths_m, pull, work);
}

/* Three spans with hangers at different heights, no bend and nothing that leans. */
static void make_straight(tw_case *c)
{
    case_begin(c);
    case_anchor(c, 0.0, 10.0);
    case_hanger(c, 250.0, 18.0, 2.0, 500.0);
    case_hanger(c, 650.0, 22.0, 3.0, 500.0);
    case_post(c, 950.0, 12.0, INFINITY, INFINITY);
    case_condition(c, 15.0);
    case_ready(c);
}

/* Larger of the tensions beside a support, sag, and horizontal tension, off the bare line hung on the lengths found. */
static tw_span_state strung_state(const tw_case *c, size_t span)
{
    tw_span_state state;
    tw_section *s = case_hung(c, TW_NONE);
    tw_section_span_state(s, span, &state);
    tw_section_free(s);
    return state;
}

static void test_pull_is_the_horizontal_tension_of_every_span(void)
{
    for (double pull = 2e3; pull < 2e5; pull *= 3.0) {
        tw_case c;
        double found;
        make_straight(&c);
        c.project.stringing.value = pull;
        CHECK(lengths_of(&c, &found) == TW_OK && found == pull);
        for (size_t k = 0; k < 3; k++) {
            CHECK_REL(strung_state(&c, k).horizontal_tension_N, pull, 1e-8);
        }
    }
}

static void test_tension_rule(void)
{
    for (size_t support = 0; support < 4; support++) {
        tw_case c;
        double pull;
        make_straight(&c);
        c.project.stringing.rule = TW_STRING_TENSION;
        c.project.stringing.value = 25e3;
        c.project.stringing.index = support;
        CHECK(lengths_of(&c, &pull) == TW_OK);
        double before = support > 0 ? strung_state(&c, support - 1).tension_to_N : 0.0;
        double after = support < 3 ? strung_state(&c, support).tension_from_N : 0.0;
        CHECK_REL(fmax(before, after), 25e3, 1e-8);
        CHECK(pull < 25e3 && pull > 20e3);
    }
}

static void test_sag_rule(void)
{
    const double sags[] = {0.5, 4.0, 30.0};
    for (size_t span = 0; span < 3; span++) {
        for (int i = 0; i < 3; i++) {
            tw_case c;
            double pull;
            make_straight(&c);
            c.project.stringing.rule = TW_STRING_SAG;
            c.project.stringing.value = sags[i];
            c.project.stringing.index = span;
            CHECK(lengths_of(&c, &pull) == TW_OK);
            CHECK_REL(strung_state(&c, span).sag_m, sags[i], 1e-8);
        }
    }
}

static void test_total_length_rule(void)
{
    const double totals[] = {949.0, 951.0, 1100.0};
    for (int i = 0; i < 3; i++) {
        tw_case c;
        double pull;
        make_straight(&c);
        c.project.stringing.rule = TW_STRING_TOTAL_LENGTH;
        c.project.stringing.value = totals[i];
        CHECK(lengths_of(&c, &pull) == TW_OK);
        CHECK_REL(c.lengths_m[0] + c.lengths_m[1] + c.lengths_m[2], totals[i], 1e-13);
        CHECK_REL(strung_state(&c, 1).horizontal_tension_N, pull, 1e-7);
    }
}

static void test_list_of_lengths_and_none(void)
{
    tw_case c;
    double pull, copied[CASE_SUPPORTS] = {0.0}, work[7 * CASE_SUPPORTS];
    make_straight(&c);
    c.lengths_m[0] = 250.5;
    c.lengths_m[1] = 401.5;
    c.lengths_m[2] = 300.7;
    c.project.stringing.rule = TW_STRING_SPAN_LENGTHS;
    CHECK(tw_stringing_lengths(&c.project, copied, &pull, work) == TW_OK && isnan(pull));
    CHECK(memcmp(copied, c.lengths_m, 3 * sizeof(double)) == 0);
    c.project.stringing.rule = TW_STRING_NONE;
    CHECK(lengths_of(&c, &pull) == TW_ERROR_RANGE);
    c.project.stringing.rule = (tw_stringing_rule)99;
    CHECK(lengths_of(&c, &pull) == TW_ERROR_RANGE);
}

/* Where the route bends and posts lean, clamps follow their hold forces: hung on the lengths found, every span has the pull. */
static void test_bends_and_leaning_posts(void)
{
    tw_case c;
    double pull;
    case_route(&c);
    CHECK(lengths_of(&c, &pull) == TW_OK);
    for (size_t k = 0; k < 4; k++) {
        CHECK_REL(strung_state(&c, k).horizontal_tension_N, 20e3, 1e-7);
    }
}

static void expect_rule(tw_stringing_rule rule, size_t index, double value, tw_status wanted)
{
    tw_case c;
    double pull;
    make_straight(&c);
    c.project.stringing.rule = rule;
    c.project.stringing.index = index;
    c.project.stringing.value = value;
    CHECK(lengths_of(&c, &pull) == wanted);
}

static void test_what_no_pull_reaches(void)
{
    expect_rule(TW_STRING_TENSION, 1, 500.0, TW_OUT_OF_REACH); /* less than half the weight of the span beside it */
    expect_rule(TW_STRING_SAG, 1, 1e-9, TW_OUT_OF_REACH);
    expect_rule(TW_STRING_SAG, 1, 1e60, TW_OUT_OF_REACH);
    expect_rule(TW_STRING_TOTAL_LENGTH, 0, 300.0, TW_OUT_OF_REACH);
    expect_rule(TW_STRING_TOTAL_LENGTH, 0, 1e60, TW_OUT_OF_REACH);
}

/* Ten metres on, a hundred up: the upper end's tension falls with the pull down to nearly the weight below it, 1000 N. */
static void test_tension_rule_on_a_steep_span(void)
{
    tw_case c;
    double pull;
    case_begin(&c);
    c.project.line.weight_N_per_m = 10.0;
    case_anchor(&c, 0.0, 0.0);
    case_anchor(&c, 10.0, 100.0);
    case_condition(&c, 15.0);
    case_ready(&c);
    c.project.stringing.rule = TW_STRING_TENSION;
    c.project.stringing.index = 1;
    for (double tension = 1050.0; tension < 3e3; tension += 300.0) {
        c.project.stringing.value = tension;
        CHECK(lengths_of(&c, &pull) == TW_OK);
        CHECK_REL(strung_state(&c, 0).tension_to_N, tension, 1e-8);
    }
}

static void test_numbers_that_are_none_end_with_a_status(void)
{
    tw_case c;
    double work[7 * CASE_SUPPORTS];
    const double bad[] = {NAN, INFINITY, 1e300, 1e-300};
    for (int i = 0; i < 4; i++) {
        make_straight(&c);
        tw_status status = tw_stringing_at_pull(&c.project, bad[i], c.lengths_m, work);
        CHECK(status != TW_OK || (isfinite(c.lengths_m[0]) && isfinite(c.lengths_m[1])));
    }
    case_route(&c);
    c.supports[0].stiffness_along_N_per_m = 1.0; /* leans further than it is long */
    CHECK(tw_stringing_at_pull(&c.project, 20e3, c.lengths_m, work) != TW_OK);
}

static void range_of(const tw_case *c, double *low, double *high)
{
    tw_stringing_range(&c->project, low, high);
    CHECK(*low > 0.0 && *high > *low && isfinite(*high));
}

/* The low end sags about as deep as the longest span is long. */
static void test_range_of_a_search(void)
{
    tw_case c;
    double low, high;
    case_level(&c, 400.0);
    range_of(&c, &low, &high);
    CHECK_REL(high, fmax(0.02 * 34.7e6, 10.0 * low), 1e-12);
    double work[7 * CASE_SUPPORTS];
    CHECK(tw_stringing_at_pull(&c.project, low, c.lengths_m, work) == TW_OK);
    double sag = strung_state(&c, 0).sag_m;
    CHECK(sag > 0.7 * 400.0 && sag < 1.6 * 400.0);
    case_limit(&c, TW_LIMIT_TENSION, NAN, 50e3);
    range_of(&c, &low, &high);
    CHECK(high == 100e3);
    case_limit(&c, TW_LIMIT_CATENARY_CONSTANT, NAN, 4000.0);
    range_of(&c, &low, &high);
    CHECK_REL(high, 8000.0 * 15.97, 1e-14);
    c.project.line.breaking_strength_N = 90e3;
    range_of(&c, &low, &high);
    CHECK(high == 90e3);
    c.project.line.weight_N_per_m = 0.0;
    range_of(&c, &low, &high);
}

int main(void)
{
    test_pull_is_the_horizontal_tension_of_every_span();
    test_tension_rule();
    test_sag_rule();
    test_total_length_rule();
    test_list_of_lengths_and_none();
    test_bends_and_leaning_posts();
    test_what_no_pull_reaches();
    test_tension_rule_on_a_steep_span();
    test_numbers_that_are_none_end_with_a_status();
    test_range_of_a_search();
    return check_end("test_stringing");
}
