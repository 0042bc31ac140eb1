#include "course.h"

#include <math.h>

#include "vector.h"

static const double ERROR_M = 1e-10;    /* of an arc */
static const double BEND_MOST = 0.25;   /* of an arc, rad: q h / T */
static const double ARCS_MOST = 20000.0;/* of one piece, however slack */

/* Length of the arc that begins where the tension is T: over it T falls to no less than (1 - BEND_MOST) T. */
static double arc_length(const tw_piece *piece, double s)
{
    double t[3], last[3];
    tw_piece_load(piece, piece->length_m, last);
    double q = fmax(tw_norm(piece->load), tw_norm(last));
    tw_piece_tension(piece, s, t);
    double radius = q > 0.0 ? tw_norm(t) / q : INFINITY;
    double step = pow(384.0 * ERROR_M / 4.0, 0.25) * pow((1.0 - BEND_MOST) * radius, 0.75);
    return fmax(fmin(step, BEND_MOST * radius), piece->length_m / ARCS_MOST);
}

static void arc_end(const tw_material *material, const tw_piece *piece, double s, double position[3], double slope[3])
{
    double t[3];
    tw_piece_position(material, piece, s, position);
    tw_piece_tension(piece, s, t);
    double size = tw_norm(t);
    double factor = size > 0.0 ? tw_material_stretch(material, size) / size : 0.0;
    for (int i = 0; i < 3; i++) {
        slope[i] = factor * t[i];
    }
}

/* Arcs of one piece; the first begins where the one before ended, to the last bit. */
static size_t piece_arcs(const tw_material *material, const tw_piece *piece, double passed, tw_arc *arcs,
                         const double *joint)
{
    size_t count = 0;
    double s = 0.0;
    while (s < piece->length_m) {
        double next = s + arc_length(piece, s);
        next = next > piece->length_m * (1.0 - 1e-9) ? piece->length_m : next;
        if (arcs) {
            tw_arc *arc = &arcs[count];
            arc->at_m[0] = passed + s;
            arc->at_m[1] = passed + next;
            arc_end(material, piece, s, arc->position[0], arc->slope[0]);
            arc_end(material, piece, next, arc->position[1], arc->slope[1]);
            if (joint) {
                tw_copy(joint, arc->position[0]);
            }
            joint = arc->position[1];
        }
        count++;
        s = next;
    }
    return count;
}

size_t tw_course_arcs(const tw_section *section, tw_arc *arcs)
{
    size_t count = 0;
    double passed = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            const tw_piece *piece = &section->pieces[p];
            if (passed + piece->length_m > passed) {
                const double *joint = arcs && count > 0 ? arcs[count - 1].position[1] : NULL;
                count += piece_arcs(&section->materials[k], piece, passed, arcs ? arcs + count : NULL, joint);
            }
            passed += piece->length_m;
        }
    }
    return count;
}

void tw_course_at(const tw_arc *arc, double u, double place[3], double slope[3], double curvature[3])
{
    double h = arc->at_m[1] - arc->at_m[0];
    for (int i = 0; i < 3; i++) {
        double rise = arc->position[1][i] - arc->position[0][i];
        double m0 = h * arc->slope[0][i], m1 = h * arc->slope[1][i];
        double c2 = 3.0 * rise - 2.0 * m0 - m1, c3 = m0 + m1 - 2.0 * rise;
        place[i] = arc->position[0][i] + u * (m0 + u * (c2 + u * c3));
        if (slope) {
            slope[i] = m0 + u * (2.0 * c2 + u * 3.0 * c3);
        }
        if (curvature) {
            curvature[i] = 2.0 * c2 + 6.0 * u * c3;
        }
    }
}

void tw_course_off_chord(const double point[3], const double a[3], const double b[3], double off[3])
{
    double chord[3], along[3];
    tw_axpy(b, -1.0, a, chord);
    tw_axpy(point, -1.0, a, along);
    double square = tw_dot(chord, chord);
    double share = square > 0.0 ? fmin(fmax(tw_dot(along, chord) / square, 0.0), 1.0) : 0.0;
    tw_axpy(along, -share, chord, off);
}

double tw_course_reach(const tw_bow *bow)
{
    return tw_norm(bow->toward) + bow->rest;
}

tw_bow tw_course_arc_bow(const tw_arc *arc, double u0, double u1)
{
    double a[3], b[3], out[3], in[3], off[2][3], apart[3];
    tw_course_at(arc, u0, a, out, NULL);
    tw_course_at(arc, u1, b, in, NULL);
    tw_axpy(a, (u1 - u0) / 3.0, out, out);
    tw_axpy(b, -(u1 - u0) / 3.0, in, in);
    tw_course_off_chord(out, a, b, off[0]);
    tw_course_off_chord(in, a, b, off[1]);
    tw_axpy(off[1], -1.0, off[0], apart);
    tw_bow bow = {.rest = 0.5 * tw_norm(apart)};
    tw_axpy(off[0], 0.5, apart, bow.toward);
    return bow;
}

/* What a bow's direction holds of a vector, and the rest of it. */
static double resolved(const double direction[3], const double vector[3], double *rest)
{
    double across[3];
    double along = tw_dot(direction, vector);
    tw_axpy(vector, -along, direction, across);
    *rest += tw_norm(across) + fmax(-along, 0.0);
    return fmax(along, 0.0);
}

/* Two runs that meet at `bend` off the chord of both: the directions of all three are nearly one. */
static tw_bow joined(const double bend[3], const tw_bow *left, const tw_bow *right)
{
    double direction[3], bent = 0.0, rests[2] = {left->rest, right->rest};
    tw_axpy(bend, 0.5, left->toward, direction);
    tw_axpy(direction, 0.5, right->toward, direction);
    double size = tw_norm(direction);
    for (int i = 0; i < 3; i++) {
        direction[i] = size > 0.0 ? direction[i] / size : 0.0;
    }
    double along = fmax(resolved(direction, left->toward, &rests[0]), resolved(direction, right->toward, &rests[1]));
    along += resolved(direction, bend, &bent);
    tw_bow bow = {.rest = bent + fmax(rests[0], rests[1])};
    for (int i = 0; i < 3; i++) {
        bow.toward[i] = along * direction[i];
    }
    return bow;
}

void tw_course_bows(const tw_arc *arcs, size_t node, size_t first, size_t last, tw_bow *bows)
{
    size_t middle = first + (last - first) / 2;
    if (last - first == 1) {
        bows[node] = tw_course_arc_bow(&arcs[first], 0.0, 1.0);
        return;
    }
    double bend[3];
    size_t left = node + 1, right = node + 2 * (middle - first);
    tw_course_bows(arcs, left, first, middle, bows);
    tw_course_bows(arcs, right, middle, last, bows);
    tw_course_off_chord(arcs[middle].position[0], arcs[first].position[0], arcs[last - 1].position[1], bend);
    bows[node] = joined(bend, &bows[left], &bows[right]);
}
