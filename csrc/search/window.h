/* window: the pulls that satisfy every limit.
 *
 * A row is one limit in one condition. Its utilisation u(H) at pull H is smooth between changes of its worst place.
 *     scan      every row at pulls spaced evenly in log H
 *     islands   where the worst utilisation f = max u has a local minimum above 1 between scan points, SLSQP looks for it
 *               (min t, u <= t); where it has a local maximum below 1, golden section does: so that a window or a gap
 *               narrower than the scan is not missed
 *     ends      in each cell where f crosses 1: SLSQP, min +-H with u <= 1 on the rows that change there; then the
 *               crossing is bracketed to rounding without the optimiser, and every row is judged again at the end found
 *     specify   min over H of max f on [H (1 - tol), H (1 + tol)]
 * For a shut window: the rows that exclude one another, and single changes that open it, each judged anew on every row.
 */
#ifndef TW_WINDOW_H
#define TW_WINDOW_H

#include "limit.h"
#include "line.h"
#include "optimise.h"

typedef struct tw_window_end {
    double pull_N;
    size_t limit; /* TW_NONE: no limit bounds this side within the range searched */
    size_t condition; /* of the limit, or the one that cannot be settled beyond */
    tw_verdict verdict;
    tw_status why; /* where limit is TW_NONE and pulls beyond cannot be judged: what becomes of them; else TW_OK */
} tw_window_end;

typedef struct tw_window_specify {
    double pull_N;
    double worst_utilisation; /* over the tolerance */
    double tolerance;
    tw_window_end edge[2]; /* what is worst at pull (1 - tolerance) and at pull (1 + tolerance) */
} tw_window_specify;

typedef enum tw_variable { TW_VARIABLE_PULL, TW_VARIABLE_SUPPORT_HEIGHT, TW_VARIABLE_SUPPORT_STATION } tw_variable;

typedef struct tw_window_price {
    int at_high; /* 0: low end */
    size_t limit;
    size_t condition;
    tw_variable variable;
    size_t support;         /* TW_NONE for the pull */
    double margin_per_unit; /* of the governing limit, per N or per m */
    double pull_per_unit;   /* how far the end moves, N per m; NaN for the pull */
} tw_window_price;

typedef enum tw_side { TW_SIDE_AT_LEAST, TW_SIDE_AT_MOST, TW_SIDE_NEVER } tw_side;

typedef struct tw_window_conflict {
    size_t limit;
    size_t condition;
    double needs_N; /* NaN: no pull in the range satisfies it */
    tw_side side;
} tw_window_conflict;

typedef enum tw_relax_kind { TW_RELAX_ALLOWANCE, TW_RELAX_SUPPORT_HEIGHT, TW_RELAX_SUPPORT_STATION } tw_relax_kind;

typedef struct tw_window_relax {
    tw_relax_kind kind;
    size_t limit;   /* allowance */
    size_t support; /* height, station */
    double by;      /* signed, SI */
    double to;      /* new allowed value, elevation or station */
    double pull_N;  /* then satisfies every limit */
} tw_window_relax;

enum { TW_WINDOW_PRICES_MOST = 10, TW_WINDOW_RELAX_SUPPORTS_MOST = 6 };

/* Owned by tw_window_create and _free. */
typedef struct tw_window {
    tw_status status; /* TW_OK: open; TW_SHUT; TW_CANCELLED, TW_DEADLINE: specify holds the best pull so far; or why not */
    double range_low_N, range_high_N;
    size_t interval_count;
    double *interval_N; /* [2 interval_count], ascending */
    tw_window_end low, high;
    tw_window_specify specify;
    size_t price_count;
    tw_window_price price[TW_WINDOW_PRICES_MOST];
    size_t conflict_count;
    tw_window_conflict *conflict; /* [conflict_count] */
    size_t relax_count;
    tw_window_relax *relax; /* [relax_count] */
    size_t row_count;
    size_t *row_limit;      /* [row_count] */
    size_t *row_condition;  /* [row_count] */
    size_t curve_capacity;  /* room for pulls, from the options given to create; the scan stops there */
    size_t curve_count;     /* pulls looked at */
    double *curve_pull_N;   /* [curve_count], ascending */
    double *curve;          /* [curve_count][row_count] utilisation */
    int verified;           /* 1: every answer was settled again with its bracket */
    double gap_relative;    /* widest of those brackets; NaN where none */
    size_t evaluations;     /* by the optimiser */
    size_t settles;         /* exact lines solved */
} tw_window;

tw_window *tw_window_create(const tw_project *project, const tw_options *options);
void tw_window_free(tw_window *window);

/* Returns window->status. */
tw_status tw_window_search(const tw_project *project, const tw_options *options, tw_window *window);

/* The same with another optimiser in NLopt's place: for tests. */
tw_status tw_window_search_with(const tw_project *project, const tw_options *options, tw_optimiser optimiser,
                                tw_window *window);

#endif
