#include "ground.h"

#include <math.h>

#include "span_ramp.h"
#include "vector.h"

enum { TANGENTS = 11 };

/* Straight top: elevation z0 at x0, rising by slope, between x0 and x1. */
typedef struct top {
    double x0, x1, z0, slope;
} top;

/* One stretch of a piece on which the station runs one way, and tangents that lie below it where it is convex. */
typedef struct stretch {
    const tw_material *material;
    const tw_piece *piece;
    double s0, s1;
    double x0, x1; /* stations, x0 <= x1 */
    int forward;   /* station grows with s */
    int convex;
    double tangents_per_m;
    double tangent_x[TANGENTS], tangent_z[TANGENTS], tangent_slope[TANGENTS];
} stretch;

typedef struct least {
    double clearance, station;
    int found;
} least;

/* Last profile stretch that begins at or before a station. */
static size_t profile_stretch(const tw_project *project, double station_m)
{
    size_t low = 0, high = project->ground_count - 1;
    while (high - low > 1) {
        size_t middle = low + (high - low) / 2;
        if (project->ground_station_m[middle] <= station_m) {
            low = middle;
        } else {
            high = middle;
        }
    }
    return low;
}

static top profile_top(const tw_project *project, size_t k)
{
    const double *x = project->ground_station_m + k;
    const double *z = project->ground_elevation_m + k;
    top t = {x[0], x[1], z[0], (z[1] - z[0]) / (x[1] - x[0])};
    return t;
}

double tw_ground_elevation(const tw_project *project, double station_m)
{
    size_t n = project->ground_count;
    if (n < 2 || !(station_m >= project->ground_station_m[0] && station_m <= project->ground_station_m[n - 1])) {
        return (double)NAN;
    }
    top t = profile_top(project, profile_stretch(project, station_m));
    return t.z0 + t.slope * (station_m - t.x0);
}

static void offer(least *best, double clearance, double station)
{
    if (!best->found || clearance < best->clearance) {
        best->clearance = clearance;
        best->station = station;
        best->found = 1;
    }
}

static void offer_place(const stretch *line, const top *t, double s, least *best)
{
    double r[3];
    tw_piece_position(line->material, line->piece, s, r);
    offer(best, r[2] - t->z0 - t->slope * (r[0] - t->x0), r[0]);
}

static double at_station(const stretch *line, double station)
{
    if (station <= line->x0) {
        return line->forward ? line->s0 : line->s1;
    }
    if (station >= line->x1) {
        return line->forward ? line->s1 : line->s0;
    }
    double a = line->forward ? line->x0 : line->x1, b = line->forward ? line->x1 : line->x0;
    return tw_piece_at_station(line->material, line->piece, line->s0, line->s1, a, b, station);
}

/* Under a growing load normal . t has up to two zeros: they and the ends. */
static void judge_top_ramp(const stretch *line, const top *t, const double normal[3], double from, double to, least *best)
{
    double places[2];
    int count = tw_span_ramp_stationary(line->piece, normal, places);
    for (int i = 0; i < count; i++) {
        double r[3];
        tw_piece_position(line->material, line->piece, places[i], r);
        if (places[i] > line->s0 && places[i] < line->s1 && r[0] >= from && r[0] <= to) {
            offer_place(line, t, places[i], best);
        }
    }
    offer_place(line, t, at_station(line, from), best);
    offer_place(line, t, at_station(line, to), best);
}

/* Exact least clearance over one straight top between stations from and to. Along a piece, d(clearance)/ds has the sign
 * of normal . t, which is linear in s: where it grows through zero within the stretch is the least place, otherwise an end. */
static void judge_top(const stretch *line, const top *t, double from, double to, least *best)
{
    const double normal[3] = {-t->slope, 0.0, 1.0};
    if (tw_span_ramp_is(line->piece)) {
        judge_top_ramp(line, t, normal, from, to, best);
        return;
    }
    double rate = -tw_dot(normal, line->piece->load);
    double at_zero = tw_dot(normal, line->piece->tension);
    double s = rate > 0.0 ? -at_zero / rate : -1.0;
    if (s > line->s0 && s < line->s1) {
        double r[3];
        tw_piece_position(line->material, line->piece, s, r);
        if (r[0] >= from && r[0] <= to) {
            offer(best, r[2] - t->z0 - t->slope * (r[0] - t->x0), r[0]);
            return;
        }
        offer_place(line, t, at_station(line, r[0] < from ? from : to), best);
        return;
    }
    offer_place(line, t, at_station(line, from), best);
    offer_place(line, t, at_station(line, to), best);
}

/* No clearance over the profile from x[0] to x[1] is less than this: the line lies above its tangent from the nearest
 * point, and that comes closest to a straight top at one of its ends. */
static double bound(const stretch *line, const double *x, const double *z)
{
    if (!line->convex) {
        return -INFINITY;
    }
    double along = (0.5 * (x[0] + x[1]) - line->x0) * line->tangents_per_m;
    int i = along <= 0.0 ? 0 : along >= TANGENTS - 1 ? TANGENTS - 1 : (int)(along + 0.5);
    double near = line->tangent_z[i] + line->tangent_slope[i] * (x[0] - line->tangent_x[i]) - z[0];
    double far = line->tangent_z[i] + line->tangent_slope[i] * (x[1] - line->tangent_x[i]) - z[1];
    return near < far ? near : far;
}

static stretch make_stretch(const tw_material *material, const tw_piece *piece, double s0, double s1)
{
    stretch line = {.material = material, .piece = piece, .s0 = s0, .s1 = s1};
    line.convex = piece->load[0] == 0.0 && piece->ramp[0] == 0.0 && piece->load[2] <= 0.0
                  && piece->load[2] + piece->length_m * piece->ramp[2] <= 0.0 && piece->tension[0] > 0.0;
    double first[3] = {0.0}, last[3] = {0.0};
    tw_piece_position(material, piece, s0, first);
    tw_piece_position(material, piece, s1, last);
    line.forward = last[0] >= first[0];
    line.x0 = fmin(first[0], last[0]);
    line.x1 = fmax(first[0], last[0]);
    line.tangents_per_m = line.x1 > line.x0 ? (TANGENTS - 1) / (line.x1 - line.x0) : 0.0;
    for (int i = 0; line.convex && i < TANGENTS; i++) {
        double r[3], t[3];
        double s = s0 + (s1 - s0) * i / (TANGENTS - 1);
        tw_piece_position(material, piece, s, r);
        tw_piece_tension(piece, s, t);
        line.tangent_x[i] = r[0];
        line.tangent_z[i] = r[2];
        line.tangent_slope[i] = t[2] / t[0];
    }
    return line;
}

/* The stretch with the lowest bound is judged first, then only those whose bound lies below what was found. */
static void judge_profile(const tw_project *project, const stretch *line, double from, double to, least *best)
{
    const double *x = project->ground_station_m, *z = project->ground_elevation_m;
    size_t first = profile_stretch(project, from);
    size_t lowest = first;
    double lowest_bound = INFINITY;
    for (size_t k = first; k + 1 < project->ground_count && x[k] < to; k++) {
        double no_less = bound(line, x + k, z + k);
        if (no_less < lowest_bound) {
            lowest_bound = no_less;
            lowest = k;
        }
    }
    for (int pass = 0; pass < 2; pass++) {
        for (size_t k = pass ? first : lowest; k + 1 < project->ground_count && x[k] < to; k++) {
            double a = from > x[k] ? from : x[k], b = to < x[k + 1] ? to : x[k + 1];
            if (a < b && (!best->found || bound(line, x + k, z + k) < best->clearance)) {
                const top t = profile_top(project, k);
                judge_top(line, &t, a, b, best);
            }
            if (pass == 0) {
                break;
            }
        }
    }
}

static void judge_stretch(const tw_section *section, const stretch *line, size_t crossing, double from_m, double to_m,
                          least *best)
{
    const tw_project *project = section->project;
    double from = isnan(from_m) ? line->x0 : fmax(from_m, line->x0);
    double to = isnan(to_m) ? line->x1 : fmin(to_m, line->x1);
    if (crossing != TW_NONE) {
        const tw_crossing *over = &project->crossings[crossing];
        const top t = {over->from_m, over->to_m, over->top_m, 0.0};
        from = fmax(from, over->from_m);
        to = fmin(to, over->to_m);
        if (from <= to) {
            judge_top(line, &t, from, to, best);
        }
        return;
    }
    from = fmax(from, project->ground_station_m[0]);
    to = fmin(to, project->ground_station_m[project->ground_count - 1]);
    if (from < to) {
        judge_profile(project, line, from, to, best);
    }
}

int tw_ground_clearance(const tw_section *section, size_t span, size_t crossing, double from_m, double to_m,
                        double *clearance_m, double *station_m)
{
    least best = {INFINITY, 0.0, 0};
    if (crossing == TW_NONE && section->project->ground_count < 2) {
        return 0;
    }
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        const tw_piece *piece = &section->pieces[p];
        double turn;
        int turns = tw_piece_turns(piece, &turn);
        stretch line = make_stretch(&section->material, piece, 0.0, turns ? turn : piece->length_m);
        judge_stretch(section, &line, crossing, from_m, to_m, &best);
        if (turns) {
            line = make_stretch(&section->material, piece, turn, piece->length_m);
            judge_stretch(section, &line, crossing, from_m, to_m, &best);
        }
    }
    if (best.found) {
        *clearance_m = best.clearance;
        *station_m = best.station;
    }
    return best.found;
}
