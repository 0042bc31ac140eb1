/* load: what a condition puts on a metre of line, span by span, and on a hanger (pure). */
#ifndef TW_LOAD_H
#define TW_LOAD_H

#include "line.h"

/* Ice per metre, N/m: the exact annulus pi t (d + t) rho g. */
double tw_load_ice(double diameter_m, double thickness_m, double density_kg_per_m3);

/* Diameter over a share of the ice, m: of the annulus that weighs so much less, sqrt(d^2 + 4 share t (d + t)). */
double tw_load_iced_diameter(double diameter_m, double thickness_m, double share);

/* Air density of the standard atmosphere, kg/m3: pressure p0 (1 - 2.25577e-5 h)^5.25588 at altitude h, p0 = 101,325 Pa, and
 * rho = p / (R T), R = 287.05287 J/(kg K), at the temperature given. Source: ISO 2533:1975. */
double tw_load_air_density(double altitude_m, double temperature_degC);

/* Wind pressure, Pa: rho v^2 / 2. */
double tw_load_wind_pressure(double air_density_kg_per_m3, double speed_m_per_s);

/* Wind pressure of a condition, by pressure or speed, times its factor, Pa. */
double tw_load_pressure(const tw_condition *condition);

/* Wind per metre across the line, N/m, positive to the left: p C d sin^2(angle), with the sign of sin(angle). */
double tw_load_wind(double pressure_Pa, double drag, double iced_diameter_m, double angle_rad);

/* Angle from a span's plan direction `along` to where the wind blows, anticlockwise from above. A compass bearing b, from
 * which it blows, is the direction -(sin b, cos b) in (east, north). */
double tw_load_wind_angle(const tw_condition *condition, const double along[2]);

/* Share of the ice on a span. */
double tw_load_ice_share(const tw_condition *condition, size_t span);

/* Weight, ice and wind of a condition on a span with a share of the ice, wind at an angle, each times its factor, then
 * scaled by the resultant addition when with_addition: (along, across, up), N/m. */
void tw_load_basic(const tw_line *line, const tw_condition *condition, double ice_share, double angle_rad,
                   int with_addition, double load[3]);

/* Half of a hanger's weight and of the wind on it, which blows at an angle from the span ahead: (along, across, up), N. The
 * wind pushes a string in its own direction: p A / 2. */
void tw_load_hanger(const tw_support *support, const tw_condition *condition, double angle_rad, double load[3]);

#endif
