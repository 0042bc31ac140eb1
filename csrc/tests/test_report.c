/* One condition in full: each state against dense sampling of the same line, marks and loads where they belong, the proof. */
#include "report.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "vector.h"

typedef struct report {
    tw_settled out;
    tw_span_state spans[CASE_SUPPORTS];
    tw_support_state supports[CASE_SUPPORTS];
    tw_mark_state marks[4], loads[CASE_LOADS];
} report;

static void make(tw_case *c)
{
    case_route(c);
    case_stretch(c, TW_PLACE_STATION, 400.0, 600.0, 0.0, 0.0, -4.0);
    case_point(c, TW_PLACE_STATION, 500.0, 50.0, -80.0, -900.0);
    case_point(c, TW_PLACE_LENGTH, 1000.0, 0.0, 0.0, 1500.0);
    case_mark(c, TW_PLACE_LENGTH, 333.0);
    case_mark(c, TW_PLACE_STATION, 900.0);
    case_ready(c);
}

static tw_status run(tw_trial *trial, size_t condition, const tw_options *options, report *r)
{
    memset(r, 0, sizeof *r);
    r->out.spans = r->spans;
    r->out.supports = r->supports;
    r->out.marks = r->marks;
    r->out.loads = r->loads;
    return tw_report_condition(trial, condition, options, &r->out);
}

static void test_every_condition_comes_with_its_proof(void)
{
    tw_case c;
    make(&c);
    tw_trial *trial = case_trial(&c, NAN);
    for (size_t k = 0; k < 4; k++) {
        report r;
        CHECK(run(trial, k, &c.options, &r) == TW_OK && r.out.status == TW_OK);
        CHECK(r.out.gap_relative <= 1e-6 && r.out.gap_relative >= -1e-9);
        CHECK(r.out.energy_lower_J == trial->sections[k]->energy_lower_J);
        CHECK(r.out.closing_m < 1e-9 && r.out.exact_steps > 0 && r.out.elements > 0);
    }
    tw_trial_free(trial);
}

/* d . chord = 0 and d . q/|q| = 1: the measure of the distance from the chord along the load. */
static void slant_measure(const tw_section *s, size_t span, double d[3])
{
    const double *a = s->clamp + 3 * span;
    double chord[3], q[3] = {0.0, 0.0, 0.0};
    for (size_t p = s->piece_first[span]; p < s->piece_first[span + 1]; p++) {
        tw_axpy(q, s->pieces[p].length_m, s->pieces[p].load, q);
        tw_axpy(q, 1.0, s->pieces[p].force, q);
    }
    tw_copy(a + 3, chord);
    tw_axpy(chord, -1.0, a, chord);
    tw_copy(q, d);
    tw_axpy(d, -tw_dot(q, chord) / tw_dot(chord, chord), chord, d);
    double size = tw_norm(q) / tw_dot(d, d);
    for (int i = 0; i < 3; i++) {
        d[i] *= size;
    }
}

/* The line seen at `SAMPLES` places of one span, in the frame of its clamps. */
enum { SAMPLES = 4000 };
static void check_span(const tw_section *s, size_t span, const tw_span_state *state)
{
    const double *a = s->clamp + 3 * span, *b = a + 3;
    double run_m = hypot(b[0] - a[0], b[1] - a[1]), ux = (b[0] - a[0]) / run_m, uy = (b[1] - a[1]) / run_m;
    double sag = 0.0, blow = 0.0, low = INFINITY, slope = 0.0, tension = 0.0, length = 0.0, before = 0.0, last[3];
    double slant = 0.0, measure[3];
    slant_measure(s, span, measure);
    for (size_t k = 0; k < span; k++) {
        before += s->length_m[k];
    }
    for (int i = 0; i <= SAMPLES; i++) {
        double r[3], t[3], d[3];
        double share = fmin(fmax((double)i / SAMPLES, 1e-12), 1.0 - 1e-12);
        tw_section_at(s, before + s->length_m[span] * share, r, t);
        double along = (r[0] - a[0]) * ux + (r[1] - a[1]) * uy;
        sag = fmax(sag, a[2] + along / run_m * (b[2] - a[2]) - r[2]);
        blow = fmax(blow, fabs((r[1] - a[1]) * ux - (r[0] - a[0]) * uy));
        low = fmin(low, r[2]);
        slope = fmax(slope, fabs(t[2]) / hypot(t[0], t[1]));
        tension = fmax(tension, tw_norm(t));
        slant = fmax(slant, tw_dot(measure, r) - tw_dot(measure, a));
        if (i > 0) {
            tw_axpy(r, -1.0, last, d);
            length += tw_norm(d);
        }
        tw_copy(r, last);
    }
    CHECK_REL(state->span_m, run_m, 1e-13);
    CHECK_NEAR(state->rise_m, b[2] - a[2], 1e-12);
    CHECK_NEAR(state->sag_m, sag, 1e-4);
    CHECK_NEAR(state->slant_sag_m, slant, 1e-4);
    CHECK_NEAR(state->blowout_m, blow, 1e-4);
    CHECK_NEAR(state->low_elevation_m, low, 1e-4);
    CHECK_NEAR(state->slope_max, slope, 1e-3);
    CHECK_REL(state->tension_max_N, tension, 1e-6);
    CHECK_NEAR(state->line_length_m, length, 1e-4);
    CHECK_REL(state->horizontal_tension_N, s->pull[3 * span] * ux + s->pull[3 * span + 1] * uy, 1e-13);
    CHECK_REL(state->tension_from_N, tw_norm(s->pull + 3 * span), 1e-13);
}

static void test_span_states_against_dense_sampling(void)
{
    tw_case c;
    make(&c);
    tw_trial *trial = case_trial(&c, 15e3);
    for (size_t k = 0; k < 4; k++) {
        report r;
        CHECK(run(trial, k, &c.options, &r) == TW_OK);
        for (size_t span = 0; span < 4; span++) {
            check_span(trial->sections[k], span, &r.spans[span]);
            CHECK(r.spans[span].natural_length_m == trial->length_m[span]);
        }
    }
    tw_trial_free(trial);
}

static void test_supports_balance_and_swing_counts_without_addition(void)
{
    tw_case c;
    report r;
    const tw_section *bare;
    make(&c);
    tw_trial *trial = case_trial(&c, NAN);
    CHECK(run(trial, 0, &c.options, &r) == TW_OK);
    CHECK(tw_trial_bare(trial, 0, &c.options, &bare) == TW_OK);
    for (size_t j = 0; j < 5; j++) {
        tw_support_state with, without;
        tw_section_support_state(trial->sections[0], j, &with);
        tw_section_support_state(bare, j, &without);
        CHECK(r.supports[j].down_N == with.down_N && r.supports[j].along_N == with.along_N);
        CHECK(c.supports[j].hold == TW_HOLD_HANGER ? r.supports[j].swing_rad == without.swing_rad
                                                   : isnan(r.supports[j].swing_rad));
    }
    CHECK(r.supports[1].swing_rad > 0.02);
    tw_trial_free(trial);
}

static void test_marks_and_point_loads_are_places_on_the_line(void)
{
    tw_case c;
    report r;
    make(&c);
    tw_trial *trial = case_trial(&c, NAN);
    CHECK(run(trial, 3, &c.options, &r) == TW_OK);
    const tw_mark_state *at[] = {&r.marks[0], &r.marks[1], &r.loads[1], &r.loads[2]};
    for (int i = 0; i < 4; i++) {
        double place[3], t[3];
        tw_section_at(trial->sections[3], at[i]->at_length_m, place, t);
        CHECK(memcmp(place, at[i]->position_m, sizeof place) == 0 && at[i]->tension_N == tw_norm(t));
    }
    CHECK(r.marks[0].at_length_m == 333.0 && r.loads[2].at_length_m == 1000.0);
    CHECK(isnan(r.loads[0].tension_N) && isnan(r.loads[0].at_length_m) && isnan(r.loads[0].position_m[2]));
    double strung[3];
    tw_section_at(trial->strung, r.marks[1].at_length_m, strung, NULL);
    CHECK_NEAR(strung[0], 900.0, 1e-9);
    tw_trial_free(trial);
}

/* Own 30-digit oracle I(a): sag 10.3551736026 m; the taut string with w per metre of span: w L^2 / (8 H), and P L / (4 H). */
static void test_small_deflection_sag_stands_beside_the_exact_one(void)
{
    tw_case c;
    report r;
    case_level(&c, 300.0);
    c.lengths_m[0] = 300.8;
    c.project.stringing.rule = TW_STRING_SPAN_LENGTHS;
    tw_trial *trial = case_trial(&c, NAN);
    CHECK(run(trial, 0, &c.options, &r) == TW_OK);
    CHECK_NEAR(r.spans[0].sag_m, 10.3551736026, 1e-9);
    CHECK_NEAR(r.spans[0].sag_station_m, 150.0, 1e-6);
    CHECK_NEAR(r.spans[0].low_station_m, 150.0, 1e-6);
    CHECK_REL(r.spans[0].small_deflection_sag_m, 15.97 * 300.0 * 300.0 / (8.0 * 17368.8076566), 1e-10);
    CHECK_REL(r.spans[0].slant_sag_m, r.spans[0].sag_m, 1e-12);
    case_point(&c, TW_PLACE_LENGTH, 150.4, 0.0, 0.0, -5000.0);
    CHECK(tw_trial_string(trial, NAN, &c.options) == TW_OK);
    tw_trial_free(trial);
    trial = case_trial(&c, NAN);
    CHECK(run(trial, 0, &c.options, &r) == TW_OK);
    double H = r.spans[0].horizontal_tension_N;
    CHECK_REL(r.spans[0].small_deflection_sag_m, (15.97 * 300.0 * 300.0 / 8.0 + 5000.0 * 300.0 / 4.0) / H, 1e-10);
    CHECK_REL(r.spans[0].small_deflection_sag_m, r.spans[0].sag_m, 5e-3);
    tw_trial_free(trial);
}

static int cancel(void *data)
{
    return --*(int *)data < 0;
}

static void test_what_fails_says_so_in_the_result(void)
{
    tw_case c;
    report r;
    make(&c);
    for (int granted = 0; granted < 12; granted++) {
        tw_trial *trial = case_trial(&c, NAN);
        int calls = granted;
        c.options.poll = cancel;
        c.options.poll_data = &calls;
        tw_status status = run(trial, 0, &c.options, &r);
        CHECK(status == TW_CANCELLED && r.out.status == TW_CANCELLED);
        c.options.poll = NULL;
        CHECK(run(trial, 0, &c.options, &r) == TW_OK);
        tw_trial_free(trial);
    }
}

static void test_a_mark_off_the_line_is_refused(void)
{
    tw_case c;
    report r;
    const double off[] = {5000.0, -1.0};
    make(&c);
    tw_trial *trial = case_trial(&c, NAN);
    for (int i = 0; i < 4; i++) {
        double good = c.marks[i / 2].at_m;
        c.marks[i / 2].at_m = off[i % 2];
        CHECK(run(trial, 0, &c.options, &r) == TW_ERROR_PLACE && r.out.status == TW_ERROR_PLACE);
        c.marks[i / 2].at_m = good;
    }
    CHECK(run(trial, 0, &c.options, &r) == TW_OK);
    tw_trial_free(trial);
}

int main(void)
{
    test_every_condition_comes_with_its_proof();
    test_span_states_against_dense_sampling();
    test_supports_balance_and_swing_counts_without_addition();
    test_marks_and_point_loads_are_places_on_the_line();
    test_small_deflection_sag_stands_beside_the_exact_one();
    test_what_fails_says_so_in_the_result();
    test_a_mark_off_the_line_is_refused();
    return check_end("test_report");
}
