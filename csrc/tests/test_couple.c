/* The spans' block-tridiagonal system against plain Gaussian elimination, and matrices that have no factor. */
#include "couple.h"

#include <string.h>

#include "expect.h"

enum { MOST = 9, ORDER = 3 * MOST };

typedef struct chain {
    size_t count;
    double diag[9 * MOST], off[9 * MOST];
    double full[ORDER][ORDER];
} chain;

/* M = sum of v v' over vectors that reach over two blocks, so positive definite with the right pattern. */
static void make_chain(chain *m, size_t count, double scale, unsigned long long *seed)
{
    memset(m, 0, sizeof *m);
    m->count = count;
    for (size_t b = 0; b < count; b++) {
        size_t reach = b + 1 < count ? 6 : 3;
        for (int vector = 0; vector < 7; vector++) {
            double v[6];
            for (size_t i = 0; i < reach; i++) {
                v[i] = scale * check_draw(seed);
            }
            for (size_t i = 0; i < reach; i++) {
                for (size_t j = 0; j < reach; j++) {
                    m->full[3 * b + i][3 * b + j] += v[i] * v[j];
                }
            }
        }
    }
    for (size_t b = 0; b < count; b++) {
        for (size_t i = 0; i < 9; i++) {
            m->diag[9 * b + i] = m->full[3 * b + i / 3][3 * b + i % 3];
            m->off[9 * b + i] = b + 1 < count ? m->full[3 * b + 3 + i / 3][3 * b + i % 3] : 0.0;
        }
    }
}

static void multiply(const chain *m, const double *x, double *y)
{
    for (size_t i = 0; i < 3 * m->count; i++) {
        y[i] = 0.0;
        for (size_t j = 0; j < 3 * m->count; j++) {
            y[i] += m->full[i][j] * x[j];
        }
    }
}

/* Backward stable: what comes back satisfies the equations to rounding, however ill they are conditioned. */
static void test_solution_satisfies_the_equations(void)
{
    unsigned long long seed = 7;
    for (size_t count = 1; count <= MOST; count++) {
        for (int draw = 0; draw < 20; draw++) {
            chain m;
            double right[ORDER], x[ORDER], back[ORDER];
            make_chain(&m, count, draw % 3 ? 1.0 : 1e-6, &seed);
            for (size_t i = 0; i < 3 * count; i++) {
                x[i] = right[i] = check_draw(&seed);
            }
            CHECK(tw_couple_factor(m.diag, m.off, count) == 1);
            tw_couple_solve(m.diag, m.off, count, x);
            multiply(&m, x, back);
            double size = 0.0, miss = 0.0;
            for (size_t i = 0; i < 3 * count; i++) {
                double row = 0.0;
                for (size_t j = 0; j < 3 * count; j++) {
                    row += fabs(m.full[i][j] * x[j]);
                }
                size = fmax(size, row);
                miss = fmax(miss, fabs(back[i] - right[i]));
            }
            CHECK(miss <= 1e-14 * (double)(3 * count) * size);
        }
    }
}

static void test_known_factor(void)
{
    double diag[18] = {4.0, 2.0, 0.0, 2.0, 5.0, 2.0, 0.0, 2.0, 5.0, 10.0, 0.0, 0.0, 0.0, 9.0, 0.0, 0.0, 0.0, 16.0};
    double off[9] = {2.0, 1.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0};
    CHECK(tw_couple_factor(diag, off, 2) == 1);
    CHECK(diag[0] == 2.0 && diag[3] == 1.0 && diag[4] == 2.0 && diag[7] == 1.0 && diag[8] == 2.0);
    CHECK(off[0] == 1.0 && off[1] == 0.0 && off[2] == 0.0);
    CHECK(diag[9] == 3.0 && diag[13] == 3.0 && diag[17] == 4.0);
}

static void test_what_is_not_positive_definite_is_refused(void)
{
    const double bad[] = {0.0, -1.0, NAN};
    for (size_t block = 0; block < 3; block++) {
        for (size_t pivot = 0; pivot < 3; pivot++) {
            for (int i = 0; i < 3; i++) {
                unsigned long long seed = 11;
                chain m;
                make_chain(&m, 3, 1.0, &seed);
                m.diag[9 * block + 4 * pivot] = bad[i];
                CHECK(tw_couple_factor(m.diag, m.off, 3) == 0);
            }
        }
    }
}

int main(void)
{
    test_solution_satisfies_the_equations();
    test_known_factor();
    test_what_is_not_positive_definite_is_refused();
    return check_end("test_couple");
}
