/* vee: a V hanger, two strings of length l whose upper ends lie a spread 2 b apart, across (pure).
 *
 * Vectors are in the support's axes (along, across, up) and measured from the middle between the upper ends. The clamp can be
 * wherever neither string is too long, in the lens where two balls overlap. With F the force of the hanger on the line,
 * F_n = hypot(F_along, F_up) and R = sqrt(l^2 - b^2), the lens' support function is
 *     h(F) = R F_n                      where |F_across| <= b/l |F|: both strings taut, on a circle about the upper ends
 *     h(F) = l |F| - b |F_across|       otherwise: one string is slack, the other swings about its own end
 * convex and, but at F = 0, with a continuous slope. -h(F) is what the hanger adds to the complementary energy behind F.a, and
 * the clamp is where its slope says. spread 0 is a single string: h = l |F|.
 * soft_N > 0 rounds the kink at F = 0 off as in hold.h, by a fourth component of F.
 * Support functions of convex sets: Rockafellar, Convex Analysis (1970), section 13.
 */
#ifndef TW_VEE_H
#define TW_VEE_H

typedef struct tw_vee {
    double length_m; /* of each string */
    double spread_m; /* between the upper ends, less than twice the length */
} tw_vee;

/* How far the clamp hangs below the upper ends when plumb: R. */
double tw_vee_drop(const tw_vee *vee);

/* h(F). */
double tw_vee_support(const tw_vee *vee, const double force[3], double soft_N);

/* Clamp under F: -dh/dF; zero at F = 0. */
void tw_vee_swing(const tw_vee *vee, const double force[3], double soft_N, double swing[3]);

/* block = d2h/dF2, positive semidefinite, 3x3; zero at F = 0. */
void tw_vee_flexibility(const tw_vee *vee, const double force[3], double soft_N, double block[9]);

/* Tensions of the right and the left string (upper ends at -b and b across) that add up to F. */
void tw_vee_tensions(const tw_vee *vee, const double force[3], double tension_N[2]);

#endif
