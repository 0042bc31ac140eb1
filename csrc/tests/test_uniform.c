/* One uniform span: published and 30-digit answers, round trips, symmetries, and every way to be extreme. */
#include "uniform.h"

#include <string.h>

#include "expect.h"

static tw_plain_span span_of(double span, double rise, double length)
{
    tw_plain_span s = {span, rise, length, 34.7e6, 15.97, 0.0, 0.0};
    return s;
}

static tw_plain_state settled(const tw_plain_span *span)
{
    tw_plain_state state;
    memset(&state, 0, sizeof state);
    CHECK(tw_plain_span_settle(span, &state) == TW_OK);
    return state;
}

/* Own 30-digit oracles I(a), I(c), I(f), wind a). */
static void test_long_oracles(void)
{
    tw_plain_span span = span_of(300.0, 0.0, 300.8);
    tw_plain_state s = settled(&span);
    CHECK_REL(s.horizontal_tension_N, 17368.8076566, 1e-11);
    CHECK_REL(s.tension_from_N, 17534.0966513, 1e-11);
    CHECK_NEAR(s.sag_m, 10.3551736026, 1e-9);
    CHECK_NEAR(s.line_length_m, 300.951041549, 1e-9);
    span = span_of(300.0, 0.0, 299.5);
    s = settled(&span);
    CHECK_REL(s.horizontal_tension_N, 65609.3448867, 1e-11);
    CHECK_NEAR(s.sag_m, 2.73350164376, 1e-10);
    const tw_plain_span small = {10.0, 0.0, 10.02, 2.5e6, 3.0, 0.0, 0.0};
    s = settled(&small);
    CHECK_REL(s.horizontal_tension_N, 135.14387091, 1e-10);
    CHECK_NEAR(s.sag_m, 0.277751986247, 1e-11);
    span = span_of(300.0, 0.0, 300.8);
    span.across_N_per_m = 12.0;
    s = settled(&span);
    CHECK_REL(s.horizontal_tension_N, 21339.4227818, 1e-11);
    CHECK_REL(s.tension_to_N, 21549.8801311, 1e-11);
    CHECK_NEAR(s.sag_m, 8.42791045671, 1e-9);
    CHECK_NEAR(s.slant_sag_m, hypot(8.42791045671, 6.33280685539), 1e-9);
}

/* Own 30-digit oracle I5: heat from -40 to 85 K, 18.9e-6 per kelvin. There the stretch is (1 + e0)(1 + T/EA), here
 * 1 + e0 + T/EA: the same with EA/(1 + e0). */
static void test_change_of_temperature(void)
{
    static const double rows[][3] = {
        {-40.0, 19658.17428, 9.152378844}, {-20.0, 18417.28607, 9.767360729}, {20.0, 16470.07121, 10.91831312},
        {40.0, 15690.01219, 11.45910425},  {60.0, 15005.56997, 11.97964165},  {85.0, 14258.31509, 12.60464036},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        tw_plain_span span = span_of(300.0, 0.0, 300.8);
        span.strain = 18.9e-6 * rows[i][0];
        span.stiffness_N /= 1.0 + span.strain;
        tw_plain_state s = settled(&span);
        CHECK_REL(s.horizontal_tension_N, rows[i][1], 1e-9);
        CHECK_NEAR(s.sag_m, rows[i][2], 1e-8);
    }
}

/* Goenen, Electric Power Transmission System Engineering, 2nd ed., Ex. 13.1 (read in the source), feet and pounds. */
static void test_textbook_catenary(void)
{
    const double w = 4122.0 / 5280.0, c = 1600.0;
    tw_plain_span span = {500.0, 0.0, 0.0, 1e12, w, 0.0, 0.0};
    CHECK(tw_plain_span_length(&span, c * w, &span.natural_length_m) == TW_OK);
    CHECK_NEAR(span.natural_length_m, 502.03699, 1e-4);
    tw_plain_state s = settled(&span);
    CHECK_NEAR(s.sag_m, 19.571019, 1e-5);
    CHECK_NEAR(s.tension_from_N, 1264.3696, 1e-3);
    CHECK_NEAR(s.horizontal_tension_N, 1249.0909, 1e-3);
}

/* sinh and tanh of a level inextensible catenary, for lines up to 30 times as long as their span (oracle H1: u where
 * the largest tension is least). */
static void test_slack_lines_are_catenaries(void)
{
    const double shapes[] = {0.5, 1.1996786402577338, 3.0, 6.2, 7.0};
    for (int i = 0; i < 5; i++) {
        double u = shapes[i], w = 7.0, L = 40.0;
        const tw_plain_span span = {L, 0.0, L * sinh(u) / u, 1e14, w, 0.0, 0.0};
        tw_plain_state s = settled(&span);
        CHECK_REL(s.horizontal_tension_N, w * L / (2.0 * u), 1e-9);
        CHECK_REL(s.tension_from_N, w * L / (2.0 * u) * cosh(u), 1e-10);
        CHECK_REL(s.sag_m, L / (2.0 * u) * (cosh(u) - 1.0), 1e-9);
    }
}

static void draw_span(unsigned long long *seed, tw_plain_span *span)
{
    span->span_m = pow(10.0, 1.5 + 1.5 * check_draw(seed));
    span->rise_m = span->span_m * 2.0 * pow(check_draw(seed), 3.0);
    span->stiffness_N = pow(10.0, 6.0 + 2.0 * check_draw(seed));
    span->weight_N_per_m = pow(10.0, 0.5 + 1.5 * check_draw(seed));
    span->across_N_per_m = span->weight_N_per_m * check_draw(seed);
    span->strain = 2e-3 * check_draw(seed);
}

/* dH/dl <= EA/l: eight epsilons of the length move the pull by 2e-15 EA. */
static void test_pull_and_length_undo_each_other(void)
{
    unsigned long long seed = 21;
    for (int draw = 0; draw < 2000; draw++) {
        tw_plain_span span;
        draw_span(&seed, &span);
        double load = hypot(span.weight_N_per_m, span.across_N_per_m);
        double pull = load * span.span_m * pow(10.0, 0.7 + check_draw(&seed));
        pull = fmin(pull, 0.05 * span.stiffness_N);
        CHECK(tw_plain_span_length(&span, pull, &span.natural_length_m) == TW_OK);
        tw_plain_state s = settled(&span);
        CHECK_NEAR(s.horizontal_tension_N, pull, 1e-10 * pull + 2e-15 * span.stiffness_N);
        CHECK(s.line_length_m >= hypot(span.span_m, span.rise_m) * (1.0 - 1e-12));
        CHECK(s.sag_m >= 0.0 && s.slant_sag_m >= 0.0);
    }
}

static void test_swapped_ends_and_mirrored_wind_change_nothing(void)
{
    unsigned long long seed = 22;
    for (int draw = 0; draw < 500; draw++) {
        tw_plain_span span, other;
        draw_span(&seed, &span);
        span.natural_length_m = hypot(span.span_m, span.rise_m) * (1.02 + 0.019 * check_draw(&seed));
        other = span;
        other.rise_m = -span.rise_m;
        other.across_N_per_m = -span.across_N_per_m;
        tw_plain_state a = settled(&span), b = settled(&other);
        CHECK_REL(a.tension_from_N, b.tension_to_N, 1e-11);
        CHECK_REL(a.tension_to_N, b.tension_from_N, 1e-11);
        CHECK_REL(a.horizontal_tension_N, b.horizontal_tension_N, 1e-10);
        CHECK_NEAR(a.sag_m, b.sag_m, 1e-10 * span.span_m);
    }
}

/* Forces scale with the unit of force, lengths with that of length. */
static void test_units_change_nothing(void)
{
    unsigned long long seed = 23;
    for (int draw = 0; draw < 500; draw++) {
        tw_plain_span span, other;
        const double force = 7.3, metre = 0.31;
        draw_span(&seed, &span);
        span.natural_length_m = hypot(span.span_m, span.rise_m) * (1.02 + 0.019 * check_draw(&seed));
        other = span;
        other.span_m *= metre;
        other.rise_m *= metre;
        other.natural_length_m *= metre;
        other.stiffness_N *= force;
        other.weight_N_per_m *= force / metre;
        other.across_N_per_m *= force / metre;
        tw_plain_state a = settled(&span), b = settled(&other);
        CHECK_REL(b.tension_from_N, force * a.tension_from_N, 1e-10);
        CHECK_NEAR(b.sag_m, metre * a.sag_m, 1e-10 * span.span_m);
        CHECK_REL(b.line_length_m, metre * a.line_length_m, 1e-12);
    }
}

static void test_weightless_line_is_a_bar_or_slack(void)
{
    tw_plain_span span = {300.0, 40.0, 300.0, 1e6, 0.0, 0.0, 1e-3};
    tw_plain_state s = settled(&span);
    double chord = hypot(300.0, 40.0), T = 1e6 * (chord / 300.0 - 1.001);
    CHECK_REL(s.tension_from_N, T, 1e-12);
    CHECK_REL(s.horizontal_tension_N, T * 300.0 / chord, 1e-12);
    CHECK_NEAR(s.sag_m, 0.0, 1e-12);
    span.natural_length_m = 310.0;
    CHECK(tw_plain_span_settle(&span, &s) == TW_SLACK);
    CHECK(tw_plain_span_length(&span, 500.0, &span.natural_length_m) == TW_OK);
    CHECK_REL(settled(&span).horizontal_tension_N, 500.0, 1e-9);
}

/* Barely loaded, bar-tight, nearly upright, and thirty times too long: settled, and W*(T) changes from end to end by the
 * load's work over the rise (d W*(t)/ds = -q.r'). */
static void test_extreme_spans_settle(void)
{
    static const tw_plain_span spans[] = {
        {300.0, 0.0, 299.0, 34.7e6, 1e-12, 0.0, 0.0}, {300.0, 0.0, 300.0, 34.7e6, 15.97, 0.0, 0.0},
        {300.0, 0.0, 150.0, 34.7e6, 15.97, 0.0, 0.0}, {1.0, 500.0, 500.5, 34.7e6, 15.97, 0.0, 0.0},
        {1.0, -500.0, 520.0, 34.7e6, 15.97, 0.0, 0.0}, {10.0, 3.0, 300.0, 1e6, 15.97, 8.0, 0.0},
        {1e-3, 0.0, 1.1e-3, 1.0, 1e-6, 0.0, 0.0},     {1e6, 100.0, 1.2e6, 1e13, 10.0, 0.0, 0.0},
        {300.0, 0.0, 301.0, 1e3, 15.97, 0.0, 0.0},    {300.0, 10.0, 300.0, 34.7e6, -15.97, 0.0, 0.0},
    };
    for (size_t i = 0; i < sizeof spans / sizeof spans[0]; i++) {
        const tw_plain_span *span = &spans[i];
        tw_plain_state s = settled(span);
        double EA = span->stiffness_N;
        CHECK(isfinite(s.tension_from_N) && s.horizontal_tension_N > 0.0);
        double fall = -span->weight_N_per_m * span->rise_m;
        double a = s.tension_from_N, b = s.tension_to_N;
        double change = (a - b) * (1.0 + span->strain + 0.5 * (a + b) / EA);
        CHECK_NEAR(change, fall, 1e-9 * (a + b));
    }
}

static void test_bad_numbers_are_refused(void)
{
    const double bad[] = {NAN, INFINITY, -INFINITY};
    tw_plain_span span = span_of(300.0, 0.0, 300.8);
    double *fields[] = {&span.span_m,         &span.rise_m,         &span.natural_length_m, &span.stiffness_N,
                        &span.weight_N_per_m, &span.across_N_per_m, &span.strain};
    tw_plain_state s;
    for (size_t f = 0; f < 7; f++) {
        double good = *fields[f], length;
        for (int i = 0; i < 3; i++) {
            *fields[f] = bad[i];
            CHECK(tw_plain_span_settle(&span, &s) == TW_ERROR_RANGE);
            CHECK(f == 2 || tw_plain_span_length(&span, 1e3, &length) == TW_ERROR_RANGE);
        }
        if (f < 4 && f != 1) {
            *fields[f] = 0.0;
            CHECK(tw_plain_span_settle(&span, &s) == TW_ERROR_RANGE);
        }
        *fields[f] = good;
    }
    double length;
    CHECK(tw_plain_span_length(&span, 0.0, &length) == TW_ERROR_RANGE);
    CHECK(tw_plain_span_length(&span, NAN, &length) == TW_ERROR_RANGE);
    span.strain = -1.0;
    CHECK(tw_plain_span_settle(&span, &s) == TW_ERROR_RANGE);
}

static int is_whole(const tw_plain_state *s)
{
    return isfinite(s->horizontal_tension_N) && isfinite(s->tension_from_N) && isfinite(s->tension_to_N) && isfinite(s->sag_m)
           && isfinite(s->slant_sag_m) && isfinite(s->line_length_m);
}

/* Numbers at the ends of the range of doubles: an answer that is finite, or a status, never a hang. */
static void test_absurd_numbers_end_with_a_status(void)
{
    const double sizes[] = {1e-300, 1e-160, 1e-30, 1.0, 1e30, 1e160, 1e300};
    for (int a = 0; a < 7 * 7 * 7; a++) {
        for (int c = 0; c < 7; c++) {
            const tw_plain_span span = {sizes[a % 7], sizes[c], sizes[a / 7 % 7], sizes[a / 49], sizes[c], sizes[6 - c], 0.0};
            tw_plain_state s;
            double length;
            tw_status status = tw_plain_span_settle(&span, &s);
            CHECK(status != TW_OK || is_whole(&s));
            status = tw_plain_span_length(&span, sizes[c], &length);
            CHECK(status != TW_OK || isfinite(length));
        }
    }
}

int main(void)
{
    test_long_oracles();
    test_change_of_temperature();
    test_textbook_catenary();
    test_slack_lines_are_catenaries();
    test_pull_and_length_undo_each_other();
    test_swapped_ends_and_mirrored_wind_change_nothing();
    test_units_change_nothing();
    test_weightless_line_is_a_bar_or_slack();
    test_extreme_spans_settle();
    test_bad_numbers_are_refused();
    test_absurd_numbers_end_with_a_status();
    return check_end("test_uniform");
}
