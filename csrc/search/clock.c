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
    if (options->poll != NULL && options->poll(options->poll_data) != 0) {
        return TW_CANCELLED;
    }
    return tw_clock_now() < deadline ? TW_OK : TW_DEADLINE;
}
