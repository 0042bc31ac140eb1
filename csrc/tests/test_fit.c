/* Fits: what hangs exactly is found again, noise moves the answer as the covariances say, and what cannot be known is said. */
#include "fit.h"

#include <string.h>

#include "cases.h"
#include "check.h"
#include "expect.h"
#include "stringing.h"

enum { POINTS_MOST = 400 };

typedef struct survey {
    tw_observation seen[POINTS_MOST];
    size_t count;
} survey;

/* Points of the line on lengths_m, bare at a temperature: by a trial of its own, `per_span` points in each span. */
static void measure(const tw_case *c, const double *lengths_m, double temperature_degC, int per_span, survey *out)
{
    tw_project project = c->project;
    const tw_condition bare = tw_line_bare(temperature_degC);
    const tw_section *section = NULL;
    project.conditions = &bare;
    project.condition_count = 1;
    project.load_count = 0;
    project.stringing.rule = TW_STRING_SPAN_LENGTHS;
    project.stringing.lengths_m = lengths_m;
    tw_trial *trial = tw_trial_create(&project);
    CHECK(tw_trial_string(trial, (double)NAN, &c->options) == TW_OK);
    CHECK(tw_trial_section(trial, 0, &c->options, &section) == TW_OK);
    for (size_t k = 0; k + 1 < project.support_count; k++) {
        double from = project.supports[k].station_m, to = project.supports[k + 1].station_m, s, r[3];
        for (int i = 1; i <= per_span; i++) {
            double station = from + (to - from) * i / (per_span + 1.0);
            CHECK(tw_section_at_station(section, station, &s) == TW_OK);
            tw_section_at(section, s, r, NULL);
            const tw_observation one = {station, r[2], NAN, NAN, temperature_degC};
            out->seen[out->count++] = one;
        }
    }
    tw_trial_free(trial);
}

static tw_fit *fitted(const tw_case *c, const survey *points, tw_fit_unknown unknown)
{
    tw_fault fault;
    CHECK(tw_check_observations(&c->project, points->seen, points->count, &fault) == TW_OK);
    tw_fit *fit = tw_fit_create(&c->project, points->seen, points->count, unknown);
    CHECK(tw_fit_search(&c->project, points->seen, points->count, unknown, &c->options, fit) == fit->status);
    return fit;
}

static void test_a_pull_is_found_again(void)
{
    const double pulls[] = {1e3, 2e3, 20e3, 90e3, 1e6};
    const double temperatures[] = {-30.0, 15.0, 70.0};
    double lengths[CASE_SUPPORTS], work[7 * CASE_SUPPORTS];
    for (int i = 0; i < 15; i++) {
        tw_case c;
        survey points = {.count = 0};
        case_level(&c, 300.0);
        c.supports[1].elevation_m += i;
        CHECK(tw_stringing_at_pull(&c.project, pulls[i % 5], lengths, work) == TW_OK);
        measure(&c, lengths, temperatures[i / 5], 4, &points);
        tw_fit *fit = fitted(&c, &points, TW_FIT_PULL);
        CHECK(fit->status == TW_OK && fit->row_count == 4);
        /* The elevations carry 1e-13 of the chord; the pull moves by e where they move by the sag or more. */
        CHECK_REL(fit->value[0], pulls[i % 5], 1e-8);
        CHECK_REL(fit->length_m[0], lengths[0], 1e-11);
        CHECK(fit->chi2 < 1e-16 && fit->step_relative < 1e-8);
        tw_fit_free(fit);
    }
}

static void test_a_whole_route_is_found_again_at_several_temperatures(void)
{
    tw_case c;
    survey points = {.count = 0};
    double lengths[CASE_SUPPORTS], work[7 * CASE_SUPPORTS];
    case_route(&c);
    CHECK(tw_stringing_at_pull(&c.project, 23e3, lengths, work) == TW_OK);
    measure(&c, lengths, -10.0, 2, &points);
    measure(&c, lengths, 35.0, 3, &points);
    tw_fit *fit = fitted(&c, &points, TW_FIT_PULL);
    CHECK(fit->status == TW_OK);
    CHECK_REL(fit->value[0], 23e3, 1e-8);
    tw_fit_free(fit);
}

/* In whatever order they come, points lie in the spans that a search from the first support on finds. */
static void test_points_find_their_spans(void)
{
    static const double shares[] = {0.5, 0.0011, 0.0009, 0.9995, 0.0, 0.9989, 0.25};
    tw_case c;
    survey points = {.count = 0};
    case_route(&c);
    size_t spans = c.project.support_count - 1;
    for (size_t i = 0; i < 7 * spans; i++) {
        size_t k = (5 * i + 2) % spans;
        double from = c.supports[k].station_m, to = c.supports[k + 1].station_m;
        if (k != 1) { /* no point at all in the second span */
            const tw_observation seen = {from + shares[i / spans] * (to - from), 0.0, NAN, NAN, 15.0};
            points.seen[points.count++] = seen;
        }
    }
    tw_fit *fit = tw_fit_create(&c.project, points.seen, points.count, TW_FIT_LENGTHS);
    for (size_t i = 0; i < points.count; i++) {
        size_t expected = TW_NONE;
        for (size_t k = 0; k < spans; k++) {
            double from = c.supports[k].station_m, to = c.supports[k + 1].station_m, edge = TW_FIT_INNER * (to - from);
            expected = points.seen[i].station_m > from + edge && points.seen[i].station_m < to - edge ? k : expected;
        }
        CHECK(fit->place[i] == expected);
    }
    CHECK(fit->unknown_count == spans - 1 && fit->span[0] == 0 && fit->span[1] == 2);
    tw_fit_free(fit);
}

static void test_lengths_are_found_again(void)
{
    tw_case c;
    survey points = {.count = 0};
    case_route(&c);
    measure(&c, c.lengths_m, 40.0, 3, &points);
    tw_fit *fit = fitted(&c, &points, TW_FIT_LENGTHS);
    CHECK(fit->status == TW_OK && fit->unknown_count == 4);
    for (size_t k = 0; k < 4; k++) {
        CHECK(fit->span[k] == k && isnan(fit->length_rate[k]));
        CHECK_REL(fit->value[k], c.lengths_m[k], 1e-10);
        CHECK(fit->value[k] == fit->length_m[k]);
    }
    tw_fit_free(fit);
}

/* The span left out takes the length of the one pull that fits best; strung to one pull, that is its own. */
static void test_a_span_without_points_takes_the_pull_of_the_others(void)
{
    tw_case c;
    survey points = {.count = 0}, some = {.count = 0};
    double lengths[CASE_SUPPORTS], work[7 * CASE_SUPPORTS];
    case_route(&c);
    CHECK(tw_stringing_at_pull(&c.project, 23e3, lengths, work) == TW_OK);
    measure(&c, lengths, 15.0, 3, &points);
    for (size_t i = 0; i < points.count; i++) {
        if (points.seen[i].station_m < 750.0 || points.seen[i].station_m > 1050.0) {
            some.seen[some.count++] = points.seen[i];
        }
    }
    tw_fit *fit = fitted(&c, &some, TW_FIT_LENGTHS);
    CHECK(fit->status == TW_OK && fit->unknown_count == 3 && fit->span[2] == 3);
    for (size_t k = 0; k < 4; k++) {
        CHECK_REL(fit->length_m[k], lengths[k], 1e-9);
    }
    tw_fit_free(fit);
}

/* On one level span the sag is near to w L^2 / (8 H): d ln H = - d sag / sag, so s(H) = H s / (sag sqrt(n)) with n points
 * amid the span; the line's own stretch and depth move that by (sag / L)^2 times ten or so. */
static void test_covariances_are_those_of_the_parabola(void)
{
    tw_case c;
    survey points = {.count = 0};
    const double length = 300.8, sag = 10.3551736026, pull = 17368.8076566; /* own oracle I(a) */
    case_level(&c, 300.0);
    measure(&c, &length, 15.0, 1, &points);
    for (int i = 1; i < 4; i++) {
        points.seen[i] = points.seen[0];
    }
    points.count = 4;
    points.seen[0].elevation_m += 0.01;
    points.seen[1].elevation_m -= 0.01;
    tw_fit *fit = fitted(&c, &points, TW_FIT_PULL);
    CHECK(fit->status == TW_OK);
    CHECK_REL(fit->value[0], pull, 1e-8);
    CHECK_REL(fit->chi2, 2e-4, 1e-6);
    CHECK_REL(sqrt(fit->covariance[0]), pull / (sag * 2.0), 0.02);
    for (int i = 0; i < 4; i++) {
        CHECK_NEAR(fit->leverage[i], 0.25, 1e-9);
        CHECK(isnan(fit->residual_m[4 + i]));
    }
    CHECK_NEAR(fit->residual_m[0], 0.01, 1e-9);
    double unit = fit->covariance[0];
    tw_fit_free(fit);
    for (int i = 0; i < 4; i++) {
        points.seen[i].sigma_m = 0.02; /* the same sigma everywhere: nothing moves, squares are counted in sigmas */
    }
    fit = fitted(&c, &points, TW_FIT_PULL);
    CHECK_REL(fit->chi2, 0.5, 1e-6);
    CHECK_REL(fit->covariance[0], unit * 4e-4, 1e-7);
    CHECK_NEAR(fit->residual_m[0], 0.01, 1e-9);
    tw_fit_free(fit);
}

/* A point a hundred times as sure decides. */
static void test_sigmas_weigh(void)
{
    tw_case c;
    survey points = {.count = 0};
    const double length = 300.8;
    case_level(&c, 300.0);
    measure(&c, &length, 15.0, 3, &points);
    points.seen[0].elevation_m += 0.5;
    points.seen[0].sigma_m = 10.0;
    points.seen[1].sigma_m = points.seen[2].sigma_m = 0.01;
    tw_fit *fit = fitted(&c, &points, TW_FIT_PULL);
    CHECK(fit->status == TW_OK);
    CHECK_REL(fit->value[0], 17368.8076566, 1e-6); /* 0.5 m in 10 m of sag, by the weight of 1e-6 */
    CHECK(fit->leverage[0] < 1e-6);
    tw_fit_free(fit);
}

/* The gradient of what is returned is nothing, by sums of this test's own. */
static void test_noisy_points_end_at_the_least(void)
{
    tw_case c;
    survey points = {.count = 0};
    unsigned long long state = 88172645463325252ull;
    case_route(&c);
    measure(&c, c.lengths_m, 10.0, 6, &points);
    for (size_t i = 0; i < points.count; i++) {
        points.seen[i].elevation_m += 0.1 * check_draw(&state);
        points.seen[i].offset_m = NAN;
    }
    tw_fit *fit = fitted(&c, &points, TW_FIT_LENGTHS);
    CHECK(fit->status == TW_OK && fit->chi2 > 1e-3);
    for (size_t k = 0; k < 4; k++) {
        double squares[2];
        for (int side = 0; side < 2; side++) {
            double lengths[4], sum = 0.0;
            survey moved = {.count = 0};
            memcpy(lengths, fit->length_m, sizeof lengths);
            lengths[k] += side ? 1e-3 : -1e-3;
            measure(&c, lengths, 10.0, 6, &moved);
            for (size_t i = 0; i < points.count; i++) {
                double off = points.seen[i].elevation_m - moved.seen[i].elevation_m;
                sum += off * off;
            }
            squares[side] = sum;
        }
        CHECK(squares[0] > fit->chi2 && squares[1] > fit->chi2);
        /* A parabola's least by three points, within a twentieth of the standard error: the rest is curvature. */
        double least = 0.5e-3 * (squares[0] - squares[1]) / (squares[0] - 2.0 * fit->chi2 + squares[1]);
        CHECK(fabs(least) < 0.05 * sqrt(fit->covariance[5 * k] * fit->chi2 / 20.0));
    }
    tw_fit_free(fit);
}

static void test_offsets_count_where_the_route_bends(void)
{
    tw_case c;
    survey points = {.count = 0};
    case_level(&c, 300.0);
    const double length = 300.8;
    measure(&c, &length, 15.0, 2, &points);
    points.seen[1].offset_m = 0.03; /* a straight line hangs in its plane: it stays a residual */
    tw_fit *fit = fitted(&c, &points, TW_FIT_PULL);
    CHECK(fit->status == TW_OK && fit->row_count == 3);
    CHECK(isnan(fit->residual_m[2]));
    CHECK_NEAR(fit->residual_m[3], 0.03, 1e-12);
    CHECK_NEAR(fit->leverage[3], 0.0, 1e-12);
    CHECK_REL(fit->chi2, 9e-4, 1e-9);
    tw_fit_free(fit);
}

static void test_what_the_points_do_not_show_is_said(void)
{
    tw_case c;
    survey at_ends = {.count = 2}, points = {.count = 0};
    case_level(&c, 300.0);
    for (int i = 0; i < 2; i++) {
        const tw_observation one = {300.0 * i, c.supports[i].elevation_m, NAN, NAN, 15.0};
        at_ends.seen[i] = one;
    }
    tw_fit *fit = fitted(&c, &at_ends, TW_FIT_PULL);
    CHECK(fit->status == TW_UNDETERMINED && !fit->has_values);
    tw_fit_free(fit);
    fit = fitted(&c, &at_ends, TW_FIT_LENGTHS);
    CHECK(fit->status == TW_UNDETERMINED && fit->unknown_count == 0);
    tw_fit_free(fit);
    c.project.line.weight_N_per_m = 0.0; /* a straight line whatever the pull */
    const tw_observation amid = {150.0, c.supports[0].elevation_m, NAN, NAN, 15.0};
    points.seen[points.count++] = amid;
    fit = fitted(&c, &points, TW_FIT_PULL);
    CHECK(fit->status == TW_UNDETERMINED);
    tw_fit_free(fit);
}

static int cancel(void *data)
{
    int *left = data;
    return (*left)-- <= 0;
}

static void test_a_search_that_is_stopped_keeps_its_best(void)
{
    tw_case c;
    survey points = {.count = 0};
    int left = 60;
    case_route(&c);
    measure(&c, c.lengths_m, 10.0, 3, &points);
    c.options.poll = cancel;
    c.options.poll_data = &left;
    tw_fit *fit = fitted(&c, &points, TW_FIT_LENGTHS);
    CHECK(fit->status == TW_CANCELLED && fit->has_values && fit->length_m[0] > 240.0 && isnan(fit->leverage[0]));
    tw_fit_free(fit);
    left = 0;
    fit = fitted(&c, &points, TW_FIT_LENGTHS);
    CHECK(fit->status == TW_CANCELLED && !fit->has_values);
    tw_fit_free(fit);
    c.options.poll = NULL;
    c.options.seconds_most = 1e-9;
    fit = fitted(&c, &points, TW_FIT_PULL);
    CHECK(fit->status == TW_DEADLINE);
    tw_fit_free(fit);
    c.options.seconds_most = 60.0;
    c.options.evaluations_most = 2;
    points.seen[0].elevation_m += 1.0;
    fit = fitted(&c, &points, TW_FIT_LENGTHS);
    CHECK(fit->status == TW_EVALUATION_LIMIT && fit->has_values && fit->chi2 > 0.0);
    tw_fit_free(fit);
    tw_fit_free(NULL);
}

static void expect_fault(const tw_case *c, const survey *points, size_t index, const char *field)
{
    tw_fault fault;
    CHECK(tw_check_observations(&c->project, points->seen, points->count, &fault) == TW_ERROR_RANGE);
    CHECK(strcmp(fault.table, "observations") == 0 && fault.index == index && strcmp(fault.field, field) == 0);
}

static void test_observations_have_ranges(void)
{
    tw_case c;
    survey good = {.count = 0};
    const double length = 300.8;
    case_level(&c, 300.0);
    measure(&c, &length, 15.0, 3, &good);
    survey bad = good;
    bad.count = 0;
    expect_fault(&c, &bad, TW_NONE, "count");
    bad = good;
    bad.seen[2].station_m = 300.01;
    expect_fault(&c, &bad, 2, "station_m");
    bad = good;
    bad.seen[1].elevation_m = NAN;
    expect_fault(&c, &bad, 1, "elevation_m");
    bad = good;
    bad.seen[1].sigma_m = 0.02;
    expect_fault(&c, &bad, 1, "sigma_m");
    bad = good;
    bad.seen[0].sigma_m = 0.0;
    expect_fault(&c, &bad, 0, "sigma_m");
    bad = good;
    bad.seen[0].temperature_degC = -300.0;
    expect_fault(&c, &bad, 0, "temperature_degC");
    bad = good;
    c.project.line.expansion_per_K = 1e-3;
    bad.seen[0].temperature_degC = -200.0;
    c.project.stringing.temperature_degC = 400.0;
    expect_fault(&c, &bad, 0, "temperature_degC");
}

int main(void)
{
    test_a_pull_is_found_again();
    test_a_whole_route_is_found_again_at_several_temperatures();
    test_points_find_their_spans();
    test_lengths_are_found_again();
    test_a_span_without_points_takes_the_pull_of_the_others();
    test_covariances_are_those_of_the_parabola();
    test_sigmas_weigh();
    test_noisy_points_end_at_the_least();
    test_offsets_count_where_the_route_bends();
    test_what_the_points_do_not_show_is_said();
    test_a_search_that_is_stopped_keeps_its_best();
    test_observations_have_ranges();
    return check_end("test_fit");
}
