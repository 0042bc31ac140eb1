#include "span_curved.h"

#include <math.h>
#include <string.h>

#include "gauss.h"
#include "vector.h"

enum { PARTS_MOST = 100000, SCAN = 32 };

static void tension_at(const tw_stretch_of_line *line, double s, double t[3])
{
    tw_axpy(line->tension, -s, line->load, t);
    if (line->ramp) {
        tw_axpy(t, -0.5 * s * s, line->ramp, t);
    }
}

/* d|t|^2/ds / 2 */
static double rate_at(const tw_stretch_of_line *line, double s)
{
    double t[3], q[3];
    tension_at(line, s, t);
    tw_copy(line->load, q);
    if (line->ramp) {
        tw_axpy(q, s, line->ramp, q);
    }
    return -tw_dot(t, q);
}

/* Largest size of the load on the stretch: it is convex in s. */
static double load_most(const tw_stretch_of_line *line)
{
    double end[3];
    tw_copy(line->load, end);
    if (line->ramp) {
        tw_axpy(end, line->length, line->ramp, end);
    }
    return fmax(tw_norm(line->load), tw_norm(end));
}

/* The integrand at one tension vector, weighed. */
static void add_point(const tw_material *material, const tw_stretch_of_line *line, const double t[3], double weight,
                      int with_flexibility, tw_curved_integrals *out)
{
    double T = tw_norm(t);
    double whole = line->ramp ? 1.0 : 0.0;
    double less = line->ramp ? 0.0 : 1.0 / material->stiffness_N;
    tw_material_point at = tw_material_under(material, T);
    double unit = whole * (1.0 + material->strain);
    double stretch = unit + at.strain - less * T;
    double across = T > 0.0 ? weight * stretch / T : 0.0;
    tw_axpy(out->displacement, across, t, out->displacement);
    out->length_m += weight * stretch;
    out->conjugate_J += weight * (T * unit + (T * at.strain - at.energy_J - 0.5 * less * T * T));
    out->stored_J += weight * (at.energy_J - 0.5 * less * T * T);
    if (with_flexibility && T > 0.0) {
        double along = (weight * (1.0 / at.tangent_N - less) - across) / (T * T);
        int k = 0;
        for (int i = 0; i < 3; i++) {
            for (int j = i; j < 3; j++) {
                out->flexibility[k++] += along * t[i] * t[j] + (i == j ? across : 0.0);
            }
        }
    }
}

static void add_part(const tw_material *material, const tw_stretch_of_line *line, double from, double to,
                     int with_flexibility, tw_curved_integrals *out)
{
    double middle = 0.5 * (from + to), half = 0.5 * (to - from);
    for (int p = 0; p < 10 && half > 0.0; p++) {
        double t[3];
        double point = p % 2 ? tw_gauss_ten_point[p / 2] : -tw_gauss_ten_point[p / 2];
        tension_at(line, middle + half * point, t);
        add_point(material, line, t, half * tw_gauss_ten_weight[p / 2], with_flexibility, out);
    }
}

/* Where |t| passes a tension between two places on which it grows or falls throughout. */
static double passes(const tw_stretch_of_line *line, double tension, double from, double to, int grows)
{
    double low = from, high = to, s = 0.5 * (from + to);
    for (int i = 0; i < 80 && high > low; i++) {
        double t[3];
        tension_at(line, s, t);
        double miss = tw_dot(t, t) - tension * tension;
        *((miss <= 0.0) == grows ? &low : &high) = s;
        double next = s - 0.5 * miss / rate_at(line, s);
        next = next > low && next < high ? next : 0.5 * (low + high);
        if (fabs(next - s) <= 1e-15 * to) {
            return next;
        }
        s = next;
    }
    return s;
}

/* A part on which |t| grows or falls throughout, cut at the kinks of the law. */
static void add_monotone(const tw_material *material, const tw_stretch_of_line *line, double from, double to,
                         int with_flexibility, tw_curved_integrals *out)
{
    double t[3], first, last;
    tension_at(line, from, t);
    first = tw_norm(t);
    tension_at(line, to, t);
    last = tw_norm(t);
    int grows = last > first;
    size_t count = material->curve ? material->curve->count : 0;
    for (size_t i = 0; i < count; i++) {
        double kink = material->curve->force_N[grows ? i : count - 1 - i];
        if (kink > fmin(first, last) && kink < fmax(first, last)) {
            double at = passes(line, kink, from, to, grows);
            add_part(material, line, from, at, with_flexibility, out);
            from = at;
        }
    }
    add_part(material, line, from, to, with_flexibility, out);
}

/* Where |t| turns from falling to growing, or the other way. */
static double turns(const tw_stretch_of_line *line, double from, double to)
{
    int falls = rate_at(line, from) < 0.0;
    for (int i = 0; i < 60; i++) {
        double middle = 0.5 * (from + to);
        *((rate_at(line, middle) < 0.0) == falls ? &from : &to) = middle;
    }
    return from;
}

void tw_piece_integrate(const tw_material *material, const tw_stretch_of_line *line, int with_flexibility,
                         tw_curved_integrals *out)
{
    double steepest = load_most(line);
    double from = 0.0;
    memset(out, 0, sizeof *out);
    for (int part = 0; part < PARTS_MOST && from < line->length; part++) {
        double t[3];
        tension_at(line, from, t);
        double reach = steepest > 0.0 ? 0.5 * tw_norm(t) / steepest : line->length;
        double to = fmin(from + fmax(reach, 1e-4 * line->length), line->length);
        to = line->length - to < 0.25 * reach ? line->length : to;
        if ((rate_at(line, from) < 0.0) != (rate_at(line, to) < 0.0)) {
            double turn = turns(line, from, to);
            add_monotone(material, line, from, turn, with_flexibility, out);
            from = turn;
        }
        add_monotone(material, line, from, to, with_flexibility, out);
        from = to;
    }
}

/* Golden section on the two intervals beside the best place of a scan. */
double tw_piece_most(const tw_piece *piece, double (*of)(const double tension[3]))
{
    static const double golden = 0.61803398874989484820;
    double t[3], best = -INFINITY;
    int at = 0;
    for (int i = 0; i <= SCAN; i++) {
        tw_piece_tension(piece, piece->length_m * i / SCAN, t);
        double here = of(t);
        at = here > best ? i : at;
        best = fmax(best, here);
    }
    double low = piece->length_m * (at > 0 ? at - 1 : 0) / SCAN;
    double high = piece->length_m * (at < SCAN ? at + 1 : SCAN) / SCAN;
    for (int i = 0; i < 60; i++) {
        double a = high - golden * (high - low), b = low + golden * (high - low);
        tw_piece_tension(piece, a, t);
        double left = of(t);
        tw_piece_tension(piece, b, t);
        double right = of(t);
        best = fmax(best, fmax(left, right));
        *(left < right ? &low : &high) = left < right ? a : b;
    }
    return best;
}
