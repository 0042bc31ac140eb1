/* hold: how a support holds the line, as a function of the force F of the hold on the line (pure).
 *
 * Each hold is a convex energy of the clamp's place c; its conjugate in F adds to the complementary energy:
 *     anchor, fixed sheave  F.a     hanger, swinging sheave  F.a - l |F|     post  F.a - F_x^2/(2 k_x) - F_y^2/(2 k_y)
 * c - a is the derivative of what stands behind F.a. To add a hold: give its swing, flexibility and energy here, its
 * own energy in energy.c, its ranges in check.c.
 *
 * A hanger's l |F| has a kink at F = 0, where it goes slack. soft_N > 0 rounds it off to l sqrt(|F|^2 + soft^2), which lies
 * above it by at most soft l: the complementary energy stays a lower bound.
 */
#ifndef TW_HOLD_H
#define TW_HOLD_H

#include "line.h"

void tw_hold_attachment(const tw_support *support, double a[3]);

/* From one support's attachment to another's. */
void tw_hold_chord(const tw_support *near, const tw_support *far, double chord[3]);

/* Length of the link that the line hangs on: of a hanger or a swinging sheave; 0 where there is none. */
double tw_hold_link_m(const tw_support *support);

/* c - a under F. */
void tw_hold_swing(const tw_support *support, const double force[3], double soft_N, double swing[3]);

/* block += sign * (-d swing / dF), positive semidefinite; block is 3x3. */
void tw_hold_flexibility(const tw_support *support, const double force[3], double soft_N, double sign, double block[9]);

/* What stands behind F.a. */
double tw_hold_energy(const tw_support *support, const double force[3], double soft_N);

#endif
