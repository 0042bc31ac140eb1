/* uniform_curved: the natural length of a span on a curved law, for a horizontal pull (pure). */
#ifndef TW_UNIFORM_CURVED_H
#define TW_UNIFORM_CURVED_H

#include "material.h"
#include "uniform.h"

/* Newton on the closing of the hung span in natural length and vertical tension, from those of the linear law of the same
 * greatest slope, which length_m and v_N hold on entry: with h given,
 *     d end / d length = (t/|t|) W*'(|t|) at the end       d end / d v = the span's flexibility.
 * TW_NOT_SETTLED: it does not close. */
tw_status tw_uniform_curved_length(const tw_material *material, const tw_uniform *span, double h_N, double *length_m,
                                double *v_N);

#endif
