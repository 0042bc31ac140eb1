/* One stretch of uniform load in closed form: against quadrature of the definitions, differences, and dense sampling. */
#include "span.h"

#include <string.h>

#include "expect.h"
#include "vector.h"

static const tw_route_leg STRAIGHT = {0.0, {0.0, 0.0}, {1.0, 0.0}};

static const tw_material STEEL = {.stiffness_N = 34.7e6, .strain = 4e-4};

typedef struct drawn {
    double tension[3], load[3], length;
} drawn;

/* From bar-tight to a loop that goes down and up again, in any direction. */
static drawn draw_piece(unsigned long long *seed)
{
    drawn d;
    d.length = 100.0 * (1.01 + check_draw(seed));
    double pull = pow(10.0, 3.0 + 1.5 * check_draw(seed)), weight = pow(10.0, 0.5 + 1.5 * check_draw(seed));
    for (int i = 0; i < 3; i++) {
        d.tension[i] = pull * check_draw(seed);
        d.load[i] = weight * check_draw(seed);
    }
    return d;
}

/* Ten-point Gauss-Legendre (Abramowitz and Stegun, table 25.4) over `panels`, of what `at` makes of the tension vector. */
static void integrate(const drawn *d, int panels, void (*at)(const double t[3], double out[3]), double sum[3])
{
    static const double x[5] = {0.148874338981631211, 0.433395394129247191, 0.679409568299024406, 0.865063366688984511,
                                0.973906528517171720};
    static const double w[5] = {0.295524224714752870, 0.269266719309996355, 0.219086362515982044, 0.149451349150580593,
                                0.066671344308688138};
    double half = 0.5 * d->length / panels;
    sum[0] = sum[1] = sum[2] = 0.0;
    for (int p = 0; p < panels; p++) {
        for (int k = 0; k < 10; k++) {
            double s = half * (2 * p + 1 + (k < 5 ? x[k] : -x[k - 5]));
            double t[3], value[3];
            tw_axpy(d->tension, -s, d->load, t);
            at(t, value);
            tw_axpy(sum, half * w[k % 5], value, sum);
        }
    }
}

static void direction_at(const double t[3], double out[3])
{
    double T = tw_norm(t);
    for (int i = 0; i < 3; i++) {
        out[i] = t[i] / T * tw_material_stretch(&STEEL, T);
    }
}

static void energies_at(const double t[3], double out[3])
{
    double T = tw_norm(t);
    out[0] = tw_material_conjugate(&STEEL, T);
    out[1] = tw_material_energy(&STEEL, tw_material_stretch(&STEEL, T));
    out[2] = tw_material_stretch(&STEEL, T);
}

static void test_displacement_and_energies_are_their_integrals(void)
{
    unsigned long long seed = 1;
    for (int draw = 0; draw < 60; draw++) {
        drawn d = draw_piece(&seed);
        double closed[3], integral[3], energy[3];
        tw_piece_displacement(&STEEL, d.tension, d.load, d.length, closed, NULL);
        integrate(&d, 800, direction_at, integral);
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR(closed[i], integral[i], 1e-10 * d.length);
        }
        tw_piece_energies(&STEEL, d.tension, d.load, d.length, &energy[0], &energy[1], &energy[2]);
        integrate(&d, 800, energies_at, integral);
        CHECK_REL(energy[0], integral[0], 1e-10);
        CHECK_REL(energy[1], integral[1], 1e-7); /* the quadrature takes T from L, and loses EA epsilon of it */
        CHECK_REL(energy[2], integral[2], 1e-12);
    }
}

/* Irvine, Cable Structures (1981), ch. 1 (from memory). */
static void test_elastic_catenary(void)
{
    const tw_material cold = {.stiffness_N = 34.7e6};
    const double w = 15.97, EA = 34.7e6, H = 17368.8076566, V = 2401.888, load[3] = {0.0, 0.0, -15.97};
    const double pull[3] = {H, 0.0, -V};
    for (double s = 10.0; s <= 300.0; s += 29.0) {
        double r[3], U = V - w * s;
        tw_piece_displacement(&cold, pull, load, s, r, NULL);
        CHECK_REL(r[0], H * s / EA + H / w * (asinh(V / H) - asinh(U / H)), 1e-12);
        double fall = w * s / EA * (V / w - 0.5 * s) + H / w * (hypot(1.0, V / H) - hypot(1.0, U / H));
        CHECK_NEAR(-r[2], fall, 1e-11);
    }
}

static void test_flexibility_is_the_slope_of_the_displacement(void)
{
    unsigned long long seed = 2;
    static const int at[3][3] = {{0, 1, 2}, {1, 3, 4}, {2, 4, 5}};
    for (int draw = 0; draw < 60; draw++) {
        drawn d = draw_piece(&seed);
        double r[3], bend[6];
        tw_piece_displacement(&STEEL, d.tension, d.load, d.length, r, bend);
        double h = 1e-4 * tw_norm(d.tension), scale = bend[0] + bend[3] + bend[5];
        for (int j = 0; j < 3; j++) {
            double far[4][3];
            const double steps[4] = {h, -h, 2.0 * h, -2.0 * h};
            for (int k = 0; k < 4; k++) {
                double t[3];
                tw_copy(d.tension, t);
                t[j] += steps[k];
                tw_piece_displacement(&STEEL, t, d.load, d.length, far[k], NULL);
            }
            for (int i = 0; i < 3; i++) {
                double slope = (8.0 * (far[0][i] - far[1][i]) - (far[2][i] - far[3][i])) / (12.0 * h);
                CHECK_NEAR(bend[at[i][j]], slope, 1e-5 * scale);
            }
        }
    }
}

/* Sylvester: all leading minors above 0. The last holds one part in EA/T, so rounding is far below it. */
static void test_flexibility_is_positive_definite(void)
{
    unsigned long long seed = 3;
    for (int draw = 0; draw < 500; draw++) {
        drawn d = draw_piece(&seed);
        double r[3], b[6];
        tw_piece_displacement(&STEEL, d.tension, d.load, d.length, r, b);
        CHECK(b[0] > 0.0 && b[0] * b[3] - b[1] * b[1] > 0.0);
        double det = b[0] * (b[3] * b[5] - b[4] * b[4]) - b[1] * (b[1] * b[5] - b[4] * b[2]) + b[2] * (b[1] * b[4] - b[3] * b[2]);
        CHECK(det > 0.0);
    }
}

static void test_two_halves_make_the_whole(void)
{
    unsigned long long seed = 4;
    for (int draw = 0; draw < 100; draw++) {
        drawn d = draw_piece(&seed);
        double share = 0.5 + 0.49 * check_draw(&seed);
        tw_piece halves[2] = {{.length_m = share * d.length}, {.length_m = d.length - share * d.length}};
        tw_piece whole = {.length_m = d.length};
        double start[3] = {1.0, 2.0, 3.0}, end[2][3], far[2][3], bend[2][6];
        tw_copy(d.load, halves[0].load);
        tw_copy(d.load, halves[1].load);
        tw_copy(d.load, whole.load);
        tw_span_hang(&STEEL, &whole, 1, start, d.tension, end[0], far[0], bend[0]);
        tw_span_hang(&STEEL, halves, 2, start, d.tension, end[1], far[1], bend[1]);
        double scale = bend[0][0] + bend[0][3] + bend[0][5];
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR(end[0][i], end[1][i], 1e-12 * d.length);
            CHECK_NEAR(far[0][i], far[1][i], 1e-12 * tw_norm(d.tension) + 1e-12 * d.length * tw_norm(d.load));
            CHECK_NEAR(bend[0][i], bend[1][i], 1e-9 * scale);
        }
    }
}

static void test_a_point_force_is_taken_off_the_tension(void)
{
    tw_piece pieces[2] = {{.length_m = 5.0, .force = {1.0, -2.0, -30.0}}, {.length_m = 7.0, .load = {0.0, 0.0, -2.0}}};
    const double zero[3] = {0.0, 0.0, 0.0}, pull[3] = {100.0, 0.0, -20.0};
    double end[3], far[3];
    tw_span_hang(&STEEL, pieces, 2, zero, pull, end, far, NULL);
    CHECK(pieces[1].tension[0] == 99.0 && pieces[1].tension[1] == 2.0 && pieces[1].tension[2] == 10.0);
    CHECK(far[2] == 24.0);
    CHECK_REL(pieces[1].start[0], 5.0 * (1.0 + 4e-4 + hypot(100.0, 20.0) / 34.7e6) * 100.0 / hypot(100.0, 20.0), 1e-15);
}

static void test_no_length_has_no_effect(void)
{
    const double t[3] = {1.0, 2.0, 3.0}, q[3] = {0.0, 1.0, 0.0};
    double r[3], bend[6], conjugate, stored, length;
    tw_piece_displacement(&STEEL, t, q, 0.0, r, bend);
    tw_piece_energies(&STEEL, t, q, 0.0, &conjugate, &stored, &length);
    CHECK(tw_norm(r) == 0.0 && bend[0] == 0.0 && bend[5] == 0.0);
    CHECK(conjugate == 0.0 && stored == 0.0 && length == 0.0);
}

static tw_piece hung(const drawn *d)
{
    tw_piece piece = {.length_m = d->length};
    double end[3], far[3];
    const double start[3] = {10.0, -5.0, 20.0};
    tw_copy(d->load, piece.load);
    tw_span_hang(&STEEL, &piece, 1, start, d->tension, end, far, NULL);
    return piece;
}

static void test_the_station_turns_back_where_the_tension_is_upright(void)
{
    unsigned long long seed = 5;
    int turned = 0;
    for (int draw = 0; draw < 200; draw++) {
        drawn d = draw_piece(&seed);
        tw_piece piece = hung(&d);
        double s, t[3];
        double far = d.tension[0] - d.length * d.load[0];
        CHECK(tw_piece_turns(&piece, &STRAIGHT, &s) == (far * d.tension[0] < 0.0));
        if (far * d.tension[0] < 0.0) {
            tw_piece_tension(&piece, s, t);
            CHECK_NEAR(t[0], 0.0, 1e-12 * fabs(d.tension[0]));
            turned++;
        }
    }
    CHECK(turned > 10);
}

static void test_a_station_is_found_where_the_line_passes_it(void)
{
    unsigned long long seed = 6;
    for (int draw = 0; draw < 200; draw++) {
        drawn d = draw_piece(&seed);
        tw_piece piece = hung(&d);
        double turn, a[3], b[3], r[3];
        double s0 = 0.0, s1 = tw_piece_turns(&piece, &STRAIGHT, &turn) ? turn : d.length;
        if (draw % 2 && s1 < d.length) {
            s0 = turn;
            s1 = d.length;
        }
        tw_piece_position(&STEEL, &piece, s0, a);
        tw_piece_position(&STEEL, &piece, s1, b);
        double share = 0.5 + 0.5 * check_draw(&seed);
        double station = a[0] + share * (b[0] - a[0]);
        double s = tw_piece_at_station(&STEEL, &piece, &STRAIGHT, s0, s1, a[0], b[0], station);
        tw_piece_position(&STEEL, &piece, s, r);
        CHECK(s >= s0 && s <= s1);
        CHECK_NEAR(r[0], station, 1e-11 * (1.0 + d.length));
    }
    tw_piece upright = {.length_m = 5.0, .tension = {0.0, 0.0, -9.0}};
    CHECK(tw_piece_at_station(&STEEL, &upright, &STRAIGHT, 1.0, 4.0, 0.0, 0.0, 0.0) >= 1.0);
}

/* No sampled place is further out, and the place given is as far as is said. */
static void test_extreme_is_the_furthest_place(void)
{
    unsigned long long seed = 8;
    for (int draw = 0; draw < 60; draw++) {
        drawn d = draw_piece(&seed);
        tw_piece pieces[2] = {{.length_m = 0.4 * d.length}, {.length_m = 0.6 * d.length}};
        double start[3] = {1.0, 2.0, 3.0}, end[3], far[3], direction[3], at, r[3];
        tw_copy(d.load, pieces[0].load);
        for (int i = 0; i < 3; i++) {
            pieces[1].load[i] = d.load[2 - i];
            direction[i] = check_draw(&seed);
        }
        tw_span_hang(&STEEL, pieces, 2, start, d.tension, end, far, NULL);
        double best = tw_span_extreme(&STEEL, pieces, 2, direction, start, &at);
        for (int k = 0; k <= 400; k++) {
            double s = d.length * k / 400.0;
            int second = s > pieces[0].length_m;
            tw_piece_position(&STEEL, &pieces[second], s - (second ? pieces[0].length_m : 0.0), r);
            tw_axpy(r, -1.0, start, r);
            CHECK(tw_dot(direction, r) <= best + 1e-10 * d.length);
        }
        int second = at > pieces[0].length_m;
        tw_piece_position(&STEEL, &pieces[second], at - (second ? pieces[0].length_m : 0.0), r);
        tw_axpy(r, -1.0, start, r);
        CHECK_NEAR(tw_dot(direction, r), best, 1e-10 * d.length);
    }
}

static void test_slope_and_tension_are_the_greatest(void)
{
    unsigned long long seed = 9;
    for (int draw = 0; draw < 100; draw++) {
        drawn d = draw_piece(&seed);
        tw_piece piece = hung(&d);
        double slope = 0.0, tension = 0.0, t[3];
        for (int k = 0; k <= 4000; k++) {
            tw_piece_tension(&piece, d.length * k / 4000.0, t);
            slope = fmax(slope, fabs(t[2]) / hypot(t[0], t[1]));
            tension = fmax(tension, tw_norm(t));
        }
        CHECK_REL(tw_span_tension_max(&piece, 1), tension, 1e-12);
        CHECK(tw_span_slope(&piece, 1) >= slope * (1.0 - 1e-12));
        CHECK(tw_span_slope(&piece, 1) <= slope * 1.01 || slope > 50.0); /* near upright it is too steep to sample */
    }
    const tw_piece upright = {.length_m = 1.0, .tension = {0.0, 0.0, -3.0}};
    CHECK(isinf(tw_span_slope(&upright, 1)));
}

static void test_slant_measures_along_the_load_from_the_chord(void)
{
    const double load[3] = {0.0, 3.0, -4.0};
    double d[3];
    tw_span_slant(200.0, 30.0, load, d);
    CHECK_NEAR(200.0 * d[0] + 30.0 * d[2], 0.0, 1e-12);
    CHECK_NEAR(tw_dot(d, load), 5.0, 1e-12);
    const double along[3] = {200.0, 0.0, 30.0}, none[3] = {0.0, 0.0, 0.0};
    tw_span_slant(200.0, 30.0, none, d);
    CHECK(tw_norm(d) == 0.0);
    tw_span_slant(200.0, 0.0, along, d);
    CHECK(tw_dot(d, along) > 0.0);
}

int main(void)
{
    test_displacement_and_energies_are_their_integrals();
    test_elastic_catenary();
    test_flexibility_is_the_slope_of_the_displacement();
    test_flexibility_is_positive_definite();
    test_two_halves_make_the_whole();
    test_a_point_force_is_taken_off_the_tension();
    test_no_length_has_no_effect();
    test_the_station_turns_back_where_the_tension_is_upright();
    test_a_station_is_found_where_the_line_passes_it();
    test_extreme_is_the_furthest_place();
    test_slope_and_tension_are_the_greatest();
    test_slant_measures_along_the_load_from_the_chord();
    return check_end("test_span");
}
