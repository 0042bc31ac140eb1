/* energy: potential energy, gradient and Hessian of the discretised line.
 *
 *     P[r] = int W(|r'|) ds - int q.r ds - sum F_i.r(s_i) + holds
 *
 * Three-node elements, r quadratic in s. Of an element of natural length l with edges a (start -> middle) and
 * b (middle -> end), at xi in [-1, 1]:
 *     r' = (2/l) [(1/2 - xi) a + (1/2 + xi) b]
 * The stretch energy is integrated at the two Gauss points xi = -+1/sqrt(3): with three, stiff stretch and soft bending
 * fight, and the sag converges two orders slower. Loads act consistently, l (q0, 2 (q0 + q1), q1)/6 from end to end.
 * Holds: an anchor or a post adds sum k_i d_i^2/2 in its own axes (route.h) and is fixed where rigid; a hanger is a link, a V
 * two, of length l that cannot grow and carries no compression, kept by the augmented term
 *     ((F + k e)+^2 - F^2) / (2 k)      e = |c - a| - l,  F: its force in the exact line,  k = 10 (EA + F) / l
 * which is convex in the clamp c and stationary at e = 0 when F is right.
 *
 * Unknowns are displacements from the shape of the exact line; strains come from that shape's edge vectors, found piece by
 * piece in closed form, plus differences of displacements, so no digit is lost to large coordinates.
 * Layout of unknowns and gradient: six per block; block 0 is (unused, node 0), block i (middle, end) of element i-1.
 * Fixed unknowns have gradient 0 and a unit diagonal. All O(elements); nothing is allocated after create.
 */
#ifndef TW_ENERGY_H
#define TW_ENERGY_H

#include "blocktri.h"
#include "section.h"

typedef struct tw_energy_link {
    double offset[3];    /* clamp less the link's upper end in the start shape, m */
    double length_m;
    double over_m;       /* |offset| - length_m */
    double force_N;      /* F */
    double stiffness;    /* k, N/m */
} tw_energy_link;

typedef struct tw_energy_hold {
    size_t block;        /* whose end node is the clamp */
    int fixed[3];        /* x, y, up */
    int guided;          /* 1: neither x nor y is fixed, but the direction `guide` in plan is */
    double guide[3];     /* unit */
    double place[3];     /* clamp in the start shape, from the first support, m */
    double offset[3];    /* clamp less the point of fixing in the start shape, m */
    double ahead[2];     /* axes of the springs */
    double stiffness[3]; /* springs: along, across, up, N/m; 0 where rigid or none */
    int link_count;      /* hanger: 1, or 2 of a V */
    tw_energy_link link[2];
} tw_energy_hold;

typedef struct tw_energy {
    tw_material *materials; /* [hold_count - 1] of the spans; owned, their curves the section's */
    size_t *span;          /* [element_count] which span an element is of; owned */
    size_t element_count;
    size_t hold_count;
    double *edge;          /* [6 element_count] a, b in the start shape, m; owned */
    double *length_m;      /* [element_count] natural; owned */
    double *load;          /* [6 (element_count + 1)] consistent loads of the nodes, N; owned */
    tw_energy_hold *holds; /* [hold_count]; owned */
} tw_energy;

/* One evaluation. */
typedef struct tw_energy_state {
    double potential_J; /* the loads' work counted from the start shape: for comparing shapes of one mesh */
    double residual_N;  /* largest out-of-balance force on a node */
    double tension_N;   /* largest, at the points of integration */
} tw_energy_state;

/* The shape judged on its own, integrated finely. */
typedef struct tw_energy_parts {
    double potential_J; /* datum at the first support: comes from above to the complementary energy */
    double stored_J;    /* stretch of the line and of posts */
    double work_J;      /* of the loads between clamps, from the middle of each chord: free of the datum */
    double link_excess; /* largest (|c - a| - l) / l of the links; <= 0 where none is too long */
} tw_energy_parts;

/* How many elements a mesh of about `per_span` in each span has; each piece has at least one. */
size_t tw_energy_elements(const tw_section *section, size_t per_span);

/* Mesh of a solved section. NULL without memory. Free is NULL-safe. */
tw_energy *tw_energy_create(const tw_section *section, size_t per_span);
void tw_energy_free(tw_energy *energy);

/* x: displacements [6 (element_count + 1)]; gradient has the same size. */
tw_energy_state tw_energy_evaluate(const tw_energy *energy, const double *x, double *gradient);

/* Hessian at x into a matrix of element_count + 1 blocks. floor_N: least tension and tangent that a point of integration
 * is given, 0 for the Hessian proper; above 0 it keeps the matrix definite where the line is slack. */
void tw_energy_hessian(const tw_energy *energy, const double *x, double floor_N, tw_blocktri *matrix);

/* The potential energy of the shape itself: the stretch at eight Gauss points of each element, so an upper bound of the
 * least potential energy of the continuous line as long as link_excess <= 0 (an excess is charged at F per metre). */
tw_energy_parts tw_energy_bound(const tw_energy *energy, const double *x);

#endif
