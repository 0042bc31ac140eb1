#include "material_curve.h"

#include <math.h>
#include <string.h>

#include "polynomial.h"

/* Where a part's law changes: its force from `from` on is a polynomial in its strain. */
typedef struct stretch_law {
    double from;
    double terms[TW_CURVE_TERMS]; /* in the part's strain */
} stretch_law;

enum { LAWS_MOST = 4, TOP = TW_CURVE_TERMS - 1 };

static double integral(const double terms[TW_CURVE_TERMS], double x)
{
    double sum = terms[TOP] / TW_CURVE_TERMS;
    for (int k = TOP - 1; k >= 0; k--) {
        sum = sum * x + terms[k] / (k + 1);
    }
    return sum * x;
}

/* out(d) += terms(x + d), by repeated division. */
static void add_moved(const double terms[TW_CURVE_TERMS], double x, double out[TW_CURVE_TERMS])
{
    double work[TW_CURVE_TERMS];
    memcpy(work, terms, sizeof work);
    for (int k = 0; k < TW_CURVE_TERMS; k++) {
        for (int j = TOP - 1; j >= k; j--) {
            work[j] += x * work[j + 1];
        }
        out[k] += work[k];
    }
}

/* Where a growing polynomial reaches a value between low and high: Newton, kept inside a bracket that bisection halves. */
static double reached(const double terms[TW_CURVE_TERMS], double wanted, double low, double high)
{
    double first = tw_polynomial_value(terms, low);
    double x = low + (high - low) * fmin(fmax((wanted - first) / (tw_polynomial_value(terms, high) - first), 0.0), 1.0);
    for (int i = 0; i < 100 && high > low; i++) {
        double miss = tw_polynomial_value(terms, x) - wanted;
        double step = miss / tw_polynomial_slope(terms, x);
        if (miss <= 0.0) {
            low = x;
        } else {
            high = x;
        }
        double next = x - step;
        next = next >= low && next <= high ? next : 0.5 * (low + high);
        if (fabs(next - x) <= 1e-9 * fabs(x)) { /* quadratic: the next step would be rounding */
            return next;
        }
        x = next;
    }
    return x;
}

static void straight(double force, double rate, double at, double terms[TW_CURVE_TERMS])
{
    memset(terms, 0, TW_CURVE_TERMS * sizeof(double));
    terms[0] = force - rate * at;
    terms[1] = rate;
}

/* The loading (or creep) curve from strain `from` on: straight below 0, polynomial, straight beyond its range. */
static int loading_laws(const tw_part *part, int creeping, double from, stretch_law *laws)
{
    const double *terms = creeping ? part->creep_N : part->loading_N;
    double end = part->valid_to;
    int count = 0;
    if (from < 0.0) {
        laws[count].from = from;
        straight(terms[0], terms[1], 0.0, laws[count++].terms);
    }
    if (from < end) {
        laws[count].from = fmax(from, 0.0);
        memcpy(laws[count++].terms, terms, TW_CURVE_TERMS * sizeof(double));
    }
    laws[count].from = fmax(from, end);
    straight(tw_polynomial_value(terms, end), tw_polynomial_slope(terms, end), end, laws[count++].terms);
    return count;
}

/* Strain at which a part begins to carry on first loading. */
static double begins(const tw_part *part, int creeping)
{
    const double *terms = creeping ? part->creep_N : part->loading_N;
    return terms[0] >= 0.0 ? -terms[0] / terms[1] : reached(terms, 0.0, 0.0, part->valid_to);
}

static int creeps(const tw_part *part)
{
    return !isnan(part->creep_N[0]);
}

static int part_laws(const tw_part *part, int creeping, const tw_permanent *permanent, size_t i, stretch_law *laws)
{
    int crept = creeping && creeps(part);
    if (!permanent || isinf(permanent->part[i])) {
        return loading_laws(part, crept, begins(part, crept), laws);
    }
    laws[0].from = permanent->part[i];
    straight(0.0, part->final_stiffness_N, permanent->part[i], laws[0].terms);
    return isinf(permanent->meets[i]) ? 1 : 1 + loading_laws(part, 0, permanent->meets[i], laws + 1);
}

/* alpha (t - t_test) - e_s0 of a part. */
static double part_shift(const tw_line *line, size_t part, double temperature_degC, double reference_degC)
{
    double warm = reference_degC - line->test_temperature_degC;
    double first = INFINITY;
    for (size_t i = 0; i < line->part_count; i++) {
        first = fmin(first, begins(&line->parts[i], 0) + line->parts[i].expansion_per_K * warm);
    }
    return line->parts[part].expansion_per_K * (temperature_degC - line->test_temperature_degC) - first;
}

static void insert_knot(tw_curve *curve, double x)
{
    size_t at = curve->count;
    while (at > 0 && curve->knot[at - 1] > x) {
        at--;
    }
    if (at > 0 && curve->knot[at - 1] == x) {
        return;
    }
    memmove(&curve->knot[at + 1], &curve->knot[at], (curve->count - at) * sizeof(double));
    curve->knot[at] = x;
    curve->count++;
}

/* Adds a part's law to the polynomials of all knots. */
static void add_part(tw_curve *curve, const stretch_law *laws, int count, double shift)
{
    for (size_t k = 0; k < curve->count; k++) {
        int at = -1;
        while (at + 1 < count && laws[at + 1].from + shift <= curve->knot[k]) {
            at++;
        }
        if (at >= 0) {
            add_moved(laws[at].terms, curve->knot[k] - shift, curve->terms[k]);
        }
    }
}

static void sum_up(tw_curve *curve)
{
    double first = curve->knot[0];
    double force = 0.0, energy = 0.0;
    for (size_t k = 0; k < curve->count; k++) {
        double *terms = curve->terms[k];
        terms[0] = force; /* the parts' own sum but for rounding: the law is continuous */
        curve->knot[k] -= first;
        curve->force_N[k] = force;
        curve->energy_J[k] = energy;
        if (k + 1 < curve->count) {
            double width = curve->knot[k + 1] - first - curve->knot[k];
            force = tw_polynomial_value(terms, width);
            energy += integral(terms, width);
        }
    }
}

double tw_curve_build(const tw_line *line, double temperature_degC, double reference_degC, const tw_permanent *permanent,
                      int creeping, tw_curve *curve)
{
    stretch_law laws[TW_PARTS_MOST][LAWS_MOST];
    double shift[TW_PARTS_MOST];
    int count[TW_PARTS_MOST];
    memset(curve, 0, sizeof *curve);
    for (size_t i = 0; i < line->part_count; i++) {
        shift[i] = part_shift(line, i, temperature_degC, reference_degC) + (permanent ? permanent->strain : 0.0);
        count[i] = part_laws(&line->parts[i], creeping, permanent, i, laws[i]);
        for (int k = 0; k < count[i]; k++) {
            insert_knot(curve, laws[i][k].from + shift[i]);
        }
    }
    for (size_t i = 0; i < line->part_count; i++) {
        add_part(curve, laws[i], count[i], shift[i]);
    }
    double first = curve->knot[0];
    sum_up(curve);
    return first;
}

static size_t knot_below(const double *at, size_t count, double x)
{
    size_t k = count - 1;
    while (k > 0 && at[k] > x) {
        k--;
    }
    return k;
}

double tw_curve_force(const tw_curve *curve, double x)
{
    size_t k = knot_below(curve->knot, curve->count, x);
    return x > 0.0 ? tw_polynomial_value(curve->terms[k], x - curve->knot[k]) : 0.0;
}

double tw_curve_slope(const tw_curve *curve, double x)
{
    size_t k = knot_below(curve->knot, curve->count, x);
    return x >= 0.0 ? tw_polynomial_slope(curve->terms[k], x - curve->knot[k]) : 0.0;
}

double tw_curve_energy(const tw_curve *curve, double x)
{
    size_t k = knot_below(curve->knot, curve->count, x);
    return x > 0.0 ? curve->energy_J[k] + integral(curve->terms[k], x - curve->knot[k]) : 0.0;
}

/* Beyond the last knot every part runs straight. */
double tw_curve_strain(const tw_curve *curve, double force_N)
{
    size_t k = knot_below(curve->force_N, curve->count, force_N);
    const double *terms = curve->terms[k];
    if (k + 1 == curve->count) {
        return curve->knot[k] + (force_N - terms[0]) / terms[1];
    }
    return curve->knot[k] + reached(terms, force_N, 0.0, curve->knot[k + 1] - curve->knot[k]);
}

double tw_curve_steepest(const tw_curve *curve)
{
    double most = 0.0;
    for (size_t k = 0; k < curve->count; k++) {
        double width = k + 1 < curve->count ? curve->knot[k + 1] - curve->knot[k] : 0.0;
        for (int i = 0; i <= 4; i++) {
            most = fmax(most, tw_polynomial_slope(curve->terms[k], 0.25 * i * width));
        }
    }
    return most;
}

double tw_part_strain(const tw_line *line, size_t part, double stretch, double temperature_degC, double reference_degC)
{
    return stretch - 1.0 - part_shift(line, part, temperature_degC, reference_degC);
}

double tw_part_force(const tw_part *part, double strain, int creeping)
{
    stretch_law laws[LAWS_MOST];
    int crept = creeping && creeps(part);
    double from = begins(part, crept);
    int count = loading_laws(part, crept, from, laws);
    int at = count - 1;
    while (at > 0 && laws[at].from > strain) {
        at--;
    }
    return strain > from ? tw_polynomial_value(laws[at].terms, strain) : 0.0;
}

/* Where the unloading line from a place below the loading curve meets that curve, at `from` or beyond. */
static double meeting(const tw_part *part, double permanent, double from)
{
    enum { STEPS = 64 };
    double rate = part->final_stiffness_N;
    double end = part->valid_to;
    double low = from;
    for (int i = 1; i <= STEPS && from < end; i++) {
        double high = from + (end - from) * i / STEPS;
        if (rate * (high - permanent) >= tw_part_force(part, high, 0)) {
            for (int halving = 0; halving < 60; halving++) {
                double middle = 0.5 * (low + high);
                *(rate * (middle - permanent) >= tw_part_force(part, middle, 0) ? &high : &low) = middle;
            }
            return high;
        }
        low = high;
    }
    low = fmax(from, end);
    double below = tw_part_force(part, low, 0) - rate * (low - permanent);
    double gain = rate - tw_polynomial_slope(part->loading_N, end);
    return gain > 0.0 ? low + below / gain : INFINITY;
}

tw_permanent tw_permanent_none(void)
{
    tw_permanent none = {.strain = 0.0};
    for (int i = 0; i < TW_PARTS_MOST; i++) {
        none.part[i] = none.meets[i] = -INFINITY;
    }
    return none;
}

void tw_permanent_take(tw_permanent *permanent, const tw_line *line, size_t part, double strain, int creeping)
{
    const tw_part *of = &line->parts[part];
    double force = tw_part_force(of, strain, creeping);
    double left = strain - force / of->final_stiffness_N;
    if (!(force > 0.0) || !(left > permanent->part[part]) || (creeping && force > tw_part_force(of, strain, 0))) {
        return;
    }
    permanent->part[part] = left;
    permanent->meets[part] = creeping && creeps(of) ? meeting(of, left, strain) : strain;
}

int tw_curve_creeps(const tw_line *line)
{
    for (size_t i = 0; i < line->part_count; i++) {
        if (creeps(&line->parts[i])) {
            return 1;
        }
    }
    return 0;
}

double tw_curve_given_creep(const tw_line *line)
{
    return line->creep_coefficient > 0.0 ? line->creep_coefficient * pow(line->creep_hours, line->creep_exponent) : 0.0;
}
