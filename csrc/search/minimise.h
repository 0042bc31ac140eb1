/* minimise: NLopt's L-BFGS behind an interface of which nothing is believed.
 *
 * The objective keeps the best point by itself, so that whatever an optimiser claims can be left unread, and another one,
 * a lying one too, can be put in its place.
 */
#ifndef TW_MINIMISE_H
#define TW_MINIMISE_H

#include <stddef.h>

#include "status.h"

/* Minimise objective(data, y, gradient) over y [count] from the y given; stop soon after finished(data) is not 0. */
typedef struct tw_minimise_problem {
    size_t count;
    size_t evaluations_most;
    double resolution; /* differences of the objective below this are rounding */
    double (*objective)(void *data, const double *y, double *gradient);
    int (*finished)(void *data);
    void *data;
} tw_minimise_problem;

/* Leaves y anywhere. Returns an error (< 0), or TW_OK, which says nothing about the point. */
typedef tw_status (*tw_minimise_function)(const tw_minimise_problem *problem, double *y);

/* Nocedal's limited-memory BFGS as NLopt has it (NLOPT_LD_LBFGS), ten vectors stored, four above a million unknowns.
 * NLopt's own result code only tells a refusal: SUCCESS and ROUNDOFF_LIMITED alike are candidates to verify. */
tw_status tw_minimise_lbfgs(const tw_minimise_problem *problem, double *y);

#endif
