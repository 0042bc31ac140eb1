#include "minimise.h"

#include <math.h>
#include <nlopt.h>

enum { STORAGE = 10, STORAGE_LARGE = 4, LARGE = 1000000, EVALUATIONS_MOST = 1000000 };

typedef struct nlopt_link {
    const tw_minimise_problem *problem;
    nlopt_opt opt;
    double datum;
    int has_datum;
} nlopt_link;

/* NLopt sees the objective less its first value, so that its own arithmetic loses nothing. */
static double nlopt_objective(unsigned count, const double *y, double *gradient, void *data)
{
    nlopt_link *link = data;
    const tw_minimise_problem *problem = link->problem;
    (void)count;
    if (gradient == NULL) { /* L-BFGS always asks for it */
        nlopt_force_stop(link->opt);
        return HUGE_VAL;
    }
    double value = problem->objective(problem->data, y, gradient);
    if (!link->has_datum) {
        link->datum = value;
        link->has_datum = 1;
    }
    if (!isfinite(value) || problem->finished(problem->data)) {
        nlopt_force_stop(link->opt);
    }
    return value - link->datum;
}

static int configure(nlopt_opt opt, nlopt_link *link)
{
    const tw_minimise_problem *problem = link->problem;
    int most = problem->evaluations_most < EVALUATIONS_MOST ? (int)problem->evaluations_most : EVALUATIONS_MOST;
    return nlopt_set_min_objective(opt, nlopt_objective, link) > 0 &&
           nlopt_set_vector_storage(opt, problem->count < LARGE ? STORAGE : STORAGE_LARGE) > 0 &&
           nlopt_set_maxeval(opt, most > 0 ? most : 1) > 0 && nlopt_set_ftol_abs(opt, problem->resolution) > 0;
}

tw_status tw_minimise_lbfgs(const tw_minimise_problem *problem, double *y)
{
    nlopt_opt opt = nlopt_create(NLOPT_LD_LBFGS, (unsigned)problem->count);
    nlopt_link link = {.problem = problem, .opt = opt};
    double least = 0.0;
    if (opt == NULL) {
        return TW_ERROR_MEMORY;
    }
    nlopt_result result = configure(opt, &link) ? nlopt_optimize(opt, y, &least) : NLOPT_INVALID_ARGS;
    nlopt_destroy(opt);
    if (result == NLOPT_OUT_OF_MEMORY) {
        return TW_ERROR_MEMORY;
    }
    return result == NLOPT_INVALID_ARGS ? TW_ERROR_OPTIMISER : TW_OK;
}
