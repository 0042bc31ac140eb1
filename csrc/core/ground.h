/* ground: the profile, and how far the line keeps from it or from a crossing's top (pure).
 *
 * Clearance is vertical, in the route's own plane: z of the line less the elevation below its station. The profile is
 * straight between its points, so on each of its stretches the clearance is linear in position, and its least place
 * within a piece of line is where (0, 0, 1) - slope (1, 0, 0) is normal to the tension: found in closed form.
 */
#ifndef TW_GROUND_H
#define TW_GROUND_H

#include "line.h"
#include "section.h"

/* Elevation of the profile; NaN outside it. */
double tw_ground_elevation(const tw_project *project, double station_m);

/* Least clearance of one span over the ground (crossing TW_NONE) or a crossing, between two stations (NaN: no bound).
 * Returns 0, and writes nothing, where the span does not pass there. */
int tw_ground_clearance(const tw_section *section, size_t span, size_t crossing, double from_m, double to_m,
                        double *clearance_m, double *station_m);

#endif
