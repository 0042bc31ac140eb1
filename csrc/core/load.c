#include "load.h"

#include <math.h>

static const double PI = 3.14159265358979323846;

double tw_load_ice(double diameter_m, double thickness_m, double density_kg_per_m3)
{
    return PI * thickness_m * (diameter_m + thickness_m) * density_kg_per_m3 * TW_GRAVITY;
}

double tw_load_iced_diameter(double diameter_m, double thickness_m, double share)
{
    if (share == 1.0) {
        return diameter_m + 2.0 * thickness_m;
    }
    return sqrt(diameter_m * diameter_m + 4.0 * share * thickness_m * (diameter_m + thickness_m));
}

double tw_load_air_density(double altitude_m, double temperature_degC)
{
    double pressure = 101325.0 * pow(1.0 - 2.25577e-5 * altitude_m, 5.25588);
    return pressure / (287.05287 * (temperature_degC + 273.15));
}

double tw_load_wind_pressure(double air_density_kg_per_m3, double speed_m_per_s)
{
    return 0.5 * air_density_kg_per_m3 * speed_m_per_s * speed_m_per_s;
}

double tw_load_pressure(const tw_condition *condition)
{
    double pressure = condition->wind_pressure_Pa;
    if (isnan(pressure)) {
        double density = isnan(condition->wind_altitude_m)
                             ? condition->air_density_kg_per_m3
                             : tw_load_air_density(condition->wind_altitude_m, condition->temperature_degC);
        double speed = condition->wind_speed_m_per_s;
        pressure = isnan(speed) ? 0.0 : tw_load_wind_pressure(density, speed);
    }
    return condition->factor_wind * pressure;
}

double tw_load_wind(double pressure_Pa, double drag, double iced_diameter_m, double angle_rad)
{
    double sine = sin(angle_rad);
    return pressure_Pa * drag * iced_diameter_m * sine * fabs(sine);
}

double tw_load_wind_angle(const tw_condition *condition, const double along[2])
{
    double bearing = condition->wind_bearing_rad;
    if (isnan(bearing)) {
        return condition->wind_angle_rad;
    }
    double east = -sin(bearing), north = -cos(bearing);
    return atan2(along[0] * north - along[1] * east, along[0] * east + along[1] * north);
}

double tw_load_ice_share(const tw_condition *condition, size_t span)
{
    return condition->ice_share ? condition->ice_share[span] : 1.0;
}

void tw_load_basic(const tw_line *line, const tw_condition *condition, double ice_share, double angle_rad,
                   int with_addition, double load[3])
{
    double thickness = condition->ice_thickness_m;
    double iced = tw_load_iced_diameter(line->diameter_m, thickness, ice_share);
    double ice = ice_share * tw_load_ice(line->diameter_m, thickness, condition->ice_density_kg_per_m3);
    load[0] = 0.0;
    load[1] = tw_load_wind(tw_load_pressure(condition), condition->wind_drag, iced, angle_rad);
    load[2] = -condition->factor_weight * line->weight_N_per_m - condition->factor_ice * ice;
    double resultant = hypot(load[1], load[2]);
    if (with_addition && resultant > 0.0) {
        double factor = 1.0 + condition->resultant_addition_N_per_m / resultant;
        load[1] *= factor;
        load[2] *= factor;
    }
}

void tw_load_hanger(const tw_support *support, const tw_condition *condition, double angle_rad, double load[3])
{
    double push = 0.5 * tw_load_pressure(condition) * support->hanger_wind_area_m2;
    load[0] = push != 0.0 ? push * cos(angle_rad) : 0.0;
    load[1] = push != 0.0 ? push * sin(angle_rad) : 0.0;
    load[2] = -0.5 * condition->factor_weight * support->hanger_weight_N;
}
