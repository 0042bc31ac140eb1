/* vector: three-component helpers, inline (pure). Arguments never alias unless said. */
#ifndef TW_VECTOR_H
#define TW_VECTOR_H

#include <math.h>

static inline double tw_dot(const double a[3], const double b[3])
{
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

static inline double tw_norm(const double a[3])
{
    return sqrt(tw_dot(a, a));
}

static inline void tw_copy(const double a[3], double out[3])
{
    out[0] = a[0];
    out[1] = a[1];
    out[2] = a[2];
}

/* out = a + factor * b; out may be a or b. */
static inline void tw_axpy(const double a[3], double factor, const double b[3], double out[3])
{
    out[0] = a[0] + factor * b[0];
    out[1] = a[1] + factor * b[1];
    out[2] = a[2] + factor * b[2];
}

#endif
