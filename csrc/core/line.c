#include "line.h"

tw_options tw_options_default(void)
{
    tw_options options = {
        .gap_relative = 1e-6,
        .residual_relative = 1e-9,
        .closing_relative = 1e-13,
        .elements_per_span = 64,
        .elements_most = 1u << 21,
        .evaluations_most = 1000,
        .newton_most = 200,
        .seconds_most = 60.0,
        .scan_points = 20,
        .verify = 1,
        .poll = NULL,
        .poll_data = NULL,
    };
    return options;
}
