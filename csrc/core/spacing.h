/* spacing: the least distance in three dimensions between a hung span and another line (pure).
 *
 * Both lines are halved again and again. A stretch lies within its reach of its chord, so that no distance between two
 * stretches is less than that of their chords less both reaches (branch and bound: A. H. Land, A. G. Doig, Econometrica 28
 * (1960) 497-520). Where that is not worse than what was found, and the stretches are nearly straight beside their distance,
 * the least of
 *     f(s) = min_u |a(s) - b(u)|^2 / 2,   f'(s) = a'(s) . (a(s) - b(u(s)))
 * lies at an end or where f' turns from falling to rising: bracketed and found by safeguarded steps. a is the exact line, b
 * the other's cubic arcs (see curve).
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

/* Returns 0, and writes nothing, where the span has no length. */
int tw_spacing_least(const tw_section *section, size_t span, const tw_curve *other, tw_spacing *least);

/* Distance of the straight stretches a0 to a1 and b0 to b1 (C. Ericson, Real-Time Collision Detection, 2005, 5.1.9). */
double tw_spacing_of_chords(const double a0[3], const double a1[3], const double b0[3], const double b1[3]);

#endif
