/* Against the dense definitions on drawn positive definite matrices. */
#include "blocktri.h"

#include <string.h>

#include "expect.h"

enum { BLOCKS = 5, N = TW_BLOCKTRI_SIZE * BLOCKS };

static unsigned long long seed = 88172645463325252ULL;

/* Draw H with the pattern of blocktri and a heavy diagonal, in both forms. */
static void draw(tw_blocktri *matrix, double dense[N][N])
{
    memset(dense, 0, sizeof(double[N][N]));
    for (int i = 0; i < BLOCKS; i++) {
        double *triangle = matrix->diagonal + TW_BLOCKTRI_TRIANGLE * i;
        double *coupling = matrix->coupling + TW_BLOCKTRI_COUPLING * i;
        for (int r = 0; r < 6; r++) {
            for (int c = 0; c <= r; c++) {
                double value = check_draw(&seed) + (r == c ? 6.0 : 0.0);
                triangle[r * (r + 1) / 2 + c] = value;
                dense[6 * i + r][6 * i + c] = dense[6 * i + c][6 * i + r] = value;
            }
            for (int c = 0; c < 3 && i > 0; c++) {
                double value = check_draw(&seed);
                coupling[3 * r + c] = value;
                dense[6 * i + r][6 * i - 3 + c] = dense[6 * i - 3 + c][6 * i + r] = value;
            }
        }
    }
}

static void dense_cholesky(double a[N][N])
{
    for (int r = 0; r < N; r++) {
        for (int c = 0; c <= r; c++) {
            double sum = a[r][c];
            for (int k = 0; k < c; k++) {
                sum -= a[r][k] * a[c][k];
            }
            a[r][c] = r == c ? sqrt(sum) : sum / a[c][c];
        }
        for (int c = r + 1; c < N; c++) {
            a[r][c] = 0.0;
        }
    }
}

static void multiply(double a[N][N], int transposed, const double x[N], double y[N])
{
    for (int r = 0; r < N; r++) {
        y[r] = 0.0;
        for (int c = 0; c < N; c++) {
            y[r] += (transposed ? a[c][r] : a[r][c]) * x[c];
        }
    }
}

static void check_vector(const double *got, const double *wanted, double tolerance)
{
    for (int i = 0; i < N; i++) {
        CHECK_NEAR(got[i], wanted[i], tolerance);
    }
}

/* Condition numbers here are below 30, so 1e-13 is a hundred roundings. */
static void test_dense(void)
{
    static double dense[N][N], lower[N][N];
    double x[N], y[N], back[N];
    tw_blocktri *matrix = tw_blocktri_create(BLOCKS);
    draw(matrix, dense);
    memcpy(lower, dense, sizeof lower);
    dense_cholesky(lower);
    CHECK(tw_blocktri_factor(matrix) == TW_OK);
    for (int i = 0; i < N; i++) {
        x[i] = check_draw(&seed);
    }
    memcpy(y, x, sizeof y);
    tw_blocktri_solve(matrix, y);
    multiply(dense, 0, y, back);
    check_vector(back, x, 1e-13);
    memcpy(y, x, sizeof y);
    tw_blocktri_forward(matrix, y);
    multiply(lower, 0, y, back);
    check_vector(back, x, 1e-13);
    memcpy(y, x, sizeof y);
    tw_blocktri_backward(matrix, y);
    multiply(lower, 1, y, back);
    check_vector(back, x, 1e-13);
    tw_blocktri_free(matrix);
}

/* What whitening rests on: (L^-T y)^T g = y^T (L^-1 g), and (L^-T y)^T H (L^-T y) = y^T y. */
static void test_whitening(void)
{
    static double dense[N][N];
    double y[N], x[N], g[N], gy[N], hx[N];
    double left = 0.0, right = 0.0, energy = 0.0, norm = 0.0;
    tw_blocktri *matrix = tw_blocktri_create(BLOCKS);
    draw(matrix, dense);
    CHECK(tw_blocktri_factor(matrix) == TW_OK);
    for (int i = 0; i < N; i++) {
        x[i] = y[i] = check_draw(&seed);
        gy[i] = g[i] = check_draw(&seed);
    }
    tw_blocktri_backward(matrix, x);
    tw_blocktri_forward(matrix, gy);
    multiply(dense, 0, x, hx);
    for (int i = 0; i < N; i++) {
        left += x[i] * g[i];
        right += y[i] * gy[i];
        energy += x[i] * hx[i];
        norm += y[i] * y[i];
    }
    CHECK_NEAR(left, right, 1e-13);
    CHECK_NEAR(energy, norm, 1e-12);
    tw_blocktri_free(matrix);
}

static void test_refused(void)
{
    static double dense[N][N];
    tw_blocktri *matrix = tw_blocktri_create(BLOCKS);
    draw(matrix, dense);
    matrix->diagonal[TW_BLOCKTRI_TRIANGLE * 3] = -1.0;
    CHECK(tw_blocktri_factor(matrix) == TW_SLACK);
    draw(matrix, dense);
    matrix->diagonal[TW_BLOCKTRI_TRIANGLE * 2 + 4] = (double)NAN;
    CHECK(tw_blocktri_factor(matrix) == TW_NOT_FINITE);
    draw(matrix, dense);
    matrix->coupling[TW_BLOCKTRI_COUPLING * 4] = INFINITY;
    CHECK(tw_blocktri_factor(matrix) == TW_NOT_FINITE);
    memset(matrix->diagonal, 0, TW_BLOCKTRI_TRIANGLE * sizeof(double));
    CHECK(tw_blocktri_factor(matrix) == TW_SLACK);
    tw_blocktri_free(matrix);
    tw_blocktri_free(NULL);
}

int main(void)
{
    for (int repeat = 0; repeat < 20; repeat++) {
        test_dense();
        test_whitening();
    }
    test_refused();
    return check_end("blocktri");
}
