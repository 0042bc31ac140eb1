/* Blocks of four that are not symmetric, against the equations themselves, and blocks that have no inverse. */
#include "couple_feed.h"

#include <string.h>

#include "expect.h"

enum { MOST = 9, SIZE = TW_COUPLE_FEED_SIZE, BLOCK = TW_COUPLE_FEED_BLOCK };

typedef struct chain {
    double lower[BLOCK * MOST], diag[BLOCK * MOST], upper[BLOCK * MOST], right[SIZE * MOST];
} chain;

/* Rows of very different units, as closing errors and tensions are; the blocks on the diagonal outweigh the others. */
static void draw_chain(chain *m, size_t count, unsigned long long *seed)
{
    static const double unit[SIZE] = {1.0, 1e-4, 1e3, 1e-7};
    for (size_t i = 0; i < BLOCK * count; i++) {
        double size = unit[(i / SIZE) % SIZE];
        m->lower[i] = 0.2 * size * check_draw(seed);
        m->upper[i] = 0.2 * size * check_draw(seed);
        m->diag[i] = size * (check_draw(seed) + (i % BLOCK % 5 == 3 ? 3.0 : 0.0));
    }
    for (size_t b = 0; b < count; b++) { /* no pivot stands on the diagonal: rows have to change places */
        for (size_t i = 0; i < SIZE; i++) {
            m->diag[BLOCK * b + SIZE * i + (i + 1) % SIZE] += 4.0 * unit[i];
        }
    }
    for (size_t i = 0; i < SIZE * count; i++) {
        m->right[i] = unit[i % SIZE] * check_draw(seed);
    }
}

static double row_times(const double *block, size_t row, const double *x)
{
    double sum = 0.0;
    for (size_t j = 0; j < SIZE; j++) {
        sum += block[SIZE * row + j] * x[j];
    }
    return sum;
}

static void test_solution_satisfies_the_equations(void)
{
    static const double unit[SIZE] = {1.0, 1e-4, 1e3, 1e-7};
    unsigned long long seed = 11;
    for (size_t count = 1; count <= MOST; count++) {
        for (int draw = 0; draw < 20; draw++) {
            chain m, used;
            draw_chain(&m, count, &seed);
            used = m;
            CHECK(tw_couple_feed_solve(used.lower, used.diag, used.upper, count, used.right));
            for (size_t b = 0; b < count; b++) {
                for (size_t i = 0; i < SIZE; i++) {
                    double left = row_times(m.diag + BLOCK * b, i, used.right + SIZE * b);
                    left += b > 0 ? row_times(m.lower + BLOCK * b, i, used.right + SIZE * (b - 1)) : 0.0;
                    left += b + 1 < count ? row_times(m.upper + BLOCK * b, i, used.right + SIZE * (b + 1)) : 0.0;
                    CHECK_NEAR(left, m.right[SIZE * b + i], 1e-13 * unit[i]); /* a few hundred roundings */
                }
            }
        }
    }
}

/* A row that says x = 0 leaves exactly 0, whatever its column holds: nothing is moved where nothing can move. */
static void test_an_unknown_held_at_zero_stays_there(void)
{
    unsigned long long seed = 3;
    chain m;
    draw_chain(&m, 3, &seed);
    memset(m.lower + BLOCK + 3 * SIZE, 0, SIZE * sizeof(double));
    memset(m.upper + BLOCK + 3 * SIZE, 0, SIZE * sizeof(double));
    memset(m.diag + BLOCK + 3 * SIZE, 0, SIZE * sizeof(double));
    m.diag[BLOCK + 15] = 1.0;
    m.right[SIZE + 3] = 0.0;
    CHECK(tw_couple_feed_solve(m.lower, m.diag, m.upper, 3, m.right));
    CHECK(m.right[SIZE + 3] == 0.0);
}

static void test_a_singular_block_is_refused(void)
{
    unsigned long long seed = 5;
    chain m;
    draw_chain(&m, 2, &seed);
    memset(m.diag + BLOCK, 0, BLOCK * sizeof(double));
    memset(m.lower + BLOCK, 0, BLOCK * sizeof(double));
    CHECK(!tw_couple_feed_solve(m.lower, m.diag, m.upper, 2, m.right));
    draw_chain(&m, 1, &seed);
    m.diag[5] = NAN;
    CHECK(!tw_couple_feed_solve(m.lower, m.diag, m.upper, 1, m.right));
}

int main(void)
{
    test_solution_satisfies_the_equations();
    test_an_unknown_held_at_zero_stays_there();
    test_a_singular_block_is_refused();
    return check_end("test_couple_feed");
}
