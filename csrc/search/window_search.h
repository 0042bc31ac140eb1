/* window_search: what the parts of the window search share; see window.h for the method. */
#ifndef TW_WINDOW_SEARCH_H
#define TW_WINDOW_SEARCH_H

#include "trial.h"
#include "window.h"

enum { TW_WINDOW_WORKING_MOST = 24 };     /* rows that one call of the optimiser sees */
#define TW_WINDOW_UNSETTLED 1000.0        /* utilisation of a row that cannot be settled at a pull */
#define TW_WINDOW_HOLDS (1.0 + 1e-9)      /* utilisation that counts as held */

typedef struct tw_window_run {
    tw_project project;    /* the user's, with `supports` in the place of its own, so that a support can be moved */
    tw_support *supports;  /* owned */
    double *route_m;       /* [support_count] stations of `supports` where the route turns, else NULL; owned */
    tw_limit *limits;      /* owned copy, so that an allowance can be changed */
    const tw_options *options;
    tw_optimiser optimiser;
    tw_window *window;
    tw_trial *trial;       /* on `project`; owned */
    double deadline;
    tw_status stop;        /* TW_OK, or why the search has to end; latched */
    size_t curve_capacity;
    double *u;             /* [row_count] scratch; owned */
    unsigned char *masked; /* [row_count] 1: left out of f; owned */
    unsigned char *judged; /* [row_count] 1: a verdict was seen; owned */
    size_t *astray;        /* [row_count] pulls at which a place of its condition was off the line; owned */
    double best_pull_N;    /* lowest f of the user's own project so far */
    double best_f;
    int moved;             /* a support is moved: pulls tried now are not the user's */
} tw_window_run;

/* Utilisation of the worst row that is not masked, at every row's u. */
double tw_window_worst(const tw_window_run *run, const double *u, size_t *row);

/* String to a pull and judge every row into u [row_count]; returns f. A row that cannot be settled counts as 1000. */
double tw_window_try(tw_window_run *run, double pull_N, double *u);

/* Keep the first reason to end the search. */
void tw_window_latch(tw_window_run *run, tw_status status);

/* String to a pull and judge one row. */
double tw_window_row_at(tw_window_run *run, size_t row, double pull_N);

/* Judge one row at the pull strung last. */
double tw_window_row(tw_window_run *run, size_t row, tw_verdict *verdict);

/* Scan the range into window->curve, then look between its points for islands. TW_ERROR_PLACE: a place is off the line at
 * most pulls; TW_UNDECIDED: a row has nothing to judge at any. */
tw_status tw_window_scan(tw_window_run *run);

/* f at a point of the curve. */
double tw_window_curve_f(const tw_window_run *run, size_t k);

/* The curve's point with the lowest f between two pulls; TW_NONE where it has none there. */
size_t tw_window_curve_best(const tw_window_run *run, double low_N, double high_N);

/* The supports beside a verdict's place, first to last: its own, or both of its span; 0 where it has no place. */
int tw_window_beside(const tw_verdict *verdict, size_t *first, size_t *last);

/* Open stretches of pulls on the scanned curve, masked rows left out; ends bracketed to rounding.
 * interval [2 most]; returns their number. */
size_t tw_window_intervals(tw_window_run *run, double *interval, size_t most);

/* Pull between low and high with the smallest f over [pull (1 - tolerance), pull (1 + tolerance)]; that f. */
double tw_window_minimax(tw_window_run *run, double low_N, double high_N, double tolerance, double *pull_N);

/* Pull between low and high with the greatest f; that f. */
double tw_window_peak(tw_window_run *run, double low_N, double high_N, double *pull_N);

/* Boundary between a pull where the masked rows hold and one where they do not: the last pull that holds. */
double tw_window_boundary(tw_window_run *run, double holds_N, double fails_N);

/* Put a support at its home plus a move ahead in its own axes (station 1) or upwards; one that is given by height follows
 * the ground. */
void tw_window_move(tw_window_run *run, const tw_support *home, size_t support, int station, double by);

void tw_window_prices(tw_window_run *run);
/* TW_SHUT, also where time runs out once the conflict is known; or why not. */
tw_status tw_window_explain_shut(tw_window_run *run);

#endif
