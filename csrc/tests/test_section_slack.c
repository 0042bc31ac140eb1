/* Hangers that carry and hangers that hang slack, in drawn routes: each line closes, each clamp is where its hanger lets
 * it be, and the energy bracket, which knows nothing of the active set, agrees. */
#include <string.h>

#include "cases.h"
#include "expect.h"
#include "hold.h"
#include "settle.h"
#include "vector.h"

static unsigned long long state = 20260101u;

/* Between 0 and 1. */
static double draw(void)
{
    state = state * 6364136223846793005u + 1442695040888963407u;
    return (double)(state >> 11) / 9007199254740992.0;
}

/* Spans between 50 and 350 m at heights that lift some hangers; offsets bend the route when wanted. */
static void draw_route(tw_case *c, double offset_m)
{
    int supports = 3 + (int)(4.0 * draw());
    double station = 0.0;
    case_begin(c);
    for (int j = 0; j < supports; j++) {
        int end = j == 0 || j == supports - 1;
        double elevation = 20.0 * draw();
        tw_support *support = end ? case_anchor(c, station, elevation)
                                  : case_hanger(c, station, elevation, 0.5 + 3.0 * draw(), 300.0 * draw());
        support->offset_m = offset_m * (draw() - 0.5);
        station += 50.0 + 300.0 * draw();
    }
    case_condition(c, 15.0 - 60.0 * draw());
    double pull = draw();
    c->project.stringing.value = 3e3 + 40e3 * pull * pull;
    case_ready(c);
}

/* Returns 1 where the hanger is slack. */
static int check_hanger(const tw_section *s, size_t j)
{
    const tw_support *support = &s->project->supports[j];
    const double *F = s->hold_force + 3 * j;
    double a[3], swing[3];
    tw_hold_attachment(support, a);
    tw_axpy(s->clamp + 3 * j, -1.0, a, swing);
    double reach = tw_norm(swing), force = tw_norm(F);
    CHECK(reach <= support->hanger_length_m * (1.0 + 1e-9));
    if (force == 0.0) {
        return 1;
    }
    if (s->soft_N == 0.0) {
        CHECK_NEAR(reach, support->hanger_length_m, 1e-9 * support->hanger_length_m);
        CHECK_NEAR(tw_dot(F, swing), -force * reach, 1e-9 * force * reach);
    }
    return 0;
}

static void test_drawn_routes_settle_whether_hangers_carry_or_not(void)
{
    int slack = 0, carrying = 0;
    for (int n = 0; n < 400; n++) {
        tw_case c;
        tw_settled out;
        const tw_section *s;
        memset(&out, 0, sizeof out);
        draw_route(&c, 0.0);
        tw_trial *trial = case_trial(&c, NAN);
        CHECK(trial != NULL);
        CHECK(tw_trial_section(trial, 0, &c.options, &s) == TW_OK);
        for (size_t j = 1; j < s->span_count; j++) {
            *(check_hanger(s, j) ? &slack : &carrying) += 1;
        }
        CHECK(tw_settle(s, &c.options, &out) == TW_OK);
        CHECK(out.gap_relative <= c.options.gap_relative);
        tw_trial_free(trial);
    }
    CHECK(slack > 20 && carrying > 100);
}

/* A warm start from another pull finds the same set of slack hangers as a cold one. */
static void test_warm_and_cold_starts_agree(void)
{
    for (int n = 0; n < 100; n++) {
        tw_case c;
        const tw_section *warm, *cold;
        draw_route(&c, 0.0);
        double pull = c.project.stringing.value;
        tw_trial *one = case_trial(&c, 0.6 * pull), *other = case_trial(&c, pull);
        CHECK(tw_trial_section(one, 0, &c.options, &warm) == TW_OK);
        CHECK(tw_trial_string(one, pull, &c.options) == TW_OK && tw_trial_section(one, 0, &c.options, &warm) == TW_OK);
        CHECK(tw_trial_section(other, 0, &c.options, &cold) == TW_OK);
        for (size_t k = 0; k < 3 * warm->span_count; k++) {
            CHECK_NEAR(warm->pull[k], cold->pull[k], 1e-6 * pull);
        }
        tw_trial_free(one);
        tw_trial_free(other);
    }
}

static void test_bends_with_hangers_are_strung(void)
{
    int strung = 0;
    for (int n = 0; n < 400; n++) {
        tw_case c;
        draw_route(&c, 20.0);
        tw_trial *trial = case_trial(&c, NAN);
        strung += trial != NULL;
        tw_trial_free(trial);
    }
    CHECK(strung >= 398);
    printf("    %d of 400 bent routes strung\n", strung);
}

int main(void)
{
    test_drawn_routes_settle_whether_hangers_carry_or_not();
    test_warm_and_cold_starts_agree();
    test_bends_with_hangers_are_strung();
    return check_end("test_section_slack");
}
