#include "spacing.h"

#include <math.h>

#include "course.h"
#include "vector.h"

static const double STRAIGHT = 1e-3;   /* reaches over the distance: below it two stretches are compared at once */
static const double FINEST_M = 1e-5;   /* reaches that need not be smaller, however near the lines */
static const double SQUARE = 1e-14;    /* cosine of the angle to the line that is a right one */
static const double NOTHING_M = 1e-13; /* gain of a further step that is none */
enum { SAMPLES = 5, STEPS_MOST = 80 };

/* A stretch of this line, within one piece. */
typedef struct stretch {
    double s[2];           /* natural length within the piece */
    double place[2][3];
    double tension[2][3];
    tw_bow bow;
} stretch;

/* A stretch of the other line: several arcs, or a part of one. */
typedef struct range {
    size_t node, first, last;
    double u[2];          /* shares of the arc; used where there is one */
    double place[2][3];
    tw_bow bow;
} range;

typedef struct search {
    const tw_material *material;
    const tw_piece *piece; /* of this line */
    const tw_course *other;
    tw_spacing *least;
} search;

static double clamp(double value)
{
    return fmin(fmax(value, 0.0), 1.0);
}

void tw_spacing_of_chords(const double a0[3], const double a1[3], const double b0[3], const double b1[3], double off[3])
{
    double d1[3], d2[3], r[3];
    tw_axpy(a1, -1.0, a0, d1);
    tw_axpy(b1, -1.0, b0, d2);
    tw_axpy(a0, -1.0, b0, r);
    double a = tw_dot(d1, d1), e = tw_dot(d2, d2), f = tw_dot(d2, r), c = tw_dot(d1, r), b = tw_dot(d1, d2);
    double det = a * e - b * b;
    double s = det > 1e-14 * a * e ? clamp((b * f - c * e) / det) : 0.0;
    double t = e > 0.0 ? (b * s + f) / e : 0.0;
    if (t < 0.0 || t > 1.0 || !(det > 1e-14 * a * e)) {
        t = clamp(t);
        s = a > 0.0 ? clamp((b * t - c) / a) : 0.0;
        t = e > 0.0 ? clamp((b * s + f) / e) : 0.0;
    }
    tw_axpy(r, s, d1, r);
    tw_axpy(r, -t, d2, off);
}

/* Under a load that varies a stretch may bend both ways: its tangents, and so its chord among them, lie within the angle
 * int |q|/T ds of one another, and it goes no further from the chord than half its length times that. */
static void set_bow_by_turning(const search *run, stretch *a)
{
    double first[3], last[3], length = a->s[1] - a->s[0];
    tw_piece_load(run->piece, a->s[0], first);
    tw_piece_load(run->piece, a->s[1], last);
    double q = fmax(tw_norm(first), tw_norm(last));
    double stretched = fmax(tw_norm(a->tension[0]), tw_norm(a->tension[1]));
    double least = stretched - q * length, turn = least > 0.0 ? q * length / least : 1.0;
    double most = 0.5 * length * tw_material_stretch(run->material, stretched + q * length);
    a->bow.rest = most * fmin(turn, 1.0);
    a->bow.toward[0] = a->bow.toward[1] = a->bow.toward[2] = 0.0;
}

/* Where a stretch bends one way, it stays within the triangle of its chord and its end tangents, whose apex is no further
 * than half the chord times the tangent of the larger angle, and lies to the side to which its tangents leave the chord;
 * where it bends far, it goes no further than half its length. */
static void set_bow(const search *run, stretch *a)
{
    if (tw_piece_varies(run->piece)) {
        set_bow_by_turning(run, a);
        return;
    }
    double chord[3], side[2][3], apart[3], steepest = 0.0;
    tw_axpy(a->place[1], -1.0, a->place[0], chord);
    double square = tw_dot(chord, chord);
    double stretched = fmax(tw_norm(a->tension[0]), tw_norm(a->tension[1]));
    double most = 0.5 * (a->s[1] - a->s[0]) * tw_material_stretch(run->material, stretched);
    for (int i = 0; i < 2; i++) {
        double along = tw_dot(chord, a->tension[i]);
        tw_axpy(a->tension[i], square > 0.0 ? -along / square : 0.0, chord, side[i]);
        double size = tw_norm(side[i]);
        double angle = along > 0.0 ? size * sqrt(square) / along : INFINITY;
        steepest = fmax(steepest, angle);
        for (int k = 0; k < 3; k++) {
            side[i][k] *= size > 0.0 ? (i ? -1.0 : 1.0) / size : 0.0;
        }
    }
    double height = 0.5 * sqrt(square) * steepest;
    int flat = steepest <= 1.0 && height <= most;
    tw_axpy(side[1], -1.0, side[0], apart);
    a->bow.rest = flat ? 0.5 * height * tw_norm(apart) : most;
    for (int k = 0; k < 3; k++) {
        a->bow.toward[k] = flat ? height * (side[0][k] + 0.5 * apart[k]) : 0.0;
    }
}

static void set_end(const search *run, stretch *a, int end, double s)
{
    a->s[end] = s;
    tw_piece_position(run->material, run->piece, s, a->place[end]);
    tw_piece_tension(run->piece, s, a->tension[end]);
}

static stretch half_stretch(const search *run, const stretch *whole, int half)
{
    stretch a = *whole;
    set_end(run, &a, 1 - half, 0.5 * (whole->s[0] + whole->s[1]));
    set_bow(run, &a);
    return a;
}

static range half_range(const search *run, const range *whole, int half)
{
    const tw_arc *arcs = run->other->arcs;
    range b = *whole;
    if (whole->last - whole->first == 1) {
        b.u[1 - half] = 0.5 * (whole->u[0] + whole->u[1]);
        tw_course_at(&arcs[b.first], b.u[1 - half], b.place[1 - half], NULL, NULL);
        b.bow = tw_course_arc_bow(&arcs[b.first], b.u[0], b.u[1]);
        return b;
    }
    size_t middle = whole->first + (whole->last - whole->first) / 2;
    b.node = half ? whole->node + 2 * (middle - whole->first) : whole->node + 1;
    b.first = half ? middle : whole->first;
    b.last = half ? whole->last : middle;
    tw_copy(arcs[middle].position[0], b.place[1 - half]);
    b.bow = run->other->bows[b.node];
    return b;
}

/* Share of the arc, within the range, that is nearest to a point: Newton on the slope of the distance, kept in a bracket. */
static double nearest(const tw_arc *arc, const range *b, const double point[3], double place[3])
{
    double low = b->u[0], high = b->u[1];
    double chord[3], off[3], slope[3], bend[3];
    tw_axpy(b->place[1], -1.0, b->place[0], chord);
    tw_axpy(point, -1.0, b->place[0], off);
    double square = tw_dot(chord, chord);
    double u = low + (high - low) * (square > 0.0 ? clamp(tw_dot(off, chord) / square) : 0.5);
    for (int i = 0; i < STEPS_MOST; i++) {
        tw_course_at(arc, u, place, slope, bend);
        tw_axpy(place, -1.0, point, off);
        double rise = tw_dot(slope, off);
        double rate = tw_dot(slope, slope) + tw_dot(bend, off);
        if (rise == 0.0 || (rise > 0.0 && u <= b->u[0]) || (rise < 0.0 && u >= b->u[1])) {
            break;
        }
        low = rise < 0.0 ? u : low;
        high = rise > 0.0 ? u : high;
        double next = rate > 0.0 ? fmin(fmax(u - rise / rate, b->u[0]), b->u[1]) : 0.5 * (low + high);
        next = next >= low && next <= high ? next : 0.5 * (low + high);
        if (!(fabs(next - u) > 1e-15)) {
            break;
        }
        u = next;
    }
    return u;
}

/* f'(s) of the header over the distance and the stretch: the cosine of the angle to the line, 0 within rounding. Keeps the
 * place where it is the nearest so far. */
static double judge_at(search *run, const range *b, double s, double *distance)
{
    const tw_arc *arc = &run->other->arcs[b->first];
    double place[3], other[3], off[3], t[3];
    tw_piece_position(run->material, run->piece, s, place);
    double u = nearest(arc, b, place, other);
    tw_axpy(place, -1.0, other, off);
    *distance = tw_norm(off);
    if (*distance < run->least->distance_m) {
        run->least->distance_m = *distance;
        run->least->other_at_m = arc->at_m[0] + u * (arc->at_m[1] - arc->at_m[0]);
        tw_copy(place, run->least->position);
        tw_copy(other, run->least->other_position);
    }
    tw_piece_tension(run->piece, s, t);
    double rise = tw_dot(t, off), square = *distance * tw_norm(t);
    return fabs(rise) > SQUARE * square ? rise / square : 0.0;
}

/* f' is below 0 at s0 and above 0 at s1: the Illinois rule, with a bisection now and then, until nothing is left to gain. */
static void judge_between(search *run, const range *b, double s0, double f0, double s1, double f1)
{
    int side = 0;
    for (int i = 0; i < STEPS_MOST && s1 - s0 > 1e-15 * fabs(s1); i++) {
        double distance;
        double s = i % 5 == 4 ? 0.5 * (s0 + s1) : s0 + (s1 - s0) * (f0 / (f0 - f1));
        s = s > s0 && s < s1 ? s : 0.5 * (s0 + s1);
        double cosine = judge_at(run, b, s, &distance);
        double f = cosine * distance;
        if (fabs(cosine) * (s1 - s0) <= NOTHING_M || s <= s0 || s >= s1) {
            return;
        }
        if (f < 0.0) {
            s0 = s;
            f0 = f;
            f1 *= side < 0 ? 0.5 : 1.0;
            side = -1;
        } else {
            s1 = s;
            f1 = f;
            f0 *= side > 0 ? 0.5 : 1.0;
            side = 1;
        }
    }
}

static void judge_pair(search *run, const stretch *a, const range *b)
{
    double before = 0.0;
    for (int i = 0; i < SAMPLES; i++) {
        double s = a->s[0] + (a->s[1] - a->s[0]) * i / (SAMPLES - 1);
        double distance;
        double f = judge_at(run, b, s, &distance) * distance;
        if (i > 0 && before < 0.0 && f > 0.0) {
            judge_between(run, b, a->s[0] + (a->s[1] - a->s[0]) * (i - 1) / (SAMPLES - 1), before, s, f);
        }
        before = f;
    }
}

/* Distance of the chords of a pair, and a distance that none between its stretches is below. */
static double least_possible(const stretch *a, const range *b, double *chords)
{
    double off[3];
    tw_spacing_of_chords(a->place[0], a->place[1], b->place[0], b->place[1], off);
    *chords = tw_norm(off);
    if (!(*chords > 0.0)) {
        return 0.0;
    }
    double mine = fmin(0.0, tw_dot(off, a->bow.toward)), theirs = fmax(0.0, tw_dot(off, b->bow.toward));
    return *chords + (mine - theirs) / *chords - a->bow.rest - b->bow.rest;
}

/* The half that may be nearer comes first; what cannot be nearer than found is left out. */
static void judge_stretches(search *run, const stretch *a, const range *b, double possible, double chords)
{
    double found = run->least->distance_m;
    if (found <= TW_SPACING_TOUCH || possible >= found - TW_SPACING_NEARER) {
        return;
    }
    double mine = tw_course_reach(&a->bow), theirs = tw_course_reach(&b->bow);
    int nearly_straight = mine + theirs <= fmax(FINEST_M, STRAIGHT * chords);
    if (b->last - b->first == 1 && nearly_straight) {
        judge_pair(run, a, b);
        return;
    }
    double bound[2], distance[2];
    stretch as[2] = {*a, *a};
    range bs[2] = {*b, *b};
    for (int half = 0; half < 2; half++) {
        if (theirs > mine || nearly_straight) {
            bs[half] = half_range(run, b, half);
        } else {
            as[half] = half_stretch(run, a, half);
        }
        bound[half] = least_possible(&as[half], &bs[half], &distance[half]);
    }
    int nearer = bound[1] < bound[0];
    judge_stretches(run, &as[nearer], &bs[nearer], bound[nearer], distance[nearer]);
    judge_stretches(run, &as[1 - nearer], &bs[1 - nearer], bound[1 - nearer], distance[1 - nearer]);
}

int tw_spacing_least(const tw_section *section, size_t span, const tw_course *other, double below_m, tw_spacing *least)
{
    tw_spacing found = {.distance_m = below_m};
    const tw_arc *arcs = other->arcs;
    range whole = {.node = 0, .first = 0, .last = other->arc_count, .u = {0.0, 1.0}, .bow = other->bows[0]};
    tw_copy(arcs[0].position[0], whole.place[0]);
    tw_copy(arcs[other->arc_count - 1].position[1], whole.place[1]);
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        search run = {&section->materials[span], &section->pieces[p], other, &found};
        stretch a;
        double chords;
        if (!(run.piece->length_m > 0.0)) {
            continue;
        }
        set_end(&run, &a, 0, 0.0);
        set_end(&run, &a, 1, run.piece->length_m);
        set_bow(&run, &a);
        double possible = least_possible(&a, &whole, &chords);
        judge_stretches(&run, &a, &whole, possible, chords);
    }
    if (found.distance_m < below_m) {
        *least = found;
        return 1;
    }
    return 0;
}
