/* The V hanger against its own definition: the clamp is the point of the lens that lies furthest against the force. */
#include "vee.h"

#include <math.h>
#include <string.h>

#include "expect.h"
#include "vector.h"

static const tw_vee VEE = {5.0, 6.0}; /* R = 4 */

static double reach(const tw_vee *vee, const double c[3], double side)
{
    const double way[3] = {c[0], c[1] - side * 0.5 * vee->spread_m, c[2]};
    return tw_norm(way);
}

static void draw_force(unsigned long long *seed, double F[3])
{
    for (int i = 0; i < 3; i++) {
        F[i] = 1e3 * check_draw(seed);
    }
}

/* h(F) is the most that any point of the lens makes of F . c; the clamp is in the lens and makes it, with its sign turned. */
static void test_support_function(void)
{
    unsigned long long seed = 21;
    int slack = 0;
    for (int draw = 0; draw < 200; draw++) {
        double F[3], c[3], p[3];
        draw_force(&seed, F);
        double h = tw_vee_support(&VEE, F, 0.0);
        tw_vee_swing(&VEE, F, 0.0, c);
        CHECK(fmax(reach(&VEE, c, 1.0), reach(&VEE, c, -1.0)) <= 5.0 * (1.0 + 1e-15));
        CHECK_REL(-tw_dot(F, c), h, 1e-14);
        slack += fmin(reach(&VEE, c, 1.0), reach(&VEE, c, -1.0)) < 4.9;
        for (int k = 0; k < 200; k++) {
            for (int i = 0; i < 3; i++) {
                p[i] = 4.0 * check_draw(&seed);
            }
            if (fmax(reach(&VEE, p, 1.0), reach(&VEE, p, -1.0)) <= 5.0) {
                CHECK(tw_dot(F, p) <= h * (1.0 + 1e-14));
            }
        }
    }
    CHECK(slack > 40 && slack < 160);
}

/* Tensions along the strings, from the clamp to the upper ends, add up to F; a slack string has none. */
static void test_tensions(void)
{
    unsigned long long seed = 8;
    for (int draw = 0; draw < 200; draw++) {
        double F[3], c[3], t[2];
        draw_force(&seed, F);
        tw_vee_swing(&VEE, F, 0.0, c);
        tw_vee_tensions(&VEE, F, t);
        for (int i = 0; i < 3; i++) {
            double right = (i == 1 ? -3.0 : 0.0) - c[i], left = (i == 1 ? 3.0 : 0.0) - c[i];
            CHECK_NEAR(t[0] * right / 5.0 + t[1] * left / 5.0, F[i], 1e-10);
        }
        CHECK(t[0] >= 0.0 && t[1] >= 0.0);
        CHECK((t[0] > 0.0 && t[1] > 0.0) == (fabs(F[1]) < 0.6 * tw_norm(F)));
    }
}

/* By hand, a 3-4-5 triangle on each side: plumb each string carries 5/8 of the load, at the limit one carries it all. */
static void test_by_hand(void)
{
    const double plumb[3] = {0.0, 0.0, 800.0}, limit[3] = {0.0, 600.0, 800.0}, aside[3] = {0.0, 800.0, 600.0};
    double c[3], t[2];
    tw_vee_swing(&VEE, plumb, 0.0, c);
    tw_vee_tensions(&VEE, plumb, t);
    CHECK(c[0] == 0.0 && c[1] == 0.0 && c[2] == -4.0);
    CHECK_REL(t[0], 500.0, 1e-15);
    CHECK_REL(t[1], 500.0, 1e-15);
    tw_vee_tensions(&VEE, limit, t);
    CHECK_NEAR(t[0], 0.0, 1e-12);
    CHECK_REL(t[1], 1000.0, 1e-15);
    tw_vee_swing(&VEE, aside, 0.0, c);
    CHECK_NEAR(c[1], 3.0 - 4.0, 1e-15);
    CHECK_NEAR(c[2], -3.0, 1e-15);
    CHECK(tw_vee_drop(&VEE) == 4.0);
}

/* Without spread it is one string. */
static void test_no_spread(void)
{
    const tw_vee one = {2.5, 0.0};
    unsigned long long seed = 2;
    for (int draw = 0; draw < 50; draw++) {
        double F[3], c[3], block[9];
        draw_force(&seed, F);
        double size = tw_norm(F);
        tw_vee_swing(&one, F, 0.0, c);
        tw_vee_flexibility(&one, F, 0.0, block);
        CHECK_REL(tw_vee_support(&one, F, 0.0), 2.5 * size, 1e-15);
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR(c[i], -2.5 * F[i] / size, 1e-15);
            CHECK_NEAR(block[3 * i + 1], 2.5 / size * ((i == 1) - F[i] * F[1] / (size * size)), 1e-15);
        }
    }
}

/* Convex, so below its chords; rounded off it lies above by at most soft l, so that D stays a lower bound. */
static void test_convex_and_rounded_from_above(void)
{
    unsigned long long seed = 77;
    for (int draw = 0; draw < 500; draw++) {
        double F[3], G[3], middle[3];
        double soft = draw % 2 ? 300.0 : 0.0;
        draw_force(&seed, F);
        draw_force(&seed, G);
        for (int i = 0; i < 3; i++) {
            middle[i] = 0.5 * (F[i] + G[i]);
        }
        double chord = 0.5 * (tw_vee_support(&VEE, F, soft) + tw_vee_support(&VEE, G, soft));
        CHECK(tw_vee_support(&VEE, middle, soft) <= chord * (1.0 + 1e-15));
        double above = tw_vee_support(&VEE, F, soft) - tw_vee_support(&VEE, F, 0.0);
        CHECK(above >= 0.0 && above <= 5.0 * soft);
    }
}

int main(void)
{
    test_support_function();
    test_tensions();
    test_by_hand();
    test_no_spread();
    test_convex_and_rounded_from_above();
    return check_end("test_vee");
}
