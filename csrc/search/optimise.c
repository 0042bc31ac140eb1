#include "optimise.h"

#include <math.h>
#include <nlopt.h>

enum { CONSTRAINTS_MOST = 64 };

typedef struct run {
    const tw_optimise_problem *problem;
    nlopt_opt opt;
    size_t evaluations;
} run;

static void stop_if(run *r, int stop)
{
    if (stop || r->problem->finished(r->problem->data)) {
        nlopt_force_stop(r->opt);
    }
}

static double objective(unsigned n, const double *x, double *gradient, void *data)
{
    run *r = data;
    double value = r->problem->objective(r->problem->data, x, gradient);
    (void)n;
    r->evaluations++;
    stop_if(r, !isfinite(value));
    return value;
}

static void constrain(unsigned m, double *values, unsigned n, const double *x, double *gradient, void *data)
{
    run *r = data;
    int bad = 0;
    (void)n;
    r->problem->constrain(r->problem->data, x, values, gradient);
    for (unsigned i = 0; i < m; i++) {
        bad |= !isfinite(values[i]);
    }
    stop_if(r, bad);
}

void tw_optimise_version(int *major, int *minor, int *bugfix)
{
    nlopt_version(major, minor, bugfix);
}

tw_status tw_optimise_slsqp(const tw_optimise_problem *problem, double *x, size_t *evaluations)
{
    run r = {problem, nlopt_create(NLOPT_LD_SLSQP, (unsigned)problem->variables), 0};
    double value;
    double tolerance[CONSTRAINTS_MOST];
    for (int i = 0; i < CONSTRAINTS_MOST; i++) {
        tolerance[i] = 1e-9; /* without it an iterate off by rounding is thrown away */
    }
    tw_status status = TW_ERROR_OPTIMISER;
    if (!r.opt) {
        return TW_ERROR_MEMORY;
    }
    if (problem->constraints > CONSTRAINTS_MOST) {
        nlopt_destroy(r.opt);
        return TW_ERROR_OPTIMISER;
    }
    if (nlopt_set_min_objective(r.opt, objective, &r) > 0 && nlopt_set_lower_bounds(r.opt, problem->low) > 0
        && nlopt_set_upper_bounds(r.opt, problem->high) > 0
        && (problem->constraints == 0
            || nlopt_add_inequality_mconstraint(r.opt, (unsigned)problem->constraints, constrain, &r, tolerance) > 0)
        && nlopt_set_xtol_abs1(r.opt, problem->x_tolerance) > 0
        && nlopt_set_maxeval(r.opt, (int)problem->evaluations_most) > 0) {
        nlopt_result result = nlopt_optimize(r.opt, x, &value);
        status = result == NLOPT_OUT_OF_MEMORY ? TW_ERROR_MEMORY
                 : result == NLOPT_INVALID_ARGS ? TW_ERROR_OPTIMISER
                                                : TW_OK;
    }
    nlopt_destroy(r.opt);
    *evaluations += r.evaluations;
    return status;
}
