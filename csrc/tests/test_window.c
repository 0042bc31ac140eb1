/* The pulls that satisfy every limit: against brute force, whatever the optimiser says, and however the search is stopped. */
#include "window.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "ground.h"

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

/* f of the pull specified, over its tolerance. */
static double over_tolerance(const tw_case *c, double pull, double tolerance)
{
    return fmax(case_utilisation(c, pull * (1.0 - tolerance)), case_utilisation(c, pull * (1.0 + tolerance)));
}

static void check_ends(const tw_case *c, const tw_window *w)
{
    const tw_window_end *ends[2] = {&w->low, &w->high};
    for (int i = 0; i < 2; i++) {
        CHECK(case_utilisation(c, ends[i]->pull_N) <= 1.0 + 2e-9);
        if (ends[i]->limit != TW_NONE) {
            CHECK_NEAR(ends[i]->verdict.utilisation, 1.0, 1e-8);
            CHECK(case_utilisation(c, ends[i]->pull_N * (i ? 1.0 + 1e-6 : 1.0 - 1e-6)) > 1.0);
        }
    }
    CHECK(w->low.pull_N <= w->specify.pull_N && w->specify.pull_N <= w->high.pull_N);
}

static void check_specify(const tw_case *c, const tw_window *w)
{
    double worst = over_tolerance(c, w->specify.pull_N, w->specify.tolerance);
    CHECK_NEAR(w->specify.worst_utilisation, worst, 1e-8);
    for (int i = 0; i < 2; i++) {
        const tw_window_end *edge = &w->specify.edge[i];
        CHECK_REL(edge->pull_N, w->specify.pull_N * (1.0 + (2 * i - 1) * w->specify.tolerance), 1e-14);
        CHECK_NEAR(edge->verdict.utilisation, case_utilisation(c, edge->pull_N), 1e-8);
    }
    for (int k = -5; k <= 5; k++) { /* no pull nearby is better */
        CHECK(over_tolerance(c, w->specify.pull_N * (1.0 + 0.005 * k), w->specify.tolerance) >= worst - 1e-6);
    }
}

/* Same stretches as brute force; every answer holds; ends are edges. */
static void check_open(const tw_case *c, const tw_window *w, int points)
{
    double edges[16];
    size_t count = case_stretches(c, w->range_low_N, w->range_high_N, points, edges, 8);
    CHECK(w->status == TW_OK && w->verified == c->options.verify);
    CHECK(w->interval_count == count);
    for (size_t i = 0; i < 2 * count && w->interval_count == count; i++) {
        CHECK_REL(w->interval_N[i], edges[i], 1e-8);
    }
    check_ends(c, w);
    check_specify(c, w);
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
    check_open(&c, w, 40);
    CHECK(w->row_count == 20);
    for (size_t k = 0; k < w->curve_count; k += 3) {
        double worst = 0.0;
        for (size_t r = 0; r < w->row_count; r++) {
            worst = fmax(worst, w->curve[k * w->row_count + r]);
        }
        CHECK_NEAR(worst, fmin(case_utilisation(&c, w->curve_pull_N[k]), 1000.0), 1e-7);
        CHECK(k == 0 || w->curve_pull_N[k] > w->curve_pull_N[k - 1]);
    }
    tw_window_free(w);
}

/* A price is how an end moves: search again with the support moved by 1 cm. */
static void test_prices_say_how_the_ends_move(void)
{
    tw_case c;
    make_span(&c);
    c.options.verify = 0;
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

static double along_at(const tw_case *c, double pull)
{
    const tw_section *s;
    tw_support_state state;
    tw_trial *trial = case_trial(c, pull);
    CHECK(tw_trial_section(trial, 0, &c->options, &s) == TW_OK);
    tw_section_support_state(s, 1, &state);
    tw_trial_free(trial);
    return fabs(state.along_N);
}

/* In the cold the along load between unequal spans is greatest at a middling pull; allowed a little less than that, it
 * leaves an open stretch on either side. Returns the pull at the peak; the limit allows just that. */
static double make_peak(tw_case *c)
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
    c->options.verify = 0;
    case_ready(c);
    double low = 10e3, high = 100e3;
    for (int i = 0; i < 50; i++) {
        double a = low + (high - low) / 3.0, b = high - (high - low) / 3.0;
        int rises = along_at(c, a) < along_at(c, b);
        low = rises ? a : low;
        high = rises ? high : b;
    }
    c->limits[0].most = along_at(c, low);
    return low;
}

static void test_a_gap_is_no_part_of_a_window(void)
{
    const double shares[] = {0.9, 0.999, 0.9999, 0.999999};
    const size_t scans[] = {8, 20, 40};
    tw_case peak;
    double pull = make_peak(&peak);
    for (int i = 0; i < 12; i++) {
        tw_case c = peak;
        c.limits[0].most *= shares[i / 3];
        c.options.scan_points = scans[i % 3];
        case_ready(&c);
        tw_window *w = search(&c);
        CHECK(w->interval_count == 2);
        for (size_t k = 0; k < w->interval_count; k++) {
            CHECK(pull < w->interval_N[2 * k] || pull > w->interval_N[2 * k + 1]);
        }
        check_ends(&c, w);
        tw_window_free(w);
    }
}

/* Clearance and tension a hair apart: far narrower than the distance of two scanned pulls. */
static void test_a_window_narrower_than_the_scan_step(void)
{
    const double widths[] = {1e-2, 1e-4, 1e-6};
    for (int i = 0; i < 3; i++) {
        tw_case c;
        tw_verdict v;
        make_span(&c);
        c.options.scan_points = 8;
        double low = case_edge(&c, 30e3, 5e3);
        tw_trial *trial = case_trial(&c, low * (1.0 + widths[i]));
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
    CHECK(w->status == TW_OK && w->low.limit == TW_NONE && w->high.limit == TW_NONE && w->specify.edge[0].limit == TW_NONE);
    CHECK(w->specify.worst_utilisation == 0.0 && w->row_count == 0 && w->interval_count == 1);
    CHECK(w->specify.pull_N >= w->low.pull_N && w->specify.pull_N <= w->high.pull_N);
    tw_window_free(w);
}

/* ---- shut ---- */

static void apply(tw_case *c, const tw_window_relax *relax)
{
    tw_support *support = &c->supports[relax->support == TW_NONE ? 0 : relax->support];
    tw_limit *limit = &c->limits[relax->limit == TW_NONE ? 0 : relax->limit];
    if (relax->kind == TW_RELAX_SUPPORT_HEIGHT) {
        support->elevation_m = relax->to;
    } else if (relax->kind == TW_RELAX_SUPPORT_STATION) {
        support->station_m = relax->to;
        if (!isnan(support->height_m)) {
            support->elevation_m = tw_ground_elevation(&c->project, relax->to) + support->height_m;
        }
    } else if (!isnan(limit->least) && relax->by < 0.0) {
        limit->least = relax->to;
    } else {
        limit->most = relax->to;
        limit->share = NAN;
    }
    case_ready(c);
}

/* Each relaxation opens the window by itself; its pull then holds, and less of the same would not do. */
static void check_shut(const tw_case *c, size_t relaxations)
{
    tw_window *w = search(c);
    CHECK(w->status == TW_SHUT && w->interval_count == 0 && w->verified == 0);
    CHECK(isnan(w->low.pull_N) && isnan(w->high.pull_N) && isnan(w->specify.pull_N));
    CHECK(w->relax_count >= relaxations);
    for (size_t i = 0; i < w->relax_count; i++) {
        tw_case open = *c;
        apply(&open, &w->relax[i]);
        CHECK(case_utilisation(&open, w->relax[i].pull_N) <= 1.0 + 2e-9);
        tw_window *after = search(&open);
        CHECK(after->status == TW_OK && w->relax[i].by != 0.0);
        tw_window_free(after);
        tw_window_relax less = w->relax[i];
        less.to -= 0.02 * less.by;
        open = *c;
        apply(&open, &less);
        after = search(&open);
        CHECK(after->status == TW_SHUT);
        tw_window_free(after);
    }
    tw_window_free(w);
}

static void test_two_limits_in_conflict(void)
{
    tw_case c;
    make_span(&c);
    c.options.verify = 0;
    c.limits[1].most = 18e3;
    check_shut(&c, 4);
    tw_window *w = search(&c);
    CHECK(w->conflict_count == 2);
    for (size_t i = 0; i < w->conflict_count; i++) {
        const tw_window_conflict *one = &w->conflict[i];
        tw_case alone = c;
        CHECK(one->side == (one->limit == 0 ? TW_SIDE_AT_LEAST : TW_SIDE_AT_MOST));
        alone.applies[1 - one->limit] = 0;
        case_ready(&alone);
        CHECK(case_utilisation(&alone, one->needs_N) <= 1.0 + 2e-9);
        CHECK(case_utilisation(&alone, one->needs_N * (one->limit == 0 ? 1.0 - 1e-6 : 1.0 + 1e-6)) > 1.0);
    }
    tw_window_free(w);
}

static void test_sags_that_exclude_each_other(void)
{
    tw_case c;
    make_span(&c);
    c.options.verify = 0;
    c.project.limit_count = 0;
    case_limit(&c, TW_LIMIT_SAG, 7.0, NAN);
    case_limit(&c, TW_LIMIT_SAG, NAN, 8.0);
    c.applies[0] = 1u << 1; /* iced at least 7 m, hot at most 8 m, but hot hangs lower */
    c.applies[1] = 1u;
    c.conditions[1].ice_thickness_m = 0.0;
    case_ready(&c);
    check_shut(&c, 2);
}

static void test_a_limit_that_no_pull_satisfies(void)
{
    tw_case c;
    make_span(&c);
    c.options.verify = 0;
    c.limits[0].least = 26.0; /* the lower support is 25 m up */
    c.supports[0].height_m = 25.0;
    c.project.limit_count = 1;
    case_ready(&c);
    check_shut(&c, 2);
    tw_window *w = search(&c);
    CHECK(w->conflict_count == 1 && w->conflict[0].side == TW_SIDE_NEVER && isnan(w->conflict[0].needs_N));
    tw_window_free(w);
}

/* ---- whatever the optimiser says ---- */

static tw_status says_start(const tw_optimise_problem *problem, double *x, size_t *evaluations)
{
    (void)problem;
    (void)x;
    ++*evaluations;
    return TW_OK;
}

static tw_status says_anything(const tw_optimise_problem *problem, double *x, size_t *evaluations)
{
    unsigned long long seed = 1 + ++*evaluations;
    for (size_t i = 0; i < problem->variables; i++) {
        x[i] = 3.0 * check_draw(&seed);
    }
    return TW_OK;
}

static tw_status says_high(const tw_optimise_problem *problem, double *x, size_t *evaluations)
{
    ++*evaluations;
    memcpy(x, problem->high, problem->variables * sizeof *x);
    return TW_OK;
}

static tw_status says_nothing(const tw_optimise_problem *problem, double *x, size_t *evaluations)
{
    ++*evaluations;
    for (size_t i = 0; i < problem->variables; i++) {
        x[i] = NAN;
    }
    return TW_NOT_FINITE;
}

static tw_status says_refused(const tw_optimise_problem *problem, double *x, size_t *evaluations)
{
    (void)problem;
    (void)x;
    (void)evaluations;
    return TW_ERROR_OPTIMISER;
}

static void check_same(const tw_case *c, tw_optimiser liar, double tolerance)
{
    tw_window *honest = search(c), *lied = search_with(c, liar);
    CHECK(lied->status == honest->status && lied->interval_count == honest->interval_count);
    for (size_t i = 0; i < 2 * honest->interval_count && i < 2 * lied->interval_count; i++) {
        CHECK_REL(lied->interval_N[i], honest->interval_N[i], 1e-9);
    }
    if (honest->status == TW_OK) {
        CHECK_NEAR(lied->specify.worst_utilisation, honest->specify.worst_utilisation, tolerance);
        check_ends(c, lied);
    }
    tw_window_free(honest);
    tw_window_free(lied);
}

static void test_a_lying_optimiser_changes_nothing(void)
{
    const tw_optimiser liars[] = {says_start, says_anything, says_high, says_nothing};
    for (int i = 0; i < 4; i++) {
        tw_case c;
        make_span(&c);
        c.options.verify = 0;
        check_same(&c, liars[i], 1e-8);
        c.limits[1].most = 18e3;
        check_same(&c, liars[i], 1e-8);
        if (i % 2 == 1) {
            make_route(&c);
            c.project.condition_count = 2;
            c.options.verify = 0;
            case_ready(&c);
            check_same(&c, liars[i], 1e-8);
        }
    }
}

static void test_an_optimiser_that_cannot_run_is_no_window(void)
{
    tw_case c;
    make_span(&c);
    tw_window *w = search_with(&c, says_refused);
    CHECK(w->status == TW_ERROR_OPTIMISER && w->interval_count == 0 && w->verified == 0);
    tw_window_free(w);
}

/* ---- stopped ---- */

static int count_down(void *data)
{
    return --*(long *)data < 0;
}

static void check_stopped(const tw_case *c, const tw_window *w)
{
    CHECK(w->interval_count == 0 && w->price_count == 0 && w->conflict_count == 0 && w->relax_count == 0 && !w->verified);
    CHECK(isnan(w->low.pull_N) && isnan(w->high.pull_N) && w->low.limit == TW_NONE);
    if (isnan(w->specify.pull_N)) {
        CHECK(isnan(w->specify.worst_utilisation));
        return;
    }
    tw_case free_run = *c;
    free_run.options.poll = NULL;
    case_ready(&free_run);
    CHECK_NEAR(case_utilisation(&free_run, w->specify.pull_N), w->specify.worst_utilisation, 1e-7);
    CHECK(w->specify.edge[0].limit == TW_NONE || fabs(fmax(w->specify.edge[0].verdict.utilisation, w->specify.edge[1].verdict.utilisation) - w->specify.worst_utilisation) < 1e-7);
}

/* After n calls of the poll: cancelled, with the best pull of those tried; late enough, not cancelled at all. */
static void test_cancelled_after_any_number_of_calls(int shut)
{
    int tried = 0, finished = 0;
    for (long granted = 0; !finished && granted < 1000000; granted += granted < 6 ? 1 : granted) {
        tw_case c;
        long calls = granted;
        make_span(&c);
        c.limits[1].most = shut ? 18e3 : 60e3;
        c.options.elements_per_span = 16;
        c.options.poll = count_down;
        c.options.poll_data = &calls;
        tw_window *w = search(&c);
        finished = calls >= 0;
        CHECK(w->status == (!finished ? TW_CANCELLED : shut ? TW_SHUT : TW_OK));
        if (!finished) {
            check_stopped(&c, w);
            tried += !isnan(w->specify.pull_N);
            CHECK(granted < 20 || !isnan(w->specify.pull_N));
        }
        tw_window_free(w);
    }
    CHECK(finished && tried > 3);
}

static void test_a_deadline_ends_the_search(void)
{
    const double seconds[] = {1e-9, 1e-4, 1e-3};
    for (int i = 0; i < 3; i++) {
        tw_case c;
        make_route(&c);
        c.options.seconds_most = seconds[i];
        tw_window *w = search(&c);
        CHECK(w->status == TW_DEADLINE);
        c.options.seconds_most = 60.0;
        check_stopped(&c, w);
        tw_window_free(w);
    }
}

int main(void)
{
    test_one_span_against_brute_force();
    test_a_route_with_hangers_and_posts_against_brute_force();
    test_prices_say_how_the_ends_move();
    test_a_gap_is_no_part_of_a_window();
    test_a_window_narrower_than_the_scan_step();
    test_sides_without_a_limit_are_open_ended();
    test_two_limits_in_conflict();
    test_sags_that_exclude_each_other();
    test_a_limit_that_no_pull_satisfies();
    test_a_lying_optimiser_changes_nothing();
    test_an_optimiser_that_cannot_run_is_no_window();
    test_cancelled_after_any_number_of_calls(0);
    test_cancelled_after_any_number_of_calls(1);
    test_a_deadline_ends_the_search();
    tw_window_free(NULL);
    return check_end("test_window");
}
