#include "blocktri.h"

#include <math.h>

#include "alloc.h"

enum { SIZE = TW_BLOCKTRI_SIZE, TRIANGLE = TW_BLOCKTRI_TRIANGLE, COUPLING = TW_BLOCKTRI_COUPLING };

/* Where row r of a lower triangle stored by rows begins. */
static const int row_start[SIZE] = {0, 1, 3, 6, 10, 15};

tw_blocktri *tw_blocktri_create(size_t block_count)
{
    tw_blocktri *matrix = tw_calloc(1, sizeof *matrix);
    if (matrix == NULL) {
        return NULL;
    }
    matrix->block_count = block_count;
    matrix->diagonal = tw_calloc(block_count, TRIANGLE * sizeof(double));
    matrix->coupling = tw_calloc(block_count, COUPLING * sizeof(double));
    if (matrix->diagonal == NULL || matrix->coupling == NULL) {
        goto fail;
    }
    return matrix;
fail:
    tw_blocktri_free(matrix);
    return NULL;
}

void tw_blocktri_free(tw_blocktri *matrix)
{
    if (matrix != NULL) {
        tw_free(matrix->diagonal);
        tw_free(matrix->coupling);
        tw_free(matrix);
    }
}

/* X = B K^-T in place; K is the lower right corner of the factored triangle before. */
static void coupling_reduce(const double *before, double *coupling)
{
    const double *k3 = before + 6 + 3, *k4 = before + 10 + 3, *k5 = before + 15 + 3;
    for (int r = 0; r < SIZE; r++) {
        double *b = coupling + 3 * r;
        b[0] *= k3[0];
        b[1] = (b[1] - k4[0] * b[0]) * k4[1];
        b[2] = (b[2] - k5[0] * b[0] - k5[1] * b[1]) * k5[2];
    }
}

/* A <- A - X X^T. */
static void triangle_update(double *triangle, const double *x)
{
    double *a = triangle;
    for (int r = 0; r < SIZE; r++) {
        const double *p = x + 3 * r;
        for (int c = 0; c <= r; c++) {
            const double *q = x + 3 * c;
            *a++ -= p[0] * q[0] + p[1] * q[1] + p[2] * q[2];
        }
    }
}

/* Cholesky of one triangle; pivots are kept as reciprocals, so that the solves only multiply. */
static tw_status triangle_factor(double *triangle)
{
    for (int r = 0; r < SIZE; r++) {
        double *row = triangle + row_start[r];
        double pivot = row[r];
        for (int c = 0; c < r; c++) {
            const double *other = triangle + row_start[c];
            double sum = row[c];
            for (int k = 0; k < c; k++) {
                sum -= row[k] * other[k];
            }
            row[c] = sum * other[c];
            pivot -= row[c] * row[c];
        }
        if (!isfinite(pivot)) {
            return TW_NOT_FINITE;
        }
        if (pivot <= 0.0) {
            return TW_SLACK;
        }
        row[r] = 1.0 / sqrt(pivot);
    }
    return TW_OK;
}

tw_status tw_blocktri_factor(tw_blocktri *matrix)
{
    for (size_t i = 0; i < matrix->block_count; i++) {
        double *triangle = matrix->diagonal + TRIANGLE * i;
        if (i > 0) {
            double *coupling = matrix->coupling + COUPLING * i;
            coupling_reduce(triangle - TRIANGLE, coupling);
            triangle_update(triangle, coupling);
        }
        tw_status status = triangle_factor(triangle);
        if (status != TW_OK) {
            return status;
        }
    }
    return TW_OK;
}

void tw_blocktri_forward(const tw_blocktri *matrix, double *x)
{
    for (size_t i = 0; i < matrix->block_count; i++, x += SIZE) {
        const double *triangle = matrix->diagonal + TRIANGLE * i;
        const double *b = matrix->coupling + COUPLING * i;
        for (int r = 0; r < SIZE; r++) {
            const double *row = triangle + row_start[r];
            double sum = x[r];
            if (i > 0) {
                sum -= b[3 * r] * x[-3] + b[3 * r + 1] * x[-2] + b[3 * r + 2] * x[-1];
            }
            for (int c = 0; c < r; c++) {
                sum -= row[c] * x[c];
            }
            x[r] = sum * row[r];
        }
    }
}

void tw_blocktri_backward(const tw_blocktri *matrix, double *x)
{
    for (size_t i = matrix->block_count; i-- > 0;) {
        const double *triangle = matrix->diagonal + TRIANGLE * i;
        const double *b = matrix->coupling + COUPLING * i;
        double *y = x + SIZE * i;
        for (int r = SIZE; r-- > 0;) {
            const double *row = triangle + row_start[r];
            y[r] *= row[r];
            for (int c = 0; c < r; c++) {
                y[c] -= row[c] * y[r];
            }
        }
        for (int c = 0; i > 0 && c < 3; c++) {
            y[c - 3] -= (b[c] * y[0] + b[3 + c] * y[1] + b[6 + c] * y[2]) +
                        (b[9 + c] * y[3] + b[12 + c] * y[4] + b[15 + c] * y[5]);
        }
    }
}

void tw_blocktri_solve(const tw_blocktri *matrix, double *x)
{
    tw_blocktri_forward(matrix, x);
    tw_blocktri_backward(matrix, x);
}
