#define _POSIX_C_SOURCE 200809L
#include "clock.h"

#include <time.h>

double tw_clock_now(void)
{
    struct timespec now;
    clock_gettime(CLOCK_MONOTONIC, &now);
    return (double)now.tv_sec + 1e-9 * (double)now.tv_nsec;
}

double tw_clock_deadline(double seconds)
{
    return tw_clock_now() + seconds;
}

tw_status tw_clock_check(const tw_options *options, double deadline)
{
    tw_status asked = tw_options_ask(options);
    return asked != TW_OK || tw_clock_now() < deadline ? asked : TW_DEADLINE;
}
