/* Every range rule refuses once, and says which number of which row and what was expected. */
#include "../core/check.h"

#include <string.h>

#include "cases.h"
#include "expect.h"

/* A project with something in every table, all of it in range. */
static void make_full(tw_case *c)
{
    case_route(c);
    c->project.line.breaking_strength_N = 120e3;
    for (int k = 0; k < 4; k++) {
        case_ground(c, 500.0 * k, 10.0 + k);
    }
    c->project.crossing_count = 1;
    c->crossings[0] = (tw_crossing){500.0, 510.0, 20.0};
    case_point(c, TW_PLACE_STATION, 500.0, 0.0, 0.0, -500.0);
    case_stretch(c, TW_PLACE_LENGTH, 100.0, 200.0, 0.0, 0.0, -5.0);
    case_stretch(c, TW_PLACE_WHOLE, NAN, NAN, 0.0, 0.0, -1.0);
    case_mark(c, TW_PLACE_LENGTH, 100.0);
    case_limit(c, TW_LIMIT_CLEARANCE, 6.0, NAN);
    case_limit(c, TW_LIMIT_TENSION, NAN, NAN)->share = 0.6;
    case_limit(c, TW_LIMIT_SUPPORT_LOAD, NAN, 30e3)->direction = TW_DIRECTION_DOWN;
    case_limit(c, TW_LIMIT_UPLIFT, 0.0, NAN);
    case_limit(c, TW_LIMIT_SAG, 1.0, 30.0);
    case_ready(c);
}

/* After a change: refused, with this table, row and field; and right again without it. */
static void expect(const tw_case *c, const char *table, size_t index, const char *field, int line)
{
    tw_fault fault;
    tw_status status = tw_check_project(&c->project, &fault);
    int right = status == TW_ERROR_RANGE && !strcmp(fault.table, table) && fault.index == index
                && !strcmp(fault.field, field) && strlen(fault.expected) > 5;
    check_one(right, __FILE__, line, field);
    if (!right) {
        printf("    %s: %s[%zu].%s: %s\n", tw_status_name(status), fault.table, fault.index, fault.field, fault.expected);
    }
}

#define REFUSED(change, table, index, field)           \
    do {                                               \
        tw_case c;                                     \
        make_full(&c);                                 \
        change;                                        \
        expect(&c, table, index, field, __LINE__);     \
    } while (0)

static void test_a_full_project_is_accepted(void)
{
    tw_case c;
    tw_fault fault;
    memset(&fault, 1, sizeof fault);
    make_full(&c);
    CHECK(tw_check_project(&c.project, &fault) == TW_OK);
    CHECK(fault.table[0] == '\0');
}

/* Each number outside its range at either end; infinite; and not a number, where it has to be given. */
typedef struct number {
    double *at;
    double low, high;
    int optional, infinite;
    const char *table, *field;
    size_t index;
} number;

static void refuse_values(tw_case *c, const number *n)
{
    const double bad[] = {n->low, n->high, -INFINITY, n->infinite ? n->high : INFINITY, n->optional ? n->low : NAN};
    const double good = *n->at;
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) {
        *n->at = bad[i];
        expect(c, n->table, n->index, n->field, __LINE__);
    }
    *n->at = good;
}

static void test_line_numbers(void)
{
    tw_case c;
    make_full(&c);
    tw_line *l = &c.project.line;
    const number numbers[] = {
        {&l->diameter_m, -1e-9, 2.01, 0, 0, "line", "diameter_m", TW_NONE},
        {&l->weight_N_per_m, -1e-9, 1.1e6, 0, 0, "line", "weight_N_per_m", TW_NONE},
        {&l->stiffness_N, 0.0, 1.1e14, 0, 0, "line", "stiffness_N", TW_NONE},
        {&l->expansion_per_K, -1.1e-3, 1.1e-3, 0, 0, "line", "expansion_per_K", TW_NONE},
        {&l->breaking_strength_N, 0.0, 1.1e12, 1, 0, "line", "breaking_strength_N", TW_NONE},
    };
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) {
        refuse_values(&c, &numbers[i]);
    }
}

static void test_support_numbers(void)
{
    tw_case c;
    make_full(&c);
    tw_support *s = &c.supports[2];
    const number numbers[] = {
        {&s->station_m, -1.1e7, 1.1e7, 0, 0, "supports", "station_m", 2},
        {&s->offset_m, -1.1e7, 1.1e7, 0, 0, "supports", "offset_m", 2},
        {&s->elevation_m, -2.1e4, 2.1e4, 0, 0, "supports", "elevation_m", 2},
        {&s->height_m, -2.1e4, 2.1e4, 1, 0, "supports", "height_m", 2},
        {&s->hanger_length_m, -1e-9, 1.1e3, 0, 0, "supports", "hanger_length_m", 2},
        {&s->hanger_weight_N, -1e-9, 1.1e7, 0, 0, "supports", "hanger_weight_N", 2},
        {&s->stiffness_along_N_per_m, 0.0, 1.1e15, 0, 1, "supports", "stiffness_along_N_per_m", 2},
        {&s->stiffness_across_N_per_m, 0.0, 1.1e15, 1, 1, "supports", "stiffness_across_N_per_m", 2},
        {&s->capacity_along_N, 0.0, 1.1e12, 1, 0, "supports", "capacity_along_N", 2},
        {&s->capacity_across_N, 0.0, 1.1e12, 1, 0, "supports", "capacity_across_N", 2},
        {&s->capacity_down_N, 0.0, 1.1e12, 1, 0, "supports", "capacity_down_N", 2},
        {&s->capacity_up_N, 0.0, 1.1e12, 1, 0, "supports", "capacity_up_N", 2},
    };
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) {
        refuse_values(&c, &numbers[i]);
    }
}

static void test_condition_numbers(void)
{
    tw_case c;
    make_full(&c);
    tw_condition *s = &c.conditions[1];
    const number numbers[] = {
        {&s->temperature_degC, -273.2, 2001.0, 0, 0, "conditions", "temperature_degC", 1},
        {&s->ice_thickness_m, -1e-9, 2.1, 0, 0, "conditions", "ice_thickness_m", 1},
        {&s->ice_density_kg_per_m3, -1e-9, 2001.0, 0, 0, "conditions", "ice_density_kg_per_m3", 1},
        {&s->wind_pressure_Pa, -1e-9, 1.1e6, 1, 0, "conditions", "wind_pressure_Pa", 1},
        {&s->wind_speed_m_per_s, -1e-9, 301.0, 1, 0, "conditions", "wind_speed_m_per_s", 1},
        {&s->air_density_kg_per_m3, -1e-9, 11.0, 0, 0, "conditions", "air_density_kg_per_m3", 1},
        {&s->wind_drag, -1e-9, 11.0, 0, 0, "conditions", "wind_drag", 1},
        {&s->wind_angle_rad, -6.4, 6.4, 0, 0, "conditions", "wind_angle_rad", 1},
        {&s->resultant_addition_N_per_m, -1e-9, 1.1e6, 0, 0, "conditions", "resultant_addition_N_per_m", 1},
    };
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) {
        refuse_values(&c, &numbers[i]);
    }
}

static void test_other_numbers(void)
{
    tw_case c;
    make_full(&c);
    const number numbers[] = {
        {&c.crossings[0].from_m, -1.1e7, 1.1e7, 0, 0, "crossings", "from_m", 0},
        {&c.crossings[0].to_m, -1.1e7, 1.1e7, 0, 0, "crossings", "to_m", 0},
        {&c.crossings[0].top_m, -2.1e4, 2.1e4, 0, 0, "crossings", "top_m", 0},
        {&c.loads[1].from_m, -1.1e7, 1.1e7, 1, 0, "loads", "from_m", 1},
        {&c.loads[1].to_m, -1.1e7, 1.1e7, 1, 0, "loads", "to_m", 1},
        {&c.loads[0].vector[0], -1.1e9, 1.1e9, 0, 0, "loads", "vector[0]", 0},
        {&c.loads[0].vector[1], -1.1e9, 1.1e9, 0, 0, "loads", "vector[1]", 0},
        {&c.loads[0].vector[2], -1.1e9, 1.1e9, 0, 0, "loads", "vector[2]", 0},
        {&c.marks[0].at_m, -1.1e7, 1.1e7, 0, 0, "marks", "at_m", 0},
        {&c.limits[0].least, -1e-9, 1.1e12, 1, 0, "limits", "least", 0},
        {&c.limits[2].most, 0.0, 1.1e12, 1, 0, "limits", "most", 2},
        {&c.limits[1].share, 0.0, 101.0, 1, 0, "limits", "share", 1},
        {&c.limits[0].from_m, -1.1e7, 1.1e7, 1, 0, "limits", "from_m", 0},
        {&c.limits[0].to_m, -1.1e7, 1.1e7, 1, 0, "limits", "to_m", 0},
        {&c.project.stringing.temperature_degC, -274.0, 2001.0, 0, 1, "stringing", "temperature_degC", TW_NONE},
        {&c.project.stringing.tolerance, -1e-9, 0.9, 0, 0, "stringing", "tolerance", TW_NONE},
        {&c.project.stringing.value, 0.0, 1.1e12, 0, 0, "stringing", "value", TW_NONE},
    };
    for (size_t i = 0; i < sizeof numbers / sizeof numbers[0]; i++) {
        refuse_values(&c, &numbers[i]);
    }
}

static void test_supports_follow_one_another(void)
{
    REFUSED(c.project.support_count = 1, "supports", TW_NONE, "count");
    REFUSED(c.project.condition_count = 0, "conditions", TW_NONE, "count");
    REFUSED(c.supports[3].station_m = c.supports[2].station_m, "supports", 3, "station_m");
}

static void test_holds(void)
{
    REFUSED(c.supports[1].hanger_length_m = 0.0, "supports", 1, "hanger_length_m");
    REFUSED(c.supports[0] = c.supports[1]; c.supports[0].station_m = 0.0, "supports", 0, "hold");
    REFUSED(c.project.support_count = 4, "supports", 3, "hold");
    REFUSED(c.supports[1].hold = (tw_hold)99, "supports", 1, "hold");
    REFUSED(c.supports[0].hold = TW_HOLD_SHEAVE, "supports", 0, "hold");
    REFUSED(c.supports[1].hold = TW_HOLD_SHEAVE; c.supports[1].sheave_friction = -0.1, "supports", 1, "sheave_friction");
    REFUSED(c.supports[1].sheave_friction = 1.1, "supports", 1, "sheave_friction");
    REFUSED(c.project.stringing.friction = -1e-9, "stringing", TW_NONE, "friction");
    REFUSED(c.project.stringing.friction = NAN, "stringing", TW_NONE, "friction");
    REFUSED(c.project.stringing.end_allowance_m = -1e-9, "stringing", TW_NONE, "end_allowance_m");
    REFUSED(c.project.stringing.method = TW_METHOD_OVER_SHEAVES; c.project.stringing.rule = TW_STRING_SPAN_LENGTHS,
            "stringing", TW_NONE, "method");
    REFUSED(c.supports[2].stiffness_along_N_per_m = NAN, "supports", 2, "stiffness_along_N_per_m");
    REFUSED(c.supports[2].stiffness_across_N_per_m = NAN, "supports", 2, "stiffness_along_N_per_m");
}

static void test_ground(void)
{
    REFUSED(c.project.ground_count = 1, "ground", 0, "station_m");
    REFUSED(c.ground_station_m[0] = c.supports[0].station_m + 1.0, "ground", 0, "station_m");
    REFUSED(c.project.ground_count = 2, "ground", 1, "station_m");
    REFUSED(c.ground_station_m[2] = c.ground_station_m[1], "ground", 2, "station_m");
    REFUSED(c.ground_station_m[0] = NAN, "ground", 0, "station_m");
    REFUSED(c.ground_station_m[3] = INFINITY, "ground", 3, "station_m");
    REFUSED(c.ground_elevation_m[1] = NAN, "ground", 1, "elevation_m");
    REFUSED(c.ground_elevation_m[1] = -2.1e4, "ground", 1, "elevation_m");
}

static void test_conditions_and_loads(void)
{
    REFUSED(c.conditions[2].load_first = 4, "conditions", 2, "loads");
    REFUSED(c.conditions[3].load_count = 4, "conditions", 3, "loads");
    REFUSED(c.conditions[3].load_first = c.conditions[3].load_count = (size_t)-1, "conditions", 3, "loads");
    REFUSED(c.project.line.expansion_per_K = 1e-3; c.project.stringing.temperature_degC = 500.0, "conditions", 0,
            "temperature_degC");
    REFUSED(c.loads[0].place = TW_PLACE_WHOLE, "loads", 0, "from_m");
    REFUSED(c.loads[0].from_m = NAN, "loads", 0, "from_m");
    REFUSED(c.loads[1].to_m = c.loads[1].from_m, "loads", 1, "from_m");
    REFUSED(c.loads[1].to_m = NAN, "loads", 1, "from_m");
    REFUSED(c.crossings[0].to_m = c.crossings[0].from_m, "crossings", 0, "to_m");
}

static void test_limits(void)
{
    REFUSED(c.limits[0].least = NAN, "limits", 0, "least");
    REFUSED(c.limits[0].most = 3.0, "limits", 0, "least");
    REFUSED(c.limits[3].least = NAN, "limits", 3, "least");
    REFUSED(c.limits[4].least = c.limits[4].most = NAN, "limits", 4, "most");
    REFUSED(c.limits[2].share = 0.5, "limits", 2, "most");
    REFUSED(c.limits[1].share = NAN, "limits", 1, "most");
    REFUSED(c.project.line.breaking_strength_N = NAN, "limits", 1, "share");
    REFUSED(c.limits[0].crossing = 1, "limits", 0, "crossing");
    REFUSED(c.project.ground_count = 0, "limits", 0, "crossing");
    REFUSED((c.limits[0].from_m = 300.0, c.limits[0].to_m = 300.0), "limits", 0, "to_m");
    REFUSED(c.limits[0].share = 0.5, "limits", 0, "least");
    REFUSED(c.limits[1].least = 1.0, "limits", 1, "most");
    REFUSED((c.limits[2].most = NAN, c.limits[2].share = 0.5), "limits", 2, "share"); /* a support without capacity */
    REFUSED((c.limits[2].most = NAN, c.limits[2].share = 0.5, c.limits[2].direction = TW_DIRECTION_RESULTANT), "limits", 2,
            "share");
    REFUSED(c.limits[4].share = 0.5, "limits", 4, "most");
    REFUSED((c.limits[2].kind = TW_LIMIT_SLOPE, c.limits[2].most = NAN, c.limits[2].share = 0.5), "limits", 2, "share");
    REFUSED((c.limits[2].kind = TW_LIMIT_CATENARY_CONSTANT, c.project.line.weight_N_per_m = 0.0), "line", TW_NONE,
            "weight_N_per_m");
    REFUSED(c.marks[0].place = TW_PLACE_WHOLE, "marks", 0, "place");
    REFUSED(c.project.stringing.temperature_degC = INFINITY, "stringing", TW_NONE, "temperature_degC");
}

static void test_stringing(void)
{
    REFUSED(c.project.stringing.rule = TW_STRING_TENSION; c.project.stringing.index = 5, "stringing", TW_NONE, "index");
    REFUSED(c.project.stringing.rule = TW_STRING_SAG; c.project.stringing.index = 4, "stringing", TW_NONE, "index");
    REFUSED(c.project.stringing.rule = TW_STRING_SPAN_LENGTHS; c.lengths_m[3] = 0.0, "stringing", 3, "lengths_m");
    REFUSED(c.project.stringing.rule = TW_STRING_SPAN_LENGTHS; c.lengths_m[0] = NAN, "stringing", 0, "lengths_m");
    REFUSED(c.project.stringing.rule = TW_STRING_SPAN_LENGTHS; c.lengths_m[0] = 1.1e7, "stringing", 0, "lengths_m");
}

static void test_every_rule_of_stringing_is_accepted(void)
{
    for (int rule = TW_STRING_PULL; rule <= TW_STRING_NONE; rule++) {
        tw_case c;
        tw_fault fault;
        make_full(&c);
        c.project.stringing.rule = (tw_stringing_rule)rule;
        CHECK(tw_check_project(&c.project, &fault) == TW_OK);
    }
}

static void expect_option(const tw_options *options, const char *field)
{
    tw_fault fault;
    CHECK(tw_check_options(options, &fault) == TW_ERROR_RANGE);
    CHECK(strcmp(fault.table, "options") == 0 && strcmp(fault.field, field) == 0 && fault.index == TW_NONE);
}

#define OPTION_REFUSED(field, value, named)            \
    do {                                               \
        tw_options options = tw_options_default();     \
        options.field = value;                         \
        expect_option(&options, named);                \
    } while (0)

static void test_options(void)
{
    OPTION_REFUSED(elements_per_span, 0, "elements_per_span");
    OPTION_REFUSED(elements_most, 31, "elements_per_span");
    OPTION_REFUSED(elements_most, (1u << 24) + 1u, "elements_most");
    OPTION_REFUSED(evaluations_most, 0, "elements_most");
    OPTION_REFUSED(newton_most, 0, "elements_most");
    OPTION_REFUSED(scan_points, 3, "scan_points");
    OPTION_REFUSED(scan_points, 100001, "scan_points");
    OPTION_REFUSED(gap_relative, 0.0, "gap_relative");
    OPTION_REFUSED(residual_relative, NAN, "residual_relative");
    OPTION_REFUSED(closing_relative, 1.1, "closing_relative");
    OPTION_REFUSED(seconds_most, INFINITY, "seconds_most");
    OPTION_REFUSED(seconds_most, -1.0, "seconds_most");
}

int main(void)
{
    test_a_full_project_is_accepted();
    test_line_numbers();
    test_support_numbers();
    test_condition_numbers();
    test_other_numbers();
    test_supports_follow_one_another();
    test_holds();
    test_ground();
    test_conditions_and_loads();
    test_limits();
    test_stringing();
    test_every_rule_of_stringing_is_accepted();
    test_options();
    return check_end("test_check");
}
