/* material: stored energy, tension and stretch of the line, and their Legendre transforms (pure).
 *
 * L is the stretch |r'| (stretched over natural length), T the tension. The line carries no compression.
 *     W(L)  = EA/2 (L - 1 - e0)+^2        W'(L)  = T
 *     W*(T) = T (1 + e0) + T^2 / (2 EA)   W*'(T) = L
 */
#ifndef TW_MATERIAL_H
#define TW_MATERIAL_H

#include "line.h"

typedef struct tw_material {
    double stiffness_N; /* EA */
    double strain;      /* e0: expansion (t - t_ref) */
} tw_material;

tw_material tw_material_at(const tw_line *line, double temperature_degC, double reference_degC);

double tw_material_energy(const tw_material *material, double stretch);      /* W,   J per natural metre */
double tw_material_tension(const tw_material *material, double stretch);     /* W',  N */
double tw_material_tangent(const tw_material *material, double stretch);     /* W'', N */
double tw_material_conjugate(const tw_material *material, double tension);   /* W*,  J per natural metre; T >= 0 */
double tw_material_stretch(const tw_material *material, double tension);     /* W*'; T >= 0 */

#endif
