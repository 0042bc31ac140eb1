/* Placing of loads: span by span, ramps, loads per run, and what is put on a clamp. */
#include "cases.h"
#include "expect.h"
#include "load.h"
#include "section_load.h"
#include "vector.h"

static void four_spans(tw_case *c)
{
    case_begin(c);
    case_anchor(c, 0.0, 30.0);
    case_hanger(c, 200.0, 32.0, 2.0, 500.0);
    case_post(c, 420.0, 31.0, 3e5, 2e5);
    case_hanger(c, 640.0, 33.0, 2.0, 500.0);
    case_anchor(c, 850.0, 30.0);
    const double lengths_m[] = {200.3, 220.4, 220.4, 210.3};
    for (size_t k = 0; k < 4; k++) {
        c->lengths_m[k] = lengths_m[k];
    }
    case_condition(c, -5.0);
}

static void total_of(const tw_section *s, size_t span, double total[3])
{
    total[0] = total[1] = total[2] = 0.0;
    for (size_t p = s->piece_first[span]; p < s->piece_first[span + 1]; p++) {
        double one[3];
        tw_piece_total(&s->pieces[p], one);
        tw_axpy(total, 1.0, one, total);
        tw_axpy(total, 1.0, s->pieces[p].force, total);
    }
}

static void test_each_span_keeps_its_share_of_ice(void)
{
    static const double shares[] = {1.0, 0.0, 0.25, 1.0};
    tw_case c;
    four_spans(&c);
    c.conditions[0].ice_thickness_m = 0.015;
    c.conditions[0].ice_density_kg_per_m3 = 900.0;
    c.conditions[0].wind_pressure_Pa = 300.0;
    c.conditions[0].factor_ice = 1.5;
    c.conditions[0].factor_wind = 1.2;
    c.conditions[0].ice_share = shares;
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK(s != NULL);
    for (size_t k = 0; s && k < 4; k++) {
        const double d = c.project.line.diameter_m;
        double total[3];
        double ring = shares[k] * ((d + 0.03) * (d + 0.03) - d * d);
        total_of(s, k, total);
        double ice = 0.25 * 3.14159265358979323846 * ring * 900.0 * 9.80665;
        CHECK_REL(-total[2], c.lengths_m[k] * (15.97 + 1.5 * ice), 1e-13);
        CHECK_REL(total[1], c.lengths_m[k] * 1.2 * 300.0 * sqrt(d * d + ring), 1e-13);
    }
    tw_section_free(s);
}

static void test_a_ramp_is_linear_over_spans_and_cuts(void)
{
    tw_case c;
    four_spans(&c);
    tw_load *ramp = case_stretch(&c, TW_PLACE_LENGTH, 100.0, 500.0, 0.0, 0.0, -4.0);
    ramp->is_ramp = 1;
    ramp->vector_to[1] = 2.0;
    ramp->vector_to[2] = -20.0;
    case_point(&c, TW_PLACE_LENGTH, 300.0, 0.0, 0.0, -100.0);
    c.conditions[0].factor_load = 2.0;
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK(s != NULL);
    double at = 0.0, sum[3] = {0.0, 0.0, 0.0};
    for (size_t p = 0; s && p < s->piece_count; p++) {
        const tw_piece *piece = &s->pieces[p];
        for (int e = 0; e < 2; e++) { /* just inside either end */
            double within = piece->length_m * (e ? 1.0 - 1e-9 : 1e-9), x = at + within;
            double share = x > 100.0 && x < 500.0 ? (x - 100.0) / 400.0 : 0.0;
            double on = x > 100.0 && x < 500.0 ? 2.0 : 0.0;
            CHECK_NEAR(piece->load[2] + within * piece->ramp[2], -15.97 - on * (4.0 + 16.0 * share), 1e-11);
            CHECK_NEAR(piece->load[1] + within * piece->ramp[1], on * 2.0 * share, 1e-11);
        }
        double total[3];
        tw_piece_total(piece, total);
        tw_axpy(sum, 1.0, total, sum);
        tw_axpy(sum, 1.0, piece->force, sum);
        at += piece->length_m;
    }
    CHECK_REL(-sum[2], 15.97 * at + 2.0 * 400.0 * 12.0 + 200.0, 1e-13);
    CHECK_REL(sum[1], 2.0 * 400.0, 1e-13);
    tw_section_free(s);
}

/* p times how far the line gets in plan, on each span and piece. */
static void test_a_load_per_run_weighs_its_run(void)
{
    static const unsigned char covers[] = {1, 0, 1, 0};
    tw_case c;
    four_spans(&c);
    tw_load *run = case_stretch(&c, TW_PLACE_WHOLE, NAN, NAN, 0.0, 0.0, -30.0);
    run->is_run = 1;
    run->covers = covers;
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK(s != NULL);
    for (size_t k = 0; s && k < 4; k++) {
        double total[3], plan = s->clamp[3 * (k + 1)] - s->clamp[3 * k];
        total_of(s, k, total);
        CHECK_REL(-total[2], 15.97 * c.lengths_m[k] + covers[k] * 30.0 * plan, 1e-11);
        CHECK(s->piece_first[k + 1] - s->piece_first[k] == (covers[k] ? TW_SECTION_RUN_PIECES : 1));
    }
    CHECK(s == NULL || tw_section_follow_runs(s) < 1e-10);
    tw_section_free(s);
}

static void test_half_of_a_hanger_acts_at_its_clamp(void)
{
    tw_case c;
    four_spans(&c);
    c.supports[1].hanger_wind_area_m2 = 0.4;
    c.conditions[0].wind_pressure_Pa = 500.0;
    c.conditions[0].wind_angle_rad = 0.5;
    c.conditions[0].factor_weight = 1.1;
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK(s != NULL);
    if (s) {
        const double *g = s->clamp_load + 3;
        CHECK_REL(g[0], 100.0 * cos(0.5), 1e-14);
        CHECK_REL(g[1], 100.0 * sin(0.5), 1e-14);
        CHECK_REL(g[2], -275.0, 1e-14);
        tw_support_state state;
        tw_section_support_state(s, 1, &state);
        CHECK_REL(state.down_N, s->hold_force[5] + 275.0, 1e-14); /* the support takes the other half */
        CHECK_REL(state.along_N, -s->hold_force[3] + 100.0 * cos(0.5), 1e-14);
        CHECK_REL(state.across_N, -s->hold_force[4] + 100.0 * sin(0.5), 1e-14);
    }
    tw_section_free(s);
}

/* West wind on a span to the north blows to its right, on one to the east along it, on one to the south to its left. */
static void test_a_bearing_is_where_the_wind_comes_from(void)
{
    const double PI = 3.14159265358979323846;
    const tw_condition west = {.wind_bearing_rad = 1.5 * PI, .wind_angle_rad = 7.0};
    const tw_condition by_angle = {.wind_bearing_rad = NAN, .wind_angle_rad = 0.3};
    const double north[2] = {0.0, 1.0}, east[2] = {1.0, 0.0}, south[2] = {0.0, -1.0};
    CHECK_NEAR(tw_load_wind_angle(&west, north), -0.5 * PI, 1e-15);
    CHECK_NEAR(tw_load_wind_angle(&west, east), 0.0, 1e-15);
    CHECK_NEAR(tw_load_wind_angle(&west, south), 0.5 * PI, 1e-15);
    CHECK(tw_load_wind_angle(&by_angle, south) == 0.3);
}

int main(void)
{
    test_each_span_keeps_its_share_of_ice();
    test_a_ramp_is_linear_over_spans_and_cuts();
    test_a_load_per_run_weighs_its_run();
    test_half_of_a_hanger_acts_at_its_clamp();
    test_a_bearing_is_where_the_wind_comes_from();
    return check_end("test_section_load");
}
