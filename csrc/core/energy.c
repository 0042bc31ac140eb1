#include "energy.h"

#include <float.h>
#include <math.h>
#include <string.h>

#include "route.h"
#include "sum.h"
#include "vector.h"

enum { BLOCK = TW_BLOCKTRI_SIZE };


/* Gauss-Legendre points and weights on [-1, 1]; the rule of eight is symmetric. */
static const double two_point = 0.57735026918962576451;
static const double eight_point[4] = {0.18343464249564980494, 0.52553240991632898582, 0.79666647741362673959,
                                      0.96028985649753623168};
static const double eight_weight[4] = {0.36268378337836198297, 0.31370664587788728734, 0.22238103445337447054,
                                       0.10122853629037625915};

/* An element's edges under displacements x; its three nodes start at x + 6 element + 3. */
static void element_edges(const tw_energy *energy, size_t element, const double *x, double a[3], double b[3])
{
    const double *base = energy->edge + BLOCK * element;
    const double *node = x + BLOCK * element + 3;
    for (int i = 0; i < 3; i++) {
        a[i] = base[i] + (node[3 + i] - node[i]);
        b[i] = base[3 + i] + (node[6 + i] - node[3 + i]);
    }
}

/* r' at xi; returns the stretch |r'|. */
static double element_slope(const double a[3], const double b[3], double length, double xi, double slope[3])
{
    double wa = (1.0 - 2.0 * xi) / length;
    double wb = (1.0 + 2.0 * xi) / length;
    for (int i = 0; i < 3; i++) {
        slope[i] = wa * a[i] + wb * b[i];
    }
    return tw_norm(slope);
}

/* Stretch energy of an element; sets the gradient of its middle and end, adds to that of its start. */
static double element_evaluate(const tw_energy *energy, size_t element, const double *x, double *gradient,
                               double *tension_most)
{
    double a[3], b[3], slope[3];
    double fa[3] = {0.0, 0.0, 0.0}, fb[3] = {0.0, 0.0, 0.0};
    double *g = gradient + BLOCK * element + 3;
    double length = energy->length_m[element];
    double stored = 0.0;
    element_edges(energy, element, x, a, b);
    for (int p = 0; p < 2; p++) {
        double xi = p == 0 ? -two_point : two_point;
        double stretch = element_slope(a, b, length, xi, slope);
        double tension = tw_material_tension(&energy->material, stretch);
        double factor = tension > 0.0 ? tension / stretch : 0.0;
        stored += tw_material_energy(&energy->material, stretch);
        tw_axpy(fa, (0.5 - xi) * factor, slope, fa);
        tw_axpy(fb, (0.5 + xi) * factor, slope, fb);
        *tension_most = fmax(*tension_most, tension);
    }
    for (int i = 0; i < 3; i++) {
        g[i] -= fa[i];
        g[3 + i] = fa[i] - fb[i];
        g[6 + i] = fb[i];
    }
    return 0.5 * length * stored;
}

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

/* Energy of a hold at displacement d of its clamp; adds its force to g. */
static double hold_evaluate(const tw_energy_hold *hold, const double *d, double *g)
{
    double stored = springs_evaluate(hold, d, g);
    for (int i = 0; i < hold->link_count; i++) {
        stored += link_evaluate(&hold->link[i], d, g);
    }
    return stored;
}

/* Take the fixed directions out of a clamp's gradient. */
static void hold_release(const tw_energy_hold *hold, double *g)
{
    for (int i = 0; i < 3; i++) {
        g[i] = hold->fixed[i] ? 0.0 : g[i];
    }
    if (hold->guided) {
        tw_axpy(g, -tw_dot(hold->guide, g), hold->guide, g);
    }
}

/* Puts the loads on: adds -load.x to the energy and -load to the gradient. */
static void load_evaluate(const tw_energy *energy, const double *x, double *gradient, tw_sum *potential)
{
    for (size_t i = 0; i <= energy->element_count; i++) {
        const double *load = energy->load + BLOCK * i;
        const double *d = x + BLOCK * i;
        double *g = gradient + BLOCK * i;
        tw_sum_add(potential, -(tw_dot(load, d) + tw_dot(load + 3, d + 3)));
        tw_axpy(g, -1.0, load, g);
        tw_axpy(g + 3, -1.0, load + 3, g + 3);
    }
}

/* Largest force on a node; NaN when one is not finite, which fmax would hide. */
static double residual_of(const double *gradient, size_t node_count)
{
    double most = 0.0;
    int finite = 1;
    for (size_t i = 0; i < node_count; i++) {
        double square = tw_dot(gradient + 3 * i, gradient + 3 * i);
        finite &= square <= DBL_MAX;
        most = square > most ? square : most;
    }
    return finite ? sqrt(most) : NAN;
}

tw_energy_state tw_energy_evaluate(const tw_energy *energy, const double *x, double *gradient)
{
    tw_energy_state state = {0.0, 0.0, 0.0};
    tw_sum potential = {0.0, 0.0};
    memset(gradient, 0, BLOCK * sizeof(double));
    for (size_t e = 0; e < energy->element_count; e++) {
        tw_sum_add(&potential, element_evaluate(energy, e, x, gradient, &state.tension_N));
    }
    load_evaluate(energy, x, gradient, &potential);
    for (size_t j = 0; j < energy->hold_count; j++) {
        const tw_energy_hold *hold = &energy->holds[j];
        size_t end = BLOCK * hold->block + 3;
        tw_sum_add(&potential, hold_evaluate(hold, x + end, gradient + end));
        hold_release(hold, gradient + end);
    }
    memset(gradient, 0, 3 * sizeof(double));
    state.potential_J = tw_sum_value(&potential);
    state.residual_N = residual_of(gradient, 2 * (energy->element_count + 1));
    return state;
}

/* Symmetric 3x3 stored as xx xy xz yy yz zz: where row i, column j is. */
static const int packed[3][3] = {{0, 1, 2}, {1, 3, 4}, {2, 4, 5}};

/* tangent u u^T + across (I - u u^T). */
static void stiffness_along(const double unit[3], double tangent, double across, double out[6])
{
    double along = tangent - across;
    out[0] = along * unit[0] * unit[0] + across;
    out[1] = along * unit[0] * unit[1];
    out[2] = along * unit[0] * unit[2];
    out[3] = along * unit[1] * unit[1] + across;
    out[4] = along * unit[1] * unit[2];
    out[5] = along * unit[2] * unit[2] + across;
}

/* Second derivatives of the stretch energy at a point of integration, in r'. */
static void point_stiffness(const tw_energy *energy, const double a[3], const double b[3], double length, double xi,
                            double floor_N, double out[6])
{
    double slope[3];
    double stretch = element_slope(a, b, length, xi, slope);
    double tension = fmax(tw_material_tension(&energy->material, stretch), floor_N);
    double tangent = fmax(tw_material_tangent(&energy->material, stretch), floor_N);
    double inverse = stretch > 0.0 ? 1.0 / stretch : 1.0;
    for (int i = 0; i < 3; i++) {
        slope[i] *= inverse;
    }
    stiffness_along(slope, tangent, tension * inverse, out);
}

/* Second derivatives of an element's energy in its edges: aa, ab and bb are each symmetric. */
static void element_stiffness(const tw_energy *energy, size_t element, const double *x, double floor_N, double aa[6],
                              double ab[6], double bb[6])
{
    double a[3], b[3], low[6], high[6];
    double length = energy->length_m[element];
    const double near = 2.0 * (0.5 + two_point) * (0.5 + two_point) / length;
    const double far = 2.0 * (0.5 - two_point) * (0.5 - two_point) / length;
    const double mixed = -1.0 / (6.0 * length);
    element_edges(energy, element, x, a, b);
    point_stiffness(energy, a, b, length, -two_point, floor_N, low);
    point_stiffness(energy, a, b, length, two_point, floor_N, high);
    for (int i = 0; i < 6; i++) {
        aa[i] = near * low[i] + far * high[i];
        ab[i] = mixed * (low[i] + high[i]);
        bb[i] = far * low[i] + near * high[i];
    }
}

/* Edges to nodes: a = r1 - r0, b = r2 - r1. The element's middle and end are one block, its start ends the one before. */
static void element_scatter(tw_blocktri *matrix, size_t element, const double aa[6], const double ab[6],
                            const double bb[6])
{
    double *before = matrix->diagonal + TW_BLOCKTRI_TRIANGLE * element;
    double *block = before + TW_BLOCKTRI_TRIANGLE;
    double *coupling = matrix->coupling + TW_BLOCKTRI_COUPLING * (element + 1);
    for (int i = 0; i < 3; i++) {
        int middle = i * (i + 1) / 2, end = (3 + i) * (4 + i) / 2;
        for (int j = 0; j < 3; j++) {
            int k = packed[i][j];
            coupling[3 * i + j] = ab[k] - aa[k];
            coupling[9 + 3 * i + j] = -ab[k];
            block[end + j] = ab[k] - bb[k];
        }
        for (int j = 0; j <= i; j++) {
            int k = packed[i][j];
            before[end + 3 + j] += aa[k];
            block[middle + j] = aa[k] - 2.0 * ab[k] + bb[k];
            block[end + 3 + j] = bb[k];
        }
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
            triangle[(3 + i) * (4 + i) / 2 + 3 + j] += stiffness[packed[i][j]];
        }
    }
}

static void hold_stiffness(const tw_energy_hold *hold, const double *d, double *triangle)
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
            stiffness_along(unit, link->stiffness, length > 0.0 ? force / length : 0.0, stiffness);
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

void tw_energy_hessian(const tw_energy *energy, const double *x, double floor_N, tw_blocktri *matrix)
{
    double aa[6], ab[6], bb[6];
    memset(matrix->diagonal, 0, TW_BLOCKTRI_TRIANGLE * sizeof(double));
    matrix->diagonal[0] = matrix->diagonal[2] = matrix->diagonal[5] = 1.0;
    for (size_t e = 0; e < energy->element_count; e++) {
        element_stiffness(energy, e, x, floor_N, aa, ab, bb);
        element_scatter(matrix, e, aa, ab, bb);
    }
    for (size_t j = 0; j < energy->hold_count; j++) {
        const tw_energy_hold *hold = &energy->holds[j];
        hold_stiffness(hold, x + BLOCK * hold->block + 3, matrix->diagonal + TW_BLOCKTRI_TRIANGLE * hold->block);
        for (int i = 0; i < 3; i++) {
            if (hold->fixed[i]) {
                fix_unknown(matrix, hold->block, i);
            }
        }
        if (hold->guided) {
            fix_direction(matrix, hold->block, hold->guide);
        }
    }
}

/* Stretch energy of an element at eight points. */
static double element_stored(const tw_energy *energy, size_t element, const double a[3], const double b[3])
{
    double length = energy->length_m[element];
    double slope[3];
    double stored = 0.0;
    for (int p = 0; p < 4; p++) {
        double low = element_slope(a, b, length, -eight_point[p], slope);
        double high = element_slope(a, b, length, eight_point[p], slope);
        stored += eight_weight[p] *
                  (tw_material_energy(&energy->material, low) + tw_material_energy(&energy->material, high));
    }
    return 0.5 * length * stored;
}

/* Place of a node measured from a span's start clamp, and what its load does there. */
typedef struct tracker {
    tw_sum place[3]; /* m */
    tw_sum load[3];  /* of the nodes met, N */
    tw_sum work;     /* from the middle of the chord, J */
    double half[3];  /* half the chord, m */
} tracker;

static void tracker_step(tracker *t, const double edge[3], const double *load)
{
    double work = 0.0;
    for (int i = 0; i < 3; i++) {
        tw_sum_add(&t->place[i], edge[i]);
        if (load != NULL) {
            tw_sum_add(&t->load[i], load[i]);
            work += load[i] * (tw_sum_value(&t->place[i]) - t->half[i]);
        }
    }
    tw_sum_add(&t->work, work);
}

/* Between the clamps from and to: adds stretch energy, the loads' work from the chord's middle, and from the datum. */
static void span_bound(const tw_energy *energy, const tw_energy_hold *from, const tw_energy_hold *to, const double *x,
                       tw_sum *stored, tw_sum *work, tw_sum *route)
{
    tracker t = {.work = {0.0, 0.0}};
    double start[3], end[3], a[3], b[3];
    tw_axpy(from->place, 1.0, x + BLOCK * from->block + 3, start);
    tw_axpy(to->place, 1.0, x + BLOCK * to->block + 3, end);
    for (int i = 0; i < 3; i++) {
        t.half[i] = 0.5 * (end[i] - start[i]);
    }
    for (size_t e = from->block; e < to->block; e++) {
        const double *load = energy->load + BLOCK * (e + 1);
        element_edges(energy, e, x, a, b);
        tw_sum_add(stored, element_stored(energy, e, a, b));
        tracker_step(&t, a, load);
        tracker_step(&t, b, e + 1 < to->block ? load + 3 : NULL);
    }
    tw_sum_add(work, tw_sum_value(&t.work));
    tw_sum_add(route, tw_sum_value(&t.work));
    for (int i = 0; i < 3; i++) {
        tw_sum_add(route, tw_sum_value(&t.load[i]) * (start[i] + t.half[i]));
    }
}

/* A clamp's own: springs, what a link has grown by, the work of the loads at the clamp. */
static void hold_bound(const tw_energy *energy, const tw_energy_hold *hold, const double *x, tw_energy_parts *parts,
                       tw_sum *stored, tw_sum *route)
{
    const double *d = x + BLOCK * hold->block + 3;
    const double *load = energy->load + BLOCK * hold->block + 3;
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

tw_energy_parts tw_energy_bound(const tw_energy *energy, const double *x)
{
    tw_energy_parts parts = {0.0, 0.0, 0.0, -INFINITY};
    tw_sum stored = {0.0, 0.0}, work = {0.0, 0.0}, route = {0.0, 0.0};
    for (size_t j = 0; j < energy->hold_count; j++) {
        hold_bound(energy, &energy->holds[j], x, &parts, &stored, &route);
        if (j + 1 < energy->hold_count) {
            span_bound(energy, &energy->holds[j], &energy->holds[j + 1], x, &stored, &work, &route);
        }
    }
    parts.stored_J = tw_sum_value(&stored);
    parts.work_J = tw_sum_value(&work);
    parts.potential_J = parts.stored_J - tw_sum_value(&route);
    return parts;
}
