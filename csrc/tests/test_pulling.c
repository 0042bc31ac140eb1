/* A line pulled in over sheaves and clamped: what each state keeps, every rule, several sections, sheaves that stay. */
#include "pulling.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "section_feed.h"
#include "vector.h"

static double sum(const double *values, size_t from, size_t to)
{
    double total = 0.0;
    for (size_t k = from; k < to; k++) {
        total += values[k];
    }
    return total;
}

static double horizontal(const tw_section *section, size_t span)
{
    return hypot(section->pull[3 * span], section->pull[3 * span + 1]);
}

static void far_tension(const tw_section *section, size_t span, double t[3])
{
    const tw_piece *piece = &section->pieces[section->piece_first[span + 1] - 1];
    tw_piece_tension(piece, piece->length_m, t);
}

static void test_both_states(void)
{
    tw_case c;
    case_hill(&c);
    tw_pulling *pulling = tw_pulling_create(&c.project);
    double lengths[5], pull = 18e3;
    CHECK(pulling && tw_pulling_lengths(pulling, &pull, lengths, &c.options) == TW_OK);
    const tw_section *blocks = pulling->blocks, *clamped = pulling->clamped;
    CHECK_REL(horizontal(blocks, 0), 18e3, 1e-13);
    CHECK_REL(horizontal(blocks, 3), 18e3, 1e-13); /* each section has its own winch */
    static const size_t hangers[] = {1, 2, 4};
    for (size_t i = 0; i < 3; i++) {
        size_t j = hangers[i];
        double behind[3];
        far_tension(blocks, j - 1, behind);
        CHECK_REL(tw_norm(blocks->pull + 3 * j), tw_norm(behind), 1e-13);
        CHECK(fabs(blocks->clamp[3 * j] - c.supports[j].station_m) > 0.01); /* the sheave leans */
        CHECK_NEAR(clamped->clamp[3 * j], c.supports[j].station_m, 1e-10);  /* the hanger is plumb */
        CHECK_NEAR(clamped->clamp[3 * j + 2], c.supports[j].elevation_m - 1.6, 1e-12);
    }
    CHECK_REL(horizontal(clamped, 0), horizontal(clamped, 2), 1e-13);
    CHECK_REL(horizontal(clamped, 3), horizontal(clamped, 4), 1e-13);
    CHECK(fabs(horizontal(clamped, 0) / horizontal(clamped, 3) - 1.0) > 1e-3);
    CHECK_NEAR(sum(lengths, 0, 3), sum(blocks->length_m, 0, 3), 2e-13); /* anchor to anchor nothing is lost */
    CHECK_NEAR(sum(lengths, 3, 5), sum(blocks->length_m, 3, 5), 2e-13);
    CHECK(fabs(lengths[0] - blocks->length_m[0]) > 0.05);
    tw_pulling_free(pulling);
}

/* The clamped state is the one that today's rule strings to, at the horizontal tension that was found. */
static void test_clamped_as_the_plumb_rule_has_it(void)
{
    static const double pulls[] = {18e3, 60e3, 1e5, 4e5}; /* the last two lift a hanger */
    for (size_t i = 0; i < 4; i++) {
        tw_case c;
        case_hill(&c);
        c.supports[3].hold = TW_HOLD_HANGER;
        c.supports[3].hanger_length_m = 1.6;
        tw_trial *over = case_trial(&c, pulls[i]);
        CHECK(over != NULL);
        CHECK((over->pulling->blocks->hold_force[5] < 0.0) == (i > 1));
        double pull = horizontal(over->pulling->clamped, 0);
        c.project.stringing.method = TW_METHOD_CLAMPED;
        tw_trial *plumb = case_trial(&c, pull);
        CHECK(!plumb->pulling);
        for (size_t k = 0; k < 5; k++) {
            CHECK_NEAR(over->length_m[k], plumb->length_m[k], 1e-11);
        }
        tw_trial_free(over);
        tw_trial_free(plumb);
    }
}

/* Each rule asks for what a pull of 18 kN gives on the sheaves, and finds that pull and the same lengths. */
static void test_every_rule(void)
{
    tw_case c;
    tw_span_state span;
    case_hill(&c);
    tw_trial *trial = case_trial(&c, 18e3);
    const tw_section *blocks = trial->pulling->blocks;
    tw_section_span_state(blocks, 1, &span);
    double behind[3];
    far_tension(blocks, 1, behind);
    const struct {
        tw_stringing_rule rule;
        size_t index;
        double value;
    } rules[] = {
        {TW_STRING_PULL, 0, 18e3},
        {TW_STRING_TENSION, 2, tw_norm(behind)},
        {TW_STRING_SAG, 1, span.sag_m},
        {TW_STRING_TOTAL_LENGTH, 0, sum(blocks->length_m, 0, 5)},
    };
    for (size_t i = 0; i < sizeof rules / sizeof rules[0]; i++) {
        c.project.stringing.rule = rules[i].rule;
        c.project.stringing.index = rules[i].index;
        c.project.stringing.value = rules[i].value;
        tw_trial *by_rule = case_trial(&c, (double)NAN);
        CHECK(by_rule != NULL);
        for (size_t k = 0; by_rule && k < 5; k++) {
            CHECK_NEAR(by_rule->length_m[k], trial->length_m[k], 1e-9); /* a length of 1255 m asks for its pull to 1e-9 */
        }
        CHECK_REL(by_rule ? by_rule->pull_N : 0.0, 18e3, 1e-9);
        tw_trial_free(by_rule);
    }
    c.project.stringing.rule = TW_STRING_NONE;
    CHECK(tw_trial_string(trial, (double)NAN, &c.options) == TW_ERROR_RANGE);
    tw_trial_free(trial);
}

static void test_clamped_where_it_lies(void)
{
    tw_case c;
    case_hill(&c);
    c.project.stringing.clip = TW_CLIP_LIES;
    tw_trial *trial = case_trial(&c, 18e3);
    for (size_t k = 0; k < 5; k++) {
        CHECK(trial->length_m[k] == trial->pulling->blocks->length_m[k]);
    }
    tw_trial_free(trial);
}

/* Sheaves that stay: the line is at rest at stringing as it was strung, whatever else is clamped. */
static void test_sheaves_in_service(void)
{
    for (int over = 0; over < 2; over++) {
        tw_case c;
        case_hill(&c);
        c.supports[2].hold = TW_HOLD_SHEAVE;
        c.project.stringing.method = over ? TW_METHOD_OVER_SHEAVES : TW_METHOD_CLAMPED;
        tw_trial *trial = case_trial(&c, 18e3);
        const tw_section *section;
        CHECK(trial && trial->pulling);
        CHECK(tw_trial_section(trial, 0, &c.options, &section) == TW_OK);
        for (size_t k = 0; k < 5; k++) {
            CHECK_NEAR(section->length_m[k], trial->length_m[k], 1e-10);
        }
        CHECK_NEAR(section->clamp[3], 260.0, 1e-9);
        CHECK(tw_section_imbalance(section) < 1e-8);
        CHECK(over || fabs(horizontal(section, 0) - 18e3) < 1e-7);
        tw_trial_free(trial);
    }
}

static void test_given_lengths_are_kept(void)
{
    tw_case c;
    case_hill(&c);
    c.supports[2].hold = TW_HOLD_SHEAVE;
    c.project.stringing.method = TW_METHOD_CLAMPED;
    tw_trial *by_pull = case_trial(&c, 18e3);
    memcpy(c.lengths_m, by_pull->length_m, 5 * sizeof(double));
    c.lengths_m[1] += 0.5;
    c.project.stringing.rule = TW_STRING_SPAN_LENGTHS;
    c.project.stringing.lengths_m = c.lengths_m;
    tw_trial *trial = case_trial(&c, (double)NAN);
    const tw_section *section;
    CHECK(memcmp(trial->length_m, c.lengths_m, 5 * sizeof(double)) == 0 && isnan(trial->pull_N));
    CHECK(tw_trial_section(trial, 0, &c.options, &section) == TW_OK);
    CHECK(fabs(section->length_m[1] - c.lengths_m[1]) > 0.05);
    CHECK_NEAR(section->length_m[1] + section->length_m[2], c.lengths_m[1] + c.lengths_m[2], 1e-12);
    tw_trial_free(by_pull);
    tw_trial_free(trial);
}

static void test_what_a_pull_cannot_do(void)
{
    static const double bad[] = {1e-9, 1e-3, 1.0, 1e12, 1e300};
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) {
        tw_case c;
        case_hill(&c);
        tw_trial *trial = case_trial(&c, 18e3);
        tw_status status = tw_trial_string(trial, bad[i], &c.options);
        int finite = 1;
        for (size_t k = 0; k < 5; k++) {
            finite &= isfinite(trial->length_m[k]) && trial->length_m[k] > 0.0;
        }
        CHECK(status != TW_OK || finite);
        CHECK(tw_trial_string(trial, 18e3, &c.options) == TW_OK); /* and nothing is left of it */
        tw_trial_free(trial);
    }
}

static int say_after(void *data)
{
    int *left_then = data;
    return left_then[0]-- > 0 ? 0 : left_then[1];
}

/* The search for the pull solves a line each time: every solve asks, and its first word ends the search. */
static void test_a_search_over_sheaves_can_be_stopped(void)
{
    static const tw_status ends[] = {TW_CANCELLED, TW_DEADLINE};
    for (int i = 0; i < 2; i++) {
        for (int granted = 0; granted < 40; granted += 13) {
            tw_case c;
            int left_then[2] = {granted, (int)ends[i]};
            case_hill(&c);
            tw_trial *trial = case_trial(&c, 18e3);
            c.project.stringing.rule = TW_STRING_SAG;
            c.project.stringing.index = 1;
            c.project.stringing.value = 6.0;
            c.options.poll = say_after;
            c.options.poll_data = left_then;
            CHECK(tw_trial_string(trial, (double)NAN, &c.options) == ends[i]);
            c.options.poll = NULL;
            CHECK(tw_trial_string(trial, (double)NAN, &c.options) == TW_OK); /* and nothing is left of it */
            tw_trial_free(trial);
        }
    }
}

int main(void)
{
    test_both_states();
    test_clamped_as_the_plumb_rule_has_it();
    test_every_rule();
    test_clamped_where_it_lies();
    test_sheaves_in_service();
    test_given_lengths_are_kept();
    test_what_a_pull_cannot_do();
    test_a_search_over_sheaves_can_be_stopped();
    return check_end("test_pulling");
}
