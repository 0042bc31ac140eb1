#include "line.h"

#include <math.h>

tw_options tw_options_default(void)
{
    tw_options options = {
        .gap_relative = 1e-6,
        .residual_relative = 1e-9,
        .closing_relative = 1e-13,
        .elements_per_span = 32,
        .elements_most = 1u << 21,
        .evaluations_most = 1000,
        .newton_most = 200,
        .seconds_most = 60.0,
        .scan_points = 16,
        .verify = 1,
        .poll = NULL,
        .poll_data = NULL,
    };
    return options;
}

tw_status tw_options_ask(const tw_options *options)
{
    int says = options->poll ? options->poll(options->poll_data) : 0;
    return says == 0 ? TW_OK : says == TW_DEADLINE ? TW_DEADLINE : TW_CANCELLED;
}

tw_condition tw_line_bare(double temperature_degC)
{
    tw_condition condition = {
        .temperature_degC = temperature_degC,
        .wind_pressure_Pa = 0.0,
        .wind_speed_m_per_s = (double)NAN,
        .wind_drag = 1.0,
        .wind_bearing_rad = (double)NAN,
        .wind_altitude_m = (double)NAN,
        .factor_weight = 1.0,
        .factor_ice = 1.0,
        .factor_wind = 1.0,
        .factor_load = 1.0,
    };
    return condition;
}

double tw_line_capacity(const tw_support *support, tw_direction direction)
{
    switch (direction) {
    case TW_DIRECTION_ALONG: return support->capacity_along_N;
    case TW_DIRECTION_ACROSS: return support->capacity_across_N;
    case TW_DIRECTION_DOWN: return support->capacity_down_N;
    case TW_DIRECTION_UP: return support->capacity_up_N;
    case TW_DIRECTION_RESULTANT: break;
    }
    return (double)NAN;
}
