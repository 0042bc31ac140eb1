#include "material.h"

tw_material tw_material_at(const tw_line *line, double temperature_degC, double reference_degC)
{
    tw_material material = {
        .stiffness_N = line->stiffness_N,
        .strain = line->expansion_per_K * (temperature_degC - reference_degC),
    };
    return material;
}

static tw_material curved(const tw_line *line, double temperature_degC, double reference_degC,
                          const tw_permanent *permanent, int creeping, tw_curve *curve)
{
    tw_material material = {.curve = curve};
    material.strain = tw_curve_build(line, temperature_degC, reference_degC, permanent, creeping, curve);
    material.stiffness_N = tw_curve_steepest(curve);
    return material;
}

tw_material tw_material_after(const tw_line *line, double temperature_degC, double reference_degC,
                              const tw_permanent *permanent, tw_curve *curve)
{
    if (line->part_count > 0) {
        return curved(line, temperature_degC, reference_degC, permanent, 0, curve);
    }
    tw_material material = tw_material_at(line, temperature_degC, reference_degC);
    material.strain += permanent ? permanent->strain : 0.0;
    return material;
}

tw_material tw_material_creeping(const tw_line *line, double temperature_degC, double reference_degC, tw_curve *curve)
{
    return line->part_count > 0 ? curved(line, temperature_degC, reference_degC, NULL, 1, curve)
                                : tw_material_at(line, temperature_degC, reference_degC);
}

double tw_material_energy(const tw_material *material, double stretch)
{
    double elastic = stretch - 1.0 - material->strain;
    if (material->curve) {
        return tw_curve_energy(material->curve, elastic);
    }
    return elastic > 0.0 ? 0.5 * material->stiffness_N * elastic * elastic : 0.0;
}

double tw_material_tension(const tw_material *material, double stretch)
{
    double elastic = stretch - 1.0 - material->strain;
    if (material->curve) {
        return tw_curve_force(material->curve, elastic);
    }
    return elastic > 0.0 ? material->stiffness_N * elastic : 0.0;
}

double tw_material_tangent(const tw_material *material, double stretch)
{
    double elastic = stretch - 1.0 - material->strain;
    if (material->curve) {
        return tw_curve_slope(material->curve, elastic);
    }
    return elastic > 0.0 ? material->stiffness_N : 0.0;
}

tw_material_point tw_material_under(const tw_material *material, double tension)
{
    tw_material_point at;
    if (material->curve) {
        at.strain = tw_curve_strain(material->curve, tension);
        at.tangent_N = tw_curve_slope(material->curve, at.strain);
        at.energy_J = tw_curve_energy(material->curve, at.strain);
        return at;
    }
    at.strain = tension / material->stiffness_N;
    at.tangent_N = material->stiffness_N;
    at.energy_J = 0.5 * tension * at.strain;
    return at;
}

double tw_material_conjugate(const tw_material *material, double tension)
{
    if (material->curve) {
        double strain = tw_curve_strain(material->curve, tension);
        return tension * (1.0 + material->strain + strain) - tw_curve_energy(material->curve, strain);
    }
    return tension * (1.0 + material->strain) + 0.5 * tension * tension / material->stiffness_N;
}

double tw_material_stretch(const tw_material *material, double tension)
{
    if (material->curve) {
        return 1.0 + material->strain + tw_curve_strain(material->curve, tension);
    }
    return 1.0 + material->strain + tension / material->stiffness_N;
}
