/* sum: compensated sums, good to the last digit over a million terms (pure). A. Neumaier, ZAMM 54 (1974) 39-51, IV. */
#ifndef TW_SUM_H
#define TW_SUM_H

#include <math.h>

typedef struct tw_sum {
    double total;
    double rest; /* what rounding took from total */
} tw_sum;

static inline void tw_sum_add(tw_sum *sum, double term)
{
    double next = sum->total + term;
    sum->rest += fabs(sum->total) >= fabs(term) ? (sum->total - next) + term : (term - next) + sum->total;
    sum->total = next;
}

static inline double tw_sum_value(const tw_sum *sum)
{
    return sum->total + sum->rest;
}

#endif
