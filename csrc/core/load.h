/* load: what a condition puts on a metre of line (pure). */
#ifndef TW_LOAD_H
#define TW_LOAD_H

#include "line.h"

/* Ice per metre, N/m: the exact annulus pi t (d + t) rho g. */
double tw_load_ice(double diameter_m, double thickness_m, double density_kg_per_m3);

/* Wind pressure, Pa: rho v^2 / 2. */
double tw_load_wind_pressure(double air_density_kg_per_m3, double speed_m_per_s);

/* Wind per metre across the line, N/m, positive to the left: p C (d + 2 t) sin^2(angle), with the sign of sin(angle). */
double tw_load_wind(double pressure_Pa, double drag, double iced_diameter_m, double angle_rad);

/* Weight, ice and wind of a condition, scaled by its resultant addition when with_addition: (along, across, up), N/m. */
void tw_load_basic(const tw_line *line, const tw_condition *condition, int with_addition, double load[3]);

#endif
