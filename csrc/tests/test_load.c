/* Ice, wind and their resultant against published tables, and the signs that tables leave out. */
#include "load.h"

#include <string.h>

#include "cases.h"
#include "expect.h"

static const double INCH = 0.0254, LBF_PER_FOOT = 14.593903, PSF = 47.880259, LB_PER_FT3 = 16.018463;
static const double PI = 3.14159265358979323846;

static tw_condition condition_of(double ice_m, double ice_density, double pressure_Pa, double addition)
{
    tw_case c;
    case_begin(&c);
    tw_condition condition = *case_condition(&c, 0.0);
    condition.ice_thickness_m = ice_m;
    condition.ice_density_kg_per_m3 = ice_density;
    condition.wind_pressure_Pa = pressure_Pa;
    condition.resultant_addition_N_per_m = addition;
    return condition;
}

/* All of the ice, wind by the angle. */
static void basic(const tw_line *line, const tw_condition *condition, int with_addition, double load[3])
{
    tw_load_basic(line, condition, 1.0, condition->wind_angle_rad, with_addition, load);
}

/* California PUC General Order 95, Appendix C, tables 18 and 23 (read in the source): diameter in, bare, heavy vertical,
 * heavy horizontal, heavy resultant, light horizontal, light resultant, lb/ft. One unit of the last digit. */
static void test_general_order_95(void)
{
    static const double rows[][7] = {
        {0.813, 1.544, 2.3604, 0.9065, 2.528, 0.5420, 1.636}, {0.368, 0.3258, 0.8655, 0.6840, 1.103, 0.2453, 0.408},
        {1.108, 1.093, 2.0928, 1.0540, 2.343, 0.7387, 1.319}, {0.783, 0.5464, 1.3442, 0.8915, 1.613, 0.5220, 0.756},
        {0.642, 0.3668, 1.0769, 0.8210, 1.354, 0.4280, 0.564}, {0.447, 0.1837, 0.7725, 0.7235, 1.058, 0.2980, 0.350},
        {0.316, 0.0916, 0.5990, 0.6580, 0.890, 0.2107, 0.230},
    };
    const tw_condition heavy = condition_of(0.5 * INCH, 57.0 * LB_PER_FT3, 6.0 * PSF, 0.0);
    const tw_condition light = condition_of(0.0, 900.0, 8.0 * PSF, 0.0);
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        const double *row = rows[i];
        const tw_line line = {.diameter_m = row[0] * INCH, .weight_N_per_m = row[1] * LBF_PER_FOOT};
        double load[3];
        basic(&line, &heavy, 1, load);
        CHECK_NEAR(-load[2] / LBF_PER_FOOT, row[2], 1e-4);
        CHECK_NEAR(load[1] / LBF_PER_FOOT, row[3], 1e-4);
        CHECK_NEAR(hypot(load[1], load[2]) / LBF_PER_FOOT, row[4], 1e-3);
        basic(&line, &light, 1, load);
        CHECK_NEAR(load[1] / LBF_PER_FOOT, row[5], 1e-4);
        CHECK_NEAR(hypot(load[1], load[2]) / LBF_PER_FOOT, row[6], 1e-3);
    }
}

/* Read in the source (D1): 795 kcmil 26/7, 2.094 lb/ft iced, 2.509 with 4 psf and the constant 0.30; swing without it. */
static void test_a_constant_scales_the_resultant_and_keeps_its_direction(void)
{
    const tw_line line = {.diameter_m = 1.108 * INCH, .weight_N_per_m = 1.094 * LBF_PER_FOOT};
    const tw_condition heavy = condition_of(0.5 * INCH, 57.0 * LB_PER_FT3, 4.0 * PSF, 0.30 * LBF_PER_FOOT);
    double with[3], without[3];
    basic(&line, &heavy, 1, with);
    basic(&line, &heavy, 0, without);
    CHECK_NEAR(-without[2] / LBF_PER_FOOT, 2.094, 1e-3);
    CHECK_NEAR(hypot(with[1], with[2]) / LBF_PER_FOOT, 2.509, 1e-3);
    CHECK_NEAR(hypot(with[1], with[2]) - hypot(without[1], without[2]), 0.30 * LBF_PER_FOOT, 1e-12);
    CHECK_NEAR(atan2(without[1], -without[2]) * 180.0 / PI, 18.551, 1e-3);
    CHECK_NEAR(with[1] * without[2], with[2] * without[1], 1e-10);
}

static void test_ice_is_an_annulus(void)
{
    const double d = 0.03, t = 0.02, density = 913.0;
    double area = 0.25 * PI * ((d + 2.0 * t) * (d + 2.0 * t) - d * d);
    CHECK_REL(tw_load_ice(d, t, density), area * density * 9.80665, 1e-14);
    CHECK(tw_load_ice(d, 0.0, density) == 0.0);
    CHECK(tw_load_ice(0.0, t, density) > 0.0);
}

/* Read in the source (G4): 27.972 m/s gives 479.63 Pa and 15.6 m/s gives 149.18 Pa at 0.613 v^2. */
static void test_wind_pressure(void)
{
    CHECK_NEAR(tw_load_wind_pressure(1.226, 27.972), 479.63, 0.02);
    CHECK_NEAR(tw_load_wind_pressure(1.226, 15.6), 149.18, 0.01);
    CHECK(tw_load_wind_pressure(1.225, 0.0) == 0.0);
}

static void test_wind_acts_with_the_square_of_the_sine_to_its_own_side(void)
{
    double square = tw_load_wind(400.0, 1.1, 0.03, 0.5 * PI);
    CHECK_REL(square, 400.0 * 1.1 * 0.03, 1e-14);
    CHECK_REL(tw_load_wind(400.0, 1.1, 0.03, PI / 6.0), 0.25 * square, 1e-14);
    CHECK_REL(tw_load_wind(400.0, 1.1, 0.03, -0.5 * PI), -square, 1e-14);
    CHECK_NEAR(tw_load_wind(400.0, 1.1, 0.03, PI), 0.0, 1e-14);
    CHECK(tw_load_wind(400.0, 1.1, 0.03, 0.0) == 0.0);
}

static void test_speed_and_pressure_say_the_same(void)
{
    const tw_line line = {.diameter_m = 0.02, .weight_N_per_m = 10.0};
    tw_condition by_speed = condition_of(0.01, 900.0, NAN, 0.0);
    by_speed.wind_speed_m_per_s = 30.0;
    const tw_condition by_pressure = condition_of(0.01, 900.0, 0.5 * 1.225 * 900.0, 0.0);
    const tw_condition calm = condition_of(0.01, 900.0, NAN, 0.0);
    double a[3], b[3];
    basic(&line, &by_speed, 0, a);
    basic(&line, &by_pressure, 0, b);
    CHECK(a[1] > 0.0 && memcmp(a, b, sizeof a) == 0);
    basic(&line, &calm, 0, b);
    CHECK(b[1] == 0.0 && b[2] == a[2]);
}

static void test_no_load_takes_no_addition(void)
{
    const tw_line line = {.diameter_m = 0.0, .weight_N_per_m = 0.0};
    const tw_condition condition = condition_of(0.0, 900.0, NAN, 5.0);
    double load[3];
    basic(&line, &condition, 1, load);
    CHECK(load[0] == 0.0 && load[1] == 0.0 && load[2] == 0.0);
}

/* ISO 2533, geopotential altitudes 0 and 1000 m: 1.2250 and 1.1117 kg/m3 (from memory; five digits). */
static void test_air_is_thinner_higher_up(void)
{
    tw_condition windy = condition_of(0.0, 900.0, NAN, 0.0);
    CHECK_NEAR(tw_load_air_density(0.0, 15.0), 1.2250, 5e-5);
    CHECK_NEAR(tw_load_air_density(1000.0, 8.5), 1.1117, 1e-4);
    windy.wind_speed_m_per_s = 20.0;
    windy.wind_altitude_m = 1000.0;
    windy.temperature_degC = 8.5;
    windy.factor_wind = 1.5;
    CHECK_REL(tw_load_pressure(&windy), 1.5 * 200.0 * tw_load_air_density(1000.0, 8.5), 1e-15);
}

static void test_a_share_of_ice_is_a_thinner_ring(void)
{
    const double d = 0.03, t = 0.02;
    CHECK(tw_load_iced_diameter(d, t, 1.0) == d + 2.0 * t);
    CHECK_REL(tw_load_iced_diameter(d, t, 1.0 - 1e-15), d + 2.0 * t, 1e-14);
    CHECK(tw_load_iced_diameter(d, t, 0.0) == d);
    double half = tw_load_iced_diameter(d, t, 0.5);
    CHECK_REL(tw_load_ice(d, 0.5 * (half - d), 900.0), 0.5 * tw_load_ice(d, t, 900.0), 1e-14);
}

int main(void)
{
    test_air_is_thinner_higher_up();
    test_a_share_of_ice_is_a_thinner_ring();
    test_general_order_95();
    test_a_constant_scales_the_resultant_and_keeps_its_direction();
    test_ice_is_an_annulus();
    test_wind_pressure();
    test_wind_acts_with_the_square_of_the_sine_to_its_own_side();
    test_speed_and_pressure_say_the_same();
    test_no_load_takes_no_addition();
    return check_end("test_load");
}
