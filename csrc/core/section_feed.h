/* section_feed: natural length that moves between the spans of a section.
 *
 * Over a sheave j the natural length m_j moves into the span ahead, so that a span's length is l_k + m_k - m_{k+1}. It is
 * taken from the end of the last piece behind and put before the first piece ahead: what is fixed on the line keeps its
 * natural place. With R_j the tension at the start of the span ahead and t_j at the end of the span behind, m_j is found
 * from
 *     sheave  ln |R_j| - ln |t_j| - drag mu theta_j = 0       theta_j: angle between t_j and R_j, the wrap of the sheave
 *     plumb   ln H(R_j) - ln H(t_j) = 0                       H: horizontal part; the hold then has no force along
 *     winch   ln H(R_j) - ln pull = 0                         m_j comes in from outside; nothing leaves the span behind
 * beside the closing errors of the spans. mu = 0: V(m) = max_R D is stationary in m, as W* grows with |t|, and it is
 * convex for a taut line. Friction: L. Euler 1769, J. A. Eytelwein 1808.
 *
 * Newton on all R and m at once gives the step: the equations see their neighbours only, so it costs one block-tridiagonal
 * solve with 4x4 blocks. After a step in m, with every length positive, R is brought to rest by the convex solver of
 * section_solve; the step is halved until the equations in m are nearer to zero, which a short enough step is.
 */
#ifndef TW_SECTION_FEED_H
#define TW_SECTION_FEED_H

#include "section_newton.h"

/* Sheaves feed, every other support does not; no friction. */
void tw_section_feed_by_holds(tw_section *section);

/* Whether natural length moves anywhere. */
int tw_section_feeds(const tw_section *section);

/* At rest with natural lengths that move; length_m and start_m, and the pieces, are then those found. warm: from the pulls
 * and moved lengths that stand. TW_OVER_SHEAVE: something fixed on the line would run over a sheave. */
tw_status tw_section_run_over(tw_section *section, const tw_options *options, tw_section_scratch *s, int warm);

/* Largest | |R_j| - |t_j| | over the sheaves of the project, N, from the hung pieces alone. */
double tw_section_imbalance(const tw_section *section);

#endif
