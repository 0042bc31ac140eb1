#include "hold.h"

#include <math.h>

#include "route.h"
#include "vector.h"
#include "vee.h"

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

void tw_hold_springs(const tw_support *support, double rate[3])
{
    rate[0] = rate[1] = rate[2] = INFINITY;
    if (support->hold == TW_HOLD_ANCHOR) {
        rate[0] = support->stiffness_along_N_per_m > 0.0 ? support->stiffness_along_N_per_m : INFINITY;
        rate[1] = support->stiffness_across_N_per_m > 0.0 ? support->stiffness_across_N_per_m : INFINITY;
        rate[2] = support->stiffness_vertical_N_per_m > 0.0 ? support->stiffness_vertical_N_per_m : INFINITY;
    } else if (support->hold == TW_HOLD_POST) {
        rate[0] = support->stiffness_along_N_per_m;
        rate[1] = support->stiffness_across_N_per_m;
    }
}

static int is_vee(const tw_support *support)
{
    return support->hold == TW_HOLD_HANGER && support->hanger_spread_m > 0.0;
}

static tw_vee vee_of(const tw_support *support)
{
    tw_vee vee = {support->hanger_length_m, support->hanger_spread_m};
    return vee;
}

/* c - a in the support's axes, of all but a single string. */
static void swing_in_axes(const tw_support *support, const double F[3], double soft_N, double swing[3])
{
    double rate[3];
    if (is_vee(support)) {
        const tw_vee vee = vee_of(support);
        tw_vee_swing(&vee, F, soft_N, swing);
        return;
    }
    tw_hold_springs(support, rate);
    for (int i = 0; i < 3; i++) {
        swing[i] = isfinite(rate[i]) ? -F[i] / rate[i] : 0.0;
    }
}

void tw_hold_swing(const tw_support *support, const double ahead[2], const double F[3], double soft_N, double swing[3])
{
    swing[0] = swing[1] = swing[2] = 0.0;
    if (tw_hold_link_m(support) > 0.0 && !is_vee(support)) {
        double size = sqrt(tw_dot(F, F) + soft_N * soft_N);
        if (size > 0.0) {
            tw_axpy(swing, -support->hanger_length_m / size, F, swing);
        }
        return;
    }
    double force[3], in_axes[3];
    tw_route_into_axes(ahead, F, force);
    swing_in_axes(support, force, soft_N, in_axes);
    tw_route_out_of_axes(ahead, in_axes, swing);
}

/* -d swing / dF in the support's axes, of all but a single string. */
static void flexibility_in_axes(const tw_support *support, const double F[3], double soft_N, double own[9])
{
    double rate[3];
    if (is_vee(support)) {
        const tw_vee vee = vee_of(support);
        tw_vee_flexibility(&vee, F, soft_N, own);
        return;
    }
    tw_hold_springs(support, rate);
    for (int i = 0; i < 9; i++) {
        own[i] = i % 4 == 0 ? 1.0 / rate[i / 4] : 0.0;
    }
}

void tw_hold_flexibility(const tw_support *support, const double ahead[2], const double F[3], double soft_N, double sign,
                         double block[9])
{
    if (tw_hold_link_m(support) > 0.0 && !is_vee(support)) {
        double size = sqrt(tw_dot(F, F) + soft_N * soft_N);
        double factor = size > 0.0 ? sign * support->hanger_length_m / size : 0.0;
        for (int i = 0; i < 3 && size > 0.0; i++) {
            for (int j = 0; j < 3; j++) {
                block[3 * i + j] += factor * ((i == j ? 1.0 : 0.0) - F[i] * F[j] / (size * size));
            }
        }
        return;
    }
    double force[3], own[9], half[9], column[3], turned[3];
    tw_route_into_axes(ahead, F, force);
    flexibility_in_axes(support, force, soft_N, own);
    for (int i = 0; i < 3; i++) {
        tw_route_out_of_axes(ahead, own + 3 * i, half + 3 * i); /* own is symmetric: its rows are its columns */
    }
    for (int j = 0; j < 3; j++) {
        for (int i = 0; i < 3; i++) {
            column[i] = half[3 * i + j];
        }
        tw_route_out_of_axes(ahead, column, turned);
        for (int i = 0; i < 3; i++) {
            block[3 * i + j] += sign * turned[i];
        }
    }
}

double tw_hold_energy(const tw_support *support, const double ahead[2], const double F[3], double soft_N)
{
    double force[3], rate[3];
    switch (support->hold) {
    case TW_HOLD_HANGER:
        if (is_vee(support)) {
            const tw_vee vee = vee_of(support);
            tw_route_into_axes(ahead, F, force);
            return -tw_vee_support(&vee, force, soft_N);
        }
        return -support->hanger_length_m * sqrt(tw_dot(F, F) + soft_N * soft_N);
    case TW_HOLD_ANCHOR:
    case TW_HOLD_POST:
        tw_route_into_axes(ahead, F, force);
        tw_hold_springs(support, rate);
        return -0.5 * (force[0] * force[0] / rate[0] + force[1] * force[1] / rate[1] + force[2] * force[2] / rate[2]);
    case TW_HOLD_SHEAVE: break;
    }
    return -tw_hold_link_m(support) * sqrt(tw_dot(F, F) + soft_N * soft_N);
}

double tw_hold_drop(const tw_support *support)
{
    if (is_vee(support)) {
        const tw_vee vee = vee_of(support);
        return tw_vee_drop(&vee);
    }
    return tw_hold_link_m(support);
}

int tw_hold_strings(const tw_support *support, const double ahead[2], const double F[3], double end[2][3],
                    double tension_N[2])
{
    end[0][0] = end[0][1] = end[0][2] = 0.0;
    if (!is_vee(support)) {
        tension_N[0] = tw_norm(F);
        return 1;
    }
    const tw_vee vee = vee_of(support);
    double force[3];
    tw_route_into_axes(ahead, F, force);
    tw_vee_tensions(&vee, force, tension_N);
    for (int i = 0; i < 2; i++) {
        const double upper[3] = {0.0, (i ? 0.5 : -0.5) * vee.spread_m, 0.0};
        tw_route_out_of_axes(ahead, upper, end[i]);
    }
    return 2;
}

double tw_hold_reach(const tw_support *support, const double ahead[2], const double swing[3], double away[3])
{
    const double none[3] = {0.0, 0.0, 0.0};
    double end[2][3], tension[2], other[3];
    int count = tw_hold_strings(support, ahead, none, end, tension);
    tw_axpy(swing, -1.0, end[0], away);
    double reach = tw_norm(away);
    if (count == 2) {
        tw_axpy(swing, -1.0, end[1], other);
        if (tw_norm(other) > reach) {
            tw_copy(other, away);
            reach = tw_norm(other);
        }
    }
    return reach;
}
