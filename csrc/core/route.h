/* route: stations and directions in plan of a line that turns at its supports (pure).
 *
 * On a straight route (project->route_station_m NULL) the station of a point is its x, whatever the offsets of the supports,
 * and every support's axes are those of the route. On a turning route supports stand at plan coordinates p_j, and
 *     station of support j       s_j = s_{j-1} + |p_j - p_{j-1}|,  s_0 = 0
 *     direction of span k        d_k = (p_{k+1} - p_k) / |p_{k+1} - p_k|
 *     station of a point r       s_k + (r - p_k) . d_k            read in the span that the point of the line belongs to
 *     axes of support j          ahead e_j = unit(d_{j-1} + d_j), at the ends the span's own direction; across: to the left
 * so that at an angle point `across` lies along the bisector of the line's angle.
 */
#ifndef TW_ROUTE_H
#define TW_ROUTE_H

#include "line.h"

/* How stations are read in one span: origin_m + (x - at[0]) ahead[0] + (y - at[1]) ahead[1]. */
typedef struct tw_route_leg {
    double origin_m;
    double at[2];
    double ahead[2]; /* unit, in plan: where the station grows */
} tw_route_leg;

/* Stations of supports at plan coordinates (station_m, offset_m) of a turning route; station_m [count]. */
void tw_route_measure(const tw_support *supports, size_t count, double *station_m);

/* Station of a support. */
double tw_route_support_station(const tw_project *project, size_t support);

tw_route_leg tw_route_leg_of(const tw_project *project, size_t span);

double tw_route_station(const tw_route_leg *leg, const double position[3]);

/* How far left of the leg a point is: y on a straight route, else from the line between the span's supports. */
double tw_route_left(const tw_route_leg *leg, const double position[3]);

/* Rate at which the station grows along a vector. */
double tw_route_rate(const tw_route_leg *leg, const double vector[3]);

/* Ahead of a support, a unit vector in plan. */
void tw_route_ahead(const tw_project *project, size_t support, double ahead[2]);

/* Ahead of every support; ahead [2 support_count]. */
void tw_route_ahead_all(const tw_project *project, double *ahead);

/* Cosine of the angle by which the route turns at a support; 1 at its ends and on a straight route. */
double tw_route_turn_cosine(const tw_project *project, size_t support);

/* Plan direction from a support to its neighbour ahead; returns their distance. */
double tw_route_direction(const tw_support *near, double d[2]);

/* A vector (x, y, up) in a support's axes (along, across, up), and back; out is not the vector. */
void tw_route_into_axes(const double ahead[2], const double vector[3], double out[3]);
void tw_route_out_of_axes(const double ahead[2], const double vector[3], double out[3]);

#endif
