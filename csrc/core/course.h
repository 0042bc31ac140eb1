/* course: a hung line as cubic arcs, for the project of another line to keep its distance from (pure).
 *
 * Over natural length s an exact stretch under a uniform load q is smooth where the tension T is not 0, and from the elastic
 * catenary |r''''| <= 4 (|q|/T)^3. A cubic with both ends and their derivatives errs by h^4/384 max |r''''| at most (P. J.
 * Davis, Interpolation and Approximation, 1963, theorem 3.5.1), from which the length h of each arc follows for an error
 * of 1e-10 m. Kinks under point forces and at holds lie at the ends of arcs.
 */
#ifndef TW_COURSE_H
#define TW_COURSE_H

#include "line.h"
#include "section.h"

/* Arcs of a hung section, in its own axes; returns their number. arcs NULL: count them only. */
size_t tw_course_arcs(const tw_section *section, tw_arc *arcs);

/* Place at a share u of an arc, 0 to 1; slope: d place / du, curvature: d2 place / du2; either may be NULL. */
void tw_course_at(const tw_arc *arc, double u, double place[3], double slope[3], double curvature[3]);

/* What leads from the nearest place of the straight stretch a to b to a point. */
void tw_course_off_chord(const double point[3], const double a[3], const double b[3], double off[3]);

/* How far a stretch goes from its chord, at most, m. */
double tw_course_reach(const tw_bow *bow);

/* The bow of an arc between two of its shares: a cubic stays within its four control points. */
tw_bow tw_course_arc_bow(const tw_arc *arc, double u0, double u1);

/* The bows of whole runs of arcs, halved again and again: bows [2 count - 1], of arcs `first` to `last` - 1 at `node`; its
 * halves are at node + 1 and node + 2 (middle - first), middle = first + (last - first) / 2. Call with node 0, 0, count. */
void tw_course_bows(const tw_arc *arcs, size_t node, size_t first, size_t last, tw_bow *bows);

#endif
