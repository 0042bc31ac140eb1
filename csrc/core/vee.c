#include "vee.h"

#include <math.h>
#include <string.h>

#include "vector.h"

double tw_vee_drop(const tw_vee *vee)
{
    double b = 0.5 * vee->spread_m;
    return sqrt((vee->length_m - b) * (vee->length_m + b));
}

/* F as seen from the line through the upper ends: its size, its part normal to that line, and whether one string is slack. */
typedef struct aspect {
    double size, normal;
    int one_slack;
} aspect;

static aspect aspect_of(const tw_vee *vee, const double F[3], double soft_N)
{
    aspect a;
    a.normal = sqrt(F[0] * F[0] + F[2] * F[2] + soft_N * soft_N);
    a.size = sqrt(tw_dot(F, F) + soft_N * soft_N);
    a.one_slack = fabs(F[1]) > 0.5 * vee->spread_m / vee->length_m * a.size;
    return a;
}

double tw_vee_support(const tw_vee *vee, const double F[3], double soft_N)
{
    aspect a = aspect_of(vee, F, soft_N);
    return a.one_slack ? vee->length_m * a.size - 0.5 * vee->spread_m * fabs(F[1]) : tw_vee_drop(vee) * a.normal;
}

void tw_vee_swing(const tw_vee *vee, const double F[3], double soft_N, double swing[3])
{
    aspect a = aspect_of(vee, F, soft_N);
    swing[0] = swing[1] = swing[2] = 0.0;
    if (a.one_slack) {
        tw_axpy(swing, -vee->length_m / a.size, F, swing);
        swing[1] += copysign(0.5 * vee->spread_m, F[1]);
    } else if (a.normal > 0.0) {
        swing[0] = -tw_vee_drop(vee) / a.normal * F[0];
        swing[2] = -tw_vee_drop(vee) / a.normal * F[2];
    }
}

void tw_vee_flexibility(const tw_vee *vee, const double F[3], double soft_N, double block[9])
{
    aspect a = aspect_of(vee, F, soft_N);
    double across = a.one_slack ? 1.0 : 0.0;
    double size = a.one_slack ? a.size : a.normal;
    double radius = a.one_slack ? vee->length_m : tw_vee_drop(vee);
    const double part[3] = {F[0], across * F[1], F[2]};
    const double open[3] = {1.0, across, 1.0};
    memset(block, 0, 9 * sizeof(double));
    for (int i = 0; i < 3 && size > 0.0; i++) {
        for (int j = 0; j < 3; j++) {
            block[3 * i + j] = radius / size * ((i == j ? open[i] : 0.0) - part[i] * part[j] / (size * size));
        }
    }
}

void tw_vee_tensions(const tw_vee *vee, const double F[3], double tension_N[2])
{
    aspect a = aspect_of(vee, F, 0.0);
    if (a.one_slack) {
        tension_N[0] = F[1] < 0.0 ? a.size : 0.0;
        tension_N[1] = F[1] < 0.0 ? 0.0 : a.size;
        return;
    }
    double even = 0.5 * a.normal * vee->length_m / tw_vee_drop(vee);
    double odd = vee->spread_m > 0.0 ? F[1] * vee->length_m / vee->spread_m : 0.0;
    tension_N[0] = fmax(0.0, even - odd);
    tension_N[1] = fmax(0.0, even + odd);
}
