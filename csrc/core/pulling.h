/* pulling: a line pulled in over sheaves, then clamped; bare, at the stringing temperature.
 *
 * A section runs from anchor to anchor, or to the line's end. Over sheaves at every support between them natural length
 * moves until the tension is the same on both sides, and comes in at the section's first support until the first span has
 * the pull as its horizontal tension. A hanger is then a block that swings on its link.
 * Clamped plumb, the length between two anchors stays and every span of the section gets the same horizontal tension.
 * The mark of a support on the line moves by the clipping offset
 *     S_plumb,j - S_block,j        natural length from the section's first support, positive ahead.
 * A line that runs over sheaves in service keeps them when it is clamped. A hanger that the line would lift is held down
 * plumb in both states, as it is on a line strung clamped.
 */
#ifndef TW_PULLING_H
#define TW_PULLING_H

#include "line.h"
#include "section.h"

typedef struct tw_pulling {
    const tw_project *project;
    tw_project held;        /* the same, on the supports below */
    tw_support *supports;   /* lifted hangers as fixed points; owned */
    tw_section *blocks;     /* as pulled in; owned */
    tw_section *clamped;    /* as clamped; owned */
    double *work;           /* scratch of stringing; owned */
    const tw_options *options; /* of the call at work */
} tw_pulling;

/* Whether a project's natural lengths are found this way: strung over sheaves, or with a sheave in service. */
int tw_pulling_applies(const tw_project *project);

/* Whether a support is where a section begins and the line is pulled in. */
int tw_pulling_begins(const tw_project *project, size_t support);

tw_pulling *tw_pulling_create(const tw_project *project);
void tw_pulling_free(tw_pulling *pulling);

/* Natural length of each span once it is clamped. pull_N: given, or NaN for the project's own rule, whose pull is then
 * written. Fills blocks, and clamped where the line was clamped plumb.
 * TW_OUT_OF_REACH: no pull does it. TW_ERROR_RANGE: no rule. TW_CANCELLED, TW_DEADLINE: the options' poll said so. */
tw_status tw_pulling_lengths(tw_pulling *pulling, double *pull_N, double *length_m, const tw_options *options);

/* Sheaves at every support between the anchors of a section that is loaded later; no length comes in from outside. */
void tw_pulling_over_sheaves(tw_section *section);

#endif
