/* blocktri: Cholesky factor of the Hessian of a chain of three-node elements.
 *
 * Block i holds six unknowns, (middle node, end node) of element i; it meets only the last three unknowns of block i-1,
 * the end node where the element starts. So
 *     H = [ A_0  .            ]      A_i 6x6 symmetric, stored as its lower triangle by rows (21 numbers)
 *         [ B_1  A_1  .       ]      B_i 6x3, by rows (18 numbers)
 *         [      B_2  A_2  .  ]
 * and H = L L^T keeps that pattern: L_ii = chol(A_i - X_i X_i^T), X_i = B_i K^-T with K the lower right 3x3 corner of
 * L_(i-1)(i-1). Golub and Van Loan, Matrix Computations, 4th ed., 4.2.4 and 4.5.1 (block tridiagonal Cholesky).
 * All O(block_count); nothing is allocated after create.
 */
#ifndef TW_BLOCKTRI_H
#define TW_BLOCKTRI_H

#include <stddef.h>

#include "status.h"

#define TW_BLOCKTRI_SIZE 6       /* unknowns of a block */
#define TW_BLOCKTRI_TRIANGLE 21  /* numbers of a lower triangle */
#define TW_BLOCKTRI_COUPLING 18  /* numbers of a coupling */

typedef struct tw_blocktri {
    size_t block_count;
    double *diagonal; /* [21 block_count] A_i; after factor L_ii with each pivot as its reciprocal; owned */
    double *coupling; /* [18 block_count] B_i; after factor X_i; the first is not used; owned */
} tw_blocktri;

/* All zero. NULL without memory. Free is NULL-safe. */
tw_blocktri *tw_blocktri_create(size_t block_count);
void tw_blocktri_free(tw_blocktri *matrix);

/* H -> L in place. TW_SLACK at a pivot that is not positive (the Hessian of a line loses definiteness only where the
 * line carries no tension), TW_NOT_FINITE at one that is not finite; the matrix is then spoilt. */
tw_status tw_blocktri_factor(tw_blocktri *matrix);

/* On a factored matrix, x [6 block_count] in place. */
void tw_blocktri_forward(const tw_blocktri *matrix, double *x);  /* x <- L^-1 x */
void tw_blocktri_backward(const tw_blocktri *matrix, double *x); /* x <- L^-T x */
void tw_blocktri_solve(const tw_blocktri *matrix, double *x);    /* x <- H^-1 x */

#endif
