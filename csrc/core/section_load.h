/* section_load: what the section's own files need of the placing of loads; see section.h. */
#ifndef TW_SECTION_LOAD_H
#define TW_SECTION_LOAD_H

#include "section.h"

/* A point load of a condition on a span, times the condition's factor, in route axes, N. */
void tw_section_load_vector(const tw_section *section, size_t condition, const tw_load *load, size_t span, double out[3]);

/* Bring the loads per run into line with the hung shape: p |t_xy|/|t| per stretched metre becomes, piece by piece, a ramp of
 * the same total, p times the horizontal run of the piece. Returns the largest change of a share. */
double tw_section_follow_runs(tw_section *section);

#endif
