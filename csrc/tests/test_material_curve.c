/* Curved laws: Legendre pair, continuity, slopes, knees, what is permanent, and the law against the parts' own sum. */
#include "material.h"


#include "expect.h"

/* Published curves of a 26/7 conductor (Grigsby, ch. 14) on 468.6 mm2, N at a strain as a ratio. */
static tw_line conductor(void)
{
    const double newton = 6894.757 * 468.6e-6; /* of a psi on the area */
    tw_line line = {.part_count = 2, .test_temperature_degC = 21.0};
    tw_part core = {.loading_N = {0.0, 37.15e5 * newton}, .creep_N = {0.0, 37.15e5 * newton}, .valid_to = 0.0045,
                    .final_stiffness_N = 38.60e5 * newton, .expansion_per_K = 11.5e-6};
    tw_part outer = {.loading_N = {-512.0 * newton, 4.902e6 * newton, -1.18e8 * newton, -5.76e10 * newton},
                     .creep_N = {0.0, 16.30e5 * newton}, .valid_to = 0.0045,
                     .final_stiffness_N = 68.95e5 * newton, .expansion_per_K = 23.0e-6};
    line.parts[0] = core;
    line.parts[1] = outer;
    return line;
}

typedef struct lived {
    tw_line line;
    tw_curve curve;
    tw_material material;
} lived;

/* Which of the laws: 0 as strung, 1 after a heavy strain, 2 also crept, 3 creeping. */
static void make(lived *l, int which, double temperature_degC)
{
    tw_permanent permanent = tw_permanent_none();
    l->line = conductor();
    for (size_t i = 0; i < 2 && which > 0; i++) {
        tw_permanent_take(&permanent, &l->line, i, 0.0018 + 0.0004 * (double)i, 0);
        if (which == 2) {
            tw_permanent_take(&permanent, &l->line, i, 0.0016 + 0.0004 * (double)i, 1);
        }
    }
    l->material = which == 3 ? tw_material_creeping(&l->line, temperature_degC, 15.0, &l->curve)
                             : tw_material_after(&l->line, temperature_degC, 15.0, which ? &permanent : NULL, &l->curve);
}

static const double TEMPERATURES[] = {-30.0, 15.0, 100.0};

#define EACH_LAW(l)                                       \
    for (int which = 0; which < 4; which++)               \
        for (int k = 0; k < 3; k++)                       \
            if (make(&(l), which, TEMPERATURES[k]), 1)

static void test_the_pair_meets_the_product_and_never_falls_below_it(void)
{
    lived l;
    EACH_LAW(l)
    {
        for (double T = 1.0; T < 3e5; T *= 1.7) {
            double L = tw_material_stretch(&l.material, T);
            double W = tw_material_energy(&l.material, L);
            CHECK_NEAR(W + tw_material_conjugate(&l.material, T), L * T, 1e-13 * L * T);
            CHECK_REL(tw_material_tension(&l.material, L), T, 1e-15 * l.material.stiffness_N / T + 1e-13);
            for (double other = 1.0; other < 3e5; other *= 3.1) {
                CHECK(W + tw_material_conjugate(&l.material, other) >= L * other - 1e-12 * L * other);
            }
        }
    }
}

static void test_each_is_the_slope_of_the_one_before_and_kinks_are_joined(void)
{
    lived l;
    EACH_LAW(l)
    {
        for (size_t i = 0; i < l.curve.count; i++) {
            double x = l.curve.knot[i], h = 1e-12;
            double below = tw_curve_force(&l.curve, x - h), above = tw_curve_force(&l.curve, x + h);
            CHECK_NEAR(below, above, 3.0 * h * l.material.stiffness_N + 1e-12 * above);
            CHECK_NEAR(tw_curve_energy(&l.curve, x - h), tw_curve_energy(&l.curve, x + h), 3.0 * h * (above + 1.0));
            CHECK_NEAR(l.curve.force_N[i], above, 2.0 * h * l.material.stiffness_N + 1e-12 * above);
        }
        for (double x = 1.7e-5; x < 8e-3; x *= 1.9) {
            double h = 1e-9, up = x + h, down = x - h;
            double slope = (tw_curve_energy(&l.curve, up) - tw_curve_energy(&l.curve, down)) / (2.0 * h);
            CHECK_NEAR(slope, tw_curve_force(&l.curve, x), 1e-6 * slope + 1e-3);
            slope = (tw_curve_force(&l.curve, up) - tw_curve_force(&l.curve, down)) / (2.0 * h);
            CHECK_REL(slope, tw_curve_slope(&l.curve, x), 1e-5);
            CHECK(slope > 0.0 && slope <= l.material.stiffness_N * (1.0 + 1e-6));
        }
    }
}

/* The whole against its parts, each asked for itself. */
static void test_the_law_is_the_sum_of_its_parts(void)
{
    lived l;
    EACH_LAW(l)
    {
        for (double L = 0.9995; which % 3 == 0 && L < 1.008; L += 1.3e-4) {
            double sum = 0.0;
            for (size_t i = 0; i < 2; i++) {
                double strain = tw_part_strain(&l.line, i, L, TEMPERATURES[k], 15.0);
                sum += tw_part_force(&l.line.parts[i], strain, which == 3);
            }
            CHECK_NEAR(tw_material_tension(&l.material, L), sum, 1e-9 * l.material.stiffness_N * 1e-3);
        }
    }
}

static void test_the_natural_length_is_unstressed_as_strung(void)
{
    lived l;
    make(&l, 0, 15.0);
    CHECK_NEAR(l.material.strain, 0.0, 1e-18);
    make(&l, 0, 40.0);
    CHECK_REL(l.material.strain, 11.5e-6 * 25.0, 1e-9); /* the core begins; the outer, longer by heat, hangs loose */
    CHECK(tw_material_energy(&l.material, 1.0) == 0.0 && tw_material_tension(&l.material, 1.0) == 0.0);
}

static void test_a_part_goes_slack_at_the_knee(void)
{
    lived l;
    make(&l, 2, 15.0);
    double alone = l.line.parts[0].final_stiffness_N, both = alone + l.line.parts[1].final_stiffness_N;
    int knees = 0;
    CHECK_REL(tw_curve_slope(&l.curve, 1e-5), alone, 1e-12);
    for (size_t i = 1; i < l.curve.count; i++) {
        knees += fabs(tw_curve_slope(&l.curve, l.curve.knot[i] + 1e-9) / both - 1.0) < 1e-9
                 && tw_curve_slope(&l.curve, l.curve.knot[i] - 1e-9) < 0.5 * both;
    }
    CHECK(knees == 1);
}

static void test_what_is_permanent_does_not_shrink(void)
{
    tw_line line = conductor();
    tw_permanent p = tw_permanent_none();
    tw_permanent_take(&p, &line, 1, 5e-5, 0); /* below its first load: nothing */
    CHECK(isinf(p.part[1]));
    tw_permanent_take(&p, &line, 1, 2e-3, 0);
    double left = p.part[1];
    CHECK_REL(left, 2e-3 - tw_part_force(&line.parts[1], 2e-3, 0) / line.parts[1].final_stiffness_N, 1e-14);
    tw_permanent_take(&p, &line, 1, 1e-3, 0);
    CHECK(p.part[1] == left && p.meets[1] == 2e-3);
    tw_permanent_take(&p, &line, 1, 2e-3, 1);
    CHECK(p.part[1] > left && p.meets[1] > 2e-3);
    double meets = p.meets[1];
    double back = line.parts[1].final_stiffness_N * (meets - p.part[1]);
    CHECK_REL(back, tw_part_force(&line.parts[1], meets, 0), 1e-12);
}

static void test_creep_is_the_power_law(void)
{
    tw_line line = {.creep_coefficient = 2e-5, .creep_exponent = 0.5, .creep_hours = 400.0};
    CHECK_REL(tw_curve_given_creep(&line), 4e-4, 1e-15);
    tw_permanent p = tw_permanent_none();
    p.strain = 3e-4;
    line.stiffness_N = 1e7;
    CHECK_REL(tw_material_after(&line, 15.0, 15.0, &p, NULL).strain, 3e-4, 1e-15);
    CHECK(!tw_curve_creeps(&line));
}

static void test_beyond_its_range_it_runs_straight(void)
{
    lived l;
    make(&l, 0, 15.0);
    double end = 0.0045, rate = tw_curve_slope(&l.curve, 0.01);
    CHECK_REL(rate, tw_curve_slope(&l.curve, 0.2), 1e-15);
    CHECK_REL(rate, tw_curve_slope(&l.curve, l.curve.knot[l.curve.count - 1] - 1e-9), 1e-4);
    CHECK(l.curve.knot[l.curve.count - 1] <= end);
}

int main(void)
{
    test_the_pair_meets_the_product_and_never_falls_below_it();
    test_each_is_the_slope_of_the_one_before_and_kinks_are_joined();
    test_the_law_is_the_sum_of_its_parts();
    test_the_natural_length_is_unstressed_as_strung();
    test_a_part_goes_slack_at_the_knee();
    test_what_is_permanent_does_not_shrink();
    test_creep_is_the_power_law();
    test_beyond_its_range_it_runs_straight();
    return check_end("test_material_curve");
}
