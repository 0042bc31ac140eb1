/* crossing: where a hung line crosses another one in plan, and whether they have changed places since they were strung (pure).
 *
 * In plan both lines are cut into short straight stretches; where two of them cross, the vertical gap is taken on the exact
 * line and on the other's arc. A crossing of the hung line is compared with the one nearest to it in the same span of the
 * line as strung, bare: lines that were above one another and are now below have passed through each other, and the gap
 * counts below zero. Stretches that lie over one another in plan cross at each end of this line's stretches; they are
 * compared only with their like, as lines that swing apart may well come back on the other side.
 */
#ifndef TW_CROSSING_H
#define TW_CROSSING_H

#include "line.h"
#include "section.h"

typedef struct tw_crossing_place {
    double gap_m;             /* this line above the other one: positive */
    int over;                 /* 1: the stretches lie over one another in plan */
    double position[3];       /* on this line */
    double other_at_m;        /* natural length along the other line */
    double other_position[3];
} tw_crossing_place;

/* The deepest of the places of a span where the lines have changed places; strung: the same line bare, as strung, and the
 * other one likewise. Returns 0, and writes nothing, where they have not. */
int tw_crossing_swapped(const tw_section *section, const tw_course *other, const tw_section *strung,
                        const tw_course *other_strung, size_t span, tw_crossing_place *deepest);

#endif
