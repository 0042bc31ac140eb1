/* clock: monotonic time, deadlines, and the one place that asks whether to go on.
 *
 * NLopt's own time limit follows the wall clock, which can be set back; it is not used.
 */
#ifndef TW_CLOCK_H
#define TW_CLOCK_H

#include "line.h"

/* Seconds from some fixed instant; never goes back. */
double tw_clock_now(void);

/* The instant `seconds` from now. */
double tw_clock_deadline(double seconds);

/* TW_OK: go on. TW_CANCELLED: the poll asked to stop. TW_DEADLINE: it says that the time is up, or the instant is past (a NaN
 * always is). */
tw_status tw_clock_check(const tw_options *options, double deadline);

#endif
