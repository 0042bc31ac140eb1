#include "energy.h"

#include <float.h>
#include <math.h>
#include <string.h>

#include "energy_hold.h"
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
    const tw_material *material = &energy->materials[energy->span[element]];
    double length = energy->length_m[element];
    double stored = 0.0;
    element_edges(energy, element, x, a, b);
    for (int p = 0; p < 2; p++) {
        double xi = p == 0 ? -two_point : two_point;
        double stretch = element_slope(a, b, length, xi, slope);
        double tension = tw_material_tension(material, stretch);
        double factor = tension > 0.0 ? tension / stretch : 0.0;
        stored += tw_material_energy(material, stretch);
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
        tw_sum_add(&potential, tw_energy_hold_evaluate(hold, x + end, gradient + end));
        tw_energy_hold_release(hold, gradient + end);
    }
    memset(gradient, 0, 3 * sizeof(double));
    state.potential_J = tw_sum_value(&potential);
    state.residual_N = residual_of(gradient, 2 * (energy->element_count + 1));
    return state;
}

/* Second derivatives of the stretch energy at a point of integration, in r'. */
static void point_stiffness(const tw_material *material, const double a[3], const double b[3], double length, double xi,
                            double floor_N, double out[6])
{
    double slope[3];
    double stretch = element_slope(a, b, length, xi, slope);
    double tension = fmax(tw_material_tension(material, stretch), floor_N);
    double tangent = fmax(tw_material_tangent(material, stretch), floor_N);
    double inverse = stretch > 0.0 ? 1.0 / stretch : 1.0;
    for (int i = 0; i < 3; i++) {
        slope[i] *= inverse;
    }
    tw_stiffness_along(slope, tangent, tension * inverse, out);
}

/* Second derivatives of an element's energy in its edges: aa, ab and bb are each symmetric. */
static void element_stiffness(const tw_energy *energy, size_t element, const double *x, double floor_N, double aa[6],
                              double ab[6], double bb[6])
{
    double a[3], b[3], low[6], high[6];
    const tw_material *material = &energy->materials[energy->span[element]];
    double length = energy->length_m[element];
    const double near = 2.0 * (0.5 + two_point) * (0.5 + two_point) / length;
    const double far = 2.0 * (0.5 - two_point) * (0.5 - two_point) / length;
    const double mixed = -1.0 / (6.0 * length);
    element_edges(energy, element, x, a, b);
    point_stiffness(material, a, b, length, -two_point, floor_N, low);
    point_stiffness(material, a, b, length, two_point, floor_N, high);
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
            int k = tw_packed[i][j];
            coupling[3 * i + j] = ab[k] - aa[k];
            coupling[9 + 3 * i + j] = -ab[k];
            block[end + j] = ab[k] - bb[k];
        }
        for (int j = 0; j <= i; j++) {
            int k = tw_packed[i][j];
            before[end + 3 + j] += aa[k];
            block[middle + j] = aa[k] - 2.0 * ab[k] + bb[k];
            block[end + 3 + j] = bb[k];
        }
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
        tw_energy_hold_stiffness(hold, x + BLOCK * hold->block + 3, matrix);
    }
}

/* Stretch energy of an element at eight points. */
static double element_stored(const tw_energy *energy, size_t element, const double a[3], const double b[3])
{
    double length = energy->length_m[element];
    const tw_material *material = &energy->materials[energy->span[element]];
    double slope[3];
    double stored = 0.0;
    for (int p = 0; p < 4; p++) {
        double low = element_slope(a, b, length, -eight_point[p], slope);
        double high = element_slope(a, b, length, eight_point[p], slope);
        stored += eight_weight[p] * (tw_material_energy(material, low) + tw_material_energy(material, high));
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

tw_energy_parts tw_energy_bound(const tw_energy *energy, const double *x)
{
    tw_energy_parts parts = {0.0, 0.0, 0.0, -INFINITY};
    tw_sum stored = {0.0, 0.0}, work = {0.0, 0.0}, route = {0.0, 0.0};
    for (size_t j = 0; j < energy->hold_count; j++) {
        const tw_energy_hold *hold = &energy->holds[j];
        size_t end = BLOCK * hold->block + 3;
        tw_energy_hold_bound(hold, x + end, energy->load + end, &parts, &stored, &route);
        if (j + 1 < energy->hold_count) {
            span_bound(energy, &energy->holds[j], &energy->holds[j + 1], x, &stored, &work, &route);
        }
    }
    parts.stored_J = tw_sum_value(&stored);
    parts.work_J = tw_sum_value(&work);
    parts.potential_J = parts.stored_J - tw_sum_value(&route);
    return parts;
}
