/* Stations and axes of a turning route against plane geometry, and what the section reads along it. */
#include "route.h"

#include <string.h>

#include "check.h"
#include "cases.h"
#include "expect.h"
#include "vector.h"

static const double DEGREE = 0.017453292519943295769;
static double STATIONS[CASE_SUPPORTS];

static void turn_on(tw_case *c)
{
    tw_route_measure(c->supports, c->project.support_count, STATIONS);
    c->project.route_station_m = STATIONS;
}

/* Two level spans of 300 m with a turn to the left, the middle held as asked. */
static tw_support *case_turn(tw_case *c, double degrees, double east_m, double north_m, double heading)
{
    double x = east_m, y = north_m;
    case_begin(c);
    for (int j = 0; j < 3; j++) {
        case_anchor(c, x, 30.0)->offset_m = y;
        double way = heading + (j ? degrees * DEGREE : 0.0);
        x += 300.0 * cos(way);
        y += 300.0 * sin(way);
        c->lengths_m[j] = 300.8;
    }
    case_condition(c, 15.0);
    case_ready(c);
    turn_on(c);
    return &c->supports[1];
}

static void test_stations_and_axes(void)
{
    tw_case c;
    double e[2], out[3], back[3];
    const double v[3] = {3.0, -2.0, 7.0};
    case_turn(&c, 20.0, 500.0, -40.0, 0.3);
    CHECK(STATIONS[0] == 0.0);
    CHECK_NEAR(STATIONS[1], 300.0, 1e-12);
    CHECK_NEAR(tw_route_support_station(&c.project, 2), 600.0, 1e-12);
    const double headings[3] = {0.3, 0.3 + 10.0 * DEGREE, 0.3 + 20.0 * DEGREE};
    for (size_t j = 0; j < 3; j++) {
        tw_route_ahead(&c.project, j, e);
        CHECK_NEAR(e[0], cos(headings[j]), 1e-14);
        CHECK_NEAR(e[1], sin(headings[j]), 1e-14);
        tw_route_into_axes(e, v, out);
        tw_route_out_of_axes(e, out, back);
        CHECK_NEAR(out[1], -v[0] * e[1] + v[1] * e[0], 1e-15);
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR(back[i], v[i], 1e-14);
        }
    }
    CHECK_NEAR(tw_route_turn_cosine(&c.project, 1), cos(20.0 * DEGREE), 1e-14);
    CHECK(tw_route_turn_cosine(&c.project, 0) == 1.0 && tw_route_turn_cosine(&c.project, 2) == 1.0);
    const tw_route_leg leg = tw_route_leg_of(&c.project, 1);
    double h = headings[2];
    const double place[3] = {c.supports[1].station_m + 100.0 * cos(h) - 5.0 * sin(h),
                             c.supports[1].offset_m + 100.0 * sin(h) + 5.0 * cos(h), 12.0};
    CHECK_NEAR(tw_route_station(&leg, place), 400.0, 1e-12);
    const double aside[3] = {place[0] - 3.0 * leg.ahead[1], place[1] + 3.0 * leg.ahead[0], place[2]};
    CHECK_NEAR(tw_route_left(&leg, aside) - tw_route_left(&leg, place), 3.0, 1e-12);
}

/* Without route stations it is the x of today, to the last bit, whatever the offsets. */
static void test_straight(void)
{
    tw_case c;
    double e[2], out[3];
    const double v[3] = {-0.0, 0.1, -0.0};
    case_route(&c);
    for (size_t k = 0; k < 4; k++) {
        const tw_route_leg leg = tw_route_leg_of(&c.project, k);
        const double place[3] = {1234.56789, -7.7, 3.3};
        CHECK(tw_route_station(&leg, place) == 1234.56789);
        tw_route_ahead(&c.project, k, e);
        CHECK(e[0] == 1.0 && e[1] == 0.0);
        CHECK(tw_route_turn_cosine(&c.project, k) == 1.0);
    }
    tw_route_into_axes(e, v, out);
    CHECK(memcmp(v, out, sizeof v) == 0);
    CHECK(tw_route_support_station(&c.project, 1) == 350.0);
}

/* Station by station: the line is where it should be; at a hanger inside of the turn some stations are skipped. */
static void test_the_section_reads_stations_along_the_route(void)
{
    tw_case c;
    tw_support *middle = case_turn(&c, 20.0, 500.0, -40.0, 0.3);
    middle->hold = TW_HOLD_HANGER;
    middle->hanger_length_m = 3.0;
    middle->hanger_weight_N = 300.0;
    middle->elevation_m = 32.0;
    tw_section *section = case_hung(&c, 0);
    CHECK(section != NULL);
    double s, r[3];
    for (double station = 0.0; section && station <= 600.0; station += 7.3) {
        CHECK(tw_section_at_station(section, station, &s) == TW_OK);
        tw_section_at(section, s, r, NULL);
        if (fabs(station - 300.0) > 1.0) {
            CHECK_NEAR(tw_section_station(section, s, r), station, 1e-9);
        }
    }
    if (section) {
        CHECK(tw_section_at_station(section, 300.0, &s) == TW_OK);
        CHECK(s == section->start_m[1]); /* the clamp, which swung inside by more than a metre */
        CHECK(tw_section_at_station(section, 600.5, &s) == TW_ERROR_PLACE);
        tw_support_state state;
        tw_section_support_state(section, 1, &state);
        CHECK(state.swing_across_rad > 0.5);
        CHECK_NEAR(state.swing_across_rad, state.swing_rad, 1e-12);
        CHECK_NEAR(state.swing_along_rad, 0.0, 1e-9);
        CHECK_NEAR(state.station_m, 300.0, 1e-12);
    }
    tw_section_free(section);
}

static void test_check(void)
{
    tw_case c;
    tw_fault fault;
    case_turn(&c, 20.0, 500.0, -40.0, 3.0); /* westwards: x falls */
    CHECK(tw_check_project(&c.project, &fault) == TW_OK);
    c.supports[1].station_m = c.supports[0].station_m;
    c.supports[1].offset_m = c.supports[0].offset_m;
    turn_on(&c);
    CHECK(tw_check_project(&c.project, &fault) == TW_ERROR_RANGE && fault.index == 1);
    CHECK(strcmp(fault.field, "station_m") == 0);
    case_turn(&c, 179.9, 0.0, 0.0, 0.0);
    CHECK(tw_check_project(&c.project, &fault) == TW_ERROR_RANGE && strstr(fault.expected, "179"));
    case_turn(&c, 170.0, 0.0, 0.0, 0.0);
    CHECK(tw_check_project(&c.project, &fault) == TW_OK);
    tw_support *middle = case_turn(&c, 20.0, 0.0, 0.0, 0.0);
    middle->hold = TW_HOLD_HANGER;
    middle->hanger_length_m = 3.0;
    middle->hanger_spread_m = 6.0;
    CHECK(tw_check_project(&c.project, &fault) == TW_ERROR_RANGE && strcmp(fault.field, "hanger_spread_m") == 0);
    middle->hanger_spread_m = 5.9;
    CHECK(tw_check_project(&c.project, &fault) == TW_OK);
    case_ground(&c, 0.0, 0.0);
    case_ground(&c, 599.0, 0.0);
    CHECK(tw_check_project(&c.project, &fault) == TW_ERROR_RANGE && strcmp(fault.table, "ground") == 0);
    c.ground_station_m[1] = 601.0;
    CHECK(tw_check_project(&c.project, &fault) == TW_OK);
}

int main(void)
{
    test_stations_and_axes();
    test_straight();
    test_the_section_reads_stations_along_the_route();
    test_check();
    return check_end("test_route");
}
