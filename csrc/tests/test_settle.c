/* Settled lines against long oracles, the bracket, and every way in which a settle must not succeed. */
#include "settle.h"

#include <string.h>

#include "expect.h"
#include "clock.h"
#include "fixture.h"

static tw_settled settle(const fixture *f, tw_section **keep)
{
    tw_settled out;
    tw_section *section = fixture_solve(f);
    memset(&out, 0, sizeof out);
    CHECK(section != NULL);
    CHECK(tw_settle(section, &f->options, &out) == out.status);
    if (keep != NULL) {
        *keep = section;
    } else {
        tw_section_free(section);
    }
    return out;
}

/* The proof as the header states it. tension: largest of the exact line. */
static void check_proof(const fixture *f, const tw_settled *out, double tension)
{
    CHECK(out->status == TW_OK);
    CHECK(out->gap_relative <= f->options.gap_relative);
    CHECK(out->gap_relative >= -1e-9);
    CHECK(out->residual_N <= 1e-9 * tension + 4e-15 * f->project.line.stiffness_N);
    CHECK_NEAR(out->gap_J, out->energy_J - out->energy_lower_J, 0.0);
    CHECK(out->elements > 0);
}

static double largest_tension(const tw_section *section)
{
    return tw_span_tension_max(section->pieces, section->piece_count);
}

/* Own 30-digit oracle I(a). */
static void test_sagging(void)
{
    fixture f;
    tw_section *section;
    fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
    tw_settled out = settle(&f, &section);
    check_proof(&f, &out, 17534.0966513);
    CHECK_REL(section->pull[0], 17368.8076566, 1e-11);
    CHECK_NEAR(out.energy_J, -31815.3228054, 34447.0 * 1e-6);
    CHECK_REL(out.energy_lower_J, -31815.3228054, 1e-10);
    CHECK(out.evaluations < 40);
    CHECK(out.elements == 64);
    f.options.gap_relative = 1e-10;
    out = settle(&f, NULL);
    check_proof(&f, &out, 17534.0966513);
    CHECK(out.elements == 512); /* 7.2e-8 at 64 elements, a sixteenth for each doubling: 1.7e-11 */
    CHECK(out.evaluations < 40);
    tw_section_free(section);
}

/* Own 30-digit oracle I(c): shorter than its span. */
static void test_taut(void)
{
    fixture f;
    tw_section *section;
    fixture_span(&f, 300.0, 0.0, 299.5, 15.97, 34.7e6);
    tw_settled out = settle(&f, &section);
    check_proof(&f, &out, 65652.9164972);
    CHECK_REL(section->pull[0], 65609.3448867, 1e-11);
    CHECK_NEAR(out.energy_J, 9869.2602108, 27300.0 * 1e-6);
    tw_section_free(section);
}

/* Own 30-digit oracle, wind in three dimensions. */
static void test_wind(void)
{
    fixture f;
    tw_section *section;
    tw_load wind = {.place = TW_PLACE_WHOLE, .vector = {0.0, 12.0, 0.0}};
    wind.from_m = wind.to_m = (double)NAN;
    fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
    fixture_load(&f, wind);
    tw_settled out = settle(&f, &section);
    check_proof(&f, &out, 21549.8801311);
    CHECK_REL(section->pull[0], 21339.4227818, 1e-11);
    CHECK(out.evaluations < 40);
    tw_section_free(section);
}

/* Own 30-digit oracle I4: a lifeline with a point load in the middle. */
static void test_lifeline(void)
{
    const double force[3] = {1000.0, 6000.0, 10000.0};
    const double tension[3] = {7601.2151318, 24251.030352, 33997.967654};
    for (int i = 0; i < 3; i++) {
        fixture f;
        tw_section *section;
        tw_load point = {.is_point = 1, .place = TW_PLACE_LENGTH, .from_m = 0.5 * 9.9969278491648};
        point.to_m = (double)NAN;
        point.vector[2] = -force[i];
        fixture_span(&f, 10.0, 0.0, 9.9969278491648, 2.5, 3.0e6);
        fixture_load(&f, point);
        tw_settled out = settle(&f, &section);
        check_proof(&f, &out, tension[i]);
        CHECK_REL(largest_tension(section), tension[i], 1e-10);
        tw_section_free(section);
    }
}

/* Posts, hangers and loads of every kind; from a mesh far too coarse as well. */
static void test_three_spans(void)
{
    for (size_t per_span = 1; per_span <= 256; per_span *= 4) {
        fixture f;
        tw_section *section;
        fixture_three_spans(&f);
        f.options.elements_per_span = per_span;
        tw_settled out = settle(&f, &section);
        check_proof(&f, &out, largest_tension(section));
        CHECK(out.evaluations < 40);
        tw_section_free(section);
    }
}

/* Very slack and very light lines, a line without weight: whatever the exact line can hang, the mesh follows. */
static void test_extremes(void)
{
    const double cases[5][5] = {/* span, rise, length, weight, stiffness */
                                {30.0, 5.0, 60.0, 15.97, 34.7e6},
                                {30.0, 5.0, 300.0, 15.97, 34.7e6},
                                {10.0, 0.0, 10.02, 1e-6, 2.5e6},
                                {100.0, 0.0, 99.9, 0.0, 34.7e6},
                                {300.0, 200.0, 361.0, 15.97, 1e4}};
    for (int i = 0; i < 5; i++) {
        fixture f;
        tw_section *section;
        const double *c = cases[i];
        fixture_span(&f, c[0], c[1], c[2], c[3], c[4]);
        tw_settled out = settle(&f, &section);
        check_proof(&f, &out, largest_tension(section));
        tw_section_free(section);
    }
}

/* A short span far from the route's origin, where the energies in route coordinates keep no more than eight digits of its
 * own: rounding must not be taken for a bracket turned over. */
static void test_far_away(void)
{
    fixture f;
    tw_section *section;
    fixture_span(&f, 1.3, 0.0, 1.2995, 6.56, 1.27e6);
    f.supports[0].station_m += 1e5;
    f.supports[1].station_m += 1e5;
    tw_settled out = settle(&f, &section);
    CHECK(out.status == TW_OK);
    CHECK(fabs(out.gap_relative) < 1e-6);
    tw_section_free(section);
}

/* Two hundred thousand nodes still come to 1e-9 of the tension, in about the time per node of two thousand. */
static void test_many_nodes(void)
{
    double seconds[2];
    for (int i = 0; i < 2; i++) {
        fixture f;
        fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
        f.options.elements_per_span = i ? 100000 : 1000;
        double start = tw_clock_now();
        tw_settled out = settle(&f, NULL);
        seconds[i] = tw_clock_now() - start;
        check_proof(&f, &out, 17534.0966513);
        CHECK_REL(out.energy_J, -31815.3228054, 1e-11);
    }
    CHECK(seconds[1] < 1000.0 * seconds[0]); /* 100 where time is linear; room for a busy machine */
}

/* Forty thousand nodes' whole work, forced by a start shape that is off. */
static void test_from_afar(void)
{
    fixture f;
    tw_settled out;
    fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
    f.options.elements_per_span = 20000;
    tw_section *section = fixture_solve(&f);
    for (size_t p = 0; p < section->piece_count; p++) {
        section->pieces[p].tension[0] *= 1.0 + 1e-5; /* closes 0.1 mm short, and is stretched to reach */
    }
    CHECK(tw_settle(section, &f.options, &out) == TW_OK);
    check_proof(&f, &out, 17534.0966513);
    CHECK(out.evaluations + out.newton_steps > 0);
    CHECK_REL(out.energy_J, -31815.3228054, 1e-11);
    tw_section_free(section);
}

/* A wrong exact line: each lie must be caught by the bracket or the hangers. */
static void test_wrong_exact_line(void)
{
    fixture f;
    tw_settled out;
    fixture_three_spans(&f);
    tw_section *section = fixture_solve(&f);
    double scale = fabs(section->energy_lower_J) * 1e-5;
    section->energy_lower_J += scale;
    CHECK(tw_settle(section, &f.options, &out) == TW_GAP_TOO_WIDE);
    CHECK(out.gap_J < 0.0);
    section->energy_lower_J -= 2.0 * scale;
    CHECK(tw_settle(section, &f.options, &out) == TW_GAP_TOO_WIDE);
    section->energy_lower_J = (double)NAN;
    CHECK(tw_settle(section, &f.options, &out) == TW_NOT_FINITE);
    tw_section_free(section);

    section = fixture_solve(&f);
    for (int i = 0; i < 3; i++) {
        section->hold_force[3 + i] *= 0.99; /* a hanger that is said to hold less than it does: its link would grow */
    }
    CHECK(tw_settle(section, &f.options, &out) != TW_OK);
    tw_section_free(section);

    section = fixture_solve(&f);
    section->clamp[5] += 0.05; /* a clamp out of place: found again, or refused */
    tw_status status = tw_settle(section, &f.options, &out);
    CHECK(status != TW_OK || fabs(out.gap_relative) <= 1e-6);
    tw_section_free(section);
}

static tw_status lie_without_work(const tw_minimise_problem *problem, double *y)
{
    for (size_t i = 0; i < problem->count; i++) {
        y[i] = 1e3;
    }
    return TW_OK;
}

/* Spoils points that it was given, asks for absurd ones, goes on after it was told to stop. */
static tw_status lie_with_work(const tw_minimise_problem *problem, double *y)
{
    double *gradient = calloc(problem->count, sizeof(double));
    for (int k = 0; k < 50 && gradient != NULL; k++) {
        for (size_t i = 0; i < problem->count; i++) {
            y[i] = k == 25 ? (double)NAN : (double)(k * 7 % 5) - 2.0;
        }
        problem->objective(problem->data, y, gradient);
    }
    free(gradient);
    return TW_OK;
}

static tw_status refuse(const tw_minimise_problem *problem, double *y)
{
    (void)problem;
    (void)y;
    return TW_ERROR_OPTIMISER;
}

/* A sheave that was held as a clamp: the bracket closes, but the tension jumps over the sheave, and that is not settled. */
static void test_clamped_sheave(void)
{
    for (int runs = 0; runs < 2; runs++) {
        fixture f;
        tw_settled out = {0};
        fixture_begin(&f, 15.97, 34.7e6);
        fixture_support(&f, TW_HOLD_ANCHOR, 0.0, 0.0, 0.0);
        fixture_support(&f, TW_HOLD_SHEAVE, 250.0, 3.0, 250.4);
        fixture_support(&f, TW_HOLD_ANCHOR, 650.0, 0.0, 401.9);
        tw_section *section = tw_section_create(&f.project);
        section->feed[1] = runs ? TW_FEED_SHEAVE : TW_FEED_NONE;
        CHECK(tw_section_load(section, 0, f.lengths_m, NULL, 0) == TW_OK);
        CHECK(tw_section_solve(section, &f.options, 0) == TW_OK);
        CHECK(tw_settle(section, &f.options, &out) == (runs ? TW_OK : TW_NOT_SETTLED));
        CHECK(out.gap_relative < 1e-6 && out.gap_relative > -1e-12);
        CHECK(runs ? out.sheave_imbalance_N < 1e-6 : out.sheave_imbalance_N > 1.0);
        tw_section_free(section);
    }
}

/* A load per run and a carriage that are not those of the shape: the bracket of the frozen loads closes all the same. */
static void test_spoilt_loads(void)
{
    for (int kind = 0; kind < 2; kind++) {
        fixture f;
        tw_settled out = {0};
        fixture_three_spans(&f);
        tw_load load = {.is_run = 1, .place = TW_PLACE_WHOLE, .from_m = NAN, .to_m = NAN, .vector = {0.0, 0.0, -20.0}};
        if (kind) {
            load = (tw_load){.is_point = 1, .carriage = TW_CARRIAGE_FREE, .carriage_span = 1, .place = TW_PLACE_WHOLE,
                             .from_m = NAN, .to_m = NAN, .vector = {0.0, 0.0, -800.0}};
        }
        fixture_load(&f, load);
        tw_section *section = tw_section_create(&f.project);
        CHECK(tw_section_hang(section, 0, f.lengths_m, NULL, 1, &f.options, 0) == TW_OK);
        CHECK(tw_settle(section, &f.options, &out) == TW_OK && out.load_mismatch <= 1e-9);
        section->run_pieces = 0;
        section->carriage_m += kind ? 3.0 : 0.0;
        CHECK(tw_section_load(section, 0, f.lengths_m, NULL, 1) == TW_OK); /* run shares of the chord; a carriage beside its place */
        CHECK(tw_section_solve(section, &f.options, 1) == TW_OK);
        CHECK(tw_settle(section, &f.options, &out) == TW_NOT_SETTLED);
        CHECK(out.gap_relative < 1e-6 && out.load_mismatch > 1e-6);
        tw_section_free(section);
    }
}

/* Without Newton's steps a lie cannot become a result; with them it does no harm. */
static void test_lying_optimiser(void)
{
    const tw_minimise_function liars[2] = {lie_without_work, lie_with_work};
    fixture f;
    tw_settled honest, out;
    fixture_three_spans(&f);
    tw_section *section = fixture_solve(&f);
    CHECK(tw_settle(section, &f.options, &honest) == TW_OK);
    for (int i = 0; i < 2; i++) {
        fixture_three_spans(&f);
        f.options.newton_most = 0;
        CHECK(tw_settle_with(section, &f.options, liars[i], &out) == TW_NOT_SETTLED);
        CHECK(out.residual_N > 1e-9 * largest_tension(section));
        CHECK(isfinite(out.energy_J) && isfinite(out.residual_N));
        f.options.newton_most = 50;
        CHECK(tw_settle_with(section, &f.options, liars[i], &out) == TW_OK);
        check_proof(&f, &out, largest_tension(section));
        CHECK_NEAR(out.energy_J, honest.energy_J, 1e-8);
    }
    CHECK(tw_settle_with(section, &f.options, refuse, &out) == TW_ERROR_OPTIMISER);
    tw_section_free(section);
}

static int poll_after(void *data)
{
    int *left = data;
    return (*left)-- <= 0;
}

/* Wherever a settle is cut off, it says so, and what stands in out is one shape with its own numbers. */
static void test_stopped(void)
{
    fixture f;
    tw_settled out;
    fixture_three_spans(&f);
    f.options.gap_relative = 1e-10;
    tw_section *section = fixture_solve(&f);
    int cancelled = 0;
    for (int polls = 0; polls < 12; polls++) {
        int left = polls;
        f.options.poll = poll_after;
        f.options.poll_data = &left;
        tw_status status = tw_settle(section, &f.options, &out);
        cancelled += status == TW_CANCELLED;
        CHECK(status == TW_CANCELLED || status == TW_OK);
        CHECK(out.status == status && out.elements > 0 && isfinite(out.energy_J) && isfinite(out.residual_N));
        CHECK_NEAR(out.gap_J, out.energy_J - out.energy_lower_J, 0.0);
    }
    CHECK(cancelled > 3);
    f.options.poll = NULL;
    f.options.seconds_most = 0.0;
    CHECK(tw_settle(section, &f.options, &out) == TW_DEADLINE);
    f.options.seconds_most = (double)NAN;
    CHECK(tw_settle(section, &f.options, &out) == TW_DEADLINE);
    tw_section_free(section);
}

static void test_limits(void)
{
    fixture f;
    tw_settled out;
    fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
    tw_section *section = fixture_solve(&f);
    f.options.newton_most = 0;
    f.options.evaluations_most = 1;
    CHECK(tw_settle(section, &f.options, &out) == TW_EVALUATION_LIMIT);
    CHECK(out.evaluations == 1);
    f.options = tw_options_default();
    f.options.elements_per_span = 4;
    f.options.elements_most = 7; /* no room to double */
    CHECK(tw_settle(section, &f.options, &out) == TW_GAP_TOO_WIDE);
    CHECK(out.elements == 4);
    CHECK(out.gap_relative > 1e-6);
    CHECK(out.residual_N <= 1e-9 * 17534.1 + 1e-7);
    f.options.elements_per_span = 64; /* more than allowed to begin with */
    CHECK(tw_settle(section, &f.options, &out) == TW_GAP_TOO_WIDE);
    CHECK(out.elements <= 7);
    f.options = tw_options_default();
    f.options.gap_relative = 1e-16; /* below rounding: ends, and does not claim it */
    f.options.elements_most = 4096;
    tw_status status = tw_settle(section, &f.options, &out);
    CHECK(status == TW_GAP_TOO_WIDE || out.gap_relative <= 1e-16);
    tw_section_free(section);
}

static void test_clock(void)
{
    tw_options options = tw_options_default();
    double now = tw_clock_now();
    CHECK(tw_clock_now() >= now);
    CHECK(tw_clock_check(&options, tw_clock_deadline(60.0)) == TW_OK);
    CHECK(tw_clock_check(&options, tw_clock_deadline(-1.0)) == TW_DEADLINE);
    int left = 0;
    options.poll = poll_after;
    options.poll_data = &left;
    CHECK(tw_clock_check(&options, tw_clock_deadline(60.0)) == TW_CANCELLED);
}

int main(void)
{
    test_sagging();
    test_taut();
    test_wind();
    test_lifeline();
    test_three_spans();
    test_extremes();
    test_far_away();
    test_many_nodes();
    test_from_afar();
    test_wrong_exact_line();
    test_clamped_sheave();
    test_spoilt_loads();
    test_lying_optimiser();
    test_stopped();
    test_limits();
    test_clock();
    return check_end("settle");
}
