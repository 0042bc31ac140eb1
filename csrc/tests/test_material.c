/* The line's stored energy and its Legendre transform: derivatives, convexity, and the inequality of Young and Fenchel. */
#include "material.h"

#include "expect.h"

static const tw_line LINE = {.stiffness_N = 34.7e6, .expansion_per_K = 18.9e-6};
static const double TEMPERATURES[] = {-60.0, 15.0, 120.0};

/* W(L) + W*(T) >= L T for every L and every T >= 0. */
static void test_the_pair_never_falls_below_the_product(void)
{
    for (int k = 0; k < 3; k++) {
        tw_material m = tw_material_at(&LINE, TEMPERATURES[k], 15.0);
        for (double L = 0.99; L < 1.01; L += 1.7e-4) {
            for (double T = 0.0; T < 400e3; T += 7e3) {
                double excess = tw_material_energy(&m, L) + tw_material_conjugate(&m, T) - L * T;
                CHECK(excess >= -1e-10 * (1.0 + T));
            }
        }
    }
}

static void test_the_pair_meets_the_product_at_its_own_tension(void)
{
    for (int k = 0; k < 3; k++) {
        tw_material m = tw_material_at(&LINE, TEMPERATURES[k], 15.0);
        for (double elastic = 0.0; elastic < 0.01; elastic += 1e-4) {
            double L = 1.0 + m.strain + elastic;
            double T = tw_material_tension(&m, L);
            CHECK_NEAR(tw_material_energy(&m, L) + tw_material_conjugate(&m, T), L * T, 1e-12 * (1.0 + L * T));
        }
    }
}

static void test_stretch_and_tension_undo_each_other(void)
{
    tw_material m = tw_material_at(&LINE, 80.0, 15.0);
    for (double T = 1.0; T < 1e6; T *= 1.5) {
        CHECK_NEAR(tw_material_tension(&m, tw_material_stretch(&m, T)), T, 1e-8); /* one epsilon of L times EA */
    }
}

/* Central differences of a quadratic are exact but for rounding. */
static void test_each_is_the_slope_of_the_one_before(void)
{
    tw_material m = tw_material_at(&LINE, -20.0, 15.0);
    const double h = 1e-5;
    for (double L = 1.0005; L < 1.01; L += 3e-4) {
        double up = tw_material_energy(&m, L + h), down = tw_material_energy(&m, L - h);
        CHECK_REL((up - down) / (2.0 * h), tw_material_tension(&m, L), 1e-8);
        up = tw_material_tension(&m, L + h);
        down = tw_material_tension(&m, L - h);
        CHECK_REL((up - down) / (2.0 * h), tw_material_tangent(&m, L), 1e-8);
    }
    for (double T = 100.0; T < 1e5; T *= 2.0) {
        double up = tw_material_conjugate(&m, T + 1.0), down = tw_material_conjugate(&m, T - 1.0);
        CHECK_REL((up - down) / 2.0, tw_material_stretch(&m, T), 1e-9);
    }
}

static void test_a_slack_line_carries_nothing(void)
{
    tw_material m = tw_material_at(&LINE, 40.0, 15.0);
    const double stretches[] = {0.0, 0.5, 1.0, 1.0 + 0.999 * m.strain};
    for (int i = 0; i < 4; i++) {
        CHECK(tw_material_energy(&m, stretches[i]) == 0.0);
        CHECK(tw_material_tension(&m, stretches[i]) == 0.0);
        CHECK(tw_material_tangent(&m, stretches[i]) == 0.0);
    }
    CHECK(tw_material_tangent(&m, 1.01) == 34.7e6);
}

static void test_heat_strains_by_the_expansion(void)
{
    CHECK_REL(tw_material_at(&LINE, 115.0, 15.0).strain, 18.9e-4, 1e-15);
    CHECK(tw_material_at(&LINE, 15.0, 15.0).strain == 0.0);
    CHECK(tw_material_at(&LINE, -85.0, 15.0).strain == -tw_material_at(&LINE, 115.0, 15.0).strain);
}

int main(void)
{
    test_the_pair_never_falls_below_the_product();
    test_the_pair_meets_the_product_at_its_own_tension();
    test_stretch_and_tension_undo_each_other();
    test_each_is_the_slope_of_the_one_before();
    test_a_slack_line_carries_nothing();
    test_heat_strains_by_the_expansion();
    return check_end("test_material");
}
