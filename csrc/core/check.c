#include "check.h"

#include "check_load.h"

#include <math.h>
#include <string.h>

#include "check_rules.h"
#include "route.h"

enum {
    OPEN_LOW = 1,  /* the low end is excluded */
    OPTIONAL = 2,  /* NaN stands for "not given" */
    INFINITE = 4   /* infinity is allowed */
};

typedef struct range {
    char field[32];
    size_t offset;
    double low, high;
    int flags;
    char expected[72];
} range;

#define LINE(field) #field, offsetof(tw_line, field)
static const range line_rules[] = {
    {LINE(diameter_m), 0.0, 2.0, 0, "a diameter from 0 to 2 m"},
    {LINE(weight_N_per_m), 0.0, 1e6, 0, "a weight from 0 to 1e6 N/m"},
    {LINE(stiffness_N), 0.0, 1e14, OPEN_LOW, "a stiffness EA above 0, up to 1e14 N"},
    {LINE(expansion_per_K), -1e-3, 1e-3, 0, "an expansion within 1e-3 per kelvin"},
    {LINE(breaking_strength_N), 0.0, 1e12, OPEN_LOW | OPTIONAL, "a breaking strength above 0"},
};

#define SUPPORT(field) #field, offsetof(tw_support, field)
static const range support_rules[] = {
    {SUPPORT(station_m), -1e7, 1e7, 0, "a station within 10,000 km"},
    {SUPPORT(offset_m), -1e7, 1e7, 0, "an offset within 10,000 km"},
    {SUPPORT(elevation_m), -2e4, 2e4, 0, "an elevation within 20 km"},
    {SUPPORT(height_m), -2e4, 2e4, OPTIONAL, "a height within 20 km"},
    {SUPPORT(hanger_length_m), 0.0, 1e3, 0, "a hanger length from 0 to 1 km"},
    {SUPPORT(hanger_spread_m), 0.0, 2e3, 0, "a spread from 0 to 2 km"},
    {SUPPORT(hanger_weight_N), 0.0, 1e7, 0, "a hanger weight from 0 to 1e7 N"},
    {SUPPORT(sheave_friction), 0.0, 1.0, OPTIONAL, "a coefficient of friction from 0 to 1"},
    {SUPPORT(hanger_wind_area_m2), 0.0, 1e3, 0, "a wind area from 0 to 1000 m2"},
    {SUPPORT(stiffness_along_N_per_m), 0.0, 1e15, OPEN_LOW | OPTIONAL | INFINITE, "a stiffness above 0"},
    {SUPPORT(stiffness_across_N_per_m), 0.0, 1e15, OPEN_LOW | OPTIONAL | INFINITE, "a stiffness above 0"},
    {SUPPORT(stiffness_vertical_N_per_m), 0.0, 1e15, OPEN_LOW | OPTIONAL | INFINITE, "a stiffness above 0"},
    {SUPPORT(capacity_along_N), 0.0, 1e12, OPEN_LOW | OPTIONAL, "a capacity above 0"},
    {SUPPORT(capacity_across_N), 0.0, 1e12, OPEN_LOW | OPTIONAL, "a capacity above 0"},
    {SUPPORT(capacity_down_N), 0.0, 1e12, OPEN_LOW | OPTIONAL, "a capacity above 0"},
    {SUPPORT(capacity_up_N), 0.0, 1e12, OPEN_LOW | OPTIONAL, "a capacity above 0"},
};

#define CROSSING(field) #field, offsetof(tw_crossing, field)
static const range crossing_rules[] = {
    {CROSSING(from_m), -1e7, 1e7, 0, "a station within 10,000 km"},
    {CROSSING(to_m), -1e7, 1e7, 0, "a station within 10,000 km"},
    {CROSSING(top_m), -2e4, 2e4, 0, "an elevation within 20 km"},
};

#define CONDITION(field) #field, offsetof(tw_condition, field)
static const range condition_rules[] = {
    {CONDITION(temperature_degC), -273.15, 2000.0, 0, "a temperature from -273.15 to 2000 degC"},
    {CONDITION(ice_thickness_m), 0.0, 2.0, 0, "a radial ice thickness from 0 to 2 m"},
    {CONDITION(ice_density_kg_per_m3), 0.0, 2000.0, 0, "an ice density from 0 to 2000 kg/m3"},
    {CONDITION(wind_pressure_Pa), 0.0, 1e6, OPTIONAL, "a wind pressure from 0 to 1e6 Pa"},
    {CONDITION(wind_speed_m_per_s), 0.0, 300.0, OPTIONAL, "a wind speed from 0 to 300 m/s"},
    {CONDITION(air_density_kg_per_m3), 0.0, 10.0, 0, "an air density from 0 to 10 kg/m3"},
    {CONDITION(wind_drag), 0.0, 10.0, 0, "a drag coefficient from 0 to 10"},
    {CONDITION(wind_angle_rad), -6.3, 6.3, 0, "an angle within a full turn"},
    {CONDITION(wind_bearing_rad), -6.3, 6.3, OPTIONAL, "a bearing within a full turn"},
    {CONDITION(wind_altitude_m), -500.0, 11000.0, OPTIONAL, "an altitude from -500 to 11,000 m"},
    {CONDITION(factor_weight), 0.0, 100.0, 0, "a load factor from 0 to 100"},
    {CONDITION(factor_ice), 0.0, 100.0, 0, "a load factor from 0 to 100"},
    {CONDITION(factor_wind), 0.0, 100.0, 0, "a load factor from 0 to 100"},
    {CONDITION(factor_load), 0.0, 100.0, 0, "a load factor from 0 to 100"},
    {CONDITION(resultant_addition_N_per_m), 0.0, 1e6, 0, "an addition from 0 to 1e6 N/m"},
};

#define LOAD(field) #field, offsetof(tw_load, field)
static const range load_rules[] = {
    {LOAD(from_m), -1e7, 1e7, OPTIONAL, "a place within 10,000 km"},
    {LOAD(to_m), -1e7, 1e7, OPTIONAL, "a place within 10,000 km"},
    {LOAD(vector[0]), -1e9, 1e9, 0, "a load within 1e9 N"},
    {LOAD(vector[1]), -1e9, 1e9, 0, "a load within 1e9 N"},
    {LOAD(vector[2]), -1e9, 1e9, 0, "a load within 1e9 N"},
    {LOAD(vector_to[0]), -1e9, 1e9, 0, "a load within 1e9 N/m"},
    {LOAD(vector_to[1]), -1e9, 1e9, 0, "a load within 1e9 N/m"},
    {LOAD(vector_to[2]), -1e9, 1e9, 0, "a load within 1e9 N/m"},
};

#define MARK(field) #field, offsetof(tw_mark, field)
static const range mark_rules[] = {
    {MARK(at_m), -1e7, 1e7, 0, "a place within 10,000 km"},
};

#define LIMIT(field) #field, offsetof(tw_limit, field)
static const range limit_rules[] = {
    {LIMIT(least), 0.0, 1e12, OPTIONAL, "a least value from 0"},
    {LIMIT(most), 0.0, 1e12, OPEN_LOW | OPTIONAL, "a most value above 0"},
    {LIMIT(share), 0.0, 100.0, OPEN_LOW | OPTIONAL, "a share above 0"},
    {LIMIT(from_m), -1e7, 1e7, OPTIONAL, "a station within 10,000 km"},
    {LIMIT(to_m), -1e7, 1e7, OPTIONAL, "a station within 10,000 km"},
};

#define OBSERVATION(field) #field, offsetof(tw_observation, field)
static const range observation_rules[] = {
    {OBSERVATION(station_m), -1e7, 1e7, 0, "a station within 10,000 km"},
    {OBSERVATION(elevation_m), -2e4, 2e4, 0, "an elevation within 20 km"},
    {OBSERVATION(offset_m), -1e6, 1e6, OPTIONAL, "an offset within 1,000 km"},
    {OBSERVATION(sigma_m), 0.0, 1e3, OPEN_LOW | OPTIONAL, "a standard deviation above 0, up to 1 km"},
    {OBSERVATION(temperature_degC), -273.15, 2000.0, 0, "a temperature from -273.15 to 2000 degC"},
};

#define OPTION(field) #field, offsetof(tw_options, field)
static const range option_rules[] = {
    {OPTION(gap_relative), 0.0, 1.0, OPEN_LOW, "a gap above 0, up to 1"},
    {OPTION(residual_relative), 0.0, 1.0, OPEN_LOW, "a residual above 0, up to 1"},
    {OPTION(closing_relative), 0.0, 1.0, OPEN_LOW, "a closing error above 0, up to 1"},
    {OPTION(seconds_most), 0.0, 1e9, OPEN_LOW, "a time above 0 s"},
};

static void copy_text(char *to, const char *from, size_t size)
{
    size_t length = strlen(from);
    memcpy(to, from, length < size ? length : size - 1);
}

tw_status tw_check_fail(tw_fault *fault, const char *table, size_t index, const char *field, const char *expected)
{
    memset(fault, 0, sizeof *fault);
    copy_text(fault->table, table, sizeof fault->table);
    copy_text(fault->field, field, sizeof fault->field);
    copy_text(fault->expected, expected, sizeof fault->expected);
    fault->index = index;
    return TW_ERROR_RANGE;
}

static tw_status fail(tw_fault *fault, const char *table, size_t index, const char *field, const char *expected)
{
    return tw_check_fail(fault, table, index, field, expected);
}

static int holds(const range *r, double value)
{
    if (isnan(value)) {
        return r->flags & OPTIONAL;
    }
    if (isinf(value)) {
        return value > 0.0 && (r->flags & INFINITE);
    }
    return (r->flags & OPEN_LOW ? value > r->low : value >= r->low) && value <= r->high;
}

static tw_status check_rows(const range *rules, size_t rule_count, const char *table, const void *rows, size_t size,
                            size_t count, int single, tw_fault *fault)
{
    for (size_t row = 0; row < count; row++) {
        for (size_t i = 0; i < rule_count; i++) {
            double value;
            memcpy(&value, (const char *)rows + row * size + rules[i].offset, sizeof value);
            if (!holds(&rules[i], value)) {
                return fail(fault, table, single ? TW_NONE : row, rules[i].field, rules[i].expected);
            }
        }
    }
    return TW_OK;
}

#define COUNT(rules) (sizeof(rules) / sizeof(rules)[0])
#define CHECK_ROWS(rules, table, rows, count) \
    check_rows(rules, COUNT(rules), table, rows, sizeof *(rows), count, 0, fault)

static tw_status check_numbers(const tw_project *p, tw_fault *fault)
{
    tw_status status = check_rows(line_rules, COUNT(line_rules), "line", &p->line, sizeof p->line, 1, 1, fault);
    if (status == TW_OK) {
        status = CHECK_ROWS(support_rules, "supports", p->supports, p->support_count);
    }
    if (status == TW_OK) {
        status = CHECK_ROWS(crossing_rules, "crossings", p->crossings, p->crossing_count);
    }
    if (status == TW_OK) {
        status = CHECK_ROWS(condition_rules, "conditions", p->conditions, p->condition_count);
    }
    if (status == TW_OK) {
        status = CHECK_ROWS(load_rules, "loads", p->loads, p->load_count);
    }
    if (status == TW_OK) {
        status = CHECK_ROWS(mark_rules, "marks", p->marks, p->mark_count);
    }
    if (status == TW_OK) {
        status = CHECK_ROWS(limit_rules, "limits", p->limits, p->limit_count);
    }
    return status;
}

/* A turn of nearly 180 degrees has no bisector: the axes of the support would be none. */
static tw_status check_route(const tw_project *p, size_t j, tw_fault *fault)
{
    if (!p->route_station_m) {
        return j == 0 || p->supports[j].station_m > p->supports[j - 1].station_m
                   ? TW_OK
                   : fail(fault, "supports", j, "station_m", "stations that grow from support to support");
    }
    if (j > 0 && !(p->route_station_m[j] > p->route_station_m[j - 1])) {
        return fail(fault, "supports", j, "station_m", "another place in plan than the support before it");
    }
    return tw_route_turn_cosine(p, j) > -0.9999 ? TW_OK
                                                : fail(fault, "supports", j, "station_m", "a turn of less than 179 degrees");
}

static tw_status check_support(const tw_project *p, size_t j, tw_fault *fault)
{
    const tw_support *support = &p->supports[j];
    int end = j == 0 || j + 1 == p->support_count;
    tw_status status = check_route(p, j, fault);
    if (status != TW_OK) {
        return status;
    }
    switch (support->hold) {
    case TW_HOLD_ANCHOR: return TW_OK;
    case TW_HOLD_POST:
        if (isnan(support->stiffness_along_N_per_m) || isnan(support->stiffness_across_N_per_m)) {
            return fail(fault, "supports", j, "stiffness_along_N_per_m", "both stiffnesses of a post");
        }
        return TW_OK;
    case TW_HOLD_HANGER:
        if (!(support->hanger_length_m > 0.0)) {
            return fail(fault, "supports", j, "hanger_length_m", "a hanger length above 0");
        }
        if (!(support->hanger_spread_m < 2.0 * support->hanger_length_m)) {
            return fail(fault, "supports", j, "hanger_spread_m", "a spread of less than twice the hanger's length");
        }
        return end ? fail(fault, "supports", j, "hold", "an anchor or a post at the line's ends") : TW_OK;
    case TW_HOLD_SHEAVE:
        return end ? fail(fault, "supports", j, "hold", "an anchor or a post at the line's ends") : TW_OK;
    }
    return fail(fault, "supports", j, "hold", "an anchor, a hanger, a sheave or a post");
}

static tw_status check_ground(const tw_project *p, tw_fault *fault)
{
    for (size_t k = 0; k < p->ground_count; k++) {
        if (!isfinite(p->ground_station_m[k]) || (k > 0 && !(p->ground_station_m[k] > p->ground_station_m[k - 1]))) {
            return fail(fault, "ground", k, "station_m", "finite stations that grow from point to point");
        }
        if (!(fabs(p->ground_elevation_m[k]) <= 2e4)) {
            return fail(fault, "ground", k, "elevation_m", "an elevation within 20 km");
        }
    }
    if (p->ground_count == 1) {
        return fail(fault, "ground", 0, "station_m", "at least two points, or none");
    }
    size_t last = p->ground_count - 1;
    if (p->ground_count > 0 && !(p->ground_station_m[0] <= tw_route_support_station(p, 0))) {
        return fail(fault, "ground", 0, "station_m", "a profile that begins at or before the first support");
    }
    if (p->ground_count > 0 && !(p->ground_station_m[last] >= tw_route_support_station(p, p->support_count - 1))) {
        return fail(fault, "ground", last, "station_m", "a profile that ends at or beyond the last support");
    }
    return TW_OK;
}

static tw_status check_conditions(const tw_project *p, tw_fault *fault)
{
    for (size_t c = 0; c < p->condition_count; c++) {
        const tw_condition *state = &p->conditions[c];
        if (state->load_first > p->load_count || state->load_count > p->load_count - state->load_first) {
            return fail(fault, "conditions", c, "loads", "loads that exist");
        }
        if (p->line.expansion_per_K * (state->temperature_degC - p->stringing.temperature_degC) <= -0.5) {
            return fail(fault, "conditions", c, "temperature_degC", "a thermal strain above -0.5");
        }
    }
    const char *field = NULL;
    for (size_t c = 0; c < p->condition_count; c++) {
        const char *expected = tw_check_condition_loads(p, c, &field);
        if (expected) {
            return fail(fault, "conditions", c, field, expected);
        }
    }
    for (size_t i = 0; i < p->load_count; i++) {
        const char *expected = tw_check_load(&p->loads[i], p->support_count - 1, &field);
        if (expected) {
            return fail(fault, "loads", i, field, expected);
        }
    }
    return TW_OK;
}

/* A share is of the breaking strength, or of the capacity of every support looked at. */
static tw_status check_share(const tw_project *p, size_t i, tw_fault *fault)
{
    const tw_limit *limit = &p->limits[i];
    if (limit->kind == TW_LIMIT_TENSION) {
        return !isnan(p->line.breaking_strength_N)
                   ? TW_OK
                   : fail(fault, "limits", i, "share", "a breaking strength for the share to be of");
    }
    if (limit->kind != TW_LIMIT_SUPPORT_LOAD || limit->direction == TW_DIRECTION_RESULTANT) {
        return fail(fault, "limits", i, "share", "no share, but of a tension or of a support's capacity in a direction");
    }
    for (size_t j = 0; j < p->support_count; j++) {
        if (p->limit_covers[i * p->support_count + j] && isnan(tw_line_capacity(&p->supports[j], limit->direction))) {
            return fail(fault, "limits", i, "share", "a capacity of every support that the limit looks at");
        }
    }
    return TW_OK;
}

static tw_status check_clearance(const tw_project *p, size_t i, tw_fault *fault)
{
    const tw_limit *limit = &p->limits[i];
    if (limit->crossing != TW_NONE && limit->crossing >= p->crossing_count) {
        return fail(fault, "limits", i, "crossing", "a crossing that exists");
    }
    if (limit->crossing == TW_NONE && p->ground_count == 0) {
        return fail(fault, "limits", i, "crossing", "a ground profile to keep clear of");
    }
    if (limit->from_m >= limit->to_m) {
        return fail(fault, "limits", i, "to_m", "a station beyond from");
    }
    return TW_OK;
}

static tw_status check_course(const tw_course *course, size_t index, tw_fault *fault)
{
    for (size_t i = 0; i < course->arc_count; i++) {
        const tw_arc *arc = &course->arcs[i];
        int right = isfinite(arc->at_m[0]) && arc->at_m[1] > arc->at_m[0] && isfinite(arc->at_m[1]);
        for (int k = 0; k < 6; k++) {
            right &= fabs(arc->position[k / 3][k % 3]) <= 1e8 && fabs(arc->slope[k / 3][k % 3]) <= 1e3;
            right &= i == 0 || k >= 3 || arc->position[0][k] == arc[-1].position[1][k];
        }
        if (!right) {
            return fail(fault, "courses", index, "arcs", "finite arcs along the line that join end to end");
        }
    }
    return course->arc_count > 0 ? TW_OK : fail(fault, "courses", index, "arcs", "at least one arc");
}

/* A distance to keep, and a line to keep it from wherever the limit is judged. */
static tw_status check_spacing(const tw_project *p, size_t i, tw_fault *fault)
{
    const tw_limit *limit = &p->limits[i];
    if (!(limit->least > 0.0) || !isnan(limit->most) || !isnan(limit->share)) {
        return fail(fault, "limits", i, "least", "a least distance above 0, and neither most nor share");
    }
    for (size_t c = 0; c < p->condition_count; c++) {
        size_t row = i * p->condition_count + c;
        if (p->limit_applies[row] && (p->course_count == 0 || p->limit_course[row] >= p->course_count)) {
            return fail(fault, "limits", i, "courses", "another line's course for every condition of the limit");
        }
    }
    if (limit->strung_course > p->course_count) {
        return fail(fault, "limits", i, "strung_course", "the number of a course, or none");
    }
    return TW_OK;
}

static tw_status check_limit(const tw_project *p, size_t i, tw_fault *fault)
{
    const tw_limit *limit = &p->limits[i];
    int most = !isnan(limit->most), least = !isnan(limit->least), share = !isnan(limit->share);
    if (limit->kind == TW_LIMIT_CLEARANCE || limit->kind == TW_LIMIT_UPLIFT) {
        if (!least || most || share) {
            return fail(fault, "limits", i, "least", "a least value, and neither most nor share");
        }
        return limit->kind == TW_LIMIT_CLEARANCE ? check_clearance(p, i, fault) : TW_OK;
    }
    if (limit->kind == TW_LIMIT_SPACING) {
        return check_spacing(p, i, fault);
    }
    if (limit->kind == TW_LIMIT_SAG) {
        return (most || least) && !share ? TW_OK : fail(fault, "limits", i, "most", "a most or a least value, no share");
    }
    if (least || most == share) {
        return fail(fault, "limits", i, "most", "either a most value or a share, and no least");
    }
    if (limit->kind == TW_LIMIT_CATENARY_CONSTANT && !(p->line.weight_N_per_m > 0.0)) {
        return fail(fault, "line", TW_NONE, "weight_N_per_m", "a weight above 0 for a catenary constant");
    }
    return share ? check_share(p, i, fault) : TW_OK;
}

static tw_status check_stringing_temperature(const tw_project *p, tw_fault *fault)
{
    double temperature = p->stringing.temperature_degC;
    return temperature >= -273.15 && temperature <= 2000.0
               ? TW_OK
               : fail(fault, "stringing", TW_NONE, "temperature_degC", "a temperature from -273.15 to 2000 degC");
}

static tw_status check_marks(const tw_project *p, tw_fault *fault)
{
    for (size_t i = 0; i < p->mark_count; i++) {
        if (p->marks[i].place == TW_PLACE_WHOLE) {
            return fail(fault, "marks", i, "place", "a station or a natural length");
        }
    }
    return TW_OK;
}

tw_status tw_check_pull(const tw_project *project, double pull_N, tw_fault *fault)
{
    memset(fault, 0, sizeof *fault);
    return pull_N > 0.0 && pull_N <= project->line.stiffness_N
               ? TW_OK
               : fail(fault, "stringing", TW_NONE, "value", "a tension above 0 and no more than the stiffness EA");
}

static tw_status check_stringing(const tw_project *p, tw_fault *fault)
{
    const tw_stringing *rule = &p->stringing;
    if (!(rule->tolerance >= 0.0 && rule->tolerance < 0.9)) {
        return fail(fault, "stringing", TW_NONE, "tolerance", "a tolerance from 0 to 0.9");
    }
    if (!(rule->friction >= 0.0 && rule->friction <= 1.0)) {
        return fail(fault, "stringing", TW_NONE, "friction", "a coefficient of friction from 0 to 1");
    }
    if (!(rule->end_allowance_m >= 0.0 && rule->end_allowance_m <= 1e4)) {
        return fail(fault, "stringing", TW_NONE, "end_allowance_m", "an allowance from 0 to 10 km");
    }
    if (rule->method == TW_METHOD_OVER_SHEAVES && rule->rule == TW_STRING_SPAN_LENGTHS) {
        return fail(fault, "stringing", TW_NONE, "method", "no length of each span for a line strung over sheaves");
    }
    switch (rule->rule) {
    case TW_STRING_NONE: return TW_OK;
    case TW_STRING_SPAN_LENGTHS:
        for (size_t k = 0; k + 1 < p->support_count; k++) {
            if (!(rule->lengths_m[k] > 0.0 && rule->lengths_m[k] <= 1e7)) {
                return fail(fault, "stringing", k, "lengths_m", "a natural length above 0, up to 10,000 km");
            }
        }
        return TW_OK;
    case TW_STRING_TENSION:
        if (rule->index >= p->support_count) {
            return fail(fault, "stringing", TW_NONE, "index", "a support that exists");
        }
        return tw_check_pull(p, rule->value, fault);
    case TW_STRING_SAG:
        if (rule->index + 1 >= p->support_count) {
            return fail(fault, "stringing", TW_NONE, "index", "a span that exists");
        }
        break;
    case TW_STRING_PULL: return tw_check_pull(p, rule->value, fault);
    case TW_STRING_TOTAL_LENGTH: break;
    }
    return rule->value > 0.0 && rule->value <= 1e12 ? TW_OK
                                                    : fail(fault, "stringing", TW_NONE, "value", "a value above 0");
}

tw_status tw_check_project(const tw_project *project, tw_fault *fault)
{
    tw_status status = TW_OK;
    memset(fault, 0, sizeof *fault);
    if (project->support_count < 2 || project->condition_count < 1) {
        return fail(fault, project->support_count < 2 ? "supports" : "conditions", TW_NONE, "count",
                    "at least two supports and one condition");
    }
    status = check_numbers(project, fault);
    for (size_t j = 0; status == TW_OK && j < project->support_count; j++) {
        status = check_support(project, j, fault);
    }
    if (status == TW_OK) {
        status = tw_check_material(project, fault);
    }
    if (status == TW_OK) {
        status = check_ground(project, fault);
    }
    if (status == TW_OK) {
        status = check_stringing_temperature(project, fault);
    }
    if (status == TW_OK) {
        status = check_conditions(project, fault);
    }
    if (status == TW_OK) {
        status = check_marks(project, fault);
    }
    for (size_t k = 0; status == TW_OK && k < project->crossing_count; k++) {
        if (!(project->crossings[k].from_m < project->crossings[k].to_m)) {
            status = fail(fault, "crossings", k, "to_m", "a station beyond from");
        }
    }
    for (size_t i = 0; status == TW_OK && i < project->course_count; i++) {
        status = check_course(&project->courses[i], i, fault);
    }
    for (size_t i = 0; status == TW_OK && i < project->limit_count; i++) {
        status = check_limit(project, i, fault);
    }
    return status == TW_OK ? check_stringing(project, fault) : status;
}

tw_status tw_check_observations(const tw_project *project, const tw_observation *observations, size_t count,
                                tw_fault *fault)
{
    double first = tw_route_support_station(project, 0);
    double last = tw_route_support_station(project, project->support_count - 1);
    memset(fault, 0, sizeof *fault);
    if (count < 1) {
        return fail(fault, "observations", TW_NONE, "count", "at least one point");
    }
    tw_status status = CHECK_ROWS(observation_rules, "observations", observations, count);
    for (size_t i = 0; status == TW_OK && i < count; i++) {
        const tw_observation *seen = &observations[i];
        if (!(seen->station_m >= first && seen->station_m <= last)) {
            status = fail(fault, "observations", i, "station_m", "a station from the first support to the last");
        } else if (isnan(seen->sigma_m) != isnan(observations[0].sigma_m)) {
            status = fail(fault, "observations", i, "sigma_m", "a standard deviation of every point, or of none");
        } else if (project->line.expansion_per_K * (seen->temperature_degC - project->stringing.temperature_degC) <= -0.5) {
            status = fail(fault, "observations", i, "temperature_degC", "a thermal strain above -0.5");
        }
    }
    return status;
}

tw_status tw_check_options(const tw_options *options, tw_fault *fault)
{
    memset(fault, 0, sizeof *fault);
    if (options->elements_per_span < 1 || options->elements_most < options->elements_per_span) {
        return fail(fault, "options", TW_NONE, "elements_per_span", "from 1 to elements_most");
    }
    if (options->elements_most > (1u << 24) || options->evaluations_most < 1 || options->newton_most < 1) {
        return fail(fault, "options", TW_NONE, "elements_most", "up to 16,777,216, and at least one evaluation and step");
    }
    if (options->scan_points < 4 || options->scan_points > 100000) {
        return fail(fault, "options", TW_NONE, "scan_points", "from 4 to 100,000");
    }
    return check_rows(option_rules, COUNT(option_rules), "options", options, sizeof *options, 1, 1, fault);
}
