/* section_state: what can be read off a hung section. */
#include <math.h>

#include "hold.h"
#include "route.h"
#include "section.h"
#include "vector.h"

/* Last index k below count with at[k * step] <= value; 0 where there is none. */
static size_t last_below(const double *at, size_t step, size_t count, double value)
{
    size_t low = 0, high = count;
    while (high - low > 1) {
        size_t middle = low + (high - low) / 2;
        if (at[middle * step] <= value) {
            low = middle;
        } else {
            high = middle;
        }
    }
    return low;
}

void tw_section_locate(const tw_section *section, double s, size_t *span, double *within)
{
    size_t k = last_below(section->start_m, 1, section->span_count, s);
    *span = k;
    *within = fmin(fmax(s - section->start_m[k], 0.0), section->length_m[k]);
}

static const tw_piece *piece_within(const tw_section *section, size_t span, double *s)
{
    size_t p = section->piece_first[span];
    while (p + 1 < section->piece_first[span + 1] && *s > section->pieces[p].length_m) {
        *s -= section->pieces[p].length_m;
        p++;
    }
    return &section->pieces[p];
}

void tw_section_at(const tw_section *section, double s, double position[3], double tension[3])
{
    size_t span;
    double within;
    tw_section_locate(section, s, &span, &within);
    const tw_piece *piece = piece_within(section, span, &within);
    if (position) {
        tw_piece_position(&section->materials[span], piece, within, position);
    }
    if (tension) {
        tw_piece_tension(piece, within, tension);
    }
}

/* Places are compared as they were when the loads were put on: within a share of a span that rounding cannot reach. */
void tw_section_beside(const tw_section *section, double s, double before[3], double beyond[3])
{
    size_t span;
    double within;
    tw_section_locate(section, s, &span, &within);
    double near = 1e-11 * section->length_m[span];
    size_t p = section->piece_first[span];
    while (p + 1 < section->piece_first[span + 1] && within > section->pieces[p].length_m + near) {
        within -= section->pieces[p].length_m;
        p++;
    }
    const tw_piece *piece = &section->pieces[p];
    tw_piece_tension(piece, fmin(within, piece->length_m), before);
    if (p + 1 < section->piece_first[span + 1] && within >= piece->length_m - near) {
        tw_copy(piece[1].tension, beyond);
    } else {
        tw_copy(before, beyond);
    }
}

static int passes(const tw_material *material, const tw_piece *piece, const tw_route_leg *leg, double s0, double s1,
                  double station_m, double *s)
{
    double r[3];
    double slack = 1e-9 * (1.0 + fabs(station_m));
    tw_piece_position(material, piece, s0, r);
    double a = tw_route_station(leg, r);
    tw_piece_position(material, piece, s1, r);
    double b = tw_route_station(leg, r);
    if (!(station_m >= fmin(a, b) - slack && station_m <= fmax(a, b) + slack && isfinite(station_m))) {
        return 0;
    }
    *s = tw_piece_at_station(material, piece, leg, s0, s1, a, b, station_m);
    return 1;
}

/* First place of a span that passes a station. */
static int span_passes(const tw_section *section, size_t span, double station_m, double *s)
{
    const tw_route_leg leg = tw_route_leg_of(section->project, span);
    double passed = section->start_m[span];
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        const tw_piece *piece = &section->pieces[p];
        double turn, at;
        int turns = tw_piece_turns(piece, &leg, &turn);
        if (passes(&section->materials[span], piece, &leg, 0.0, turns ? turn : piece->length_m, station_m, &at)
            || (turns && passes(&section->materials[span], piece, &leg, turn, piece->length_m, station_m, &at))) {
            *s = passed + at;
            return 1;
        }
        passed += piece->length_m;
    }
    return 0;
}

/* A clamp that stands inside of an angle point ends one leg before the next begins: is the station between? */
static int clamp_skips(const tw_section *section, size_t support, double station_m)
{
    const double *clamp = section->clamp + 3 * support;
    const tw_route_leg before = tw_route_leg_of(section->project, support - 1);
    const tw_route_leg after = tw_route_leg_of(section->project, support);
    return station_m >= tw_route_station(&before, clamp) && station_m <= tw_route_station(&after, clamp);
}

/* First place of the spans from, ..., to - 1 that passes a station. */
static tw_status spans_at_station(const tw_section *section, size_t from, size_t to, double station_m, double *s)
{
    for (size_t k = from; k < to; k++) {
        if (span_passes(section, k, station_m, s)) {
            return TW_OK;
        }
        if (section->project->route_station_m && k + 1 < section->span_count && clamp_skips(section, k + 1, station_m)) {
            *s = section->start_m[k + 1];
            return TW_OK;
        }
    }
    return TW_ERROR_PLACE;
}

/* The span between whose clamps the station lies and its neighbours first; a line blown past them is looked through. */
tw_status tw_section_at_station(const tw_section *section, double station_m, double *s)
{
    size_t n = section->span_count;
    const double *route = section->project->route_station_m;
    size_t k = route ? last_below(route, 1, n, station_m) : last_below(section->clamp, 3, n, station_m);
    tw_status status = spans_at_station(section, k > 0 ? k - 1 : 0, k + 2 < n ? k + 2 : n, station_m, s);
    return status == TW_OK ? status : spans_at_station(section, 0, n, station_m, s);
}

double tw_section_station(const tw_section *section, double s, const double position[3])
{
    size_t span;
    double within;
    tw_section_locate(section, s, &span, &within);
    const tw_route_leg leg = tw_route_leg_of(section->project, span);
    return tw_route_station(&leg, position);
}

/* A span's own frame between its present clamps. */
typedef struct chord_frame {
    double start[3];
    double span, rise;
    double u[2]; /* plan direction */
} chord_frame;

static chord_frame chord_of(const tw_section *section, size_t span)
{
    const double *a = section->clamp + 3 * span;
    chord_frame frame;
    tw_copy(a, frame.start);
    frame.span = hypot(a[3] - a[0], a[4] - a[1]);
    frame.rise = a[5] - a[2];
    frame.u[0] = (a[3] - a[0]) / frame.span;
    frame.u[1] = (a[4] - a[1]) / frame.span;
    return frame;
}

static void total_load(const tw_piece *pieces, size_t count, double load[3])
{
    load[0] = load[1] = load[2] = 0.0;
    for (size_t p = 0; p < count; p++) {
        double total[3];
        tw_piece_total(&pieces[p], total);
        tw_axpy(load, 1.0, total, load);
        tw_axpy(load, 1.0, pieces[p].force, load);
    }
}

static double slant_sag(const tw_material *material, const tw_piece *pieces, size_t count, const chord_frame *frame)
{
    double load[3], at;
    total_load(pieces, count, load);
    const double *u = frame->u;
    const double own[3] = {load[0] * u[0] + load[1] * u[1], load[1] * u[0] - load[0] * u[1], load[2]};
    double d[3];
    tw_span_slant(frame->span, frame->rise, own, d);
    const double direction[3] = {d[0] * u[0] - d[1] * u[1], d[0] * u[1] + d[1] * u[0], d[2]};
    return fmax(0.0, tw_span_extreme(material, pieces, count, direction, frame->start, &at));
}

/* Taut string along the chord: deflection M(x)/H, a metre of line taken for a metre of chord; its greatest. Of a uniform
 * load w L c / (8 H) on a span L with chord c, which on a level span is w L^2 / (8 H). */
static double small_deflection_sag(const tw_piece *pieces, size_t count, double natural, double span, double chord, double H)
{
    double scale = span / natural;
    double slant = chord / span;
    double support = 0.0, x = 0.0;
    for (size_t p = 0; p < count; p++) {
        double l = pieces[p].length_m * scale;
        double arm = span - x;
        support += -pieces[p].load[2] * slant * l * (arm - 0.5 * l) - pieces[p].force[2] * (arm - l);
        support -= pieces[p].ramp[2] / scale * slant * l * l * (0.5 * arm - l / 3.0);
        x += l;
    }
    double shear = support / span, moment = 0.0, most = 0.0;
    for (size_t p = 0; p < count; p++) {
        double l = pieces[p].length_m * scale;
        double q = -pieces[p].load[2] * slant;
        double bend = -pieces[p].ramp[2] * slant / scale;
        double root = sqrt(fmax(q * q + 2.0 * bend * shear, 0.0));
        double top = q + root > 0.0 ? 2.0 * shear / (q + root) : -1.0; /* shear = q x + bend x^2 / 2 */
        top = bend == 0.0 && q > 0.0 ? shear / q : top;
        if (top > 0.0 && top < l) {
            most = fmax(most, moment + (shear - (0.5 * q + bend * top / 6.0) * top) * top);
        }
        moment += shear * l - (0.5 * q + bend * l / 6.0) * l * l;
        shear -= (q + 0.5 * bend * l) * l - pieces[p].force[2];
        most = fmax(most, moment);
    }
    return most / H;
}

static double line_length(const tw_material *material, const tw_piece *pieces, size_t count)
{
    double length = 0.0;
    for (size_t p = 0; p < count; p++) {
        double part;
        tw_piece_energy(material, &pieces[p], NULL, NULL, &part);
        length += part;
    }
    return length;
}

static void span_tensions(const tw_section *section, size_t span, const tw_piece *pieces, size_t count,
                          const chord_frame *frame, tw_span_state *state)
{
    const double *pull = section->pull + 3 * span;
    double far[3];
    tw_piece_tension(&pieces[count - 1], pieces[count - 1].length_m, far);
    state->horizontal_tension_N = pull[0] * frame->u[0] + pull[1] * frame->u[1];
    state->tension_from_N = tw_norm(pull);
    state->tension_to_N = tw_norm(far);
    state->tension_max_N = tw_span_tension_max(pieces, count);
    state->slope_max = tw_span_slope(pieces, count);
}

static double permanent_strain(const tw_section *section, size_t span, double horizontal_N)
{
    tw_curve curve;
    if (!section->permanent) {
        return 0.0;
    }
    tw_material strung = tw_material_after(&section->project->line, section->temperature_degC,
                                           section->project->stringing.temperature_degC, NULL, &curve);
    double tension = fmax(horizontal_N, 0.0);
    return tw_material_stretch(&section->materials[span], tension) - tw_material_stretch(&strung, tension);
}

void tw_section_span_state(const tw_section *section, size_t span, tw_span_state *state)
{
    const tw_piece *pieces = section->pieces + section->piece_first[span];
    size_t count = section->piece_first[span + 1] - section->piece_first[span];
    const tw_material *material = &section->materials[span];
    const chord_frame frame = chord_of(section, span);
    const tw_route_leg leg = tw_route_leg_of(section->project, span);
    const double slope = frame.rise / frame.span;
    const double down[3] = {slope * frame.u[0], slope * frame.u[1], -1.0};
    const double left[3] = {-frame.u[1], frame.u[0], 0.0};
    const double right[3] = {frame.u[1], -frame.u[0], 0.0};
    const double fall[3] = {0.0, 0.0, -1.0};
    double at, position[3];
    state->span_m = frame.span;
    state->rise_m = frame.rise;
    state->natural_length_m = section->length_m[span];
    state->line_length_m = line_length(material, pieces, count);
    span_tensions(section, span, pieces, count, &frame, state);
    state->sag_m = fmax(0.0, tw_span_extreme(material, pieces, count, down, frame.start, &at));
    const tw_piece *piece = piece_within(section, span, &at);
    tw_piece_position(material, piece, at, position);
    state->sag_station_m = tw_route_station(&leg, position);
    state->slant_sag_m = slant_sag(material, pieces, count, &frame);
    state->blowout_m = fmax(0.0, fmax(tw_span_extreme(material, pieces, count, left, frame.start, &at),
                                      tw_span_extreme(material, pieces, count, right, frame.start, &at)));
    tw_span_extreme(material, pieces, count, fall, frame.start, &at);
    piece = piece_within(section, span, &at);
    tw_piece_position(material, piece, at, position);
    state->low_station_m = tw_route_station(&leg, position);
    state->low_elevation_m = position[2];
    state->permanent_strain = permanent_strain(section, span, state->horizontal_tension_N);
    state->small_deflection_sag_m = small_deflection_sag(pieces, count, section->length_m[span], frame.span,
                                                         hypot(frame.span, frame.rise), state->horizontal_tension_N);
}

/* Angles of a hanger from the vertical: its own, and as seen from the side and along the line. */
static void hanger_swing(const tw_section *section, size_t support, tw_support_state *state)
{
    const tw_support *at = &section->project->supports[support];
    const double *c = section->clamp + 3 * support;
    const double swing[3] = {c[0] - at->station_m, c[1] - at->offset_m, c[2] - at->elevation_m};
    double own[3];
    tw_route_into_axes(section->ahead + 2 * support, swing, own);
    state->swing_rad = atan2(hypot(swing[0], swing[1]), -swing[2]);
    state->swing_along_rad = atan2(own[0], -swing[2]);
    state->swing_across_rad = atan2(own[1], -swing[2]);
}

void tw_section_support_state(const tw_section *section, size_t support, tw_support_state *state)
{
    const tw_support *at = &section->project->supports[support];
    int hangs = tw_hold_link_m(at) > 0.0;
    double whole[3], F[3];
    tw_axpy(section->hold_force + 3 * support, -1.0, section->link_load + 3 * support, whole);
    tw_route_into_axes(section->ahead + 2 * support, whole, F);
    state->along_N = -F[0];
    state->across_N = -F[1];
    state->down_N = F[2];
    state->resultant_N = tw_norm(F);
    state->station_m = tw_route_support_station(section->project, support);
    tw_copy(section->clamp + 3 * support, state->position_m);
    state->swing_rad = state->swing_along_rad = state->swing_across_rad = (double)NAN;
    if (hangs) {
        hanger_swing(section, support, state);
    }
}

double tw_section_stored(const tw_section *section)
{
    double total = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            double stored;
            tw_piece_energy(&section->materials[k], &section->pieces[p], NULL, &stored, NULL);
            total += stored;
        }
    }
    return total;
}
