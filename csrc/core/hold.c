#include "hold.h"

#include <math.h>

#include "vector.h"

void tw_hold_attachment(const tw_support *support, double a[3])
{
    a[0] = support->station_m;
    a[1] = support->offset_m;
    a[2] = support->elevation_m;
}

void tw_hold_chord(const tw_support *near, const tw_support *far, double chord[3])
{
    double a[3];
    tw_hold_attachment(near, a);
    tw_hold_attachment(far, chord);
    tw_axpy(chord, -1.0, a, chord);
}

double tw_hold_link_m(const tw_support *support)
{
    int hangs = support->hold == TW_HOLD_HANGER || support->hold == TW_HOLD_SHEAVE;
    return hangs ? support->hanger_length_m : 0.0;
}

void tw_hold_swing(const tw_support *support, const double F[3], double soft_N, double swing[3])
{
    double size = sqrt(tw_dot(F, F) + soft_N * soft_N);
    swing[0] = swing[1] = swing[2] = 0.0;
    double link = tw_hold_link_m(support);
    if (link > 0.0 && size > 0.0) {
        tw_axpy(swing, -link / size, F, swing);
    } else if (support->hold == TW_HOLD_POST) {
        swing[0] = -F[0] / support->stiffness_along_N_per_m;
        swing[1] = -F[1] / support->stiffness_across_N_per_m;
    }
}

void tw_hold_flexibility(const tw_support *support, const double F[3], double soft_N, double sign, double block[9])
{
    double size = sqrt(tw_dot(F, F) + soft_N * soft_N);
    double link = tw_hold_link_m(support);
    if (link > 0.0 && size > 0.0) {
        double factor = sign * link / size;
        for (int i = 0; i < 3; i++) {
            for (int j = 0; j < 3; j++) {
                block[3 * i + j] += factor * ((i == j ? 1.0 : 0.0) - F[i] * F[j] / (size * size));
            }
        }
    } else if (support->hold == TW_HOLD_POST) {
        block[0] += sign / support->stiffness_along_N_per_m;
        block[4] += sign / support->stiffness_across_N_per_m;
    }
}

double tw_hold_energy(const tw_support *support, const double F[3], double soft_N)
{
    switch (support->hold) {
    case TW_HOLD_HANGER:
    case TW_HOLD_SHEAVE: return -tw_hold_link_m(support) * sqrt(tw_dot(F, F) + soft_N * soft_N);
    case TW_HOLD_POST:
        return -0.5 * (F[0] * F[0] / support->stiffness_along_N_per_m + F[1] * F[1] / support->stiffness_across_N_per_m);
    case TW_HOLD_ANCHOR: break;
    }
    return 0.0;
}
