/* status: the one list of outcomes and errors, with their messages.
 *
 * An outcome says how a call that ran ended (settled, cancelled, ...); an error says why it could not run.
 * Outcomes are >= 0, errors are < 0. Every function of the core and the searches that can fail returns one.
 */
#ifndef TW_STATUS_H
#define TW_STATUS_H

#define TW_STATUS_LIST(X)                                                                                       \
    X(TW_OK, 0, "ok", "done")                                                                                   \
    X(TW_CANCELLED, 1, "cancelled", "cancelled; the best point so far is returned")                             \
    X(TW_EVALUATION_LIMIT, 2, "evaluation_limit", "stopped at the evaluation limit before the tolerance was met") \
    X(TW_DEADLINE, 3, "deadline", "stopped at the deadline before the tolerance was met")                       \
    X(TW_NOT_SETTLED, 4, "not_settled", "no equilibrium within tolerance")                                      \
    X(TW_GAP_TOO_WIDE, 5, "gap_too_wide", "the energy bracket did not close within tolerance")                  \
    X(TW_SLACK, 6, "slack", "the line carries no tension")                                                      \
    X(TW_NOT_FINITE, 7, "not_finite", "a number left the finite range")                                         \
    X(TW_SHUT, 8, "shut", "no pull satisfies every limit")                                                      \
    X(TW_OUT_OF_REACH, 9, "out_of_reach", "no natural length satisfies the stringing rule")                     \
    X(TW_UNDECIDED, 10, "undecided", "a limit finds nothing of the line to look at")                            \
    X(TW_OVER_SHEAVE, 11, "over_sheave", "a load fixed on the line would run over a sheave")                    \
    X(TW_UNDETERMINED, 14, "undetermined", "the points measured do not determine what is unknown")                \
    X(TW_ERROR_MEMORY, -1, "error_memory", "out of memory")                                                     \
    X(TW_ERROR_RANGE, -2, "error_range", "an input is outside its range")                                       \
    X(TW_ERROR_PLACE, -3, "error_place", "a place is not on the line")                                          \
    X(TW_ERROR_OPTIMISER, -4, "error_optimiser", "the optimiser refused the problem")

typedef enum tw_status {
#define TW_STATUS_ENUM(symbol, value, name, text) symbol = value,
    TW_STATUS_LIST(TW_STATUS_ENUM)
#undef TW_STATUS_ENUM
} tw_status;

/* The name, as results carry it ("gap_too_wide"), and the message; never NULL. */
const char *tw_status_name(tw_status status);
const char *tw_status_text(tw_status status);

/* Whether a search was told to end: cancelled, or at its deadline. */
int tw_status_stops(tw_status status);

#endif
