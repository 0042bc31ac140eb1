/* What is refused of loads, field by field, and what is taken. */
#include "check_load.h"

#include <string.h>

#include "cases.h"
#include "check.h"
#include "expect.h"

static tw_case made(void)
{
    tw_case c;
    case_level(&c, 200.0);
    return c;
}

static void refused(tw_case *c, const char *table, const char *field)
{
    tw_fault fault;
    case_ready(c);
    CHECK(tw_check_project(&c->project, &fault) == TW_ERROR_RANGE);
    CHECK(strcmp(fault.table, table) == 0 && strcmp(fault.field, field) == 0 && fault.expected[0] != '\0');
}

static void taken(tw_case *c)
{
    tw_fault fault;
    case_ready(c);
    CHECK(tw_check_project(&c->project, &fault) == TW_OK);
}

static void test_a_load_is_one_kind_of_load(void)
{
    tw_case c = made();
    tw_load *load = case_stretch(&c, TW_PLACE_WHOLE, NAN, NAN, 0.0, 0.0, -3.0);
    taken(&c);
    load->is_run = 1;
    taken(&c);
    load->is_ramp = 1;
    refused(&c, "loads", "is_run");
    load->is_run = 0;
    refused(&c, "loads", "from_m");
    load->place = TW_PLACE_LENGTH;
    load->from_m = 9.0;
    load->to_m = 5.0;
    refused(&c, "loads", "from_m");
    load->to_m = 50.0;
    taken(&c);
    load->vector_to[2] = NAN;
    refused(&c, "loads", "vector_to[2]");
}

static void test_a_carriage_has_a_force_a_span_and_a_place(void)
{
    tw_case c = made();
    tw_load *load = case_point(&c, TW_PLACE_WHOLE, NAN, 0.0, 0.0, -900.0);
    refused(&c, "loads", "from_m");
    load->carriage = TW_CARRIAGE_FREE;
    taken(&c);
    load->carriage_span = 1;
    refused(&c, "loads", "carriage");
    load->carriage_span = 0;
    load->place = TW_PLACE_STATION;
    refused(&c, "loads", "from_m");
    load->from_m = 50.0;
    taken(&c);
    load->carriage = TW_CARRIAGE_HELD;
    taken(&c);
    load->place = TW_PLACE_LENGTH;
    refused(&c, "loads", "from_m");
    load->place = TW_PLACE_STATION;
    load->is_point = 0;
    refused(&c, "loads", "carriage");
    load->is_point = 1;
    case_point(&c, TW_PLACE_STATION, 50.0, 0.0, 0.0, -1.0)->carriage = TW_CARRIAGE_FREE;
    refused(&c, "conditions", "loads");
}

static void test_shares_and_factors_have_their_ranges(void)
{
    tw_case c = made();
    double share = 0.5;
    c.conditions[0].ice_share = &share;
    taken(&c);
    share = 1.0000001;
    refused(&c, "conditions", "ice_pattern");
    share = NAN;
    refused(&c, "conditions", "ice_pattern");
    c.conditions[0].ice_share = NULL;
    c.conditions[0].factor_ice = -0.1;
    refused(&c, "conditions", "factor_ice");
    c.conditions[0].factor_ice = 1.0;
    c.conditions[0].wind_altitude_m = 11001.0;
    refused(&c, "conditions", "wind_altitude_m");
    c.conditions[0].wind_altitude_m = NAN;
    c.conditions[0].wind_bearing_rad = INFINITY;
    refused(&c, "conditions", "wind_bearing_rad");
    c.conditions[0].wind_bearing_rad = NAN;
    c.supports[0].hanger_wind_area_m2 = -1.0;
    refused(&c, "supports", "hanger_wind_area_m2");
}

int main(void)
{
    test_a_load_is_one_kind_of_load();
    test_a_carriage_has_a_force_a_span_and_a_place();
    test_shares_and_factors_have_their_ranges();
    return check_end("test_check_load");
}
