/* spacing: the least distance in three dimensions between a hung span and another line (pure).
 *
 * Both lines are halved again and again. A stretch lies within its bow of its chord; with n what leads from chord to chord
 * where these are closest, no distance between two stretches is less than that of their chords less what their bows hold of
 * n towards each other (branch and bound: A. H. Land, A. G. Doig, Econometrica 28 (1960) 497-520). Where that is not worse
 * than what was found, and the stretches are nearly straight beside their distance, the least of
 *     f(s) = min_u |a(s) - b(u)|^2 / 2,   f'(s) = a'(s) . (a(s) - b(u(s)))
 * lies at an end or where f' turns from falling to rising: bracketed and found by safeguarded steps. a is the exact line, b
 * the other's cubic arcs (see course).
 */
#ifndef TW_SPACING_H
#define TW_SPACING_H

#include "line.h"
#include "section.h"

typedef struct tw_spacing {
    double distance_m;
    double position[3];       /* of the place on this line */
    double other_at_m;        /* natural length along the other line */
    double other_position[3]; /* of the place there, in this line's axes */
} tw_spacing;

/* Distance below which lines count as touching: a search for less would find rounding, m. */
#define TW_SPACING_TOUCH 1e-9

/* How much nearer a place would have to be to be looked for, m. */
#define TW_SPACING_NEARER 1e-10

/* Least distance of a span where it is less than `below_m` (infinity: any). Returns 0, and writes nothing, where it is not,
 * and where the span has no length. */
int tw_spacing_least(const tw_section *section, size_t span, const tw_course *other, double below_m, tw_spacing *least);

/* What leads from the straight stretch b0 to b1 to a0 to a1 where they are closest (C. Ericson, Real-Time Collision
 * Detection, 2005, 5.1.9). */
void tw_spacing_of_chords(const double a0[3], const double a1[3], const double b0[3], const double b1[3], double off[3]);

#endif
