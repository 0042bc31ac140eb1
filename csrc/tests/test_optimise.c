/* NLopt's SLSQP behind the plain interface: known optima, limits kept, and every way to be stopped or refused. */
#include "optimise.h"

#include "expect.h"

typedef struct bench {
    size_t asked, stop_after;
    double poison_objective, poison_constraint; /* added: 0, or not a number */
} bench;

/* (x - 3)^2 + (y + 1)^2 */
static double bowl(void *data, const double *x, double *gradient)
{
    bench *b = data;
    b->asked++;
    if (gradient) {
        gradient[0] = 2.0 * (x[0] - 3.0);
        gradient[1] = 2.0 * (x[1] + 1.0);
    }
    return (x[0] - 3.0) * (x[0] - 3.0) + (x[1] + 1.0) * (x[1] + 1.0) + b->poison_objective;
}

/* x^2 + y^2 <= 4 and y >= 0 */
static void disc(void *data, const double *x, double *values, double *gradient)
{
    values[0] = x[0] * x[0] + x[1] * x[1] - 4.0 + ((bench *)data)->poison_constraint;
    values[1] = -x[1];
    if (gradient) {
        gradient[0] = 2.0 * x[0];
        gradient[1] = 2.0 * x[1];
        gradient[2] = 0.0;
        gradient[3] = -1.0;
    }
}

static int finished(void *data)
{
    const bench *b = data;
    return b->asked >= b->stop_after;
}

static const double LOW[2] = {-5.0, -5.0}, HIGH[2] = {5.0, 5.0};

static tw_optimise_problem problem_of(bench *b)
{
    tw_optimise_problem problem = {
        .variables = 2,
        .constraints = 2,
        .evaluations_most = 200,
        .x_tolerance = 1e-10,
        .low = LOW,
        .high = HIGH,
        .objective = bowl,
        .constrain = disc,
        .finished = finished,
        .data = b,
    };
    b->stop_after = (size_t)-1;
    return problem;
}

static void test_constrained_optimum(void)
{
    bench b = {0};
    tw_optimise_problem problem = problem_of(&b);
    double x[2] = {-1.0, 1.0};
    size_t evaluations = 100;
    CHECK(tw_optimise_slsqp(&problem, x, &evaluations) == TW_OK);
    CHECK_NEAR(x[0], 2.0, 1e-7);
    CHECK_NEAR(x[1], 0.0, 1e-7);
    CHECK(evaluations == 100 + b.asked && b.asked < 60);
}

static void test_bounds_alone(void)
{
    bench b = {0};
    tw_optimise_problem problem = problem_of(&b);
    const double high[2] = {2.5, 5.0};
    double x[2] = {0.0, 0.0};
    size_t evaluations = 0;
    problem.constraints = 0;
    problem.high = high;
    CHECK(tw_optimise_slsqp(&problem, x, &evaluations) == TW_OK);
    CHECK_NEAR(x[0], 2.5, 1e-7);
    CHECK_NEAR(x[1], -1.0, 1e-7);
}

static void test_evaluations_are_limited(void)
{
    bench b = {0};
    tw_optimise_problem problem = problem_of(&b);
    double x[2] = {-4.0, 4.0};
    size_t evaluations = 0;
    problem.evaluations_most = 3;
    CHECK(tw_optimise_slsqp(&problem, x, &evaluations) == TW_OK);
    CHECK(evaluations <= 4);
}

static void test_finished_stops_soon(void)
{
    bench b = {0};
    tw_optimise_problem problem = problem_of(&b);
    double x[2] = {-4.0, 4.0};
    size_t evaluations = 0;
    b.stop_after = 2;
    CHECK(tw_optimise_slsqp(&problem, x, &evaluations) == TW_OK);
    CHECK(evaluations <= 3);
}

static void test_not_a_number_stops_at_once(void)
{
    for (int i = 0; i < 2; i++) {
        bench b = {0};
        tw_optimise_problem problem = problem_of(&b);
        double x[2] = {-4.0, 4.0};
        size_t evaluations = 0;
        *(i ? &b.poison_objective : &b.poison_constraint) = NAN;
        CHECK(tw_optimise_slsqp(&problem, x, &evaluations) == TW_OK);
        CHECK(evaluations <= 2);
    }
}

static void test_a_start_or_bounds_without_sense_are_refused(void)
{
    bench b = {0};
    tw_optimise_problem problem = problem_of(&b);
    double x[2] = {9.0, 0.0};
    size_t evaluations = 0;
    CHECK(tw_optimise_slsqp(&problem, x, &evaluations) == TW_ERROR_OPTIMISER);
    x[0] = 0.0;
    problem.low = HIGH;
    problem.high = LOW;
    CHECK(tw_optimise_slsqp(&problem, x, &evaluations) == TW_ERROR_OPTIMISER);
    CHECK(evaluations == 0);
}

static void test_version_is_new_enough(void)
{
    int major = 0, minor = 0, bugfix = -1;
    tw_optimise_version(&major, &minor, &bugfix);
    CHECK(100 * major + minor >= 207 && bugfix >= 0);
}

int main(void)
{
    test_constrained_optimum();
    test_bounds_alone();
    test_evaluations_are_limited();
    test_finished_stops_soon();
    test_not_a_number_stops_at_once();
    test_a_start_or_bounds_without_sense_are_refused();
    test_version_is_new_enough();
    return check_end("test_optimise");
}
