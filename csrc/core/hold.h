/* hold: how a support holds the line, as a function of the force F of the hold on the line (pure).
 *
 * Each hold is a convex energy of the clamp's place c; its conjugate in F adds to the complementary energy:
 *     anchor, post  F.a - sum F_i^2/(2 k_i)    hanger  F.a - l |F|, or of two strings as vee.h says
 * with k_i along, across and up in the support's axes (`ahead`, see route.h), infinite where rigid.
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

/* Spring rates of an anchor or a post in its axes (along, across, up); infinity where rigid, and for a hanger. */
void tw_hold_springs(const tw_support *support, double rate[3]);

/* Length of the link that the line hangs on: of a hanger or a swinging sheave; 0 where there is none. */
double tw_hold_link_m(const tw_support *support);

/* c - a under F. */
void tw_hold_swing(const tw_support *support, const double ahead[2], const double force[3], double soft_N,
                   double swing[3]);

/* block += sign * (-d swing / dF), positive semidefinite; block is 3x3. */
void tw_hold_flexibility(const tw_support *support, const double ahead[2], const double force[3], double soft_N,
                         double sign, double block[9]);

/* What stands behind F.a. */
double tw_hold_energy(const tw_support *support, const double ahead[2], const double force[3], double soft_N);

/* How far a hanger's clamp hangs below its support when plumb; 0 for other holds. */
double tw_hold_drop(const tw_support *support);

/* Strings of a hanger: their upper ends from the support, and how F shares among them. Returns their number, 1 or 2. */
int tw_hold_strings(const tw_support *support, const double ahead[2], const double force[3], double end[2][3],
                    double tension_N[2]);

/* The longer way from a hanger's upper ends to a clamp at `swing` from the support; away: that way as a vector. */
double tw_hold_reach(const tw_support *support, const double ahead[2], const double swing[3], double away[3]);

#endif
