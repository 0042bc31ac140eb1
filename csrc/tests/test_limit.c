/* Limits of each kind and direction, judged against the states that they are about; utilisation around its edge. */
#include "limit.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "ground.h"

/* The route with a capacity everywhere, flat ground and a crossing; hung in the iced condition. */
static tw_section *make_judged(tw_case *c)
{
    case_route(c);
    c->project.line.breaking_strength_N = 120e3;
    case_ground(c, 0.0, 20.0);
    case_ground(c, 2000.0, 20.0);
    c->project.crossing_count = 1;
    c->crossings[0] = (tw_crossing){500.0, 520.0, 25.0};
    for (int j = 0; j < 5; j++) {
        c->supports[j].capacity_along_N = 40e3 + 1e3 * j;
        c->supports[j].capacity_across_N = 9e3;
        c->supports[j].capacity_down_N = 20e3;
        c->supports[j].capacity_up_N = 5e3;
    }
    return case_hung(c, 0);
}

static tw_verdict judge(tw_case *c, const tw_section *s)
{
    case_ready(c);
    return tw_limit_judge(&c->project, c->project.limit_count - 1, 0, s, s);
}

static void check_most(const tw_verdict *v, double value, double most)
{
    CHECK(v->judged == 1);
    CHECK_REL(v->value, value, 1e-13);
    CHECK(v->allowed == most);
    CHECK_NEAR(v->margin, most - value, 1e-9 * most);
    CHECK_REL(v->utilisation, value / most, 1e-12);
}

static void test_tension_is_the_greatest_of_all_spans(void)
{
    tw_case c;
    tw_section *s = make_judged(&c);
    double greatest = tw_span_tension_max(s->pieces, s->piece_count), r[3], t[3];
    case_limit(&c, TW_LIMIT_TENSION, NAN, 50e3);
    tw_verdict v = judge(&c, s);
    check_most(&v, greatest, 50e3);
    CHECK(v.support == TW_NONE && v.span < 4);
    double passed = 0.0;
    for (size_t k = 0; k < v.span; k++) {
        passed += s->length_m[k];
    }
    int at_end = fabs(v.station_m - s->clamp[3 * v.span]) > 1e-6;
    tw_section_at(s, passed + (at_end ? s->length_m[v.span] : 1e-9), r, t);
    CHECK_NEAR(r[0], v.station_m, 1e-6);
    CHECK_REL(sqrt(t[0] * t[0] + t[1] * t[1] + t[2] * t[2]), greatest, 1e-9);
    case_limit(&c, TW_LIMIT_TENSION, NAN, NAN)->share = 0.5;
    v = judge(&c, s);
    check_most(&v, greatest, 60e3);
    tw_section_free(s);
}

/* The greatest tension is at the upper support, whichever that is. */
static void test_tension_is_greatest_at_the_upper_end(void)
{
    for (int up = 0; up < 2; up++) {
        tw_case c;
        case_level(&c, 200.0);
        c.supports[up].elevation_m = 40.0;
        c.lengths_m[0] = 205.0;
        case_point(&c, TW_PLACE_LENGTH, 100.0, 0.0, 0.0, -10.0);
        tw_section *s = case_hung(&c, 0);
        case_limit(&c, TW_LIMIT_TENSION, NAN, 50e3);
        CHECK_NEAR(judge(&c, s).station_m, c.supports[up].station_m, 1e-9);
        tw_section_free(s);
    }
}

/* A metre of sag to spare counts as all of it. */
static void test_least_sag_of_nothing(void)
{
    tw_case c;
    tw_span_state state;
    case_level(&c, 30.0);
    c.lengths_m[0] = 30.01;
    tw_section *s = case_hung(&c, 0);
    tw_section_span_state(s, 0, &state);
    case_limit(&c, TW_LIMIT_SAG, 0.0, NAN);
    CHECK(state.sag_m < 1.0);
    CHECK_REL(judge(&c, s).utilisation, 1.0 - state.sag_m, 1e-14);
    tw_section_free(s);
}

static void test_sag_catenary_constant_and_slope(void)
{
    tw_case c;
    tw_section *s = make_judged(&c);
    double sag = 0.0, least = INFINITY, pull = 0.0, slope = 0.0;
    for (size_t k = 0; k < 4; k++) {
        tw_span_state state;
        tw_section_span_state(s, k, &state);
        sag = fmax(sag, state.sag_m);
        least = fmin(least, state.sag_m);
        pull = fmax(pull, state.horizontal_tension_N);
        slope = fmax(slope, state.slope_max);
    }
    case_limit(&c, TW_LIMIT_SAG, NAN, 30.0);
    tw_verdict v = judge(&c, s);
    check_most(&v, sag, 30.0);
    CHECK(v.span == 1 && v.station_m > 350.0 && v.station_m < 750.0);
    case_limit(&c, TW_LIMIT_SAG, 2.0, 1e3);
    v = judge(&c, s);
    CHECK_NEAR(v.value, least, 1e-12);
    CHECK_REL(v.utilisation, 2.0 / least, 1e-12);
    case_limit(&c, TW_LIMIT_CATENARY_CONSTANT, NAN, 3000.0);
    v = judge(&c, s);
    check_most(&v, pull / 15.97, 3000.0);
    case_limit(&c, TW_LIMIT_SLOPE, NAN, 0.4);
    v = judge(&c, s);
    check_most(&v, slope, 0.4);
    tw_section_free(s);
}

static double component_of(const tw_support_state *state, tw_direction direction)
{
    const double of[] = {fabs(state->along_N), fabs(state->across_N), fmax(state->down_N, 0.0),
                         fmax(-state->down_N, 0.0), state->resultant_N};
    return of[direction];
}

static void test_support_load_in_every_direction(void)
{
    tw_case c;
    tw_section *s = make_judged(&c);
    for (int direction = TW_DIRECTION_ALONG; direction <= TW_DIRECTION_RESULTANT; direction++) {
        double greatest = 0.0;
        size_t at = 0;
        for (size_t j = 0; j < 5; j++) {
            tw_support_state state;
            tw_section_support_state(s, j, &state);
            if (component_of(&state, (tw_direction)direction) > greatest) {
                greatest = component_of(&state, (tw_direction)direction);
                at = j;
            }
        }
        case_limit(&c, TW_LIMIT_SUPPORT_LOAD, NAN, 70e3)->direction = (tw_direction)direction;
        tw_verdict v = judge(&c, s);
        CHECK_NEAR(v.value, greatest, 1e-9);
        CHECK(greatest == 0.0 || (v.support == at && v.span == TW_NONE && v.station_m == c.supports[at].station_m));
    }
    tw_section_free(s);
}

static void test_share_is_of_each_supports_own_capacity(void)
{
    tw_case c;
    tw_section *s = make_judged(&c);
    const double capacity[] = {40e3, 9e3, 20e3, 5e3};
    for (int direction = TW_DIRECTION_ALONG; direction < TW_DIRECTION_RESULTANT; direction++) {
        tw_support_state state;
        case_limit(&c, TW_LIMIT_SUPPORT_LOAD, NAN, NAN)->direction = (tw_direction)direction;
        c.limits[direction].share = 0.5;
        c.covers[direction] = 1u;
        tw_verdict v = judge(&c, s);
        tw_section_support_state(s, 0, &state);
        CHECK(v.support == 0 && v.allowed == 0.5 * capacity[direction]);
        CHECK_NEAR(v.utilisation, component_of(&state, (tw_direction)direction) / v.allowed, 1e-12);
    }
    c.supports[0].capacity_up_N = NAN;
    CHECK(judge(&c, s).judged == 0); /* no capacity, nothing to share */
    tw_section_free(s);
}

/* A low support between two high ones: with least 0 the scale is its share of the bare line's weight. */
static void test_uplift(void)
{
    tw_case c;
    case_begin(&c);
    case_anchor(&c, 0.0, 30.0);
    case_anchor(&c, 200.0, 0.0);
    case_anchor(&c, 420.0, 30.0);
    case_condition(&c, 15.0);
    c.lengths_m[0] = 202.4;
    c.lengths_m[1] = 222.2;
    case_limit(&c, TW_LIMIT_UPLIFT, 0.0, NAN);
    c.covers[0] = 2u;
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    tw_support_state state;
    tw_section_support_state(s, 1, &state);
    CHECK(state.down_N < 0.0);
    tw_verdict v = judge(&c, s);
    double share = 15.97 * 0.5 * (202.4 + 222.2);
    CHECK(v.support == 1 && v.value == state.down_N && v.margin == state.down_N && v.allowed == 0.0);
    CHECK_REL(v.utilisation, 1.0 - state.down_N / share, 1e-13);
    c.limits[0].least = 500.0;
    v = judge(&c, s);
    CHECK_REL(v.utilisation, 2.0 - state.down_N / 500.0, 1e-13);
    c.limits[0].least = 0.0;
    c.project.line.weight_N_per_m = 0.0; /* no weight to share: one newton */
    v = judge(&c, s);
    CHECK_REL(v.utilisation, 1.0 - state.down_N, 1e-13);
    tw_section_free(s);
}

/* Only hangers swing, and by the loads without the addition. */
static void test_swing_is_read_off_the_bare_section(void)
{
    tw_case c;
    tw_section *s = make_judged(&c);
    tw_section *bare = tw_section_create(&c.project);
    CHECK(tw_section_load(bare, 0, c.lengths_m, NULL, 0) == TW_OK);
    CHECK(tw_section_solve(bare, &c.options, 0) == TW_OK);
    case_limit(&c, TW_LIMIT_SWING, NAN, 0.9);
    case_ready(&c);
    tw_verdict v = tw_limit_judge(&c.project, 0, 0, s, bare);
    tw_support_state one, three;
    tw_section_support_state(bare, 1, &one);
    tw_section_support_state(bare, 3, &three);
    check_most(&v, fmax(one.swing_rad, three.swing_rad), 0.9);
    CHECK(v.support == (one.swing_rad > three.swing_rad ? 1u : 3u));
    c.covers[0] = 1u | 4u | 16u;
    CHECK(judge(&c, s).judged == 0);
    tw_section_free(bare);
    tw_section_free(s);
}

static void test_clearance_is_the_least_of_the_spans(void)
{
    tw_case c;
    tw_section *s = make_judged(&c);
    double least = INFINITY, station = 0.0, clearance, at;
    for (size_t k = 0; k < 4; k++) {
        if (tw_ground_clearance(s, k, TW_NONE, NAN, NAN, &clearance, &at) && clearance < least) {
            least = clearance;
            station = at;
        }
    }
    case_limit(&c, TW_LIMIT_CLEARANCE, 1.0, NAN);
    tw_verdict v = judge(&c, s);
    CHECK(v.value == least && v.station_m == station && v.allowed == 1.0);
    CHECK_NEAR(v.margin, least - 1.0, 1e-12);
    case_limit(&c, TW_LIMIT_CLEARANCE, 1.0, NAN)->crossing = 0;
    v = judge(&c, s);
    CHECK(v.judged && v.station_m >= 500.0 && v.station_m <= 520.0);
    case_limit(&c, TW_LIMIT_CLEARANCE, 0.0, NAN)->from_m = 3000.0;
    CHECK(judge(&c, s).judged == 0);
    tw_section_free(s);
}

static void test_only_what_is_covered_is_judged(void)
{
    tw_case c;
    tw_section *s = make_judged(&c);
    case_limit(&c, TW_LIMIT_SAG, NAN, 30.0);
    for (unsigned k = 0; k < 4; k++) {
        c.covers[0] = 1u << k;
        CHECK(judge(&c, s).span == k);
    }
    c.covers[0] = 16u; /* no span starts at the last support */
    tw_verdict v = judge(&c, s);
    case_limit(&c, TW_LIMIT_SAG, NAN, 30.0);
    c.covers[1] = 8u;
    CHECK(judge(&c, s).span == 3); /* each limit has its own */
    CHECK(v.judged == 0 && v.span == TW_NONE && v.support == TW_NONE && isnan(v.station_m));
    tw_section_free(s);
}

/* The two branches meet at 1 with one slope, and grow as the value falls. */
static void test_utilisation_of_a_least_limit(void)
{
    for (double least = 0.5; least < 100.0; least *= 3.0) {
        const double h = 1e-6 * least;
        double above = tw_limit_utilisation_least(least + h, least, 1.0);
        double below = tw_limit_utilisation_least(least - h, least, 1.0);
        CHECK(tw_limit_utilisation_least(least, least, 1.0) == 1.0);
        CHECK_REL((1.0 - above) / h, 1.0 / least, 2e-6);
        CHECK_REL((below - 1.0) / h, 1.0 / least, 2e-6);
        CHECK_REL(tw_limit_utilisation_least(0.0, least, 1.0), 2.0, 1e-15);
        double before = INFINITY;
        for (double value = -5.0 * least; value < 5.0 * least; value += 0.1 * least) {
            double u = tw_limit_utilisation_least(value, least, 1.0);
            CHECK(isfinite(u) && u < before && (u <= 1.0) == (value >= least));
            before = u;
        }
    }
}

static void test_utilisation_of_least_zero(void)
{
    CHECK(tw_limit_utilisation_least(0.0, 0.0, 4.0) == 1.0);
    CHECK(tw_limit_utilisation_least(1.0, 0.0, 4.0) == 0.75);
    CHECK(tw_limit_utilisation_least(-2.0, 0.0, 4.0) == 1.5);
    CHECK(tw_limit_utilisation_least(400.0, 0.0, 4.0) == 0.0);
    CHECK(tw_limit_utilisation_most(30.0, 40.0) == 0.75);
}

int main(void)
{
    test_tension_is_the_greatest_of_all_spans();
    test_tension_is_greatest_at_the_upper_end();
    test_least_sag_of_nothing();
    test_sag_catenary_constant_and_slope();
    test_support_load_in_every_direction();
    test_share_is_of_each_supports_own_capacity();
    test_uplift();
    test_swing_is_read_off_the_bare_section();
    test_clearance_is_the_least_of_the_spans();
    test_only_what_is_covered_is_judged();
    test_utilisation_of_a_least_limit();
    test_utilisation_of_least_zero();
    return check_end("test_limit");
}
