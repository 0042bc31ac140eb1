/* couple_feed: block-tridiagonal systems with 4x4 blocks that are not symmetric (pure, in place).
 *
 * Block row b: lower_b x_{b-1} + diag_b x_b + upper_b x_{b+1} = right_b. Gaussian elimination by blocks, with row pivots
 * inside a block only: O(count). Blocks are stored by rows.
 */
#ifndef TW_COUPLE_FEED_H
#define TW_COUPLE_FEED_H

#include <stddef.h>

enum { TW_COUPLE_FEED_SIZE = 4, TW_COUPLE_FEED_BLOCK = 16 };

/* lower, diag, upper [16 count] are overwritten, right [4 count] becomes the solution; lower of the first and upper of the
 * last block are not read. Returns 0 when a block is singular. */
int tw_couple_feed_solve(double *lower, double *diag, double *upper, size_t count, double *right);

#endif
