#include "material.h"

tw_material tw_material_at(const tw_line *line, double temperature_degC, double reference_degC)
{
    tw_material material = {
        .stiffness_N = line->stiffness_N,
        .strain = line->expansion_per_K * (temperature_degC - reference_degC),
    };
    return material;
}

double tw_material_energy(const tw_material *material, double stretch)
{
    double elastic = stretch - 1.0 - material->strain;
    return elastic > 0.0 ? 0.5 * material->stiffness_N * elastic * elastic : 0.0;
}

double tw_material_tension(const tw_material *material, double stretch)
{
    double elastic = stretch - 1.0 - material->strain;
    return elastic > 0.0 ? material->stiffness_N * elastic : 0.0;
}

double tw_material_tangent(const tw_material *material, double stretch)
{
    return stretch - 1.0 - material->strain > 0.0 ? material->stiffness_N : 0.0;
}

double tw_material_conjugate(const tw_material *material, double tension)
{
    return tension * (1.0 + material->strain) + 0.5 * tension * tension / material->stiffness_N;
}

double tw_material_stretch(const tw_material *material, double tension)
{
    return 1.0 + material->strain + tension / material->stiffness_N;
}
