/* Derivatives against central differences, the elements against closed forms, the bound against a long oracle. */
#include "energy.h"

#include <string.h>

#include "expect.h"
#include "fixture.h"
#include "vector.h"

static unsigned long long seed = 88172645463325252ULL;

static double *vector_create(const tw_energy *energy)
{
    return calloc(energy->element_count + 1, TW_BLOCKTRI_SIZE * sizeof(double));
}

static size_t unknowns(const tw_energy *energy)
{
    return TW_BLOCKTRI_SIZE * (energy->element_count + 1);
}

/* Displacements of every unknown that is not fixed, up to `size`. */
static void displace(const tw_energy *energy, double size, double *x)
{
    for (size_t i = 0; i < unknowns(energy); i++) {
        x[i] = i < 3 ? 0.0 : size * check_draw(&seed);
    }
    for (size_t j = 0; j < energy->hold_count; j++) {
        for (size_t i = 0; i < 3; i++) {
            size_t at = TW_BLOCKTRI_SIZE * energy->holds[j].block + 3 + i;
            x[at] = energy->holds[j].fixed[i] ? 0.0 : x[at];
        }
    }
}

static int is_fixed(const tw_energy *energy, size_t unknown)
{
    for (size_t j = 0; j < energy->hold_count; j++) {
        size_t end = TW_BLOCKTRI_SIZE * energy->holds[j].block + 3;
        if (unknown >= end && unknown < end + 3) {
            return energy->holds[j].fixed[unknown - end];
        }
    }
    return unknown < 3;
}

static double entry(const tw_blocktri *matrix, size_t row, size_t column)
{
    size_t r = row > column ? row : column, c = row > column ? column : row;
    size_t block = r / 6, i = r % 6;
    if (c / 6 == block) {
        return matrix->diagonal[TW_BLOCKTRI_TRIANGLE * block + i * (i + 1) / 2 + c % 6];
    }
    return c / 6 + 1 == block && c % 6 >= 3 ? matrix->coupling[TW_BLOCKTRI_COUPLING * block + 3 * i + c % 6 - 3] : 0.0;
}

/* Central differences, step 1e-6 m. Second-order error: third derivative EA/a^2, below 1e6 N/m^2 with edges a of 6 m and
 * more, times 1e-12 m^2. Rounding: that of the strain, 1e-16, moves the energy of 60 m of line by 6e-15 T; over 1e-6 m
 * that is 1e-8 of the tension; three of them are allowed. */
static void check_gradient(const tw_energy *energy, double size)
{
    const double h = 1e-6;
    double *x = vector_create(energy), *g = vector_create(energy), *other = vector_create(energy);
    displace(energy, size, x);
    double tolerance = 3e-8 * tw_energy_evaluate(energy, x, g).tension_N;
    for (size_t i = 0; i < unknowns(energy); i++) {
        double at = x[i];
        x[i] = at + h;
        double high = tw_energy_evaluate(energy, x, other).potential_J;
        x[i] = at - h;
        double low = tw_energy_evaluate(energy, x, other).potential_J;
        x[i] = at;
        CHECK_NEAR(g[i], is_fixed(energy, i) ? 0.0 : (high - low) / (2.0 * h), tolerance);
    }
    free(x);
    free(g);
    free(other);
}

/* The same of the gradient, against entries of up to EA/a = 1e7 N/m: a millionth of that. */
static void check_hessian(const tw_energy *energy, double size)
{
    const double h = 1e-6;
    double *x = vector_create(energy), *high = vector_create(energy), *low = vector_create(energy);
    tw_blocktri *matrix = tw_blocktri_create(energy->element_count + 1);
    displace(energy, size, x);
    tw_energy_hessian(energy, x, 0.0, matrix);
    for (size_t c = 0; c < unknowns(energy); c++) {
        double at = x[c];
        x[c] = at + h;
        tw_energy_evaluate(energy, x, high);
        x[c] = at - h;
        tw_energy_evaluate(energy, x, low);
        x[c] = at;
        for (size_t r = 0; r < unknowns(energy); r++) {
            double wanted = is_fixed(energy, c) ? (r == c ? 1.0 : 0.0) : (high[r] - low[r]) / (2.0 * h);
            CHECK_NEAR(entry(matrix, r, c), wanted, 10.0);
        }
    }
    tw_blocktri_free(matrix);
    free(x);
    free(high);
    free(low);
}

static void test_derivatives(void)
{
    fixture f;
    fixture_three_spans(&f);
    tw_section *section = fixture_solve(&f);
    CHECK(section != NULL);
    tw_energy *energy = tw_energy_create(section, 4);
    CHECK(energy->element_count == 12); /* the point load splits the second span 149.6 to 252.6 m: 1 + 3 */
    check_gradient(energy, 0.0);
    check_gradient(energy, 1e-3);
    check_gradient(energy, 0.1); /* slack here and there */
    check_hessian(energy, 0.0);
    check_hessian(energy, 1e-3);
    check_hessian(energy, 0.1);
    tw_energy_free(energy);
    tw_section_free(section);
}

/* The start shape reaches from clamp to clamp, and weighs what the line weighs. */
static void test_mesh(void)
{
    fixture f;
    fixture_three_spans(&f);
    tw_section *section = fixture_solve(&f);
    tw_energy *energy = tw_energy_create(section, 1000);
    double load[3] = {0.0, 0.0, 0.0};
    for (size_t j = 0; j + 1 < energy->hold_count; j++) {
        double reach[3];
        tw_copy(energy->holds[j].place, reach);
        for (size_t e = 2 * energy->holds[j].block; e < 2 * energy->holds[j + 1].block; e++) {
            tw_axpy(reach, 1.0, energy->edge + 3 * e, reach);
        }
        for (int i = 0; i < 3; i++) {
            CHECK_NEAR(reach[i], energy->holds[j + 1].place[i], 1e-10);
        }
    }
    for (size_t i = 0; i < 2 * (energy->element_count + 1); i++) {
        tw_axpy(load, 1.0, energy->load + 3 * i, load);
    }
    /* 953.5 m under (0, 4, -18.97) N/m, the point load and half of two hangers' 600 N. The wind turns with the span. */
    CHECK_NEAR(load[0], 200.0, 1e-8);
    CHECK_NEAR(load[1], 953.5 * 4.0 + 100.0, 1e-8);
    CHECK_NEAR(load[2], -953.5 * 18.97 - 900.0 - 600.0, 1e-8);
    tw_energy_free(energy);
    tw_section_free(section);
}

/* Plain Newton from the exact line's shape. */
static void settle(const tw_energy *energy, double *x)
{
    double *g = vector_create(energy);
    tw_blocktri *matrix = tw_blocktri_create(energy->element_count + 1);
    for (int step = 0; step < 6; step++) {
        tw_energy_evaluate(energy, x, g);
        tw_energy_hessian(energy, x, 0.0, matrix);
        CHECK(tw_blocktri_factor(matrix) == TW_OK);
        tw_blocktri_solve(matrix, g);
        for (size_t i = 0; i < unknowns(energy); i++) {
            x[i] -= g[i];
        }
    }
    tw_blocktri_free(matrix);
    free(g);
}

static double middle_sag(const tw_energy *energy, const double *x)
{
    double z = x[3 * (energy->element_count + 1) + 2];
    for (size_t e = 0; e < energy->element_count; e++) {
        z += energy->edge[3 * e + 2];
    }
    return -z;
}

/* Own 30-digit oracle I(a): sag 10.3551736026 m. Errors of fourth order. */
static void test_order(void)
{
    const size_t counts[3] = {4, 8, 16};
    const double errors[3] = {6.7e-6, 4.2e-7, 2.6e-8};
    fixture f;
    fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
    tw_section *section = fixture_solve(&f);
    for (int i = 0; i < 3; i++) {
        tw_energy *energy = tw_energy_create(section, counts[i]);
        double *x = vector_create(energy);
        settle(energy, x);
        CHECK_REL(fabs(middle_sag(energy, x) / 10.3551736026 - 1.0), errors[i], 0.02);
        free(x);
        tw_energy_free(energy);
    }
    tw_section_free(section);
}

/* Own 30-digit oracle I(a): stretch energy, work of gravity and their sum. */
static void test_bound(void)
{
    fixture f;
    fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
    tw_section *section = fixture_solve(&f);
    for (size_t count = 256; count <= 65536; count *= 16) {
        tw_energy *energy = tw_energy_create(section, count);
        double *x = vector_create(energy);
        tw_energy_parts parts = tw_energy_bound(energy, x);
        double mesh = pow(256.0 / (double)count, 4.0) * 2e-4; /* measured at 256 elements: 1e-4 J */
        CHECK_NEAR(parts.stored_J, 1315.88514729, mesh + 1e-8);
        CHECK_NEAR(parts.work_J, 33131.2079527, mesh + 1e-7);
        CHECK_NEAR(parts.potential_J, -31815.3228054, mesh + 1e-7);
        free(x);
        tw_energy_free(energy);
    }
    tw_section_free(section);
}

/* Moving the whole problem moves the potential energy by the loads' work, and nothing else. */
static void test_datum(void)
{
    fixture f;
    fixture_three_spans(&f);
    tw_section *section = fixture_solve(&f);
    tw_energy *energy = tw_energy_create(section, 64);
    double *x = vector_create(energy);
    tw_energy_parts here = tw_energy_bound(energy, x);
    for (size_t j = 0; j < energy->hold_count; j++) {
        energy->holds[j].place[2] -= 128.0;
    }
    tw_energy_parts there = tw_energy_bound(energy, x);
    double weight = 953.5 * 18.97 + 900.0 + 600.0;
    CHECK_NEAR(here.potential_J - there.potential_J, 128.0 * weight, 1e-7);
    CHECK_NEAR(here.work_J, there.work_J, 1e-8);
    CHECK(fabs(here.link_excess) < 1e-12);
    free(x);
    tw_energy_free(energy);
    tw_section_free(section);
}

/* A number that is not finite anywhere shows in the residual, which a plain maximum would hide. */
static void test_not_finite(void)
{
    const double bad[2] = {(double)NAN, INFINITY};
    fixture f;
    fixture_three_spans(&f);
    tw_section *section = fixture_solve(&f);
    tw_energy *energy = tw_energy_create(section, 4);
    double *x = vector_create(energy), *g = vector_create(energy);
    CHECK(tw_energy_evaluate(energy, x, g).residual_N >= 0.0);
    for (size_t i = 6; i < unknowns(energy) - 6; i++) {
        x[i] = bad[i % 2];
        CHECK(isnan(tw_energy_evaluate(energy, x, g).residual_N));
        x[i] = 0.0;
    }
    free(x);
    free(g);
    tw_energy_free(energy);
    tw_section_free(section);
}

/* With a floor the matrix is definite where the line is slack, without one it is refused. */
static void test_floor(void)
{
    fixture f;
    fixture_span(&f, 300.0, 0.0, 300.8, 15.97, 34.7e6);
    tw_section *section = fixture_solve(&f);
    tw_energy *energy = tw_energy_create(section, 8);
    tw_blocktri *matrix = tw_blocktri_create(energy->element_count + 1);
    double *x = vector_create(energy);
    for (size_t e = 0; e < 6 * energy->element_count; e++) {
        energy->edge[e] *= 0.9; /* shorter than natural: slack all over */
    }
    tw_energy_hessian(energy, x, 0.0, matrix);
    CHECK(tw_blocktri_factor(matrix) == TW_SLACK);
    tw_energy_hessian(energy, x, 1.0, matrix);
    CHECK(tw_blocktri_factor(matrix) == TW_OK);
    free(x);
    tw_blocktri_free(matrix);
    tw_energy_free(energy);
    tw_section_free(section);
}

int main(void)
{
    test_not_finite();
    test_floor();
    test_derivatives();
    test_mesh();
    test_order();
    test_bound();
    test_datum();
    return check_end("energy");
}
