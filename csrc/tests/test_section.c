/* Coupled spans hung exactly: equilibrium and closing, the concave D, published answers, symmetry, loads and their places. */
#include "section.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "hold.h"
#include "vector.h"

/* Tension vectors on both sides of a clamp, its own load and the hold balance; each span reaches from clamp to clamp; each
 * clamp is where its hold puts it. */
static void check_equilibrium(const tw_section *s, double tolerance)
{
    double passed = 0.0;
    for (size_t j = 0; j <= s->span_count; j++) {
        double sum[3], t[3], r[3], swing[3], a[3];
        tw_copy(s->hold_force + 3 * j, sum);
        tw_axpy(sum, 1.0, s->clamp_load + 3 * j, sum);
        if (j > 0) {
            const tw_piece *last = &s->pieces[s->piece_first[j] - 1];
            tw_piece_tension(last, last->length_m, t);
            tw_axpy(sum, -1.0, t, sum);
            tw_piece_position(&s->materials[j - 1], last, last->length_m, r);
            tw_axpy(r, -1.0, s->clamp + 3 * j, r);
            CHECK_NEAR(tw_norm(r), 0.0, tolerance);
            passed += s->length_m[j - 1];
        }
        if (j < s->span_count) {
            tw_axpy(sum, 1.0, s->pull + 3 * j, sum);
            tw_axpy(s->pieces[s->piece_first[j]].start, -1.0, s->clamp + 3 * j, r);
            CHECK_NEAR(tw_norm(r), 0.0, tolerance);
        }
        CHECK_NEAR(tw_norm(sum), 0.0, 1e-12 * (1.0 + tw_norm(s->hold_force + 3 * j) + tw_norm(s->pull)));
        tw_hold_attachment(&s->project->supports[j], a);
        tw_hold_swing(&s->project->supports[j], s->ahead + 2 * j, s->hold_force + 3 * j, s->soft_N, swing);
        tw_axpy(a, 1.0, swing, a);
        tw_axpy(a, -1.0, s->clamp + 3 * j, a);
        CHECK_NEAR(tw_norm(a), 0.0, tolerance);
    }
    CHECK(s->closing_m <= tolerance);
}

static void test_every_condition_of_a_route_is_in_balance(void)
{
    tw_case c;
    case_route(&c);
    for (size_t k = 0; k < 4; k++) {
        tw_section *s = case_hung(&c, k);
        CHECK(s != NULL && s->steps >= 1);
        check_equilibrium(s, 1e-10);
        tw_section_free(s);
    }
}

/* D(R) <= D at the equilibrium, and D(middle) >= the mean of D at the ends, for R far and near. */
static void test_complementary_energy_is_concave_and_greatest_at_rest(void)
{
    tw_case c;
    unsigned long long seed = 31;
    case_route(&c);
    tw_section *s = case_hung(&c, 0);
    double scale = fabs(s->energy_lower_J) + 1e6;
    CHECK_NEAR(case_complementary(s, s->pull), s->energy_lower_J, 1e-12 * scale);
    for (int draw = 0; draw < 300; draw++) {
        double a[12], b[12], middle[12];
        double size = 20e3 * pow(10.0, 4.0 * (check_draw(&seed) - 0.9));
        for (int i = 0; i < 12; i++) {
            a[i] = s->pull[i] + size * check_draw(&seed);
            b[i] = s->pull[i] + size * check_draw(&seed);
            middle[i] = 0.5 * (a[i] + b[i]);
        }
        double at_a = case_complementary(s, a), at_b = case_complementary(s, b), at_middle = case_complementary(s, middle);
        CHECK(at_a <= s->energy_lower_J + 1e-12 * scale);
        CHECK(at_middle >= 0.5 * (at_a + at_b) - 1e-12 * (fabs(at_a) + fabs(at_b)));
    }
    tw_section_free(s);
}

/* Own 30-digit oracle, three spans 250/400/300 m level: the lengths at which pulleys bring 18229.95 N everywhere. Between
 * anchors each span has the horizontal tension and sag given there. */
static void test_three_published_spans(void)
{
    static const double row[3][4] = {{250.0, 250.374481229, 18119.9944082, 6.88888103116},
                                     {400.0, 401.904131087, 17945.254677, 17.8363161315},
                                     {300.0, 300.721387685, 18071.1125259, 9.95133397143}};
    tw_case c;
    case_begin(&c);
    case_anchor(&c, 0.0, 0.0);
    for (int k = 0; k < 3; k++) {
        case_anchor(&c, c.supports[k].station_m + row[k][0], 0.0);
        c.lengths_m[k] = row[k][1];
    }
    case_condition(&c, 15.0);
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    for (size_t k = 0; k < 3; k++) {
        tw_span_state state;
        tw_section_span_state(s, k, &state);
        CHECK_REL(state.horizontal_tension_N, row[k][2], 1e-8);
        CHECK_NEAR(state.sag_m, row[k][3], 1e-8);
        CHECK_REL(state.tension_from_N, 18229.9522451, 1e-8);
    }
    tw_section_free(s);
}

/* Own 30-digit oracle I(a): stretch energy 1315.88514729 J, total -31815.3228054 J. */
static void test_published_energies(void)
{
    tw_case c;
    case_level(&c, 300.0);
    c.lengths_m[0] = 300.8;
    tw_section *s = case_hung(&c, TW_NONE);
    CHECK_REL(tw_section_stored(s), 1315.88514729, 1e-10);
    CHECK_REL(s->energy_lower_J, -31815.3228054, 1e-11);
    tw_section_free(s);
}

/* Read in the source (F12): weightless cable, 400/600/400 N two metres apart: H 1600 N, end tensions 1627.88 and 1941.65 N. */
static void test_published_point_loads(void)
{
    /* A (0, 0), then 0, 2, 4, 6, 8: with H 1600 the kinks lie at z -0.375 .. ; V_A = 300 down the line. */
    static const double slope[4] = {-300.0, 100.0, 700.0, 1100.0};
    tw_case c;
    double z = 0.0, total = 0.0;
    case_begin(&c);
    c.project.line.weight_N_per_m = 0.0;
    c.project.line.stiffness_N = 1e12;
    case_anchor(&c, 0.0, 0.0);
    case_condition(&c, 15.0);
    for (int k = 0; k < 4; k++) {
        z += 2.0 * slope[k] / 1600.0;
        total += 2.0 * hypot(1.0, slope[k] / 1600.0);
        if (k < 3) {
            case_point(&c, TW_PLACE_LENGTH, total, 0.0, 0.0, slope[k] - slope[k + 1]);
        }
    }
    case_anchor(&c, 8.0, z);
    c.lengths_m[0] = total;
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK_REL(s->pull[0], 1600.0, 1e-6);
    CHECK_NEAR(tw_norm(s->pull), 1627.882, 1e-2);
    CHECK_NEAR(tw_span_tension_max(s->pieces, s->piece_count), 1941.649, 1e-2);
    CHECK_NEAR(z, 2.0, 1e-12);
    tw_section_free(s);
}

/* Seen from its far end (x -> -x, y -> -y, so left is right): the same line. */
static void test_mirrored_route_hangs_mirrored(void)
{
    tw_case c, m;
    case_route(&c);
    case_route(&m);
    size_t last = c.project.support_count - 1;
    for (size_t j = 0; j <= last; j++) {
        m.supports[j] = c.supports[last - j];
        m.supports[j].station_m = -c.supports[last - j].station_m;
        m.supports[j].offset_m = -c.supports[last - j].offset_m;
        m.lengths_m[j] = j < last ? c.lengths_m[last - 1 - j] : 0.0;
    }
    for (size_t k = 0; k < 4; k++) {
        m.conditions[k].wind_angle_rad *= -1.0;
        tw_section *a = case_hung(&c, k), *b = case_hung(&m, k);
        for (size_t j = 0; j <= last; j++) {
            CHECK_NEAR(a->clamp[3 * j], -b->clamp[3 * (last - j)], 1e-8);
            CHECK_NEAR(a->clamp[3 * j + 1], -b->clamp[3 * (last - j) + 1], 1e-8);
            CHECK_NEAR(a->clamp[3 * j + 2], b->clamp[3 * (last - j) + 2], 1e-8);
        }
        tw_section_free(a);
        tw_section_free(b);
    }
}

static void test_split_at_a_free_node_changes_nothing(void)
{
    tw_case c, split;
    case_route(&c);
    case_route(&split);
    c.project.condition_count = split.project.condition_count = 1;
    for (int i = 0; i < 6; i++) {
        case_point(&split, TW_PLACE_LENGTH, 57.3 + 190.0 * i, 0.0, 0.0, 0.0);
    }
    tw_section *a = case_hung(&c, 0), *b = case_hung(&split, 0);
    CHECK(a->piece_count == 4 && b->piece_count == 10);
    CHECK_REL(a->energy_lower_J, b->energy_lower_J, 1e-12);
    CHECK_REL(tw_section_stored(a), tw_section_stored(b), 1e-11);
    for (size_t i = 0; i < 12; i++) {
        CHECK_NEAR(a->pull[i], b->pull[i], 1e-12 * tw_norm(a->pull));
    }
    tw_section_free(a);
    tw_section_free(b);
}

static void test_hangers_are_plumb_where_the_pull_is_equal(void)
{
    tw_case c;
    case_begin(&c);
    case_anchor(&c, 0.0, 0.0);
    case_hanger(&c, 250.0, 8.0, 2.0, 500.0);
    case_hanger(&c, 650.0, 9.0, 3.0, 500.0);
    case_anchor(&c, 950.0, 2.0);
    case_condition(&c, 15.0);
    case_ready(&c);
    tw_trial *trial = case_trial(&c, 21e3);
    const tw_section *s;
    CHECK(tw_trial_section(trial, 0, &c.options, &s) == TW_OK);
    for (size_t j = 1; j < 3; j++) {
        tw_support_state state;
        tw_section_support_state(s, j, &state);
        CHECK_NEAR(state.swing_rad, 0.0, 1e-9);
        CHECK_NEAR(state.position_m[0], c.supports[j].station_m, 1e-8);
        CHECK_NEAR(state.position_m[2], 6.0, 1e-9);
        CHECK_NEAR(state.along_N, 0.0, 1e-5);
    }
    tw_trial_free(trial);
}

static void test_posts_lean_by_force_over_stiffness(void)
{
    tw_case c;
    case_route(&c);
    tw_section *s = case_hung(&c, 0);
    tw_support_state state;
    tw_section_support_state(s, 0, &state);
    CHECK_NEAR(state.position_m[0] - 100.0, state.along_N / 3e5, 1e-12);
    CHECK_NEAR(state.position_m[1] + 5.0, state.across_N / 2e5, 1e-12);
    CHECK(state.position_m[2] == 40.0 && state.along_N > 1e4);
    tw_section_support_state(s, 2, &state);
    CHECK_NEAR(state.position_m[0] - 750.0, state.along_N / 1.5e5, 1e-12);
    CHECK(state.position_m[1] == -3.0 && isnan(state.swing_rad));
    tw_section_free(s);
}

/* What the supports carry is all that is put on the line: weight, ice, wind, points and half of each hanger; the other half
 * hangs from the support. */
static void test_supports_carry_all_loads(void)
{
    tw_case c;
    case_route(&c);
    c.project.condition_count = 1;
    case_point(&c, TW_PLACE_STATION, 600.0, 100.0, 200.0, -3000.0);
    case_stretch(&c, TW_PLACE_STATION, 300.0, 800.0, 0.0, 0.0, -7.0)->frame = TW_FRAME_ROUTE;
    tw_section *s = case_hung(&c, 0);
    double down = 0.0, along = 0.0, loads[3] = {0.0, 0.0, 0.0};
    for (size_t p = 0; p < s->piece_count; p++) {
        tw_axpy(loads, s->pieces[p].length_m, s->pieces[p].load, loads);
        tw_axpy(loads, 1.0, s->pieces[p].force, loads);
    }
    for (size_t j = 0; j < 5; j++) {
        tw_support_state state;
        tw_section_support_state(s, j, &state);
        down += state.down_N;
        along += state.along_N;
        CHECK_REL(state.resultant_N, sqrt(state.along_N * state.along_N + state.across_N * state.across_N + state.down_N * state.down_N), 1e-14);
    }
    CHECK_NEAR(down, 900.0 - loads[2], 1e-8);
    CHECK_NEAR(along, loads[0], 1e-8);
    CHECK(s->load_to_m[1] - s->load_from_m[1] > 500.0 && isnan(s->load_length_m[1]));
    tw_section_free(s);
}

static double down_on(const tw_section *s, size_t support)
{
    tw_support_state state;
    tw_section_support_state(s, support, &state);
    return state.down_N;
}

/* Two spans of very unequal length, a load of 1000 N next to their common support: it acts once, wherever it is put. */
static void test_a_load_near_a_clamp_acts_once(void)
{
    const double beside[] = {0.0, 1e-3, 5e-7, -5e-7, 2e-9, -2e-9, -1e-3};
    for (int longer = 0; longer < 2; longer++) {
        for (int i = 0; i < 7; i++) {
            tw_case c;
            case_begin(&c);
            case_anchor(&c, 0.0, 0.0);
            case_anchor(&c, longer ? 1000.0 : 1.0, 0.0);
            case_anchor(&c, 1001.0, 0.0);
            c.lengths_m[0] = longer ? 1001.0 : 0.9999;
            c.lengths_m[1] = longer ? 0.9999 : 1001.0;
            case_condition(&c, 15.0);
            tw_load *load = case_point(&c, TW_PLACE_LENGTH, c.lengths_m[0] + beside[i], 0.0, 0.0, -1000.0);
            case_ready(&c);
            tw_section *with = case_hung(&c, 0);
            load->vector[2] = 0.0;
            tw_section *without = case_hung(&c, 0);
            double more = 0.0;
            for (size_t j = 0; j < 3; j++) {
                more += down_on(with, j) - down_on(without, j);
            }
            CHECK_NEAR(more, 1000.0, 1e-6);
            tw_section_free(with);
            tw_section_free(without);
        }
    }
}

/* Three loads within two thousand-millionths of the span: each acts once. */
static void test_loads_side_by_side_act_once_each(void)
{
    tw_case c;
    case_level(&c, 1000.0);
    c.lengths_m[0] = 1001.0;
    case_point(&c, TW_PLACE_LENGTH, 400.0, 0.0, 0.0, -100.0);
    case_point(&c, TW_PLACE_LENGTH, 400.0 + 1.5e-6, 0.0, 0.0, -100.0);
    case_point(&c, TW_PLACE_LENGTH, 400.0 + 0.8e-6, 0.0, 0.0, -100.0);
    case_ready(&c);
    tw_section *s = case_hung(&c, 0);
    CHECK_NEAR(down_on(s, 0) + down_on(s, 1), 300.0 + 15.97 * 1001.0, 1e-6);
    tw_section_free(s);
}

static void test_a_station_is_of_the_line_as_strung(void)
{
    tw_case c;
    case_route(&c);
    case_point(&c, TW_PLACE_STATION, 500.0, 0.0, 0.0, -800.0);
    tw_section *bare = case_hung(&c, TW_NONE), *s = case_hung(&c, 3);
    double r[3], wanted;
    CHECK(tw_section_at_station(bare, 500.0, &wanted) == TW_OK);
    CHECK(s->load_length_m[0] == wanted);
    tw_section_at(bare, wanted, r, NULL);
    CHECK_NEAR(r[0], 500.0, 1e-10);
    tw_section_free(bare);
    tw_section_free(s);
}

static tw_status load_status(tw_load load)
{
    tw_case c;
    case_level(&c, 100.0);
    c.lengths_m[0] = 100.1;
    *case_point(&c, TW_PLACE_LENGTH, 0.0, 0.0, 0.0, -1.0) = load;
    case_ready(&c);
    tw_section *strung = case_hung(&c, TW_NONE), *s = tw_section_create(&c.project);
    tw_status status = tw_section_load(s, 0, c.lengths_m, load.is_point == 2 ? NULL : strung, 1);
    tw_section_free(strung);
    tw_section_free(s);
    return status;
}

static void test_a_place_off_the_line_is_refused(void)
{
    const tw_load load = {.is_point = 1, .place = TW_PLACE_LENGTH, .from_m = 50.0, .to_m = NAN};
    tw_load bad = load;
    CHECK(load_status(load) == TW_OK);
    bad.from_m = 100.2;
    CHECK(load_status(bad) == TW_ERROR_PLACE);
    bad.from_m = -1.0;
    CHECK(load_status(bad) == TW_ERROR_PLACE);
    bad.place = TW_PLACE_STATION;
    CHECK(load_status(bad) == TW_ERROR_PLACE);
    bad.from_m = 50.0;
    CHECK(load_status(bad) == TW_OK);
    bad.is_point = 2; /* without the strung line */
    CHECK(load_status(bad) == TW_ERROR_PLACE);
    bad.is_point = 0;
    bad.to_m = 130.0;
    CHECK(load_status(bad) == TW_ERROR_PLACE);
    bad.place = (tw_place)9;
    CHECK(load_status(bad) == TW_ERROR_PLACE);
}

static tw_status solve_level(double weight, double length, tw_options options, int warm)
{
    tw_case c;
    case_level(&c, 100.0);
    c.project.line.weight_N_per_m = weight;
    tw_section *s = tw_section_create(&c.project);
    CHECK(tw_section_load(s, 0, &length, NULL, 1) == TW_OK);
    if (warm) {
        s->pull[0] = warm == 1 ? NAN : 1e200;
    }
    tw_status status = tw_section_solve(s, &options, warm);
    CHECK(status != TW_OK || (isfinite(s->pull[0]) && s->closing_m < 1e-7 * (100.0 + length)));
    tw_section_free(s);
    return status;
}

static int stop_now(void *data)
{
    return --*(int *)data < 0;
}

static void test_what_cannot_hang_ends_with_a_status(void)
{
    tw_options options = tw_options_default();
    CHECK(solve_level(0.0, 101.0, options, 0) == TW_SLACK);
    CHECK(solve_level(0.0, 99.0, options, 0) == TW_OK);
    CHECK(solve_level(15.0, 3000.0, options, 0) == TW_OK);
    solve_level(1e-300, 101.0, options, 0);
    CHECK(solve_level(1e300, 101.0, options, 0) != TW_OK);
    CHECK(solve_level(NAN, 101.0, options, 0) != TW_OK);
    CHECK(solve_level(15.0, NAN, options, 0) != TW_OK);
    CHECK(solve_level(15.0, 101.0, options, 1) == TW_OK); /* a useless warm start is left */
    CHECK(solve_level(15.0, 101.0, options, 2) == TW_OK);
}

static void test_a_poll_cancels_between_steps(void)
{
    tw_case c;
    case_route(&c);
    tw_section *s = tw_section_create(&c.project);
    for (int granted = 0; granted < 3; granted++) {
        int calls = granted;
        c.options.poll = stop_now;
        c.options.poll_data = &calls;
        CHECK(tw_section_load(s, 0, c.lengths_m, NULL, 1) == TW_OK);
        CHECK(tw_section_solve(s, &c.options, 0) == TW_CANCELLED);
        CHECK(s->steps == (size_t)granted + 1 && isfinite(s->energy_lower_J));
    }
    tw_section_free(s);
}

static void test_too_few_steps_are_not_settled(void)
{
    tw_case c;
    case_route(&c);
    c.options.newton_most = 1;
    CHECK(case_hung(&c, 0) == NULL);
}

int main(void)
{
    test_every_condition_of_a_route_is_in_balance();
    test_complementary_energy_is_concave_and_greatest_at_rest();
    test_three_published_spans();
    test_published_energies();
    test_published_point_loads();
    test_mirrored_route_hangs_mirrored();
    test_split_at_a_free_node_changes_nothing();
    test_hangers_are_plumb_where_the_pull_is_equal();
    test_posts_lean_by_force_over_stiffness();
    test_supports_carry_all_loads();
    test_a_load_near_a_clamp_acts_once();
    test_loads_side_by_side_act_once_each();
    test_a_station_is_of_the_line_as_strung();
    test_a_place_off_the_line_is_refused();
    test_what_cannot_hang_ends_with_a_status();
    test_a_poll_cancels_between_steps();
    test_too_few_steps_are_not_settled();
    return check_end("test_section");
}
