/* Carriages: where they rest, where they are held, and what may go wrong on the way. */
#include "cases.h"
#include "expect.h"
#include "vector.h"

static tw_load *case_carriage(tw_case *c, tw_carriage kind, tw_place place, double at_m, size_t span, double force_N)
{
    tw_load *load = case_point(c, place, at_m, 0.0, 0.0, -force_N);
    load->carriage = kind;
    load->carriage_span = span;
    return load;
}

static void two_spans(tw_case *c, double rise_m)
{
    case_begin(c);
    case_anchor(c, 0.0, 30.0);
    case_hanger(c, 250.0, 33.0, 1.5, 400.0);
    case_anchor(c, 550.0, 30.0 + rise_m);
    c->lengths_m[0] = 250.4;
    c->lengths_m[1] = hypot(300.0, rise_m) * 1.002;
    case_condition(c, 15.0);
}

static void beside(const tw_section *s, double *before, double *beyond)
{
    double t[3], u[3];
    tw_section_beside(s, s->carriage_m, t, u);
    *before = tw_norm(t);
    *beyond = tw_norm(u);
}

/* The same place from wherever it starts, with both tensions the same. */
static void test_a_free_carriage_finds_its_place(void)
{
    static const double starts[] = {251.0, 300.0, 400.0, 549.0};
    double first = 0.0;
    for (size_t i = 0; i < 4; i++) {
        tw_case c;
        double before, beyond;
        two_spans(&c, 12.0);
        case_carriage(&c, TW_CARRIAGE_FREE, TW_PLACE_STATION, starts[i], 1, 2500.0);
        case_ready(&c);
        tw_section *s = case_hung(&c, 0);
        CHECK(s != NULL);
        if (s) {
            first = i == 0 ? s->carriage_m : first;
            beside(s, &before, &beyond);
            CHECK_REL(before, beyond, 1e-10);
            CHECK_NEAR(s->carriage_m, first, 1e-7);
            CHECK(s->load_length_m[0] == s->carriage_m && s->closing_m < 1e-9);
        }
        tw_section_free(s);
    }
}

static void test_a_held_carriage_stays_at_its_station(void)
{
    tw_case c;
    double place[3], before, beyond;
    two_spans(&c, 12.0);
    case_carriage(&c, TW_CARRIAGE_HELD, TW_PLACE_STATION, 300.0, 1, 2500.0);
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK(s != NULL);
    if (s) {
        tw_section_at(s, s->carriage_m, place, NULL);
        CHECK_NEAR(place[0], 300.0, 1e-10);
        beside(s, &before, &beyond);
        CHECK(beyond < before - 10.0);
    }
    tw_section_free(s);
}

/* A heavy load ahead draws the clamp past the station: no place of the span is there any more. */
static void test_a_carriage_off_its_span_is_said(void)
{
    static const double stations[] = {250.02, 550.5};
    for (size_t i = 0; i < 2; i++) {
        tw_case c;
        two_spans(&c, 0.0);
        case_carriage(&c, TW_CARRIAGE_HELD, TW_PLACE_STATION, stations[i], 1, 2500.0);
        case_point(&c, TW_PLACE_STATION, 400.0, 0.0, 0.0, -3000.0);
        case_ready(&c);
        tw_section *section = tw_section_create(&c.project);
        tw_section *strung = tw_section_create(&c.project);
        CHECK(section && strung);
        if (section && strung) {
            CHECK(tw_section_hang(strung, TW_NONE, c.lengths_m, NULL, 0, &c.options, 0) == TW_OK);
            CHECK(tw_section_hang(section, 0, c.lengths_m, strung, 1, &c.options, 0) == TW_ERROR_PLACE);
        }
        tw_section_free(section);
        tw_section_free(strung);
    }
}

/* Taut and steep: the tension grows uphill faster than the slopes differ. */
static void test_a_carriage_that_finds_no_place_stands_at_the_lower_support(void)
{
    tw_case c;
    two_spans(&c, 0.0);
    c.supports[1].hold = TW_HOLD_ANCHOR;
    c.supports[2].elevation_m = 330.0;
    c.lengths_m[1] = hypot(300.0, 297.0) * 0.9995;
    case_carriage(&c, TW_CARRIAGE_FREE, TW_PLACE_WHOLE, NAN, 1, 800.0);
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK(s != NULL);
    if (s) {
        CHECK(s->carriage_m == s->start_m[1]);
        CHECK_REL(s->clamp_load[5], -800.0, 1e-14);
    }
    tw_section_free(s);
}

static void test_a_warm_start_is_shorter_and_says_the_same(void)
{
    tw_case c;
    two_spans(&c, 12.0);
    case_carriage(&c, TW_CARRIAGE_FREE, TW_PLACE_WHOLE, NAN, 1, 2500.0);
    tw_load *run = case_stretch(&c, TW_PLACE_WHOLE, NAN, NAN, 0.0, 0.0, -8.0);
    run->is_run = 1;
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK(s != NULL);
    if (s) {
        double place = s->carriage_m, lower = s->energy_lower_J;
        size_t steps = s->steps;
        CHECK(tw_section_hang(s, 0, c.lengths_m, NULL, 1, &c.options, 1) == TW_OK);
        CHECK(s->steps < steps);
        CHECK_NEAR(s->carriage_m, place, 1e-7);
        CHECK_REL(s->energy_lower_J, lower, 1e-11);
    }
    tw_section_free(s);
}

static int say(void *data)
{
    return *(int *)data;
}

static void test_it_can_be_cancelled_and_ends_at_a_deadline(void)
{
    tw_case c;
    two_spans(&c, 12.0);
    case_carriage(&c, TW_CARRIAGE_FREE, TW_PLACE_WHOLE, NAN, 1, 2500.0);
    case_ready(&c);
    static const tw_status ends[] = {TW_CANCELLED, TW_DEADLINE};
    tw_section *section = tw_section_create(&c.project);
    for (int i = 0; section && i < 2; i++) {
        int says = (int)ends[i];
        c.options.poll = say;
        c.options.poll_data = &says;
        CHECK(tw_section_hang(section, 0, c.lengths_m, NULL, 1, &c.options, 0) == ends[i]);
        CHECK(isfinite(section->energy_lower_J)); /* what was reached is there */
    }
    tw_section_free(section);
}

int main(void)
{
    test_a_free_carriage_finds_its_place();
    test_a_held_carriage_stays_at_its_station();
    test_a_carriage_off_its_span_is_said();
    test_a_carriage_that_finds_no_place_stands_at_the_lower_support();
    test_a_warm_start_is_shorter_and_says_the_same();
    test_it_can_be_cancelled_and_ends_at_a_deadline();
    return check_end("test_section_carriage");
}
