/* Return waves: closed forms of a weightless and of an inextensible line, one piece cut into many, and the parabola. */
#include "wave.h"

#include "expect.h"
#include "section.h"
#include "fixture.h"

static const double g = 9.80665;

/* A taut line without load: T and lambda are constant, so t = 2 S sqrt(m lambda / T), exactly. */
static void test_a_straight_line(void)
{
    const tw_material material = {.stiffness_N = 1e7, .strain = 2e-4};
    const tw_piece piece = {.length_m = 120.0, .tension = {3000.0, 0.0, 4000.0}};
    double wanted = 2.0 * 120.0 * sqrt(0.8 * (1.0 + 2e-4 + 5e-4) / 5000.0);
    CHECK_REL(tw_wave_return_s(&material, &piece, 1, 0.8), wanted, 1e-15);
}

/* A line that hangs straight down: T grows from T0 with the weight below, t = (4 / g) (sqrt(T1/w) - sqrt(T0/w)) sqrt(g) on
 * one that does not stretch (EA 1e300). */
static void test_a_plumb_line(void)
{
    const tw_material material = {.stiffness_N = 1e300, .strain = 0.0};
    const double w = 12.0;
    for (double low = 1e-3; low < 2e4; low *= 10.0) {
        const tw_piece piece = {.length_m = 300.0, .load = {0.0, 0.0, -w}, .tension = {0.0, 0.0, low}};
        double high = low + w * 300.0;
        double wanted = 4.0 / w * sqrt(w / g) * (sqrt(high) - sqrt(low));
        CHECK_REL(tw_wave_return_s(&material, &piece, 1, w / g), wanted, 1e-13);
    }
}

static void test_cuts_make_no_difference(void)
{
    const tw_material material = {.stiffness_N = 3e6, .strain = 1e-3};
    tw_piece whole = {.length_m = 400.0, .load = {0.0, 3.0, -9.0}, .tension = {900.0, 600.0, -1700.0}};
    tw_piece parts[40];
    for (size_t i = 0; i < 40; i++) {
        parts[i] = whole;
        parts[i].length_m = 10.0;
        tw_piece_tension(&whole, 10.0 * (double)i, parts[i].tension);
    }
    CHECK_REL(tw_wave_return_s(&material, parts, 40, 1.1), tw_wave_return_s(&material, &whole, 1, 1.1), 2e-14);
}

/* The parabola's time, t = 2 sqrt(8 D / g), against the exact one: with x = (sag over span)^2 they differ by the order of x
 * times a number of order one. */
static void test_the_parabola(void)
{
    CHECK_REL(tw_wave_parabola_s(10.0), 2.0 * sqrt(80.0 / g), 1e-15);
    for (double length = 300.02; length < 303.0; length += 0.5) {
        fixture f;
        fixture_span(&f, 300.0, 0.0, length, 15.97, 1e12);
        tw_section *section = fixture_solve(&f);
        CHECK(section != NULL);
        tw_span_state state;
        tw_section_span_state(section, 0, &state);
        double exact = tw_wave_return_s(section->materials, section->pieces, 1, 15.97 / g);
        double x = state.sag_m * state.sag_m / 9e4;
        CHECK_NEAR(tw_wave_parabola_s(state.sag_m) / exact, 1.0, 1.5 * x + 1e-9);
        CHECK(fabs(tw_wave_parabola_s(state.sag_m) / exact - 1.0) > 0.1 * x);
        tw_section_free(section);
    }
}

int main(void)
{
    test_a_straight_line();
    test_a_plumb_line();
    test_cuts_make_no_difference();
    test_the_parabola();
    return check_end("test_wave");
}
