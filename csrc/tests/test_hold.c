/* Each hold as a function of its force: the swing is the slope of its energy, the flexibility the slope of its swing. */
#include "hold.h"

#include "cases.h"
#include "expect.h"
#include "vector.h"

static const double STRAIGHT[2] = {1.0, 0.0};
static const double TURNED[2] = {0.8, -0.6};
enum { HOLDS = 8 };

static tw_case CASE;

static const tw_support *holds(void)
{
    case_begin(&CASE);
    case_anchor(&CASE, 1.0, 2.0)->offset_m = 3.0;
    case_hanger(&CASE, 0.0, 0.0, 2.5, 400.0);
    case_post(&CASE, 0.0, 0.0, 3e5, 1e5);
    case_post(&CASE, 0.0, 0.0, INFINITY, 2e4);
    case_hanger(&CASE, 0.0, 0.0, 2.5, 400.0)->hanger_spread_m = 1.5;
    case_hanger(&CASE, 0.0, 0.0, 2.5, 400.0)->hanger_spread_m = 4.6;
    tw_support *sprung = case_anchor(&CASE, 0.0, 0.0);
    sprung->stiffness_along_N_per_m = 4e5;
    sprung->stiffness_vertical_N_per_m = 7e4;
    case_anchor(&CASE, 0.0, 0.0)->stiffness_along_N_per_m = 0.0;
    return CASE.supports;
}

static void draw_force(unsigned long long *seed, double F[3])
{
    F[0] = 2e3 * check_draw(seed);
    F[1] = 1e3 * check_draw(seed);
    F[2] = 4e3 + 3e3 * check_draw(seed);
}

/* Central differences; h^2/6 of the third derivative, l/|F|^2, is below 1e-10 of the swing. */
static void test_swing_is_the_slope_of_the_energy(double soft)
{
    unsigned long long seed = 3;
    const double h = 1e-2;
    for (int draw = 0; draw < 120; draw++) {
        const tw_support *support = &holds()[draw % HOLDS];
        const double *ahead = draw % 3 ? TURNED : STRAIGHT;
        double F[3], swing[3];
        draw_force(&seed, F);
        tw_hold_swing(support, ahead, F, soft, swing);
        for (int i = 0; i < 3; i++) {
            double up[3], down[3];
            tw_copy(F, up);
            tw_copy(F, down);
            up[i] += h;
            down[i] -= h;
            double gained = tw_hold_energy(support, ahead, up, soft) - tw_hold_energy(support, ahead, down, soft);
            double slope = gained / (2.0 * h);
            CHECK_NEAR(swing[i], slope, 1e-8);
        }
    }
}

static void test_flexibility_is_minus_the_slope_of_the_swing(double soft)
{
    unsigned long long seed = 5;
    const double h = 1e-1;
    for (int draw = 0; draw < 120; draw++) {
        const tw_support *support = &holds()[draw % HOLDS];
        const double *ahead = draw % 3 ? TURNED : STRAIGHT;
        double F[3], block[9] = {0.0};
        draw_force(&seed, F);
        tw_hold_flexibility(support, ahead, F, soft, 1.0, block);
        for (int j = 0; j < 3; j++) {
            double up[3], down[3], at_up[3], at_down[3];
            tw_copy(F, up);
            tw_copy(F, down);
            up[j] += h;
            down[j] -= h;
            tw_hold_swing(support, ahead, up, soft, at_up);
            tw_hold_swing(support, ahead, down, soft, at_down);
            for (int i = 0; i < 3; i++) {
                CHECK_NEAR(block[3 * i + j], -(at_up[i] - at_down[i]) / (2.0 * h), 1e-10);
            }
        }
    }
}

static void test_flexibility_is_positive_semidefinite_and_added_with_its_sign(void)
{
    unsigned long long seed = 9;
    for (int draw = 0; draw < 400; draw++) {
        const tw_support *support = &holds()[draw % HOLDS];
        const double *ahead = draw % 3 ? TURNED : STRAIGHT;
        double F[3], v[3], block[9] = {0.0};
        draw_force(&seed, F);
        draw_force(&seed, v);
        tw_hold_flexibility(support, ahead, F, 0.0, 1.0, block);
        double work = 0.0;
        for (int i = 0; i < 9; i++) {
            work += v[i / 3] * block[i] * v[i % 3];
        }
        CHECK(work >= -1e-9);
        tw_hold_flexibility(support, ahead, F, 0.0, -1.0, block);
        for (int i = 0; i < 9; i++) {
            CHECK(fabs(block[i]) <= 1e-18);
        }
    }
}

static void test_hanger_hangs_along_its_force_at_its_own_length(void)
{
    const tw_support *hanger = &holds()[1];
    const double down[3] = {0.0, 0.0, 800.0}, aslant[3] = {300.0, 0.0, 400.0};
    double swing[3];
    tw_hold_swing(hanger, STRAIGHT, down, 0.0, swing);
    CHECK(swing[0] == 0.0 && swing[1] == 0.0 && swing[2] == -2.5);
    tw_hold_swing(hanger, STRAIGHT, aslant, 0.0, swing);
    CHECK_NEAR(swing[0], -1.5, 1e-15);
    CHECK_NEAR(swing[2], -2.0, 1e-15);
    CHECK_NEAR(tw_hold_energy(hanger, STRAIGHT, aslant, 0.0), -2.5 * 500.0, 1e-12);
}

/* Rounded off, the energy stays below the exact one, by at most soft l: D stays a lower bound. */
static void test_a_slack_hanger_is_rounded_off_from_below(void)
{
    const tw_support *hanger = &holds()[1];
    unsigned long long seed = 4;
    for (double soft = 1e-3; soft < 1e3; soft *= 10.0) {
        double F[3], none[3] = {0.0, 0.0, 0.0}, swing[3], block[9] = {0.0};
        draw_force(&seed, F);
        double below = tw_hold_energy(hanger, STRAIGHT, F, 0.0) - tw_hold_energy(hanger, STRAIGHT, F, soft);
        CHECK(below >= 0.0 && below <= 2.5 * soft);
        tw_hold_swing(hanger, STRAIGHT, none, soft, swing);
        CHECK(tw_norm(swing) == 0.0);
        tw_hold_flexibility(hanger, STRAIGHT, none, soft, 1.0, block);
        CHECK_REL(block[0], 2.5 / soft, 1e-14);
    }
}

static void test_without_force_nothing_swings(void)
{
    const double none[3] = {0.0, 0.0, 0.0};
    for (int j = 0; j < HOLDS; j++) {
        double swing[3] = {1.0, 1.0, 1.0}, block[9] = {0.0};
        tw_hold_swing(&holds()[j], STRAIGHT, none, 0.0, swing);
        CHECK(tw_norm(swing) == 0.0);
        tw_hold_flexibility(&holds()[j], STRAIGHT, none, 0.0, 1.0, block);
        CHECK(isfinite(block[0]) && (block[8] == 0.0 || j == 6));
        CHECK(tw_hold_energy(&holds()[j], STRAIGHT, none, 0.0) == 0.0);
    }
}

static void test_post_moves_by_force_over_stiffness_and_anchor_not_at_all(void)
{
    const double F[3] = {6e3, -2e3, 9e3};
    double swing[3];
    tw_hold_swing(&holds()[2], STRAIGHT, F, 0.0, swing);
    CHECK_NEAR(swing[0], -0.02, 1e-16);
    CHECK_NEAR(swing[1], 0.02, 1e-16);
    CHECK(swing[2] == 0.0);
    tw_hold_swing(&holds()[3], STRAIGHT, F, 0.0, swing);
    CHECK(swing[0] == 0.0 && swing[1] != 0.0);
    tw_hold_swing(&holds()[0], STRAIGHT, F, 0.0, swing);
    CHECK(tw_norm(swing) == 0.0 && tw_hold_energy(&holds()[0], STRAIGHT, F, 0.0) == 0.0);
}

/* In axes turned by an angle a post gives along them: its swing is the straight one's of the force turned back. */
static void test_springs_act_in_the_support_s_axes(void)
{
    const double F[3] = {6e3, -2e3, 9e3}, own[3] = {0.8 * 6e3 + 0.6 * 2e3, 0.6 * 6e3 - 0.8 * 2e3, 9e3};
    double swing[3], straight[3];
    for (int j = 2; j < HOLDS; j++) {
        tw_hold_swing(&holds()[j], TURNED, F, 0.0, swing);
        tw_hold_swing(&holds()[j], STRAIGHT, own, 0.0, straight);
        CHECK_NEAR(swing[0], 0.8 * straight[0] + 0.6 * straight[1], 1e-15);
        CHECK_NEAR(swing[1], 0.8 * straight[1] - 0.6 * straight[0], 1e-15);
        CHECK_NEAR(swing[2], straight[2], 1e-15);
        CHECK_REL(tw_hold_energy(&holds()[j], TURNED, F, 0.0), tw_hold_energy(&holds()[j], STRAIGHT, own, 0.0), 1e-14);
    }
    tw_hold_swing(&holds()[6], STRAIGHT, F, 0.0, swing);
    CHECK_NEAR(swing[0], -6e3 / 4e5, 1e-17);
    CHECK(swing[1] == 0.0);
    CHECK_NEAR(swing[2], -9e3 / 7e4, 1e-16);
}

static void test_reach_is_to_the_further_upper_end(void)
{
    const double swing[3] = {0.0, 0.4, -1.2};
    double away[3];
    CHECK_NEAR(tw_hold_reach(&holds()[1], STRAIGHT, swing, away), hypot(0.4, 1.2), 1e-15);
    CHECK_NEAR(tw_hold_reach(&holds()[4], STRAIGHT, swing, away), hypot(1.15, 1.2), 1e-15);
    CHECK_NEAR(away[1], 1.15, 1e-15);
    CHECK_NEAR(tw_hold_drop(&holds()[4]), 2.5 * sqrt(1.0 - 0.09), 1e-15);
    CHECK(tw_hold_drop(&holds()[1]) == 2.5 && tw_hold_drop(&holds()[2]) == 0.0);
}

static void test_attachment_is_the_support(void)
{
    double a[3];
    tw_hold_attachment(&holds()[0], a);
    CHECK(a[0] == 1.0 && a[1] == 3.0 && a[2] == 2.0);
}

int main(void)
{
    test_swing_is_the_slope_of_the_energy(0.0);
    test_swing_is_the_slope_of_the_energy(500.0);
    test_flexibility_is_minus_the_slope_of_the_swing(0.0);
    test_flexibility_is_minus_the_slope_of_the_swing(500.0);
    test_flexibility_is_positive_semidefinite_and_added_with_its_sign();
    test_hanger_hangs_along_its_force_at_its_own_length();
    test_a_slack_hanger_is_rounded_off_from_below();
    test_without_force_nothing_swings();
    test_post_moves_by_force_over_stiffness_and_anchor_not_at_all();
    test_springs_act_in_the_support_s_axes();
    test_reach_is_to_the_further_upper_end();
    test_attachment_is_the_support();
    return check_end("test_hold");
}
