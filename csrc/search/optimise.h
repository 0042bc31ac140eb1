/* optimise: small constrained problems by NLopt's SLSQP, behind a plain interface so that a test can put a lying
 * optimiser in its place. What it returns is a candidate; every caller judges it again. */
#ifndef TW_OPTIMISE_H
#define TW_OPTIMISE_H

#include <stddef.h>

#include "status.h"

/* Minimise objective(x) subject to constraints(x) <= 0 and low <= x <= high. */
typedef struct tw_optimise_problem {
    size_t variables;
    size_t constraints;     /* up to 64 */
    size_t evaluations_most;
    double x_tolerance;     /* absolute, on every variable */
    const double *low;      /* [variables] */
    const double *high;     /* [variables] */
    double (*objective)(void *data, const double *x, double *gradient);
    void (*constrain)(void *data, const double *x, double *values, double *gradient); /* gradient [constraints][variables] */
    int (*finished)(void *data); /* not 0: stop soon */
    void *data;
} tw_optimise_problem;

/* x [variables]: start in, candidate out. evaluations: of the objective, added to. Returns an error (< 0) or anything else. */
typedef tw_status (*tw_optimiser)(const tw_optimise_problem *problem, double *x, size_t *evaluations);

/* The version of NLopt in use. */
void tw_optimise_version(int *major, int *minor, int *bugfix);

tw_status tw_optimise_slsqp(const tw_optimise_problem *problem, double *x, size_t *evaluations);

#endif
