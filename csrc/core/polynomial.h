/* polynomial: value and slope of terms[0] + terms[1] x + ..., as a curved law states its force; by Horner's rule, inline. */
#ifndef TW_POLYNOMIAL_H
#define TW_POLYNOMIAL_H

#include "line.h"

enum { TW_POLYNOMIAL_TOP = TW_CURVE_TERMS - 1 };

static inline double tw_polynomial_value(const double terms[TW_CURVE_TERMS], double x)
{
    double sum = terms[TW_POLYNOMIAL_TOP];
    for (int k = TW_POLYNOMIAL_TOP - 1; k >= 0; k--) {
        sum = sum * x + terms[k];
    }
    return sum;
}

static inline double tw_polynomial_slope(const double terms[TW_CURVE_TERMS], double x)
{
    double sum = TW_POLYNOMIAL_TOP * terms[TW_POLYNOMIAL_TOP];
    for (int k = TW_POLYNOMIAL_TOP - 1; k >= 1; k--) {
        sum = sum * x + k * terms[k];
    }
    return sum;
}

#endif
