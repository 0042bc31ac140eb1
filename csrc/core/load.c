#include "load.h"

#include <math.h>

static const double PI = 3.14159265358979323846;
static const double GRAVITY = 9.80665; /* m/s2, standard gravity (ISO 80000-3) */

double tw_load_ice(double diameter_m, double thickness_m, double density_kg_per_m3)
{
    return PI * thickness_m * (diameter_m + thickness_m) * density_kg_per_m3 * GRAVITY;
}

double tw_load_wind_pressure(double air_density_kg_per_m3, double speed_m_per_s)
{
    return 0.5 * air_density_kg_per_m3 * speed_m_per_s * speed_m_per_s;
}

double tw_load_wind(double pressure_Pa, double drag, double iced_diameter_m, double angle_rad)
{
    double sine = sin(angle_rad);
    return pressure_Pa * drag * iced_diameter_m * sine * fabs(sine);
}

static double wind_of(const tw_line *line, const tw_condition *condition)
{
    double pressure = condition->wind_pressure_Pa;
    if (isnan(pressure)) {
        if (isnan(condition->wind_speed_m_per_s)) {
            return 0.0;
        }
        pressure = tw_load_wind_pressure(condition->air_density_kg_per_m3, condition->wind_speed_m_per_s);
    }
    double iced = line->diameter_m + 2.0 * condition->ice_thickness_m;
    return tw_load_wind(pressure, condition->wind_drag, iced, condition->wind_angle_rad);
}

void tw_load_basic(const tw_line *line, const tw_condition *condition, int with_addition, double load[3])
{
    load[0] = 0.0;
    load[1] = wind_of(line, condition);
    load[2] = -line->weight_N_per_m
              - tw_load_ice(line->diameter_m, condition->ice_thickness_m, condition->ice_density_kg_per_m3);
    double resultant = hypot(load[1], load[2]);
    if (with_addition && resultant > 0.0) {
        double factor = 1.0 + condition->resultant_addition_N_per_m / resultant;
        load[1] *= factor;
        load[2] *= factor;
    }
}
