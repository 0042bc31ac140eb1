#include "span_ramp.h"

#include <math.h>

#include "vector.h"

static const double FOUR_POINTS = 0.04, EIGHT_POINTS = 0.4; /* greatest l/R of a panel */
enum { HALVINGS_MOST = 40, LOOKS = 16, BISECTIONS = 60 };

/* Gauss-Legendre points and weights on [-1, 1], symmetric. */
static const double four_point[2] = {0.33998104358485626480, 0.86113631159405257522};
static const double four_weight[2] = {0.65214515486254614263, 0.34785484513745385737};
static const double eight_point[4] = {0.18343464249564980494, 0.52553240991632898582, 0.79666647741362673959,
                                      0.96028985649753623168};
static const double eight_weight[4] = {0.36268378337836198297, 0.31370664587788728734, 0.22238103445337447054,
                                       0.10122853629037625915};

/* What is summed over the points of a piece; pointers may be NULL. */
typedef struct sums {
    const tw_material *material;
    double *displacement; /* [3] int t/|t| W*' ds */
    double *flexibility;  /* [6] xx xy xz yy yz zz */
    double conjugate, stored, length, run;
} sums;

static void add_flexibility(sums *to, const double t[3], double T, double stretch, double weight)
{
    double across = weight * stretch / T;
    double along = weight / to->material->stiffness_N - across;
    int k = 0;
    for (int i = 0; i < 3; i++) {
        for (int j = i; j < 3; j++) {
            to->flexibility[k++] += along * (t[i] / T) * (t[j] / T) + (i == j ? across : 0.0);
        }
    }
}

static void add_point(sums *to, const tw_piece *piece, double s, double weight)
{
    double t[3];
    tw_piece_tension(piece, s, t);
    double T = tw_norm(t);
    double stretch = tw_material_stretch(to->material, T);
    if (to->displacement) {
        tw_axpy(to->displacement, weight * stretch / T, t, to->displacement);
    }
    if (to->flexibility) {
        add_flexibility(to, t, T, stretch, weight);
    }
    to->conjugate += weight * tw_material_conjugate(to->material, T);
    to->stored += weight * tw_material_energy(to->material, stretch);
    to->length += weight * stretch;
    to->run += weight * stretch * hypot(t[0], t[1]) / T;
}

static void add_panel(sums *to, const tw_piece *piece, double from, double length, int points)
{
    const double *point = points == 4 ? four_point : eight_point;
    const double *weight = points == 4 ? four_weight : eight_weight;
    double half = 0.5 * length, middle = from + half;
    for (int i = 0; i < points / 2; i++) {
        add_point(to, piece, middle - half * point[i], half * weight[i]);
        add_point(to, piece, middle + half * point[i], half * weight[i]);
    }
}

/* l/R. */
static double panel_measure(const tw_piece *piece, double from, double length)
{
    double q[3], t[3];
    tw_axpy(piece->load, from + 0.5 * length, piece->ramp, q);
    tw_piece_tension(piece, from + 0.5 * length, t);
    double change = (sqrt(2.0) - 1.0) * tw_norm(t), size = tw_norm(q);
    double sum = size + sqrt(size * size + 2.0 * tw_norm(piece->ramp) * change);
    return change > 0.0 ? length * sum / (2.0 * change) : INFINITY;
}

static void add_stretch(sums *to, const tw_piece *piece, double from, double length)
{
    double end = from + length;
    while (from < end) {
        double part = end - from;
        double measure = panel_measure(piece, from, part);
        for (int i = 0; measure > EIGHT_POINTS && i < HALVINGS_MOST; i++) {
            part *= 0.5;
            measure = panel_measure(piece, from, part);
        }
        add_panel(to, piece, from, part, measure <= FOUR_POINTS ? 4 : 8);
        from = part < end - from ? from + part : end;
    }
}

void tw_span_ramp_part(const tw_material *material, const tw_piece *piece, double from, double length, double displacement[3],
                  double flexibility[6])
{
    sums to = {.material = material, .displacement = displacement, .flexibility = flexibility};
    displacement[0] = displacement[1] = displacement[2] = 0.0;
    for (int i = 0; flexibility && i < 6; i++) {
        flexibility[i] = 0.0;
    }
    add_stretch(&to, piece, from, length);
}

void tw_span_ramp_integrals(const tw_material *material, const tw_piece *piece, double *conjugate_J, double *stored_J,
                       double *line_length_m)
{
    sums to = {.material = material};
    add_stretch(&to, piece, 0.0, piece->length_m);
    if (conjugate_J) {
        *conjugate_J = to.conjugate;
    }
    if (stored_J) {
        *stored_J = to.stored;
    }
    if (line_length_m) {
        *line_length_m = to.length;
    }
}

double tw_span_ramp_run(const tw_material *material, const tw_piece *piece)
{
    sums to = {.material = material};
    add_stretch(&to, piece, 0.0, piece->length_m);
    return to.run;
}

/* c - b s - a s^2 / 2 = 0, without cancellation. */
int tw_span_ramp_stationary(const tw_piece *piece, const double direction[3], double places[2])
{
    double a = tw_dot(direction, piece->ramp), b = tw_dot(direction, piece->load);
    double c = tw_dot(direction, piece->tension);
    double square = b * b + 2.0 * a * c;
    double sum = b >= 0.0 ? b + sqrt(fmax(square, 0.0)) : b - sqrt(fmax(square, 0.0));
    if (square < 0.0 || sum == 0.0) {
        return 0;
    }
    const double roots[2] = {2.0 * c / sum, a != 0.0 ? -sum / a : -1.0};
    int first = roots[1] < roots[0], count = 0;
    for (int i = 0; i < 2; i++) {
        double s = roots[i == 0 ? first : !first];
        if (s > 0.0 && s < piece->length_m && (count == 0 || s > places[0])) {
            places[count++] = s;
        }
    }
    return count;
}

/* Derivatives, but for positive factors, of |t| and of |t_z|/|t_xy|. */
static double tension_slope(const double t[3], const double q[3])
{
    return -tw_dot(t, q);
}

static double slope_slope(const double t[3], const double q[3])
{
    double plan = t[0] * t[0] + t[1] * t[1];
    double rate = -q[2] * plan + t[2] * (t[0] * q[0] + t[1] * q[1]);
    return t[2] >= 0.0 ? rate : -rate;
}

typedef double (*derivative)(const double t[3], const double q[3]);

static double derivative_at(derivative of, const tw_piece *piece, double s)
{
    double t[3], q[3];
    tw_piece_tension(piece, s, t);
    tw_axpy(piece->load, s, piece->ramp, q);
    return of(t, q);
}

/* Where the derivative falls through zero between s0 and s1. */
static double peak_between(derivative of, const tw_piece *piece, double s0, double s1)
{
    for (int i = 0; i < BISECTIONS; i++) {
        double middle = 0.5 * (s0 + s1);
        if (derivative_at(of, piece, middle) > 0.0) {
            s0 = middle;
        } else {
            s1 = middle;
        }
    }
    return 0.5 * (s0 + s1);
}

static double greatest_within(derivative of, const tw_piece *piece, double (*value)(const double t[3]))
{
    double most = 0.0, step = piece->length_m / LOOKS;
    for (int i = 0; i < LOOKS; i++) {
        double s0 = step * i, s1 = step * (i + 1);
        if (derivative_at(of, piece, s0) > 0.0 && derivative_at(of, piece, s1) <= 0.0) {
            double t[3];
            tw_piece_tension(piece, peak_between(of, piece, s0, s1), t);
            most = fmax(most, value(t));
        }
    }
    return most;
}

static double slope_of(const double t[3])
{
    double run = hypot(t[0], t[1]);
    return run > 0.0 ? fabs(t[2]) / run : INFINITY;
}

static double size_of(const double t[3])
{
    return tw_norm(t);
}

double tw_span_ramp_slope(const tw_piece *piece)
{
    return greatest_within(slope_slope, piece, slope_of);
}

double tw_span_ramp_tension_max(const tw_piece *piece)
{
    return greatest_within(tension_slope, piece, size_of);
}
