#include "span.h"

#include <math.h>

#include "span_curved.h"
#include "vector.h"

/* A piece resolved along its load: t = a e + b with b normal to e. */
typedef struct resolved {
    double e[3]; /* unit load; zero where there is none */
    double b[3];
    double h2;       /* |b|^2 */
    double a0, a1;   /* t.e at the start and the end */
    double T0, T1;   /* |t| */
    double inverse;  /* int ds/T */
} resolved;

/* atanh(x)/x = sum x^2k / (2k + 1); eleven terms below 0.15 leave less than 1e-18. */
static double atanh_ratio(double x)
{
    double y = x * x;
    if (y > 0.0225) {
        return atanh(x) / x;
    }
    return 1.0 + y * (1.0 / 3.0 + y * (1.0 / 5.0 + y * (1.0 / 7.0 + y * (1.0 / 9.0 + y * (1.0 / 11.0 + y * (1.0 / 13.0
               + y * (1.0 / 15.0 + y * (1.0 / 17.0 + y * (1.0 / 19.0 + y / 21.0)))))))));
}

/* int ds/T: the difference of asinh(a/h), as 2 atanh where that is small, as one logarithm where it is large. */
static double inverse_integral(double a0, double a1, double T0, double T1, double h2, double load, double length)
{
    double x = load * length / (T0 + T1);
    if (x < 0.9) {
        return 2.0 * length / (T0 + T1) * atanh_ratio(x);
    }
    if (a0 > 0.0 && a1 < 0.0) {
        return log((a0 + T0) * (T1 - a1) / h2) / load;
    }
    return log(a0 > 0.0 ? (a0 + T0) / (a1 + T1) : (T1 - a1) / (T0 - a0)) / load;
}

static resolved resolve(const double tension[3], const double load[3], double length)
{
    resolved r;
    double q = tw_norm(load);
    double inverse = q > 0.0 ? 1.0 / q : 0.0;
    for (int i = 0; i < 3; i++) {
        r.e[i] = load[i] * inverse;
    }
    r.a0 = tw_dot(tension, r.e);
    tw_axpy(tension, -r.a0, r.e, r.b);
    r.a1 = r.a0 - q * length;
    r.h2 = tw_dot(r.b, r.b);
    r.T0 = sqrt(r.a0 * r.a0 + r.h2);
    r.T1 = sqrt(r.a1 * r.a1 + r.h2);
    r.inverse = inverse_integral(r.a0, r.a1, r.T0, r.T1, r.h2, q, length);
    return r;
}

/* d/dR int t/|t| ds = int (I/T - t t'/T^3) ds, from int ds/T, int ds/T^3 and int a ds/T^3. */
static void direction_flexibility(const resolved *r, double length, double factor, double flexibility[6])
{
    double product = r->T0 * r->T1;
    double aa = r->a0 * r->a1;
    double sum = aa < 0.0 ? r->h2 + r->h2 * (r->a0 * r->a0 + r->a1 * r->a1 + r->h2) / (product - aa) : r->h2 + aa + product;
    double cubic = length * (r->T0 + r->T1) / (product * sum);
    double mixed = length * (r->a0 + r->a1) / ((r->T0 + r->T1) * product);
    double along = factor * (r->h2 * cubic - r->inverse);
    int k = 0;
    for (int i = 0; i < 3; i++) {
        for (int j = i; j < 3; j++) {
            double ee = along * r->e[i] * r->e[j];
            double eb = factor * mixed * (r->e[i] * r->b[j] + r->e[j] * r->b[i]);
            double bb = factor * cubic * r->b[i] * r->b[j];
            flexibility[k++] = ee - eb - bb;
        }
    }
    flexibility[0] += factor * r->inverse;
    flexibility[3] += factor * r->inverse;
    flexibility[5] += factor * r->inverse;
}

void tw_piece_displacement(const tw_material *material, const double tension[3], const double load[3], double length,
                           double displacement[3], double flexibility[6])
{
    double compliance = 1.0 / material->stiffness_N;
    double unit = 1.0 + material->strain;
    if (length <= 0.0) {
        displacement[0] = displacement[1] = displacement[2] = 0.0;
        for (int i = 0; flexibility && i < 6; i++) {
            flexibility[i] = 0.0;
        }
        return;
    }
    resolved r = resolve(tension, load, length);
    double along = length * (r.a0 + r.a1) / (r.T0 + r.T1);
    for (int i = 0; i < 3; i++) {
        double direction = along * r.e[i] + r.inverse * r.b[i];
        displacement[i] = unit * direction + compliance * length * (tension[i] - 0.5 * length * load[i]);
    }
    if (flexibility) {
        direction_flexibility(&r, length, unit, flexibility);
        flexibility[0] += compliance * length;
        flexibility[3] += compliance * length;
        flexibility[5] += compliance * length;
    }
    if (material->curve) {
        const tw_stretch_of_line all = {tension, load, NULL, length};
        tw_curved_integrals beyond;
        tw_piece_integrate(material, &all, flexibility != NULL, &beyond);
        tw_axpy(displacement, 1.0, beyond.displacement, displacement);
        for (int i = 0; flexibility && i < 6; i++) {
            flexibility[i] += beyond.flexibility[i];
        }
    }
}

void tw_piece_energies(const tw_material *material, const double tension[3], const double load[3], double length,
                       double *conjugate_J, double *stored_J, double *line_length_m)
{
    double first = 0.0;  /* int T ds */
    double second = 0.0; /* int T^2 ds */
    double unit = 1.0 + material->strain;
    if (length > 0.0) {
        resolved r = resolve(tension, load, length);
        double a = r.a0 + r.a1;
        double T = r.T0 + r.T1;
        first = 0.25 * length * (T + a * a / T) + 0.5 * r.h2 * r.inverse;
        second = length * ((r.a0 * r.a0 + r.a0 * r.a1 + r.a1 * r.a1) / 3.0 + r.h2);
    }
    double stored = 0.5 * second / material->stiffness_N;
    tw_curved_integrals beyond = {.length_m = 0.0};
    if (material->curve && length > 0.0) {
        const tw_stretch_of_line all = {tension, load, NULL, length};
        tw_piece_integrate(material, &all, 0, &beyond);
    }
    if (conjugate_J) {
        *conjugate_J = unit * first + stored + beyond.conjugate_J;
    }
    if (stored_J) {
        *stored_J = stored + beyond.stored_J;
    }
    if (line_length_m) {
        *line_length_m = unit * length + first / material->stiffness_N + beyond.length_m;
    }
}

int tw_piece_varies(const tw_piece *piece)
{
    return piece->ramp[0] != 0.0 || piece->ramp[1] != 0.0 || piece->ramp[2] != 0.0;
}

void tw_piece_load(const tw_piece *piece, double s, double load[3])
{
    tw_axpy(piece->load, s, piece->ramp, load);
}

void tw_piece_total(const tw_piece *piece, double total[3])
{
    for (int i = 0; i < 3; i++) {
        total[i] = piece->length_m * piece->load[i] + 0.5 * piece->length_m * piece->length_m * piece->ramp[i];
    }
}

void tw_piece_tension(const tw_piece *piece, double s, double tension[3])
{
    tw_axpy(piece->tension, -s, piece->load, tension);
    tw_axpy(tension, -0.5 * s * s, piece->ramp, tension);
}

void tw_piece_ahead(const tw_material *material, const tw_piece *piece, double s, double length, double displacement[3],
                    double flexibility[6])
{
    double tension[3], load[3];
    tw_piece_tension(piece, s, tension);
    tw_piece_load(piece, s, load);
    if (!tw_piece_varies(piece) || !(length > 0.0)) {
        tw_piece_displacement(material, tension, load, length, displacement, flexibility);
        return;
    }
    const tw_stretch_of_line all = {tension, load, piece->ramp, length};
    tw_curved_integrals whole;
    tw_piece_integrate(material, &all, flexibility != NULL, &whole);
    tw_copy(whole.displacement, displacement);
    for (int i = 0; flexibility && i < 6; i++) {
        flexibility[i] = whole.flexibility[i];
    }
}

void tw_piece_energy(const tw_material *material, const tw_piece *piece, double *conjugate_J, double *stored_J,
                     double *line_length_m)
{
    if (!tw_piece_varies(piece)) {
        tw_piece_energies(material, piece->tension, piece->load, piece->length_m, conjugate_J, stored_J, line_length_m);
        return;
    }
    const tw_stretch_of_line all = {piece->tension, piece->load, piece->ramp, piece->length_m};
    tw_curved_integrals whole = {.length_m = 0.0};
    tw_piece_integrate(material, &all, 0, &whole);
    if (conjugate_J) {
        *conjugate_J = whole.conjugate_J;
    }
    if (stored_J) {
        *stored_J = whole.stored_J;
    }
    if (line_length_m) {
        *line_length_m = whole.length_m;
    }
}

void tw_piece_position(const tw_material *material, const tw_piece *piece, double s, double position[3])
{
    double displacement[3];
    tw_piece_ahead(material, piece, 0.0, s, displacement, NULL);
    tw_axpy(piece->start, 1.0, displacement, position);
}

void tw_piece_stationary(const tw_piece *piece, const double direction[3], double places[2])
{
    double rest = tw_dot(direction, piece->tension);
    double rate = tw_dot(direction, piece->load);
    double bend = tw_dot(direction, piece->ramp);
    places[0] = rate != 0.0 ? rest / rate : -1.0;
    places[1] = -1.0;
    if (bend != 0.0) { /* rest - rate s - bend s^2 / 2 = 0, without cancellation */
        double root = rate * rate + 2.0 * bend * rest;
        double q = rate + copysign(sqrt(fmax(root, 0.0)), rate);
        places[0] = root >= 0.0 && q != 0.0 ? 2.0 * rest / q : -1.0;
        places[1] = root >= 0.0 ? -q / bend : -1.0;
    }
    for (int i = 0; i < 2; i++) {
        places[i] = places[i] > 0.0 && places[i] < piece->length_m ? places[i] : -1.0;
    }
    if (places[1] >= 0.0 && !(places[0] >= 0.0 && places[0] <= places[1])) {
        double later = places[0];
        places[0] = places[1];
        places[1] = later;
    }
}

int tw_piece_turns(const tw_piece *piece, const tw_route_leg *leg, double *s)
{
    double places[2];
    const double ahead[3] = {leg->ahead[0], leg->ahead[1], 0.0};
    tw_piece_stationary(piece, ahead, places);
    *s = places[0];
    return *s > 0.0 && *s < piece->length_m;
}

/* Newton on the station, kept inside a bracket that bisection would halve. */
double tw_piece_at_station(const tw_material *material, const tw_piece *piece, const tw_route_leg *leg, double s0, double s1,
                           double x0, double x1, double station_m)
{
    double run = x1 - x0;
    double low = s0, high = s1;
    double s = run != 0.0 ? s0 + (s1 - s0) * (station_m - x0) / run : s0;
    for (int i = 0; i < 60 && high > low; i++) {
        double r[3], t[3];
        s = s >= low && s <= high ? s : 0.5 * (low + high);
        tw_piece_position(material, piece, s, r);
        double miss = tw_route_station(leg, r) - station_m;
        if ((miss <= 0.0) == (run >= 0.0)) {
            low = s;
        } else {
            high = s;
        }
        tw_piece_tension(piece, s, t);
        double size = tw_norm(t);
        double step = miss * size / (tw_route_rate(leg, t) * tw_material_stretch(material, size));
        s -= step;
        if (!(fabs(step) > 1e-8 * (s1 - s0))) { /* quadratic: the next step would be rounding */
            break;
        }
    }
    return fmin(fmax(s, s0), s1);
}

void tw_span_hang(const tw_material *material, tw_piece *pieces, size_t count, const double start[3],
                  const double pull[3], double end[3], double end_tension[3], double flexibility[6])
{
    double step[3];
    double piece_flexibility[6];
    tw_copy(start, end);
    tw_copy(pull, end_tension);
    for (int i = 0; flexibility && i < 6; i++) {
        flexibility[i] = 0.0;
    }
    for (size_t k = 0; k < count; k++) {
        tw_piece *piece = &pieces[k];
        tw_copy(end, piece->start);
        tw_copy(end_tension, piece->tension);
        tw_piece_ahead(material, piece, 0.0, piece->length_m, step, flexibility ? piece_flexibility : NULL);
        tw_axpy(end, 1.0, step, end);
        tw_piece_tension(piece, piece->length_m, end_tension);
        tw_axpy(end_tension, -1.0, piece->force, end_tension);
        for (int i = 0; flexibility && i < 6; i++) {
            flexibility[i] += piece_flexibility[i];
        }
    }
}

double tw_span_extreme(const tw_material *material, const tw_piece *pieces, size_t count, const double direction[3],
                       const double origin[3], double *s_at)
{
    double best = -INFINITY;
    double passed = 0.0;
    for (size_t k = 0; k < count; k++) {
        double places[4] = {0.0, -1.0, -1.0, pieces[k].length_m};
        tw_piece_stationary(&pieces[k], direction, places + 1);
        for (int i = 0; i < 4; i++) {
            if (places[i] < 0.0 || (i == 3 && k + 1 < count)) {
                continue;
            }
            double r[3];
            tw_piece_position(material, &pieces[k], places[i], r);
            tw_axpy(r, -1.0, origin, r);
            double value = tw_dot(direction, r);
            if (value > best) {
                best = value;
                *s_at = passed + places[i];
            }
        }
        passed += pieces[k].length_m;
    }
    return best;
}

void tw_span_slant(double span_m, double rise_m, const double load[3], double direction[3])
{
    const double chord[3] = {span_m, 0.0, rise_m};
    double square = tw_dot(chord, chord);
    double across[3];
    tw_axpy(load, -tw_dot(load, chord) / square, chord, across);
    double size = tw_dot(across, across);
    double factor = size > 0.0 ? tw_norm(load) / size : 0.0;
    for (int i = 0; i < 3; i++) {
        direction[i] = factor * across[i];
    }
}

static double slope_of(const double t[3])
{
    double run = hypot(t[0], t[1]);
    return run > 0.0 ? fabs(t[2]) / run : INFINITY;
}

/* Where |t_z|/|t_xy| is stationary: z' (x^2 + y^2) = z (x x' + y y'). With x, y, z linear in s its square terms cancel,
 * and one place is left; -1 where it is not within the piece. */
static double slope_stationary(const tw_piece *piece)
{
    const double *t = piece->tension;
    const double *q = piece->load;
    double rr = t[0] * t[0] + t[1] * t[1];
    double rd = -(t[0] * q[0] + t[1] * q[1]);
    double dd = q[0] * q[0] + q[1] * q[1];
    double rate = -q[2] * rd - t[2] * dd;
    double s = rate != 0.0 ? (q[2] * rr + t[2] * rd) / rate : -1.0;
    return s > 0.0 && s < piece->length_m ? s : -1.0;
}

double tw_span_slope(const tw_piece *pieces, size_t count)
{
    double slope = 0.0;
    for (size_t k = 0; k < count; k++) {
        double t[3];
        slope = fmax(slope, slope_of(pieces[k].tension));
        tw_piece_tension(&pieces[k], pieces[k].length_m, t);
        slope = fmax(slope, slope_of(t));
        double inner = slope_stationary(&pieces[k]);
        if (tw_piece_varies(&pieces[k])) {
            slope = fmax(slope, tw_piece_most(&pieces[k], slope_of));
        } else if (inner >= 0.0) {
            tw_piece_tension(&pieces[k], inner, t);
            slope = fmax(slope, slope_of(t));
        }
    }
    return slope;
}

static double size_of(const double t[3])
{
    return tw_norm(t);
}

double tw_span_tension_max(const tw_piece *pieces, size_t count)
{
    double most = 0.0;
    for (size_t k = 0; k < count; k++) {
        double t[3];
        most = fmax(most, tw_norm(pieces[k].tension));
        tw_piece_tension(&pieces[k], pieces[k].length_m, t);
        most = fmax(most, tw_norm(t));
        if (tw_piece_varies(&pieces[k])) {
            most = fmax(most, tw_piece_most(&pieces[k], size_of));
        }
    }
    return most;
}
