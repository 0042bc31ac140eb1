#include "energy_hold.h"

#include <math.h>
#include <string.h>

#include "route.h"
#include "vector.h"

enum { BLOCK = TW_BLOCKTRI_SIZE };

/* Growth of a link beyond its length, without cancellation, and the unit vector along it; returns |c - a|. */
static double link_over(const tw_energy_link *link, const double *d, double *over, double unit[3])
{
    double way[3];
    tw_axpy(link->offset, 1.0, d, way);
    double length = tw_norm(way);
    double sum = length + link->length_m + link->over_m;
    *over = link->over_m + (2.0 * tw_dot(link->offset, d) + tw_dot(d, d)) / sum;
    for (int i = 0; i < 3; i++) {
        unit[i] = length > 0.0 ? way[i] / length : 0.0;
    }
    return length;
}

/* Energy of a link at displacement d of its clamp; adds its force to g. */
static double link_evaluate(const tw_energy_link *link, const double *d, double *g)
{
    double over, unit[3];
    link_over(link, d, &over, unit);
    double force = link->force_N + link->stiffness * over;
    if (force <= 0.0) {
        return -0.5 * link->force_N * link->force_N / link->stiffness;
    }
    tw_axpy(g, force, unit, g);
    return over * (link->force_N + 0.5 * link->stiffness * over);
}

/* How far the springs are moved at displacement d of their clamp, in their axes. */
static void springs_moved(const tw_energy_hold *hold, const double *d, double own[3])
{
    double moved[3];
    tw_axpy(hold->offset, 1.0, d, moved);
    tw_route_into_axes(hold->ahead, moved, own);
}

/* Energy of the springs; adds their force to g. */
static double springs_evaluate(const tw_energy_hold *hold, const double *d, double *g)
{
    double own[3], force[3], stored = 0.0;
    springs_moved(hold, d, own);
    for (int i = 0; i < 3; i++) {
        stored += 0.5 * hold->stiffness[i] * own[i] * own[i];
        own[i] *= hold->stiffness[i];
    }
    tw_route_out_of_axes(hold->ahead, own, force);
    tw_axpy(g, 1.0, force, g);
    return stored;
}

double tw_energy_hold_evaluate(const tw_energy_hold *hold, const double *d, double *g)
{
    double stored = springs_evaluate(hold, d, g);
    for (int i = 0; i < hold->link_count; i++) {
        stored += link_evaluate(&hold->link[i], d, g);
    }
    return stored;
}

void tw_energy_hold_release(const tw_energy_hold *hold, double *g)
{
    for (int i = 0; i < 3; i++) {
        g[i] = hold->fixed[i] ? 0.0 : g[i];
    }
    if (hold->guided) {
        tw_axpy(g, -tw_dot(hold->guide, g), hold->guide, g);
    }
}

/* Springs in x, y, up: the along and across rates turned into the plan's axes. */
static void springs_stiffness(const tw_energy_hold *hold, double stiffness[6])
{
    const double *e = hold->ahead, *k = hold->stiffness;
    stiffness[0] = k[0] * e[0] * e[0] + k[1] * e[1] * e[1];
    stiffness[1] = (k[0] - k[1]) * e[0] * e[1];
    stiffness[2] = stiffness[4] = 0.0;
    stiffness[3] = k[0] * e[1] * e[1] + k[1] * e[0] * e[0];
    stiffness[5] = k[2];
}

static void add_stiffness(const double stiffness[6], double *triangle)
{
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j <= i; j++) {
            triangle[(3 + i) * (4 + i) / 2 + 3 + j] += stiffness[tw_packed[i][j]];
        }
    }
}

static void add_to_triangle(const tw_energy_hold *hold, const double *d, double *triangle)
{
    double stiffness[6];
    if (hold->link_count == 0) {
        springs_stiffness(hold, stiffness);
        add_stiffness(stiffness, triangle);
    }
    for (int i = 0; i < hold->link_count; i++) {
        const tw_energy_link *link = &hold->link[i];
        double over, unit[3];
        double length = link_over(link, d, &over, unit);
        double force = link->force_N + link->stiffness * over;
        if (force > 0.0) {
            tw_stiffness_along(unit, link->stiffness, length > 0.0 ? force / length : 0.0, stiffness);
            add_stiffness(stiffness, triangle);
        }
    }
}

/* Cut a fixed unknown of a clamp out of the matrix: zero row and column, unit diagonal. */
static void fix_unknown(tw_blocktri *matrix, size_t block, int direction)
{
    double *triangle = matrix->diagonal + TW_BLOCKTRI_TRIANGLE * block;
    double *coupling = matrix->coupling + TW_BLOCKTRI_COUPLING * block;
    int at = 3 + direction;
    for (int k = 0; k < BLOCK; k++) {
        int row = k > at ? k : at, column = k > at ? at : k;
        triangle[row * (row + 1) / 2 + column] = k == at ? 1.0 : 0.0;
    }
    memset(coupling + 3 * at, 0, 3 * sizeof(double));
    for (int k = 0; k < BLOCK && block + 1 < matrix->block_count; k++) {
        coupling[TW_BLOCKTRI_COUPLING + 3 * k + direction] = 0.0;
    }
}

/* Cut a direction of a clamp out of the matrix by projecting it: P A P + n n^T with P = I - n n^T, n in the clamp's three. */
static void fix_direction(tw_blocktri *matrix, size_t block, const double n[3])
{
    double *triangle = matrix->diagonal + TW_BLOCKTRI_TRIANGLE * block;
    double *coupling = matrix->coupling + TW_BLOCKTRI_COUPLING * block;
    double whole[BLOCK] = {0.0, 0.0, 0.0, n[0], n[1], n[2]}, at[BLOCK];
    for (int i = 0; i < BLOCK; i++) {
        at[i] = 0.0;
        for (int j = 3; j < BLOCK; j++) {
            int row = i > j ? i : j, column = i > j ? j : i;
            at[i] += triangle[row * (row + 1) / 2 + column] * whole[j];
        }
    }
    double both = tw_dot(n, at + 3) + 1.0;
    for (int i = 0; i < BLOCK; i++) {
        for (int j = 0; j <= i; j++) {
            triangle[i * (i + 1) / 2 + j] += both * whole[i] * whole[j] - whole[i] * at[j] - at[i] * whole[j];
        }
    }
    for (int j = 0; j < 3; j++) {
        double part = n[0] * coupling[9 + j] + n[1] * coupling[12 + j] + n[2] * coupling[15 + j];
        for (int i = 0; i < 3; i++) {
            coupling[9 + 3 * i + j] -= n[i] * part;
        }
    }
    for (int k = 0; k < BLOCK && block + 1 < matrix->block_count; k++) {
        double *row = coupling + TW_BLOCKTRI_COUPLING + 3 * k;
        tw_axpy(row, -tw_dot(n, row), n, row);
    }
}

void tw_energy_hold_stiffness(const tw_energy_hold *hold, const double *d, tw_blocktri *matrix)
{
    add_to_triangle(hold, d, matrix->diagonal + TW_BLOCKTRI_TRIANGLE * hold->block);
    for (int i = 0; i < 3; i++) {
        if (hold->fixed[i]) {
            fix_unknown(matrix, hold->block, i);
        }
    }
    if (hold->guided) {
        fix_direction(matrix, hold->block, hold->guide);
    }
}

void tw_energy_hold_bound(const tw_energy_hold *hold, const double *d, const double *load, tw_energy_parts *parts,
                          tw_sum *stored, tw_sum *route)
{
    double place[3], own[3], over, unit[3];
    tw_axpy(hold->place, 1.0, d, place);
    tw_sum_add(route, tw_dot(load, place));
    for (int i = 0; i < hold->link_count; i++) {
        const tw_energy_link *link = &hold->link[i];
        link_over(link, d, &over, unit);
        parts->link_excess = fmax(parts->link_excess, over / link->length_m);
        tw_sum_add(route, -link->force_N * fmax(over, 0.0));
    }
    springs_moved(hold, d, own);
    for (int i = 0; i < 3; i++) {
        tw_sum_add(stored, 0.5 * hold->stiffness[i] * own[i] * own[i]);
    }
}
