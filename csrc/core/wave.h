/* wave: how long a transverse wave takes along a hung line (pure).
 *
 * In natural length s, small motions w across the line obey m w_tt = (T/lambda w_s)_s, with m the mass per natural metre, T
 * the tension and lambda = |r'| the stretch: a wave passes ds in ds sqrt(m lambda / T). (Per metre of the stretched line: in
 * d sigma sqrt(mu / T) with mu = m / lambda, the string's formula.) There and back takes
 *     t = 2 int_0^S sqrt(m lambda(T) / T) ds
 * by Gauss-Legendre over stretches on which T changes little against its least, to about 1e-14. A parabola of sag D has
 * t = 2 sqrt(8 D / g), common practice: T is taken as H, and m g L^2 / (8 H) as D.
 */
#ifndef TW_WAVE_H
#define TW_WAVE_H

#include "material.h"
#include "span.h"

/* One return, s. The pieces are hung. */
double tw_wave_return_s(const tw_material *material, const tw_piece *pieces, size_t count, double mass_kg_per_m);

/* The same by the parabola. */
double tw_wave_parabola_s(double sag_m);

#endif
