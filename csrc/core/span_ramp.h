/* span_ramp: pieces whose load grows linearly along them, by Gauss-Legendre quadrature (pure).
 *
 *     t(s) = t0 - q s - r s^2 / 2          q = load at the start, r = ramp
 * Displacement, flexibility and energies are integrals of functions of t, which are analytic where t.t is not 0: at least as
 * far from a panel's middle as R, where |q| R + |r| R^2 / 2 = (sqrt(2) - 1) |t| with q and t of the middle. On a panel of
 * length l, n points err by about (4 R / l)^-2n (Trefethen, SIAM Review 50 (2008) 67-87, theorem 4.5): by 1e-16 for four up to
 * l/R = 0.04, for eight up to 0.4.
 */
#ifndef TW_SPAN_RAMP_H
#define TW_SPAN_RAMP_H

#include "span.h"

static inline int tw_span_ramp_is(const tw_piece *piece)
{
    return piece->ramp[0] != 0.0 || piece->ramp[1] != 0.0 || piece->ramp[2] != 0.0;
}

/* See tw_piece_part and tw_piece_integrals. */
void tw_span_ramp_part(const tw_material *material, const tw_piece *piece, double from, double length, double displacement[3],
                  double flexibility[6]);
void tw_span_ramp_integrals(const tw_material *material, const tw_piece *piece, double *conjugate_J, double *stored_J,
                       double *line_length_m);

/* int |t_xy|/|t| W*'(|t|) ds: the horizontal run of a piece, uniform or not, m. */
double tw_span_ramp_run(const tw_material *material, const tw_piece *piece);

/* Where direction . t = 0 within the piece, ascending: how many of two, the rest of `places` untouched. */
int tw_span_ramp_stationary(const tw_piece *piece, const double direction[3], double places[2]);

/* Greatest |t_z|/|t_xy| and |t| at places within the piece where they are stationary; 0 where there is none. */
double tw_span_ramp_slope(const tw_piece *piece);
double tw_span_ramp_tension_max(const tw_piece *piece);

#endif
