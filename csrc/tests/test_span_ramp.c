/* Pieces under a growing load: against many small uniform ones, and against their own derivatives. */
#include "span.h"

#include <string.h>

#include "expect.h"
#include "vector.h"

static const tw_route_leg STRAIGHT = {0.0, {0.0, 0.0}, {1.0, 0.0}};
static const tw_material STEEL = {.stiffness_N = 34.7e6, .strain = 4e-4};
enum { DRAWN = 60, PARTS = 4096 };

static tw_piece drawn_piece(unsigned long long *seed)
{
    tw_piece piece;
    memset(&piece, 0, sizeof piece);
    piece.length_m = 60.0 + 50.0 * check_draw(seed);
    double pull = pow(10.0, 3.5 + check_draw(seed));
    for (int i = 0; i < 3; i++) {
        piece.tension[i] = pull * (check_draw(seed) + (i == 0 ? 1.2 : 0.0));
        piece.load[i] = 20.0 * check_draw(seed);
        piece.ramp[i] = 0.5 * check_draw(seed);
    }
    return piece;
}

/* The same piece as many uniform ones, each with its middle load: second order, so with Richardson's step fourth. */
static void sum_parts(const tw_piece *piece, int parts, double r[3], double energies[3])
{
    double l = piece->length_m / parts, step[3], e[3], t[3], q[3];
    r[0] = r[1] = r[2] = energies[0] = energies[1] = energies[2] = 0.0;
    for (int k = 0; k < parts; k++) {
        tw_piece_tension(piece, l * k, t);
        tw_axpy(piece->load, l * (k + 0.5), piece->ramp, q);
        tw_piece_displacement(&STEEL, t, q, l, step, NULL);
        tw_piece_energies(&STEEL, t, q, l, &e[0], &e[1], &e[2]);
        tw_axpy(r, 1.0, step, r);
        tw_axpy(energies, 1.0, e, energies);
    }
}

static void test_many_uniform_pieces_come_to_the_same(void)
{
    unsigned long long seed = 20261;
    for (int n = 0; n < DRAWN; n++) {
        tw_piece piece = drawn_piece(&seed);
        double coarse[3], fine[3], e0[3], e1[3], r[3], e[3];
        sum_parts(&piece, PARTS / 2, coarse, e0);
        sum_parts(&piece, PARTS, fine, e1);
        tw_piece_ahead(&STEEL, &piece, 0.0, piece.length_m, r, NULL);
        tw_piece_energy(&STEEL, &piece, &e[0], &e[1], &e[2]);
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR(r[i], fine[i] + (fine[i] - coarse[i]) / 3.0, 1e-11 * piece.length_m);
            CHECK_REL(e[i], e1[i] + (e1[i] - e0[i]) / 3.0, 1e-11);
        }
    }
}

static void test_parts_add_up(void)
{
    unsigned long long seed = 77;
    for (int n = 0; n < DRAWN; n++) {
        tw_piece piece = drawn_piece(&seed);
        double cut = 0.37 * piece.length_m, a[3], b[3], whole[3];
        tw_piece_ahead(&STEEL, &piece, 0.0, cut, a, NULL);
        tw_piece_ahead(&STEEL, &piece, cut, piece.length_m - cut, b, NULL);
        tw_piece_ahead(&STEEL, &piece, 0.0, piece.length_m, whole, NULL);
        tw_axpy(a, 1.0, b, a);
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR(a[i], whole[i], 1e-13 * piece.length_m);
        }
    }
}

/* Central differences over 1e-4 of the pull miss by the square of that. */
static void test_the_flexibility_is_the_slope_of_the_end(void)
{
    static const int packed[3][3] = {{0, 1, 2}, {1, 3, 4}, {2, 4, 5}};
    unsigned long long seed = 5;
    for (int n = 0; n < DRAWN; n++) {
        tw_piece piece = drawn_piece(&seed);
        double bend[6], r[3];
        tw_piece_ahead(&STEEL, &piece, 0.0, piece.length_m, r, bend);
        double size = fabs(bend[0]) + fabs(bend[3]) + fabs(bend[5]), h = 1e-4 * tw_norm(piece.tension);
        for (int j = 0; j < 3; j++) {
            double far[2][3];
            for (int e = 0; e < 2; e++) {
                tw_piece aside = piece;
                aside.tension[j] += e ? h : -h;
                tw_piece_ahead(&STEEL, &aside, 0.0, piece.length_m, far[e], NULL);
            }
            for (int i = 0; i < 3; i++) {
                CHECK_NEAR((far[1][i] - far[0][i]) / (2.0 * h), bend[packed[i][j]], 2e-5 * size);
            }
        }
    }
}

static void test_extremes_are_no_less_than_what_samples_find(void)
{
    unsigned long long seed = 9;
    for (int n = 0; n < DRAWN; n++) {
        tw_piece piece = drawn_piece(&seed);
        const double d[3] = {check_draw(&seed), check_draw(&seed), check_draw(&seed)}, zero[3] = {0.0, 0.0, 0.0};
        double at, best = tw_span_extreme(&STEEL, &piece, 1, d, zero, &at);
        double tension = tw_span_tension_max(&piece, 1), slope = tw_span_slope(&piece, 1);
        double most = -INFINITY, most_t = 0.0, most_slope = 0.0;
        for (int k = 0; k <= 400; k++) {
            double r[3], t[3], s = piece.length_m * k / 400;
            tw_piece_position(&STEEL, &piece, s, r);
            tw_piece_tension(&piece, s, t);
            most = fmax(most, tw_dot(d, r));
            most_t = fmax(most_t, tw_norm(t));
            most_slope = fmax(most_slope, fabs(t[2]) / hypot(t[0], t[1]));
        }
        CHECK(best >= most - 1e-12 * piece.length_m && best <= most + 1e-3 * piece.length_m);
        CHECK(tension >= most_t * (1.0 - 1e-14) && tension <= most_t * 1.001);
        CHECK(slope >= most_slope * (1.0 - 1e-12));
    }
}

static void test_both_roots_are_found_in_order(void)
{
    tw_piece piece = {.length_m = 10.0, .load = {-8.0, 0.0, 0.0}, .ramp = {2.0, 0.0, 0.0}, .tension = {-12.0, 0.0, 1.0}};
    static const double ahead[3] = {1.0, 0.0, 0.0};
    double places[2] = {0.0, 0.0}, turn; /* -12 + 8 s - s^2 = 0 at 2 and 6 */
    tw_piece_stationary(&piece, ahead, places);
    CHECK_NEAR(places[0], 2.0, 1e-14);
    CHECK_NEAR(places[1], 6.0, 1e-14);
    CHECK(tw_piece_turns(&piece, &STRAIGHT, &turn) == 1 && turn == places[0]);
    piece.length_m = 5.0;
    tw_piece_stationary(&piece, ahead, places);
    CHECK(places[0] > 0.0 && places[1] < 0.0);
    piece.tension[0] = -17.0;
    tw_piece_stationary(&piece, ahead, places);
    CHECK(places[0] < 0.0 && places[1] < 0.0 && tw_piece_turns(&piece, &STRAIGHT, &turn) == 0);
}

int main(void)
{
    test_many_uniform_pieces_come_to_the_same();
    test_parts_add_up();
    test_the_flexibility_is_the_slope_of_the_end();
    test_extremes_are_no_less_than_what_samples_find();
    test_both_roots_are_found_in_order();
    return check_end("test_span_ramp");
}
