/* couple: the symmetric 3x3 block-tridiagonal system over the spans of a section (pure, O(spans)).
 *
 *     diag[0]  off[0]'                 Blocks are row-major. diag: full 3x3 blocks; off[k] couples block k + 1 (rows) with
 *     off[0]   diag[1]  off[1]'        block k (columns). Factor in place: diag[k] becomes its Cholesky factor (lower),
 *              off[1]   diag[2]        off[k] becomes off[k] diag[k]^-T.
 */
#ifndef TW_COUPLE_H
#define TW_COUPLE_H

#include <stddef.h>

/* diag [9 count], off [9 (count - 1)]. Returns 1, or 0 when a pivot is not positive. */
int tw_couple_factor(double *diag, double *off, size_t count);

/* right [3 count]: right-hand side in, solution out. */
void tw_couple_solve(const double *diag, const double *off, size_t count, double *right);

#endif
