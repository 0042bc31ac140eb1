/* energy_hold: the holds of the discretised line: springs and links at a clamp, and directions that are fixed. Shared by the
 * files of energy only; see energy.h for the formulas. */
#ifndef TW_ENERGY_HOLD_H
#define TW_ENERGY_HOLD_H

#include "energy.h"
#include "sum.h"

/* Symmetric 3x3 stored as xx xy xz yy yz zz: where row i, column j is. */
static const int tw_packed[3][3] = {{0, 1, 2}, {1, 3, 4}, {2, 4, 5}};

/* tangent u u^T + across (I - u u^T). */
static inline void tw_stiffness_along(const double unit[3], double tangent, double across, double out[6])
{
    double along = tangent - across;
    out[0] = along * unit[0] * unit[0] + across;
    out[1] = along * unit[0] * unit[1];
    out[2] = along * unit[0] * unit[2];
    out[3] = along * unit[1] * unit[1] + across;
    out[4] = along * unit[1] * unit[2];
    out[5] = along * unit[2] * unit[2] + across;
}

/* Energy of a hold at displacement d of its clamp; adds its force to the clamp's gradient g. */
double tw_energy_hold_evaluate(const tw_energy_hold *hold, const double *d, double *g);

/* Takes the fixed directions out of a clamp's gradient. */
void tw_energy_hold_release(const tw_energy_hold *hold, double *g);

/* Adds the second derivatives at displacement d to the matrix, then cuts the fixed directions out of it. */
void tw_energy_hold_stiffness(const tw_energy_hold *hold, const double *d, tw_blocktri *matrix);

/* A clamp's own part of the bound: springs, what a link has grown by, the work of the load at the clamp. */
void tw_energy_hold_bound(const tw_energy_hold *hold, const double *d, const double *load, tw_energy_parts *parts,
                          tw_sum *stored, tw_sum *route);

#endif
