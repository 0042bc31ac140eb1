#include "couple.h"

#include <math.h>

/* Lower Cholesky factor of a 3x3 block, in place. */
static int cholesky(double a[9])
{
    for (int j = 0; j < 3; j++) {
        for (int i = j; i < 3; i++) {
            double sum = a[3 * i + j];
            for (int k = 0; k < j; k++) {
                sum -= a[3 * i + k] * a[3 * j + k];
            }
            if (i == j) {
                if (!(sum > 0.0)) {
                    return 0;
                }
                a[3 * j + j] = sqrt(sum);
            } else {
                a[3 * i + j] = sum / a[3 * j + j];
            }
        }
    }
    return 1;
}

static void forward(const double l[9], double x[3])
{
    x[0] = x[0] / l[0];
    x[1] = (x[1] - l[3] * x[0]) / l[4];
    x[2] = (x[2] - l[6] * x[0] - l[7] * x[1]) / l[8];
}

static void backward(const double l[9], double x[3])
{
    x[2] = x[2] / l[8];
    x[1] = (x[1] - l[7] * x[2]) / l[4];
    x[0] = (x[0] - l[3] * x[1] - l[6] * x[2]) / l[0];
}

int tw_couple_factor(double *diag, double *off, size_t count)
{
    for (size_t b = 0; b < count; b++) {
        double *d = diag + 9 * b;
        if (b > 0) {
            double *o = off + 9 * (b - 1);
            for (int i = 0; i < 3; i++) {
                forward(diag + 9 * (b - 1), o + 3 * i); /* row of o L^-T */
            }
            for (int i = 0; i < 3; i++) {
                for (int j = 0; j < 3; j++) {
                    d[3 * i + j] -= o[3 * i] * o[3 * j] + o[3 * i + 1] * o[3 * j + 1] + o[3 * i + 2] * o[3 * j + 2];
                }
            }
        }
        if (!cholesky(d)) {
            return 0;
        }
    }
    return 1;
}

void tw_couple_solve(const double *diag, const double *off, size_t count, double *right)
{
    for (size_t b = 0; b < count; b++) {
        double *x = right + 3 * b;
        if (b > 0) {
            const double *o = off + 9 * (b - 1);
            for (int i = 0; i < 3; i++) {
                x[i] -= o[3 * i] * x[-3] + o[3 * i + 1] * x[-2] + o[3 * i + 2] * x[-1];
            }
        }
        forward(diag + 9 * b, x);
    }
    for (size_t b = count; b-- > 0;) {
        double *x = right + 3 * b;
        if (b + 1 < count) {
            const double *o = off + 9 * b;
            for (int j = 0; j < 3; j++) {
                x[j] -= o[j] * x[3] + o[3 + j] * x[4] + o[6 + j] * x[5];
            }
        }
        backward(diag + 9 * b, x);
    }
}
