/* Holds of the discretised line in axes of their own: slopes against differences, fixed directions, and the bracket. */
#include "energy_hold.h"

#include <string.h>

#include "cases.h"
#include "expect.h"
#include "route.h"
#include "settle.h"
#include "vector.h"

enum { ELEMENTS = 2, SIZE = TW_BLOCKTRI_SIZE };
static double STATIONS[CASE_SUPPORTS];

/* A route of five angle points: springs at both ends, a post that gives one way only, a V, a V with a slack string. */
static void case_bends(tw_case *c)
{
    const double plan[6][2] = {{0, 0}, {200, 30}, {390, 110}, {600, 120}, {800, 60}, {1010, 30}};
    const double lengths_m[] = {202.9, 206.8, 210.9, 209.4, 212.8};
    case_begin(c);
    tw_support *first = case_anchor(c, 0.0, 30.0);
    first->stiffness_along_N_per_m = 3e5;
    first->stiffness_vertical_N_per_m = 6e5;
    case_post(c, 0.0, 31.0, INFINITY, 8e4);
    case_hanger(c, 0.0, 33.0, 3.0, 500.0)->hanger_spread_m = 5.0;
    case_post(c, 0.0, 31.0, 9e4, 2e5);
    case_hanger(c, 0.0, 33.0, 3.0, 500.0)->hanger_spread_m = 0.6;
    case_anchor(c, 0.0, 30.0)->stiffness_across_N_per_m = 2e5;
    for (int j = 0; j < 6; j++) {
        c->supports[j].station_m = plan[j][0];
        c->supports[j].offset_m = plan[j][1];
    }
    memcpy(c->lengths_m, lengths_m, sizeof lengths_m);
    case_condition(c, 15.0)->wind_pressure_Pa = 250.0;
    case_ready(c);
    tw_route_measure(c->supports, 6, STATIONS);
    c->project.route_station_m = STATIONS;
}

/* A drawn displacement that leaves what is fixed where it is. */
static void draw(const tw_energy *energy, double size, unsigned long long *seed, double *x)
{
    for (size_t i = 0; i < SIZE * (energy->element_count + 1); i++) {
        x[i] = i < 3 ? 0.0 : size * check_draw(seed);
    }
    for (size_t j = 0; j < energy->hold_count; j++) {
        tw_energy_hold_release(&energy->holds[j], x + SIZE * energy->holds[j].block + 3);
    }
}

static double product(const double *a, const double *b, size_t count)
{
    double sum = 0.0;
    for (size_t i = 0; i < count; i++) {
        sum += a[i] * b[i];
    }
    return sum;
}

/* y = H v from the stored blocks. */
static void multiply(const tw_blocktri *h, const double *v, double *y)
{
    memset(y, 0, SIZE * h->block_count * sizeof(double));
    for (size_t b = 0; b < h->block_count; b++) {
        for (int i = 0; i < SIZE; i++) {
            for (int j = 0; j < SIZE; j++) {
                int row = i > j ? i : j, column = i > j ? j : i;
                y[SIZE * b + (size_t)i] +=
                    h->diagonal[TW_BLOCKTRI_TRIANGLE * b + (size_t)(row * (row + 1) / 2 + column)] * v[SIZE * b + (size_t)j];
            }
            for (int j = 0; b > 0 && j < 3; j++) {
                double entry = h->coupling[TW_BLOCKTRI_COUPLING * b + (size_t)(3 * i + j)];
                y[SIZE * b + (size_t)i] += entry * v[SIZE * b - 3 + (size_t)j];
                y[SIZE * b - 3 + (size_t)j] += entry * v[SIZE * b + (size_t)i];
            }
        }
    }
}

/* Along drawn directions, central differences over h = 1e-5 m: of the energy (h^2 of its third derivative, EA / m^2 at most, is
 * 1e-3 N of forces of 1e4), of the gradient (the same of 1e7 N/m). Rounding of the energy, 1e-16 of 1e6 J over h, is 1e-5 N. */
static void check_slopes(const tw_energy *energy, unsigned long long *seed)
{
    size_t count = SIZE * (energy->element_count + 1);
    double x[count], v[count], up[count], down[count], g[count], other[count], image[count];
    const double h = 1e-5;
    draw(energy, 1e-3, seed, x);
    draw(energy, 1.0, seed, v);
    for (size_t i = 0; i < count; i++) {
        up[i] = x[i] + h * v[i];
        down[i] = x[i] - h * v[i];
    }
    double rise = tw_energy_evaluate(energy, up, g).potential_J - tw_energy_evaluate(energy, down, other).potential_J;
    for (size_t i = 0; i < count; i++) {
        g[i] = (g[i] - other[i]) / (2.0 * h);
    }
    tw_energy_evaluate(energy, x, other);
    double size = sqrt(product(other, other, count) * product(v, v, count));
    CHECK_NEAR(rise / (2.0 * h), product(other, v, count), 1e-6 * size);
    tw_blocktri *matrix = tw_blocktri_create(energy->element_count + 1);
    tw_energy_hessian(energy, x, 0.0, matrix);
    multiply(matrix, v, image);
    for (size_t i = 0; i < count; i++) {
        other[i] = image[i] - g[i];
    }
    CHECK(product(other, other, count) <= 1e-10 * product(image, image, count));
    tw_blocktri_free(matrix);
}

static void test_slopes(void)
{
    tw_case c;
    unsigned long long seed = 31;
    case_bends(&c);
    tw_section *section = case_hung(&c, 0);
    CHECK(section != NULL);
    tw_energy *energy = section ? tw_energy_create(section, ELEMENTS) : NULL;
    CHECK(energy && energy->holds[0].guided && energy->holds[1].guided && !energy->holds[3].guided);
    CHECK(energy && energy->holds[2].link_count == 2 && energy->holds[4].link_count == 2);
    CHECK(energy && energy->holds[4].link[0].force_N * energy->holds[4].link[1].force_N == 0.0);
    CHECK(energy && energy->holds[2].link[0].force_N * energy->holds[2].link[1].force_N > 0.0);
    for (int i = 0; energy && i < 20; i++) {
        check_slopes(energy, &seed);
    }
    tw_energy_free(energy);
    tw_section_free(section);
}

/* A guided clamp moves across its guide only, and its support's own place is kept. */
static void test_guide(void)
{
    tw_case c;
    case_bends(&c);
    tw_section *section = case_hung(&c, 0);
    tw_energy *energy = section ? tw_energy_create(section, ELEMENTS) : NULL;
    if (energy) {
        const tw_energy_hold *post = &energy->holds[1];
        double e[2], g[3] = {5.0, -3.0, 2.0};
        tw_route_ahead(&c.project, 1, e);
        CHECK_NEAR(post->guide[0], e[0], 1e-15);
        CHECK_NEAR(post->guide[1], e[1], 1e-15);
        CHECK_NEAR(tw_dot(post->guide, post->offset), 0.0, 1e-15);
        CHECK(post->fixed[2] && !post->fixed[0] && !post->fixed[1]);
        tw_energy_hold_release(post, g);
        CHECK_NEAR(tw_dot(post->guide, g), 0.0, 1e-15);
        CHECK(g[2] == 0.0);
    }
    tw_energy_free(energy);
    tw_section_free(section);
}

static void test_the_bracket_closes(void)
{
    tw_case c;
    case_bends(&c);
    tw_section *section = case_hung(&c, 0);
    tw_settled out = {0};
    CHECK(section && tw_settle(section, &c.options, &out) == TW_OK);
    CHECK(out.gap_relative >= 0.0 && out.gap_relative <= 1e-6);
    tw_section_free(section);
}

int main(void)
{
    test_slopes();
    test_guide();
    test_the_bracket_closes();
    return check_end("test_energy_hold");
}
