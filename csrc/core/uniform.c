#include "uniform.h"

#include <float.h>
#include <math.h>

#include "vector.h"

enum { STEPS_MOST = 100 };

/* End of the span hung with (h, v): across and along the load, with its 2x2 flexibility (hh, hv, vv). */
static void hang(const tw_uniform *span, double length, double h, double v, double end[2], double flexibility[3])
{
    const tw_material material = {span->stiffness_N, span->strain, NULL};
    const double tension[3] = {h, 0.0, v};
    const double load[3] = {0.0, 0.0, span->weight};
    double displacement[3];
    double full[6];
    tw_piece_displacement(&material, tension, load, length, displacement, full);
    end[0] = displacement[0];
    end[1] = displacement[2];
    flexibility[0] = full[0];
    flexibility[1] = full[2];
    flexibility[2] = full[5];
}

/* u > 1 -> x with sinh(x)/x = u. */
static double inverse_sinhc(double u)
{
    double x = u < 3.0 ? sqrt(6.0 * (u - 1.0)) : log(2.0 * u) + log(log(2.0 * u));
    for (int i = 0; i < 8; i++) {
        double s = sinh(x);
        double slope = (x * cosh(x) - s) / (x * x);
        double step = (s / x - u) / slope;
        x -= step;
        if (fabs(step) < 1e-10 * x) {
            break;
        }
    }
    return x;
}

/* Taut start: the parabola's change of state along the chord, (l/EA) T^3 + (l (1 + e0) - c) T^2 = c W^2 / 24. */
static double taut_start(const tw_uniform *span, double length, double chord)
{
    double across = span->weight * length * span->span / chord;
    double cubic = length / span->stiffness_N;
    double square = length * (1.0 + span->strain) - chord;
    double constant = chord * across * across / 24.0;
    double T = square < 0.0 ? -square / cubic : 0.0;
    T += cbrt(constant / cubic);
    for (int i = 0; i < 30; i++) {
        double value = (cubic * T + square) * T * T - constant;
        double slope = (3.0 * cubic * T + 2.0 * square) * T;
        double step = value / slope;
        if (!(fabs(step) > 1e-6 * T)) {
            break;
        }
        T = step < T ? T - step : 0.5 * T;
    }
    return T;
}

static void start_guess(const tw_uniform *span, double length, double *h, double *v)
{
    double chord = hypot(span->span, span->drop);
    double T = taut_start(span, length, chord);
    *h = T * span->span / chord;
    *v = T * span->drop / chord + 0.5 * span->weight * length;
    double stretched = length * (1.0 + span->strain);
    if (span->weight * span->span < *h || stretched <= fabs(span->drop)) {
        return;
    }
    double plan = sqrt((stretched - span->drop) * (stretched + span->drop));
    double u = plan / span->span;
    if (u > 1.0 + 1e-6) {
        double x = inverse_sinhc(u);
        *h = 0.5 * span->weight * span->span / x;
        *v = 0.5 * span->weight * (length + span->drop / tanh(x));
    }
}

/* Bar: no load, the line is straight. */
static tw_status settle_bar(const tw_uniform *span, double length, double *h, double *v)
{
    double chord = hypot(span->span, span->drop);
    double T = span->stiffness_N * (chord / length - 1.0 - span->strain);
    *h = T * span->span / chord;
    *v = T * span->drop / chord;
    return T > 0.0 ? TW_OK : TW_SLACK;
}

/* Newton on the closing error, the gradient of the convex -D(h, v); steps are cut so that h stays positive and the
 * slope of -D along the step never turns steeper upwards than it went down. */
tw_status tw_uniform_settle(const tw_uniform *span, double length, double *h, double *v)
{
    double end[2], f[3], error[2], step[2];
    if (span->weight <= 0.0) {
        return settle_bar(span, length, h, v);
    }
    start_guess(span, length, h, v);
    hang(span, length, *h, *v, end, f);
    error[0] = end[0] - span->span;
    error[1] = end[1] - span->drop;
    for (int i = 0; i < STEPS_MOST; i++) {
        double det = f[0] * f[2] - f[1] * f[1];
        step[0] = -(f[2] * error[0] - f[1] * error[1]) / det;
        step[1] = -(f[0] * error[1] - f[1] * error[0]) / det;
        double slope = step[0] * error[0] + step[1] * error[1];
        double factor = *h + step[0] > 0.0 ? 1.0 : -0.9 * *h / step[0];
        double h0 = *h, v0 = *v;
        double moved = fabs(step[0]) / h0 + fabs(step[1]) / hypot(h0, v0);
        for (int cut = 0; cut < 60; cut++, factor *= 0.5) {
            *h = h0 + factor * step[0];
            *v = v0 + factor * step[1];
            hang(span, length, *h, *v, end, f);
            error[0] = end[0] - span->span;
            error[1] = end[1] - span->drop;
            if (moved < 1e-9 || step[0] * error[0] + step[1] * error[1] <= 0.1 * fabs(slope) + DBL_MIN) {
                break;
            }
        }
        double size = hypot(*h, *v);
        if (!isfinite(size)) {
            return TW_NOT_FINITE;
        }
        double closing = fabs(error[0]) + fabs(error[1]);
        if (moved < 1e-9) {
            return closing <= 1e-9 * (span->span + fabs(span->drop) + length) ? TW_OK : TW_NOT_SETTLED;
        }
    }
    return TW_NOT_SETTLED;
}

/* What was found has to reach the far end, whatever the steps were like. */
static int closes(const tw_uniform *span, double length, double h, double v)
{
    double end[2], f[3];
    hang(span, length, h, v, end, f);
    double error = fabs(end[0] - span->span) + fabs(end[1] - span->drop);
    return error <= 1e-9 * (span->span + fabs(span->drop)) + 1e-14 * length;
}

/* Newton in (length, v); d end / d length is the stretched direction at the end. */
tw_status tw_uniform_length(const tw_uniform *span, double h, double *length, double *v)
{
    double chord = hypot(span->span, span->drop);
    double unit = 1.0 + span->strain;
    double compliance = 1.0 / span->stiffness_N;
    double x = 0.5 * span->weight * span->span / h;
    double plan = span->span * (x > 1e-8 ? sinh(x) / x : 1.0);
    *length = hypot(span->drop, plan);
    double bend = x > 1e-8 ? span->drop * x / tanh(x) : span->drop;
    *v = 0.5 * span->weight * *length + bend * h / span->span;
    *length /= unit + compliance * h * chord / span->span;
    for (int i = 0; i < STEPS_MOST; i++) {
        double end[2], f[3];
        hang(span, *length, h, *v, end, f);
        double error[2] = {end[0] - span->span, end[1] - span->drop};
        double far = *v - span->weight * *length;
        double stretch = unit / hypot(h, far) + compliance;
        double dx = h * stretch, dz = far * stretch;
        double det = dx * f[2] - dz * f[1];
        double grow = -(f[2] * error[0] - f[1] * error[1]) / det;
        double lift = -(dx * error[1] - dz * error[0]) / det;
        double factor = *length + grow > 0.0 ? 1.0 : -0.5 * *length / grow;
        *length += factor * grow;
        *v += factor * lift;
        if (!isfinite(*length) || !isfinite(*v)) {
            return TW_NOT_FINITE;
        }
        if (fabs(grow) < 1e-9 * *length && fabs(lift) < 1e-9 * hypot(h, *v)) {
            return closes(span, *length, h, *v) ? TW_OK : TW_NOT_SETTLED;
        }
    }
    return TW_NOT_SETTLED;
}

/* The load's own plane: e along the load, p across it towards the far end. */
static void into_plane(const tw_plain_span *span, tw_uniform *uniform, double p[3], double e[3])
{
    double load = hypot(span->weight_N_per_m, span->across_N_per_m);
    e[0] = 0.0;
    e[1] = load > 0.0 ? span->across_N_per_m / load : 0.0;
    e[2] = load > 0.0 ? -span->weight_N_per_m / load : -1.0;
    uniform->drop = span->rise_m * e[2];
    uniform->span = hypot(span->span_m, span->rise_m * e[1]);
    uniform->weight = load;
    uniform->stiffness_N = span->stiffness_N;
    uniform->strain = span->strain;
    p[0] = span->span_m / uniform->span;
    p[1] = -uniform->drop * e[1] / uniform->span;
    p[2] = (span->rise_m - uniform->drop * e[2]) / uniform->span;
}

static int plain_in_range(const tw_plain_span *span)
{
    return isfinite(span->span_m) && span->span_m > 0.0 && isfinite(span->rise_m) && isfinite(span->stiffness_N)
           && span->stiffness_N > 0.0 && isfinite(span->weight_N_per_m) && isfinite(span->across_N_per_m)
           && isfinite(span->strain) && span->strain > -1.0;
}

static void plain_state(const tw_plain_span *span, const double pull[3], tw_plain_state *state)
{
    const tw_material material = {span->stiffness_N, span->strain, NULL};
    const double origin[3] = {0.0, 0.0, 0.0};
    tw_piece piece = {.length_m = span->natural_length_m, .load = {0.0, span->across_N_per_m, -span->weight_N_per_m}};
    double end[3], far[3], at;
    tw_span_hang(&material, &piece, 1, origin, pull, end, far, NULL);
    state->horizontal_tension_N = pull[0];
    state->tension_from_N = tw_norm(pull);
    state->tension_to_N = tw_norm(far);
    tw_piece_energies(&material, pull, piece.load, piece.length_m, NULL, NULL, &state->line_length_m);
    const double down[3] = {span->rise_m / span->span_m, 0.0, -1.0};
    state->sag_m = fmax(0.0, tw_span_extreme(&material, &piece, 1, down, origin, &at));
    double slant[3];
    tw_span_slant(span->span_m, span->rise_m, piece.load, slant);
    state->slant_sag_m = fmax(0.0, tw_span_extreme(&material, &piece, 1, slant, origin, &at));
}

tw_status tw_plain_span_settle(const tw_plain_span *span, tw_plain_state *state)
{
    tw_uniform uniform;
    double p[3], e[3], pull[3], h, v;
    if (!plain_in_range(span) || !isfinite(span->natural_length_m) || span->natural_length_m <= 0.0) {
        return TW_ERROR_RANGE;
    }
    into_plane(span, &uniform, p, e);
    tw_status status = tw_uniform_settle(&uniform, span->natural_length_m, &h, &v);
    if (status != TW_OK) {
        return status;
    }
    for (int i = 0; i < 3; i++) {
        pull[i] = h * p[i] + v * e[i];
    }
    plain_state(span, pull, state);
    double all = state->horizontal_tension_N + state->tension_from_N + state->tension_to_N + state->sag_m
                 + state->slant_sag_m + state->line_length_m;
    return isfinite(all) ? TW_OK : TW_NOT_FINITE;
}

tw_status tw_plain_span_length(const tw_plain_span *span, double horizontal_tension_N, double *natural_length_m)
{
    tw_uniform uniform;
    double p[3], e[3], v;
    if (!plain_in_range(span) || !isfinite(horizontal_tension_N) || horizontal_tension_N <= 0.0) {
        return TW_ERROR_RANGE;
    }
    into_plane(span, &uniform, p, e);
    return tw_uniform_length(&uniform, horizontal_tension_N / p[0], natural_length_m, &v);
}
