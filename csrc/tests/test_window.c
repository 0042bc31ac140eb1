/* The pulls that satisfy every limit: against brute force, whatever the optimiser says, and however the search is stopped. */
#include "window.h"

#include <string.h>

#include "cases.h"
#include "check.h"
#include "ground.h"
#include "stringing.h"

/* 300 m over flat ground 25 m below, hot and iced: clearance 12 m at the hottest, 60 kN when iced. */
static void make_span(tw_case *c)
{
    case_begin(c);
    case_anchor(c, 0.0, 0.0);
    case_anchor(c, 300.0, 5.0);
    case_ground(c, -500.0, -25.0);
    case_ground(c, 900.0, -25.0);
    case_condition(c, 80.0);
    case_condition(c, -10.0)->ice_thickness_m = 0.015;
    case_limit(c, TW_LIMIT_CLEARANCE, 12.0, NAN);
    case_limit(c, TW_LIMIT_TENSION, NAN, 60e3);
    c->project.stringing.rule = TW_STRING_NONE;
    case_ready(c);
}

static void make_route(tw_case *c)
{
    case_route(c);
    case_ground(c, 0.0, 20.0);
    case_ground(c, 600.0, 22.0);
    case_ground(c, 1500.0, 25.0);
    case_limit(c, TW_LIMIT_CLEARANCE, 7.0, NAN);
    case_limit(c, TW_LIMIT_TENSION, NAN, 45e3);
    case_limit(c, TW_LIMIT_SWING, NAN, 1.2);
    case_limit(c, TW_LIMIT_UPLIFT, 0.0, NAN);
    case_limit(c, TW_LIMIT_SUPPORT_LOAD, NAN, 50e3);
    c->covers[3] = 1u << 1 | 1u << 3;
    c->project.stringing.tolerance = 0.03;
    case_ready(c);
}

/* Worst utilisation at a pull from a cold start, every limit in every condition: no part of the search. */
static double brute(const tw_case *c, double pull)
{
    const tw_project *p = &c->project;
    tw_trial *trial = case_trial(c, pull);
    double worst = trial ? 0.0 : 1000.0;
    for (size_t i = 0; trial && i < p->limit_count * p->condition_count; i++) {
        tw_verdict v;
        if (p->limit_applies[i]) {
            tw_status status = tw_trial_judge(trial, i / p->condition_count, i % p->condition_count, &c->options, &v);
            double u = status != TW_OK ? 1000.0 : v.judged ? v.utilisation : 0.0;
            worst = fmax(worst, isfinite(u) ? u : 1000.0);
        }
    }
    tw_trial_free(trial);
    return worst;
}

static double bisect(const tw_case *c, double holds, double fails)
{
    for (int i = 0; i < 60; i++) {
        double middle = 0.5 * (holds + fails);
        *(brute(c, middle) <= 1.0 ? &holds : &fails) = middle;
    }
    return holds;
}

/* Open stretches by a scan of many points and bisection; edges [2 most]. */
static size_t scan(const tw_case *c, double low, double high, int points, double *edges, size_t most)
{
    size_t count = 0;
    double before = low;
    int inside = brute(c, low) <= 1.0;
    edges[0] = low;
    for (int k = 1; k <= points; k++) {
        double pull = low * pow(high / low, (double)k / points);
        int holds = brute(c, pull) <= 1.0;
        if (holds && !inside && count < most) {
            edges[2 * count] = bisect(c, pull, before);
        } else if (!holds && inside && count < most) {
            edges[2 * count++ + 1] = bisect(c, before, pull);
        }
        inside = holds;
        before = pull;
    }
    if (inside && count < most) {
        edges[2 * count++ + 1] = high;
    }
    return count;
}

static tw_window *search_with(const tw_case *c, tw_optimiser optimiser)
{
    tw_window *w = tw_window_create(&c->project, &c->options);
    tw_status status = optimiser ? tw_window_search_with(&c->project, &c->options, optimiser, w)
                                 : tw_window_search(&c->project, &c->options, w);
    CHECK(status == w->status);
    return w;
}

static tw_window *search(const tw_case *c)
{
    return search_with(c, NULL);
}

/* Same stretches as brute force; every answer holds; ends are edges and named rightly. */
static void check_open(const tw_case *c, const tw_window *w, int points)
{
    double edges[16];
    size_t count = scan(c, w->range_low_N, w->range_high_N, points, edges, 8);
    CHECK(w->status == TW_OK && w->verified == c->options.verify);
    CHECK(w->interval_count == count);
    for (size_t i = 0; i < 2 * count && w->interval_count == count; i++) {
        CHECK_REL(w->interval_N[i], edges[i], 1e-8);
    }
    CHECK(brute(c, w->low.pull_N) <= 1.0 + 2e-9 && brute(c, w->high.pull_N) <= 1.0 + 2e-9);
    CHECK(w->low.pull_N <= w->specify.pull_N && w->specify.pull_N <= w->high.pull_N);
    const tw_window_end *ends[2] = {&w->low, &w->high};
    for (int i = 0; i < 2; i++) {
        if (ends[i]->limit != TW_NONE) {
            CHECK_NEAR(ends[i]->verdict.utilisation, 1.0, 1e-8);
            CHECK(brute(c, ends[i]->pull_N * (i ? 1.0 + 1e-6 : 1.0 - 1e-6)) > 1.0);
        }
    }
    double tolerance = w->specify.tolerance;
    double worst = fmax(brute(c, w->specify.pull_N * (1.0 - tolerance)), brute(c, w->specify.pull_N * (1.0 + tolerance)));
    CHECK_NEAR(w->specify.worst_utilisation, worst, 1e-8);
    for (int k = -20; k <= 20; k++) { /* no pull nearby is better */
        double pull = w->specify.pull_N * (1.0 + 0.002 * k);
        CHECK(fmax(brute(c, pull * (1.0 - tolerance)), brute(c, pull * (1.0 + tolerance))) >= worst - 1e-6);
    }
}

static void test_one_span_against_brute_force(void)
{
    tw_case c;
    make_span(&c);
    tw_window *w = search(&c);
    check_open(&c, w, 100);
    CHECK(w->low.limit == 0 && w->low.condition == 0 && w->high.limit == 1 && w->high.condition == 1);
    CHECK(w->gap_relative <= 1e-6 && w->evaluations > 0 && w->settles > 0);
    CHECK(w->conflict_count == 0 && w->relax_count == 0);
    tw_window_free(w);
}

static void test_a_route_with_hangers_and_posts_against_brute_force(void)
{
    tw_case c;
    make_route(&c);
    tw_window *w = search(&c);
    check_open(&c, w, 60);
    CHECK(w->row_count == 20);
    tw_window_free(w);
}

static void test_the_curve_is_what_the_limits_say(void)
{
    tw_case c;
    make_route(&c);
    tw_window *w = search(&c);
    for (size_t k = 0; k < w->curve_count; k += 3) {
        double worst = 0.0;
        for (size_t r = 0; r < w->row_count; r++) {
            worst = fmax(worst, w->curve[k * w->row_count + r]);
        }
        CHECK_NEAR(worst, fmin(brute(&c, w->curve_pull_N[k]), 1000.0), 1e-7);
        CHECK(k == 0 || w->curve_pull_N[k] > w->curve_pull_N[k - 1]);
    }
    tw_window_free(w);
}

/* A price is how an end moves: search again with the support moved by 1 cm. */
static void test_prices_say_how_the_ends_move(void)
{
    tw_case c;
    make_span(&c);
    tw_window *w = search(&c);
    CHECK(w->price_count == 10);
    for (size_t i = 0; i < w->price_count; i++) {
        const tw_window_price *p = &w->price[i];
        double end = p->at_high ? w->high.pull_N : w->low.pull_N;
        CHECK(p->limit == (p->at_high ? w->high.limit : w->low.limit));
        if (p->variable == TW_VARIABLE_PULL) {
            CHECK(p->at_high ? p->margin_per_unit < 0.0 : p->margin_per_unit > 0.0);
            continue;
        }
        tw_case moved = c;
        tw_support *support = &moved.supports[p->support];
        *(p->variable == TW_VARIABLE_SUPPORT_HEIGHT ? &support->elevation_m : &support->station_m) += 0.01;
        case_ready(&moved);
        tw_window *after = search(&moved);
        double shift = ((p->at_high ? after->high.pull_N : after->low.pull_N) - end) / 0.01;
        CHECK_NEAR(shift, p->pull_per_unit, 0.01 * fabs(p->pull_per_unit) + 0.05);
        tw_window_free(after);
    }
    tw_window_free(w);
}

/* A sag that must lie between two values in different conditions, and a gap in it: the along load on a post between
 * unequal spans is greatest at a middling pull. */
static void make_gap(tw_case *c, double share_of_peak)
{
    case_begin(c);
    case_anchor(c, 0.0, 0.0);
    case_anchor(c, 120.0, 0.0);
    case_anchor(c, 520.0, 0.0);
    case_condition(c, -40.0);
    case_limit(c, TW_LIMIT_SUPPORT_LOAD, NAN, 1.0)->direction = TW_DIRECTION_ALONG;
    c->covers[0] = 2u;
    case_limit(c, TW_LIMIT_TENSION, NAN, 150e3);
    case_limit(c, TW_LIMIT_SAG, NAN, 60.0);
    case_ready(c);
    double peak = 0.0;
    for (double pull = 5e3; pull < 150e3; pull *= 1.001) {
        tw_trial *trial = case_trial(c, pull);
        const tw_section *s;
        tw_support_state state;
        CHECK(tw_trial_section(trial, 0, &c->options, &s) == TW_OK);
        tw_section_support_state(s, 1, &state);
        peak = fmax(peak, fabs(state.along_N));
        tw_trial_free(trial);
    }
    c->limits[0].most = share_of_peak * peak;
}

static void test_two_open_stretches(double share_of_peak)
{
    tw_case c;
    make_gap(&c, share_of_peak);
    tw_window *w = search(&c);
    CHECK(w->interval_count == 2);
    check_open(&c, w, 800);
    tw_window_free(w);
}

/* Clearance and tension a hair apart: far narrower than the distance of two scanned pulls. */
static void test_a_window_narrower_than_the_scan_step(void)
{
    const double widths[] = {1e-2, 1e-4, 1e-6};
    for (int i = 0; i < 3; i++) {
        tw_case c;
        make_span(&c);
        c.options.scan_points = 8;
        c.limits[1].most = 1e9;
        tw_window *wide = search(&c);
        double low = wide->low.pull_N;
        tw_window_free(wide);
        tw_trial *trial = case_trial(&c, low * (1.0 + widths[i]));
        tw_verdict v;
        CHECK(tw_trial_judge(trial, 1, 1, &c.options, &v) == TW_OK);
        tw_trial_free(trial);
        c.limits[1].most = v.value;
        tw_window *w = search(&c);
        CHECK(w->status == TW_OK && w->interval_count == 1);
        CHECK_REL(w->low.pull_N, low, 1e-8);
        CHECK_REL(w->high.pull_N, low * (1.0 + widths[i]), 1e-8);
        tw_window_free(w);
    }
}

static void test_sides_without_a_limit_are_open_ended(void)
{
    tw_case c;
    make_span(&c);
    c.project.limit_count = 1;
    case_ready(&c);
    tw_window *w = search(&c);
    CHECK(w->status == TW_OK && w->low.limit == 0 && w->high.limit == TW_NONE && w->high.condition == TW_NONE);
    CHECK_REL(w->high.pull_N, w->range_high_N, 1e-12);
    tw_window_free(w);
    c.limits[0] = c.limits[1];
    w = search(&c);
    CHECK(w->status == TW_OK && w->low.limit == TW_NONE && w->high.limit == 0);
    tw_window_free(w);
    c.project.limit_count = 0;
    w = search(&c);
    CHECK(w->status == TW_OK && w->low.limit == TW_NONE && w->high.limit == TW_NONE && w->specify.limit == TW_NONE);
    CHECK(w->specify.worst_utilisation == 0.0 && w->row_count == 0 && w->interval_count == 1);
    CHECK(w->specify.pull_N >= w->low.pull_N && w->specify.pull_N <= w->high.pull_N);
    tw_window_free(w);
}

int main(void)
{
    test_one_span_against_brute_force();
    test_a_route_with_hangers_and_posts_against_brute_force();
    test_the_curve_is_what_the_limits_say();
    test_prices_say_how_the_ends_move();
    test_two_open_stretches(0.9);
    test_two_open_stretches(0.9999);
    test_a_window_narrower_than_the_scan_step();
    test_sides_without_a_limit_are_open_ended();
    return check_end("test_window");
}
