#include "couple_feed.h"

#include <math.h>

enum { SIZE = TW_COUPLE_FEED_SIZE, BLOCK = TW_COUPLE_FEED_BLOCK };

/* Row with the greatest pivot in a column, each row measured by its own largest entry: the rows carry different units. */
static int pivot_row(const double *a, int column)
{
    int best = -1;
    double most = 0.0;
    for (int i = column; i < SIZE; i++) {
        double size = 0.0;
        for (int j = 0; j < SIZE; j++) {
            size = fmax(size, fabs(a[SIZE * i + j]));
        }
        if (size > 0.0 && fabs(a[SIZE * i + column]) > most * size) {
            most = fabs(a[SIZE * i + column]) / size;
            best = i;
        }
    }
    return best;
}

static void swap_rows(double *a, int width, int i, int j)
{
    for (int k = 0; k < width; k++) {
        double held = a[width * i + k];
        a[width * i + k] = a[width * j + k];
        a[width * j + k] = held;
    }
}

/* row_i -= factor * row_j */
static void take_row(double *a, int width, int i, int j, double factor)
{
    for (int k = 0; k < width; k++) {
        a[width * i + k] -= factor * a[width * j + k];
    }
}

/* upper := diag^-1 upper, right := diag^-1 right (Gauss-Jordan); diag is lost. */
static int eliminate(double *diag, double *upper, double *right)
{
    for (int c = 0; c < SIZE; c++) {
        int p = pivot_row(diag, c);
        if (p < 0 || !isfinite(diag[SIZE * p + c])) {
            return 0;
        }
        swap_rows(diag, SIZE, c, p);
        swap_rows(upper, SIZE, c, p);
        swap_rows(right, 1, c, p);
        for (int i = 0; i < SIZE; i++) {
            double factor = diag[SIZE * i + c] / diag[SIZE * c + c];
            if (i != c && factor != 0.0) {
                take_row(diag, SIZE, i, c, factor);
                take_row(upper, SIZE, i, c, factor);
                take_row(right, 1, i, c, factor);
            }
        }
    }
    for (int c = 0; c < SIZE; c++) {
        right[c] /= diag[SIZE * c + c];
        for (int k = 0; k < SIZE; k++) {
            upper[SIZE * c + k] /= diag[SIZE * c + c];
        }
    }
    return 1;
}

/* out -= a b for a block b with `width` columns. */
static void take_product(const double *a, const double *b, int width, double *out)
{
    for (int i = 0; i < SIZE; i++) {
        for (int k = 0; k < SIZE; k++) {
            for (int j = 0; j < width; j++) {
                out[width * i + j] -= a[SIZE * i + k] * b[width * k + j];
            }
        }
    }
}

int tw_couple_feed_solve(double *lower, double *diag, double *upper, size_t count, double *right)
{
    for (size_t b = 0; b < count; b++) {
        if (b > 0) {
            take_product(lower + BLOCK * b, upper + BLOCK * (b - 1), SIZE, diag + BLOCK * b);
            take_product(lower + BLOCK * b, right + SIZE * (b - 1), 1, right + SIZE * b);
        }
        if (!eliminate(diag + BLOCK * b, upper + BLOCK * b, right + SIZE * b)) {
            return 0;
        }
    }
    for (size_t b = count; b-- > 1;) {
        take_product(upper + BLOCK * (b - 1), right + SIZE * b, 1, right + SIZE * (b - 1));
    }
    return 1;
}
