/* gauss: points and weights of Gauss and Legendre on [-1, 1]; symmetric, so the points above zero alone (Abramowitz and Stegun,
 * Handbook of Mathematical Functions (1964), table 25.4).
 */
#ifndef TW_GAUSS_H
#define TW_GAUSS_H

/* The rule of ten points. */
extern const double tw_gauss_ten_point[5], tw_gauss_ten_weight[5];

/* The rule of five: zero comes first. */
extern const double tw_gauss_five_point[3], tw_gauss_five_weight[3];

#endif
