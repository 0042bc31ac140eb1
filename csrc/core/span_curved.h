/* span_curved: what has no closed form on a piece, a curved law or a load that varies, by quadrature (pure).
 *
 * Of a stretch of line with t(s) = t0 - q s - q' s^2/2, T = |t|, u = t/T and a law with W*'(T) = 1 + e0 + x(T):
 *     uniform load     int u d ds,  d = x - T/EA                       beyond the line of the greatest slope EA,
 *     varying load     int u (1 + e0 + x) ds                           all of it,
 * their derivatives in t0, int [d' u u' + d/T (I - u u')] ds, and the energies likewise. Ten Gauss-Legendre points on
 * parts of the stretch that hold no kink of the law, on each of which |t| changes by at most half its size at the start:
 * the nearest singularity, T = 0, is then at least three half-lengths from the middle, and what is left of a smooth
 * integrand is below (3 + sqrt 8)^-20 = 5e-16 of it.
 */
#ifndef TW_SPAN_CURVED_H
#define TW_SPAN_CURVED_H

#include "span.h"

typedef struct tw_stretch_of_line {
    const double *tension; /* [3] at its start */
    const double *load;    /* [3] at its start */
    const double *ramp;    /* [3], or NULL: uniform */
    double length;
} tw_stretch_of_line;

typedef struct tw_curved_integrals {
    double displacement[3];
    double flexibility[6]; /* xx xy xz yy yz zz */
    double conjugate_J;
    double stored_J;
    double length_m;
} tw_curved_integrals;

/* With a ramp the whole integrals, without one those beyond the linear law of the same greatest slope. */
void tw_piece_integrate(const tw_material *material, const tw_stretch_of_line *stretch, int with_flexibility,
                         tw_curved_integrals *out);

/* Greatest value of a smooth function of the tension vector inside a piece: looked for at places close enough together
 * that two extremes are not taken for one, then narrowed down. */
double tw_piece_most(const tw_piece *piece, double (*of)(const double tension[3]));

#endif
