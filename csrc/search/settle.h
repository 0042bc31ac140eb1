/* settle: the discretised line brought to rest, and the proof that it is the line.
 *
 * From the exact line's shape, with H = L L^T there, NLopt's L-BFGS minimises over y, x = L^-T y: the Hessian it sees is
 * close to the identity, so a handful of O(n) evaluations do. Newton steps finish. Then the proof, which trusts neither:
 *     residual <= residual_relative * largest tension      every node is in balance
 *     |c - a|  <= l (1 + 1e-9)                             no hanger has grown
 *     | |R_j| - |t_j| | <= 1e-9 largest tension            natural length rests on every sheave
 *     load mismatch <= 1e-9                                loads per run and a carriage are those of the shape
 *     -1e-9    <= (P - D) / (|stored| + |work|) <= gap_relative
 * with P of the settled shape, from above, and D of the exact line, from below. A gap that is too wide doubles the mesh; the
 * gap of the start shape tells beforehand. Rounding: forces below 16 machine epsilons of EA (that of the strain) count as
 * balanced, and the bracket may be turned over by 4 epsilons of sum |F||c| over the holds (that of either energy in
 * coordinates far from the line).
 */
#ifndef TW_SETTLE_H
#define TW_SETTLE_H

#include "line.h"
#include "minimise.h"
#include "section.h"

/* section: solved. Fills status, energy_J, energy_lower_J, gap_J, gap_relative, residual_N, elements, evaluations and
 * newton_steps of out, load_mismatch and sheave_imbalance_N, all of one shape, and leaves its other fields alone. Returns out->status:
 *     TW_OK                                              only with the proof
 *     TW_CANCELLED, TW_DEADLINE                          out holds the best shape so far
 *     TW_EVALUATION_LIMIT, TW_NOT_SETTLED, TW_NOT_FINITE not in balance, or a hanger has grown
 *     TW_GAP_TOO_WIDE, TW_SLACK                          in balance, but not proven; no tension anywhere
 *     TW_ERROR_MEMORY, TW_ERROR_OPTIMISER                could not run */
tw_status tw_settle(const tw_section *section, const tw_options *options, tw_settled *out);

/* tw_settle with another optimiser in the place of NLopt's: for tests, which put a lying one there. */
tw_status tw_settle_with(const tw_section *section, const tw_options *options, tw_minimise_function optimiser,
                         tw_settled *out);

#endif
