#include "crossing.h"

#include <math.h>

#include "course.h"
#include "vector.h"

enum { STRETCHES = 48, PLACES_MOST = 64 }; /* of a span; of its crossings */
static const double OVER_M = 1e-6;         /* apart in plan: over one another */

typedef struct crossings {
    size_t count;
    tw_crossing_place place[PLACES_MOST];
} crossings;

/* A stretch of this line in one piece, and its ends. */
typedef struct stretch {
    const tw_material *material;
    const tw_piece *piece;
    double s[2];
    double end[2][3];
} stretch;

static void keep(crossings *found, const stretch *a, double t, const tw_arc *arc, double u, int over)
{
    if (found->count == PLACES_MOST) {
        return;
    }
    tw_crossing_place *place = &found->place[found->count++];
    tw_piece_position(a->material, a->piece, a->s[0] + t * (a->s[1] - a->s[0]), place->position);
    tw_course_at(arc, u, place->other_position, NULL, NULL);
    place->other_at_m = arc->at_m[0] + u * (arc->at_m[1] - arc->at_m[0]);
    place->gap_m = place->position[2] - place->other_position[2];
    place->over = over;
}

/* Where a stretch and an arc, both taken straight, cross in plan; of those over one another, the stretch's beginning. */
static void cross(crossings *found, const stretch *a, const tw_arc *arc)
{
    const double *p = a->end[0], *b = arc->position[0];
    double d[2] = {a->end[1][0] - p[0], a->end[1][1] - p[1]};
    double e[2] = {arc->position[1][0] - b[0], arc->position[1][1] - b[1]};
    double r[2] = {b[0] - p[0], b[1] - p[1]};
    double det = d[0] * e[1] - d[1] * e[0], long_a = hypot(d[0], d[1]), long_b = hypot(e[0], e[1]);
    if (!(long_a > 0.0) || !(long_b > 0.0)) {
        return;
    }
    double aside = fabs(r[0] * e[1] - r[1] * e[0]) / long_b;
    if (fabs(det) <= OVER_M * long_b && aside <= OVER_M) {
        double u = -(r[0] * e[0] + r[1] * e[1]) / (long_b * long_b);
        if (u >= 0.0 && u < 1.0) {
            keep(found, a, 0.0, arc, u, 1);
        }
        return;
    }
    double t = det != 0.0 ? (r[0] * e[1] - r[1] * e[0]) / det : -1.0;
    double u = det != 0.0 ? (r[0] * d[1] - r[1] * d[0]) / det : -1.0;
    if (t >= 0.0 && t < 1.0 && u >= 0.0 && u < 1.0) {
        keep(found, a, t, arc, u, 0);
    }
}

static int apart(const double a[2], const double b[2], const tw_arc *arc, int axis)
{
    double p = arc->position[0][axis], q = arc->position[1][axis];
    return fmax(p, q) < fmin(a[axis], b[axis]) - OVER_M || fmin(p, q) > fmax(a[axis], b[axis]) + OVER_M;
}

static void cross_piece(const tw_section *section, size_t span, const tw_piece *piece, const tw_course *other,
                        crossings *found)
{
    int parts = 1 + (int)(STRETCHES * piece->length_m / section->length_m[span]);
    for (int i = 0; i < parts && piece->length_m > 0.0; i++) {
        stretch a = {.material = &section->materials[span], .piece = piece};
        for (int end = 0; end < 2; end++) {
            a.s[end] = piece->length_m * (i + end) / parts;
            tw_piece_position(a.material, piece, a.s[end], a.end[end]);
        }
        for (size_t k = 0; k < other->arc_count; k++) {
            const tw_arc *arc = &other->arcs[k];
            if (!apart(a.end[0], a.end[1], arc, 0) && !apart(a.end[0], a.end[1], arc, 1)) {
                cross(found, &a, arc);
            }
        }
    }
}

static void cross_span(const tw_section *section, size_t span, const tw_course *other, crossings *found)
{
    found->count = 0;
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        cross_piece(section, span, &section->pieces[p], other, found);
    }
}

/* The like place nearest in plan; NULL where there is none. */
static const tw_crossing_place *nearest(const crossings *among, const tw_crossing_place *place)
{
    const tw_crossing_place *found = NULL;
    double least = INFINITY;
    for (size_t i = 0; i < among->count; i++) {
        const double *at = among->place[i].position;
        double distance = hypot(at[0] - place->position[0], at[1] - place->position[1]);
        if (among->place[i].over == place->over && distance < least) {
            least = distance;
            found = &among->place[i];
        }
    }
    return found;
}

int tw_crossing_swapped(const tw_section *section, const tw_course *other, const tw_section *strung,
                        const tw_course *other_strung, size_t span, tw_crossing_place *deepest)
{
    crossings now, before;
    double gap = 0.0;
    cross_span(section, span, other, &now);
    if (now.count == 0) {
        return 0;
    }
    cross_span(strung, span, other_strung, &before);
    for (size_t i = 0; i < now.count; i++) {
        const tw_crossing_place *then = nearest(&before, &now.place[i]);
        if (then && then->gap_m * now.place[i].gap_m < 0.0 && fabs(now.place[i].gap_m) > gap) {
            gap = fabs(now.place[i].gap_m);
            *deepest = now.place[i];
        }
    }
    return gap > 0.0;
}
