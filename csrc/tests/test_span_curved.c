/* Curved laws and loads that vary along a piece: against brute quadrature of the definitions, differences, dense sampling,
 * and the bracket of a whole section. */
#include "span.h"

#include "cases.h"
#include "energy.h"
#include "expect.h"
#include "span_curved.h"
#include "vector.h"

/* Two parts, one of which begins late: kinks at 9, 21 and 35 kN or so. */
static tw_line two_parts(void)
{
    tw_line line = {.part_count = 2, .test_temperature_degC = 15.0, .stiffness_N = 4e7, .weight_N_per_m = 15.97};
    tw_part core = {.loading_N = {0.0, 12e6}, .creep_N = {(double)NAN}, .valid_to = 0.0045, .final_stiffness_N = 12.5e6,
                    .expansion_per_K = 11.5e-6};
    tw_part outer = {.loading_N = {-9e3, 20e6, -9e8}, .creep_N = {(double)NAN}, .valid_to = 0.0022,
                     .final_stiffness_N = 22e6, .expansion_per_K = 23e-6};
    line.parts[0] = core;
    line.parts[1] = outer;
    return line;
}

static tw_piece draw_piece(unsigned long long *seed, int varies)
{
    tw_piece piece = {.length_m = 100.0 * (1.01 + check_draw(seed))};
    double pull = pow(10.0, 3.6 + 0.9 * check_draw(seed)), weight = pow(10.0, 0.9 + 0.7 * check_draw(seed));
    for (int i = 0; i < 3; i++) {
        piece.tension[i] = pull * check_draw(seed);
        piece.load[i] = weight * check_draw(seed);
        piece.ramp[i] = varies ? 2.0 * weight / piece.length_m * check_draw(seed) : 0.0;
    }
    return piece;
}

/* Midpoint rule on a million points would do; ten Gauss points on 4000 panels leave 1e-11 of the kinks' small share. */
static void brute(const tw_material *material, const tw_piece *piece, double displacement[3], double energies[3])
{
    static const double x[5] = {0.148874338981631211, 0.433395394129247191, 0.679409568299024406, 0.865063366688984511,
                                0.973906528517171720};
    static const double w[5] = {0.295524224714752870, 0.269266719309996355, 0.219086362515982044, 0.149451349150580593,
                                0.066671344308688138};
    enum { PANELS = 4000 };
    double half = 0.5 * piece->length_m / PANELS;
    displacement[0] = displacement[1] = displacement[2] = energies[0] = energies[1] = energies[2] = 0.0;
    for (int k = 0; k < 10 * PANELS; k++) {
        int point = k % 10;
        double s = half * (2 * (k / 10) + 1 + (point < 5 ? x[point] : -x[point - 5])), weight = half * w[point % 5];
        double t[3];
        for (int i = 0; i < 3; i++) {
            t[i] = piece->tension[i] - piece->load[i] * s - 0.5 * piece->ramp[i] * s * s;
        }
        double T = tw_norm(t), L = tw_material_stretch(material, T);
        tw_axpy(displacement, weight * L / T, t, displacement);
        energies[0] += weight * tw_material_conjugate(material, T);
        energies[1] += weight * tw_material_energy(material, L);
        energies[2] += weight * L;
    }
}

static void check_piece(const tw_material *material, const tw_piece *piece)
{
    double expected[3], energies[3], found[3], bend[6], conjugate, stored, length;
    double size = 1e-10 * piece->length_m;
    brute(material, piece, expected, energies);
    tw_piece_ahead(material, piece, 0.0, piece->length_m, found, bend);
    tw_piece_energy(material, piece, &conjugate, &stored, &length);
    for (int i = 0; i < 3; i++) {
        CHECK_NEAR(found[i], expected[i], size);
    }
    CHECK_REL(conjugate, energies[0], 1e-10);
    CHECK_NEAR(stored, energies[1], 1e-10 * conjugate);
    CHECK_REL(length, energies[2], 1e-10);
    const int packed[3][3] = {{0, 1, 2}, {1, 3, 4}, {2, 4, 5}};
    for (int j = 0; j < 3; j++) { /* central differences: the second derivative of a kink leaves 1e-5 */
        double h = 1e-5 * tw_norm(piece->tension), up[3], down[3];
        tw_piece more = *piece, less = *piece;
        more.tension[j] += h;
        less.tension[j] -= h;
        tw_piece_ahead(material, &more, 0.0, piece->length_m, up, NULL);
        tw_piece_ahead(material, &less, 0.0, piece->length_m, down, NULL);
        double most = fabs(bend[0]) + fabs(bend[3]) + fabs(bend[5]);
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR((up[i] - down[i]) / (2.0 * h), bend[packed[i][j]], 2e-4 * most);
        }
    }
}

static void test_pieces_agree_with_brute_quadrature(void)
{
    tw_line line = two_parts();
    tw_curve curve;
    const tw_material curved = tw_material_after(&line, 40.0, 15.0, NULL, &curve);
    const tw_material linear = {.stiffness_N = 34.7e6, .strain = 4e-4};
    unsigned long long seed = 2026;
    for (int i = 0; i < 25; i++) {
        tw_piece even = draw_piece(&seed, 0), uneven = draw_piece(&seed, 1);
        double low = INFINITY;
        for (int k = 0; k <= 200; k++) { /* through almost no tension the brute force is not good enough */
            double t[3];
            tw_piece_tension(&uneven, uneven.length_m * k / 200.0, t);
            low = fmin(low, tw_norm(t));
            tw_piece_tension(&even, even.length_m * k / 200.0, t);
            low = fmin(low, tw_norm(t));
        }
        if (low > 100.0) {
            check_piece(&curved, &even);
            check_piece(&curved, &uneven);
            check_piece(&linear, &uneven);
        }
    }
}

/* A ramp that is none is the uniform load, bit by bit; one of a millionth is near it. */
static void test_no_ramp_is_the_closed_form(void)
{
    const tw_material linear = {.stiffness_N = 34.7e6, .strain = 4e-4};
    unsigned long long seed = 7;
    for (int i = 0; i < 20; i++) {
        tw_piece piece = draw_piece(&seed, 0);
        double a[3], b[3];
        tw_piece_displacement(&linear, piece.tension, piece.load, piece.length_m, a, NULL);
        tw_piece_ahead(&linear, &piece, 0.0, piece.length_m, b, NULL);
        CHECK(a[0] == b[0] && a[1] == b[1] && a[2] == b[2]);
        piece.ramp[1] = 1e-12;
        tw_piece_ahead(&linear, &piece, 0.0, piece.length_m, b, NULL);
        CHECK_NEAR(b[1], a[1], 1e-9);
    }
}

static void test_extremes_of_a_ramp_are_those_of_dense_samples(void)
{
    const tw_material linear = {.stiffness_N = 34.7e6, .strain = 4e-4};
    const double zero[3] = {0.0, 0.0, 0.0}, up[3] = {0.0, 0.0, 1.0};
    unsigned long long seed = 99;
    for (int i = 0; i < 20; i++) {
        tw_piece piece = draw_piece(&seed, 1);
        double end[3], far[3], at, most = -INFINITY, tension = 0.0, slope = 0.0;
        tw_span_hang(&linear, &piece, 1, zero, piece.tension, end, far, NULL);
        for (int k = 0; k <= 2000; k++) {
            double r[3], t[3], s = piece.length_m * k / 2000.0;
            tw_piece_position(&linear, &piece, s, r);
            tw_piece_tension(&piece, s, t);
            most = fmax(most, r[2]);
            tension = fmax(tension, tw_norm(t));
            slope = fmax(slope, fabs(t[2]) / hypot(t[0], t[1]));
        }
        CHECK_NEAR(tw_span_extreme(&linear, &piece, 1, up, zero, &at), most, 1e-3);
        CHECK(tw_span_extreme(&linear, &piece, 1, up, zero, &at) >= most - 1e-10);
        CHECK(tw_span_tension_max(&piece, 1) >= tension * (1.0 - 1e-15));
        CHECK_REL(tw_span_tension_max(&piece, 1), tension, 1e-4);
        CHECK(tw_span_slope(&piece, 1) >= slope * (1.0 - 1e-12));
    }
}

/* Two halves of a ramp are the whole. */
static void test_a_ramp_split_at_a_free_place_is_the_same(void)
{
    tw_line line = two_parts();
    tw_curve curve;
    const tw_material curved = tw_material_after(&line, 40.0, 15.0, NULL, &curve);
    const double zero[3] = {0.0, 0.0, 0.0};
    unsigned long long seed = 5;
    for (int i = 0; i < 20; i++) {
        tw_piece whole = draw_piece(&seed, 1), halves[2];
        double end[3], far[3], split_end[3], split_far[3];
        halves[0] = halves[1] = whole;
        halves[0].length_m *= 0.4;
        halves[1].length_m *= 0.6;
        tw_piece_load(&whole, halves[0].length_m, halves[1].load);
        tw_span_hang(&curved, &whole, 1, zero, whole.tension, end, far, NULL);
        tw_span_hang(&curved, halves, 2, zero, whole.tension, split_end, split_far, NULL);
        for (int k = 0; k < 3; k++) {
            CHECK_NEAR(split_end[k], end[k], 1e-10 * whole.length_m);
            CHECK_NEAR(split_far[k], far[k], 1e-12 * (tw_norm(far) + tw_norm(whole.tension)));
        }
    }
}

/* The bracket of a section with a ramp, or a curved law, or both: the mesh takes the same loads and laws. */
static void check_bracket(int curved, int varies)
{
    tw_case c;
    case_level(&c, 300.0);
    c.lengths_m[0] = 300.4;
    if (curved) {
        double weight = c.project.line.weight_N_per_m;
        c.project.line = two_parts();
        c.project.line.weight_N_per_m = weight;
    }
    tw_section *section = tw_section_create(&c.project);
    CHECK(tw_section_load(section, 0, c.lengths_m, NULL, 1) == TW_OK);
    section->pieces[0].ramp[2] = varies ? -0.12 : 0.0;
    section->pieces[0].ramp[1] = varies ? 0.05 : 0.0;
    CHECK(tw_section_solve(section, &c.options, 0) == TW_OK);
    CHECK_NEAR(section->closing_m, 0.0, 1e-10);
    double gap[2];
    for (int fine = 0; fine < 2; fine++) {
        tw_energy *energy = tw_energy_create(section, fine ? 256 : 64);
        double *x = calloc(6 * (energy->element_count + 1), sizeof(double));
        tw_energy_parts parts = tw_energy_bound(energy, x);
        gap[fine] = (parts.potential_J - section->energy_lower_J) / (fabs(parts.stored_J) + fabs(parts.work_J));
        free(x);
        tw_energy_free(energy);
    }
    CHECK(gap[1] > -1e-12 && gap[1] < 1e-8);
    CHECK(gap[1] < 0.1 * gap[0] || gap[0] < 1e-11);
    tw_section_free(section);
}

int main(void)
{
    test_pieces_agree_with_brute_quadrature();
    test_no_ramp_is_the_closed_form();
    test_extremes_of_a_ramp_are_those_of_dense_samples();
    test_a_ramp_split_at_a_free_place_is_the_same();
    for (int which = 0; which < 4; which++) {
        check_bracket(which & 1, which & 2);
    }
    return check_end("test_span_curved");
}
