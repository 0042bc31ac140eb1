/* material: stored energy, tension and stretch of the line, and their Legendre transforms (pure).
 *
 * L is the stretch |r'| (stretched over natural length), T the tension. The line carries no compression.
 *     W(L)  = EA/2 (L - 1 - e0)+^2        W'(L)  = T                     linear
 *     W*(T) = T (1 + e0) + T^2 / (2 EA)   W*'(T) = L
 *     W(L)  = U(L - 1 - e0)               U' a curve that grows from 0   curved, see material_curve.h
 *     W*(T) = T L - W(L) at W'(L) = T
 */
#ifndef TW_MATERIAL_H
#define TW_MATERIAL_H

#include "line.h"
#include "material_curve.h"

typedef struct tw_material {
    double stiffness_N;    /* EA; of a curved law its greatest slope */
    double strain;         /* e0: the strain at which the line begins to carry */
    const tw_curve *curve; /* U', borrowed; NULL: linear */
} tw_material;

/* The elastic side of a law at one tension, T >= 0. */
typedef struct tw_material_point {
    double strain;    /* L - 1 - e0 */
    double tangent_N; /* W'' */
    double energy_J;  /* W, per natural metre */
} tw_material_point;

/* A linear line at a temperature, as strung. */
tw_material tw_material_at(const tw_line *line, double temperature_degC, double reference_degC);

/* Any line after what is permanent (NULL: nothing). curve: room for a curved law, borrowed by the material. */
tw_material tw_material_after(const tw_line *line, double temperature_degC, double reference_degC,
                              const tw_permanent *permanent, tw_curve *curve);

/* As strung, with each part's creep curve in place of its loading curve. */
tw_material tw_material_creeping(const tw_line *line, double temperature_degC, double reference_degC, tw_curve *curve);

double tw_material_energy(const tw_material *material, double stretch);      /* W,   J per natural metre */
double tw_material_tension(const tw_material *material, double stretch);     /* W',  N */
double tw_material_tangent(const tw_material *material, double stretch);     /* W'', N */
double tw_material_conjugate(const tw_material *material, double tension);   /* W*,  J per natural metre; T >= 0 */
double tw_material_stretch(const tw_material *material, double tension);     /* W*'; T >= 0 */
tw_material_point tw_material_under(const tw_material *material, double tension);

#endif
