#include "check_load.h"

#include <math.h>

static const char *check_carriage(const tw_load *load, size_t span_count, const char **field)
{
    *field = "carriage";
    if (!load->is_point) {
        return "a carriage with a force";
    }
    if (load->carriage_span >= span_count) {
        return "a carriage on a span that exists";
    }
    *field = "from_m";
    if (load->carriage == TW_CARRIAGE_HELD) {
        return load->place == TW_PLACE_STATION && !isnan(load->from_m) ? NULL : "a held carriage with its station";
    }
    return load->place == TW_PLACE_WHOLE || !isnan(load->from_m) ? NULL : "a free carriage with or without a place";
}

const char *tw_check_load(const tw_load *load, size_t span_count, const char **field)
{
    int placed = load->place != TW_PLACE_WHOLE;
    if (load->carriage != TW_CARRIAGE_NONE) {
        return check_carriage(load, span_count, field);
    }
    *field = "is_run";
    if (load->is_point + load->is_run + load->is_ramp > 1) {
        return "one of a point load, a load per run and a ramp";
    }
    *field = "from_m";
    if (load->is_ramp && !placed) {
        return "a ramp with from and to";
    }
    return (load->is_point ? !placed || isnan(load->from_m) : placed && !(load->from_m < load->to_m))
               ? "a point load with its place, or a stretch with from before to"
               : NULL;
}

const char *tw_check_condition_loads(const tw_project *project, size_t condition, const char **field)
{
    const tw_condition *state = &project->conditions[condition];
    size_t carriages = 0;
    *field = "ice_pattern";
    for (size_t k = 0; state->ice_share && k + 1 < project->support_count; k++) {
        if (!(state->ice_share[k] >= 0.0 && state->ice_share[k] <= 1.0)) {
            return "shares of the ice from 0 to 1";
        }
    }
    *field = "loads";
    for (size_t i = 0; i < state->load_count; i++) {
        carriages += project->loads[state->load_first + i].carriage != TW_CARRIAGE_NONE;
    }
    return carriages > 1 ? "one carriage at most" : NULL;
}
