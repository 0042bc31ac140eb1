/* Natural length that moves between spans: the oracle of three spans, tensions beside every kind of feed, energy stationary
 * in every moved length, and lines whose loads would run over a sheave. */
#include "section_feed.h"

#include <string.h>

#include "expect.h"
#include "fixture.h"
#include "vector.h"

/* 250, 400 and 300 m level over two sheaves, 953 m in all, strung anyhow: own oracle I of the checks, 30 digits. */
static void three_level_spans(fixture *f, double first, double second)
{
    fixture_begin(f, 15.97, 34.7e6);
    fixture_support(f, TW_HOLD_ANCHOR, 0.0, 0.0, 0.0);
    fixture_support(f, TW_HOLD_SHEAVE, 250.0, 0.0, first);
    fixture_support(f, TW_HOLD_SHEAVE, 650.0, 0.0, second);
    fixture_support(f, TW_HOLD_ANCHOR, 950.0, 0.0, 953.0 - first - second);
}

/* Uneven, with wind and a point load, a fixed sheave, a swinging one, a hanger, a post and a sheave in a row. */
static void uneven_spans(fixture *f)
{
    tw_load wind = {.place = TW_PLACE_WHOLE, .vector = {0.0, 6.0, -4.0}};
    tw_load point = {.is_point = 1, .place = TW_PLACE_LENGTH, .from_m = 400.0, .vector = {200.0, 100.0, -900.0}};
    tw_support *s;
    wind.from_m = wind.to_m = point.to_m = (double)NAN;
    fixture_begin(f, 15.97, 34.7e6);
    fixture_support(f, TW_HOLD_ANCHOR, 0.0, 100.0, 0.0);
    fixture_support(f, TW_HOLD_SHEAVE, 250.0, 130.0, 252.5);
    s = fixture_support(f, TW_HOLD_SHEAVE, 650.0, 110.0, 401.5);
    s->hanger_length_m = 1.5;
    s->hanger_weight_N = 300.0;
    s = fixture_support(f, TW_HOLD_HANGER, 900.0, 118.0, 250.9);
    s->hanger_length_m = 2.0;
    s->hanger_weight_N = 300.0;
    fixture_support(f, TW_HOLD_SHEAVE, 1100.0, 121.0, 200.3);
    s = fixture_support(f, TW_HOLD_POST, 1300.0, 125.0, 200.2);
    s->stiffness_along_N_per_m = s->stiffness_across_N_per_m = 2e6;
    fixture_support(f, TW_HOLD_ANCHOR, 1500.0, 120.0, 200.3);
    fixture_load(f, wind);
    fixture_load(f, point);
}

static double tension_behind(const tw_section *section, size_t j)
{
    const tw_piece *piece = &section->pieces[section->piece_first[j] - 1];
    double t[3];
    tw_piece_tension(piece, piece->length_m, t);
    return tw_norm(t);
}

static double total_of(const tw_section *section)
{
    double total = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        total += section->length_m[k];
    }
    return total;
}

static void expect_oracle(const tw_section *section)
{
    static const double length[] = {250.374481229, 401.904131087, 300.721387685};
    static const double horizontal[] = {18119.9944082, 17945.254677, 18071.1125259};
    static const double sag[] = {6.88888103116, 17.8363161315, 9.95133397143};
    for (size_t k = 0; k < 3; k++) {
        tw_span_state state;
        tw_section_span_state(section, k, &state);
        CHECK_REL(state.tension_from_N, 18229.9522451, 5e-12); /* as many digits as the oracle has */
        CHECK_REL(state.tension_to_N, 18229.9522451, 5e-12);
        CHECK_REL(state.horizontal_tension_N, horizontal[k], 5e-12);
        CHECK_REL(state.natural_length_m, length[k], 5e-12);
        CHECK_REL(state.sag_m, sag[k], 5e-12);
    }
}

static void test_three_level_spans(void)
{
    static const double strung[][2] = {{250.374481229, 401.904131087}, {250.0, 403.0}, {262.0, 391.0}, {230.0, 403.0}};
    for (size_t i = 0; i < sizeof strung / sizeof strung[0]; i++) {
        fixture f;
        three_level_spans(&f, strung[i][0], strung[i][1]);
        tw_section *section = fixture_solve(&f);
        CHECK(section != NULL);
        if (section) {
            expect_oracle(section);
            CHECK(tw_section_imbalance(section) <= 1e-12 * 18230.0);
            CHECK_NEAR(section->start_m[3], 953.0, 1e-12);
            CHECK_NEAR(section->start_m[1], section->length_m[0], 0.0);
        }
        tw_section_free(section);
    }
}

/* The same bytes from the lengths that a solve left, and next to no work. */
static void test_solving_again_changes_nothing(void)
{
    fixture f;
    three_level_spans(&f, 250.0, 403.0);
    tw_section *section = fixture_solve(&f);
    CHECK(section != NULL);
    double before = total_of(section), tension = tw_norm(section->pull);
    size_t steps = section->steps;
    for (int i = 0; i < 5; i++) {
        CHECK(tw_section_solve(section, &f.options, 1) == TW_OK);
        CHECK(section->steps <= steps && section->steps <= 4);
        CHECK_NEAR(total_of(section), before, 2e-13);
        CHECK_NEAR(tw_norm(section->pull), tension, 4e-9); /* 2e-13 m of rounding at 1e4 N/m, twice */
    }
    CHECK(tw_section_load(section, 0, f.lengths_m, NULL, 0) == TW_OK);
    CHECK(tw_section_solve(section, &f.options, 1) == TW_OK); /* warm, from the moved lengths that stand */
    CHECK(section->steps <= 4);
    expect_oracle(section);
    tw_section_free(section);
}

static void test_mixed_holds(void)
{
    static const size_t sheaves[] = {1, 2, 4};
    fixture f;
    uneven_spans(&f);
    tw_section *section = fixture_solve(&f);
    CHECK(section != NULL);
    if (!section) {
        return;
    }
    for (size_t i = 0; i < 3; i++) {
        size_t j = sheaves[i];
        CHECK_REL(tension_behind(section, j), tw_norm(section->pull + 3 * j), 1e-13);
        CHECK(fabs(section->moved_m[j]) > 1e-3); /* there was something to move */
    }
    CHECK(section->moved_m[3] == 0.0 && section->moved_m[5] == 0.0); /* clamped */
    CHECK_NEAR(section->length_m[0] + section->length_m[1] + section->length_m[2], 252.5 + 401.5 + 250.9, 1e-12);
    CHECK_NEAR(section->length_m[3] + section->length_m[4], 200.3 + 200.2, 1e-12);
    CHECK_NEAR(section->length_m[5], 200.3, 0.0);
    CHECK(section->closing_m < 1e-10);
    CHECK_NEAR(section->load_length_m[1], 400.0, 0.0); /* fixed on the line */
    CHECK_NEAR(tw_norm(section->clamp + 6) > 0.0 ? hypot(hypot(section->clamp[6] - 650.0, section->clamp[7]),
                                                         section->clamp[8] - 110.0) : 0.0, 1.5, 1e-12);
    tw_section_free(section);
}

/* Newton's steps are exact: from a little off, the misses are squared. Two swinging sheaves beside one another, one of them
 * light, so that every term of the step counts. */
static void test_steps_are_newtons(void)
{
    fixture f;
    uneven_spans(&f);
    f.supports[1].hanger_length_m = 2.5;
    tw_section *section = fixture_solve(&f);
    CHECK(section != NULL);
    for (double off = 1e-2; section && off > 1e-4; off *= 0.1) {
        double lengths[7];
        memcpy(lengths, f.lengths_m, sizeof lengths);
        lengths[0] -= off;
        lengths[1] += 2.0 * off;
        lengths[2] -= off;
        CHECK(tw_section_load(section, 0, lengths, NULL, 0) == TW_OK);
        CHECK(tw_section_solve(section, &f.options, 1) == TW_OK);
        CHECK(section->steps <= 5); /* leave out a term of the step, and it takes six or more */
    }
    tw_section_free(section);
}

/* D at given natural lengths, nothing moving. */
static double energy_at(const fixture *f, const double *length_m)
{
    tw_section *section = tw_section_create(&f->project);
    double energy = (double)NAN;
    for (size_t j = 0; section && j <= section->span_count; j++) {
        section->feed[j] = TW_FEED_NONE;
    }
    if (section && tw_section_load(section, 0, length_m, NULL, 0) == TW_OK
        && tw_section_solve(section, &f->options, 0) == TW_OK) {
        energy = section->energy_lower_J;
    }
    tw_section_free(section);
    return energy;
}

/* Total energy is stationary, and least, under a transfer of length across each sheave: its central difference over h is
 * third order, h^2 T'/..., and rounding of two energies of some 1e5 J; a transfer off balance shows 1e-3 of T h. */
static void test_energy_is_stationary(void)
{
    const double h = 2e-4;
    fixture f;
    three_level_spans(&f, 250.0, 403.0);
    f.supports[1].elevation_m = 20.0;
    f.supports[2].elevation_m = 9.0;
    tw_section *section = fixture_solve(&f);
    CHECK(section != NULL);
    double T = tw_norm(section->pull + 3);
    for (size_t j = 1; j < 3; j++) {
        double length[3], up, down, rest = energy_at(&f, section->length_m);
        memcpy(length, section->length_m, sizeof length);
        length[j - 1] -= h;
        length[j] += h;
        up = energy_at(&f, length);
        length[j - 1] += 2.0 * h;
        length[j] -= 2.0 * h;
        down = energy_at(&f, length);
        CHECK_NEAR((up - down) / (2.0 * h), 0.0, 1e-6 * T);
        CHECK(up > rest && down > rest);
    }
    tw_section_free(section);
}

/* Every feed: the winch keeps its pull, plumb hangers carry nothing along, friction makes the ratio e^(mu theta). */
static void expect_feeds(const tw_section *section, double mu)
{
    CHECK_REL(hypot(section->pull[0], section->pull[1]), 18000.0, 1e-13);
    for (size_t j = 1; j < 3; j++) {
        const double *ahead = section->pull + 3 * j;
        const tw_piece *piece = &section->pieces[section->piece_first[j] - 1];
        double behind[3];
        tw_piece_tension(piece, piece->length_m, behind);
        double cosine = tw_dot(ahead, behind) / (tw_norm(ahead) * tw_norm(behind));
        if (section->feed[j] == TW_FEED_PLUMB) {
            CHECK_NEAR(section->hold_force[3 * j], 0.0, 1e-9);
        } else {
            CHECK_REL(tw_norm(ahead) / tw_norm(behind), exp(section->drag * mu * acos(cosine)), 1e-12);
        }
    }
}

static void test_winch_plumb_and_friction(void)
{
    static const tw_feed kinds[] = {TW_FEED_PLUMB, TW_FEED_SHEAVE};
    for (int i = 0; i < 8; i++) {
        fixture f;
        three_level_spans(&f, 250.5, 402.0);
        f.supports[1].elevation_m = 25.0;
        f.supports[2].elevation_m = 12.0;
        for (size_t j = 1; j < 3; j++) {
            f.supports[j].hold = i < 4 ? TW_HOLD_HANGER : TW_HOLD_SHEAVE;
            f.supports[j].hanger_length_m = i % 4 == 3 ? 0.3 : 1.8;
            f.supports[j].sheave_friction = i < 4 ? 0.0 : 0.04;
        }
        f.project.stringing.friction = i < 4 ? 0.04 : 0.5; /* a sheave's own comes first */
        tw_section *section = tw_section_create(&f.project);
        section->feed[0] = TW_FEED_WINCH;
        section->winch_N[0] = 18000.0;
        section->feed[1] = section->feed[2] = kinds[i % 4 > 0];
        section->drag = i % 4 == 2 ? 1 : i % 4 == 3 ? -1 : 0;
        CHECK(tw_section_load(section, 0, f.lengths_m, NULL, 0) == TW_OK);
        CHECK(tw_section_solve(section, &f.options, 0) == TW_OK);
        expect_feeds(section, 0.04);
        CHECK(section->steps < 60);
        tw_section_free(section);
    }
}

/* A load that begins a little behind a sheave over which more than that runs ahead. */
static void test_a_load_would_run_over(void)
{
    tw_load heavy = {.place = TW_PLACE_LENGTH, .from_m = 249.9, .to_m = 250.2, .vector = {0.0, 0.0, -1.0}};
    tw_load ahead = {.place = TW_PLACE_LENGTH, .from_m = 300.0, .to_m = 600.0, .vector = {0.0, 0.0, -60.0}};
    fixture f;
    three_level_spans(&f, 250.374481229, 401.904131087);
    fixture_load(&f, heavy);
    fixture_load(&f, ahead);
    tw_section *section = tw_section_create(&f.project);
    CHECK(tw_section_load(section, 0, f.lengths_m, NULL, 0) == TW_OK);
    CHECK(tw_section_solve(section, &f.options, 0) == TW_OVER_SHEAVE);
    CHECK(tw_section_solve(section, &f.options, 1) == TW_OVER_SHEAVE);
    f.condition.load_first = 1; /* without the small one it runs */
    f.condition.load_count = 1;
    CHECK(tw_section_load(section, 0, f.lengths_m, NULL, 0) == TW_OK);
    CHECK(tw_section_solve(section, &f.options, 0) == TW_OK);
    CHECK(section->moved_m[1] > 0.3);
    tw_section_free(section);
}

static int stop(void *data)
{
    int *left = data;
    return (*left)-- <= 0;
}

static void test_it_can_be_cancelled(void)
{
    fixture f;
    three_level_spans(&f, 230.0, 403.0);
    for (int polls = 0; polls < 12; polls++) {
        int left = polls;
        f.options.poll = stop;
        f.options.poll_data = &left;
        tw_section *section = tw_section_create(&f.project);
        CHECK(tw_section_load(section, 0, f.lengths_m, NULL, 0) == TW_OK);
        CHECK(tw_section_solve(section, &f.options, 0) == TW_CANCELLED);
        tw_section_free(section);
    }
}

int main(void)
{
    test_three_level_spans();
    test_solving_again_changes_nothing();
    test_mixed_holds();
    test_steps_are_newtons();
    test_energy_is_stationary();
    test_winch_plumb_and_friction();
    test_a_load_would_run_over();
    test_it_can_be_cancelled();
    return check_end("test_section_feed");
}
