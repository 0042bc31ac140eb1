#include "limit.h"

#include <math.h>

#include "crossing.h"
#include "ground.h"
#include "hold.h"
#include "route.h"
#include "spacing.h"
#include "vector.h"

double tw_limit_utilisation_most(double value, double most)
{
    return value / most;
}

double tw_limit_utilisation_least(double value, double least, double scale)
{
    if (least <= 0.0) {
        return fmax(0.0, 1.0 - (value - least) / scale);
    }
    return value >= least ? least / value : 2.0 - value / least;
}

/* Keep the worse of two places. */
static void offer(tw_verdict *worst, double value, double allowed, double margin, double utilisation)
{
    if (!worst->judged || utilisation > worst->utilisation) {
        worst->judged = 1;
        worst->value = value;
        worst->allowed = allowed;
        worst->margin = margin;
        worst->utilisation = utilisation;
    }
}

static void offer_most(tw_verdict *worst, double value, double most)
{
    offer(worst, value, most, most - value, tw_limit_utilisation_most(value, most));
}

static void offer_least(tw_verdict *worst, double value, double least, double scale)
{
    offer(worst, value, least, value - least, tw_limit_utilisation_least(value, least, scale));
}

static void judge_clearance(const tw_limit *limit, const tw_section *section, size_t span, tw_verdict *place)
{
    double clearance, station;
    if (tw_ground_clearance(section, span, limit->crossing, limit->from_m, limit->to_m, &clearance, &station)) {
        offer_least(place, clearance, limit->least, 1.0);
        place->station_m = station;
    }
}

/* What a spacing keeps from, and the distance that matters no more. */
typedef struct keep_from {
    const tw_course *other;
    double below_m;
} keep_from;

/* Only where it is nearer than in the spans before. */
static void judge_spacing(const tw_limit *limit, const tw_section *section, size_t span, const keep_from *spaced,
                          tw_verdict *place)
{
    tw_spacing found;
    if (spaced->other && tw_spacing_least(section, span, spaced->other, spaced->below_m, &found)) {
        offer_least(place, found.distance_m, limit->least, 1.0);
        const tw_route_leg leg = tw_route_leg_of(section->project, span);
        place->station_m = tw_route_station(&leg, found.position);
        place->other_at_m = found.other_at_m;
        tw_copy(found.other_position, place->other_position_m);
    }
}

/* Station of the largest tension: it sits at a piece's end. */
static double tension_station(const tw_section *section, size_t span, double most)
{
    const tw_route_leg leg = tw_route_leg_of(section->project, span);
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        const tw_piece *piece = &section->pieces[p];
        double t[3];
        if (tw_norm(piece->tension) >= most * (1.0 - 1e-12)) {
            return tw_route_station(&leg, piece->start);
        }
        tw_piece_tension(piece, piece->length_m, t);
        if (tw_norm(t) >= most * (1.0 - 1e-12) && p + 1 < section->piece_first[span + 1]) {
            return tw_route_station(&leg, piece[1].start);
        }
    }
    return tw_route_station(&leg, section->clamp + 3 * (span + 1));
}

static void judge_tension(const tw_project *project, const tw_limit *limit, const tw_section *section, size_t span,
                          tw_verdict *place)
{
    size_t first = section->piece_first[span];
    double most = isnan(limit->share) ? limit->most : limit->share * project->line.breaking_strength_N;
    double value = tw_span_tension_max(section->pieces + first, section->piece_first[span + 1] - first);
    offer_most(place, value, most);
    place->station_m = tension_station(section, span, value);
}

static void judge_span(const tw_project *project, const tw_limit *limit, const tw_section *section, size_t span,
                       const keep_from *spaced, tw_verdict *place)
{
    tw_span_state state;
    switch (limit->kind) {
    case TW_LIMIT_CLEARANCE: judge_clearance(limit, section, span, place); return;
    case TW_LIMIT_TENSION: judge_tension(project, limit, section, span, place); return;
    case TW_LIMIT_SPACING: judge_spacing(limit, section, span, spaced, place); return;
    case TW_LIMIT_SAG:
        tw_section_span_state(section, span, &state);
        if (!isnan(limit->most)) {
            offer_most(place, state.sag_m, limit->most);
        }
        if (!isnan(limit->least)) {
            offer_least(place, state.sag_m, limit->least, 1.0);
        }
        place->station_m = state.sag_station_m;
        return;
    case TW_LIMIT_CATENARY_CONSTANT:
        tw_section_span_state(section, span, &state);
        offer_most(place, state.horizontal_tension_N / project->line.weight_N_per_m, limit->most);
        return;
    case TW_LIMIT_SLOPE: {
        size_t first = section->piece_first[span];
        double slope = tw_span_slope(section->pieces + first, section->piece_first[span + 1] - first);
        offer_most(place, slope, limit->most);
        return;
    }
    case TW_LIMIT_SUPPORT_LOAD:
    case TW_LIMIT_UPLIFT:
    case TW_LIMIT_SWING: return;
    }
}

static double component(const tw_support_state *state, tw_direction direction)
{
    switch (direction) {
    case TW_DIRECTION_ALONG: return fabs(state->along_N);
    case TW_DIRECTION_ACROSS: return fabs(state->across_N);
    case TW_DIRECTION_DOWN: return fmax(0.0, state->down_N);
    case TW_DIRECTION_UP: return fmax(0.0, -state->down_N);
    case TW_DIRECTION_RESULTANT: break;
    }
    return state->resultant_N;
}

/* The support's own share of bare line weight: half of each span beside it. */
static double weight_share(const tw_section *section, size_t support)
{
    double length = support > 0 ? 0.5 * section->length_m[support - 1] : 0.0;
    length += support < section->span_count ? 0.5 * section->length_m[support] : 0.0;
    double share = length * section->project->line.weight_N_per_m;
    return share > 0.0 ? share : 1.0;
}

/* A hanger that is slack, or whose clamp stands no lower than its support, is lifted, whatever force is left: judged by
 * how far the clamp has risen from plumb, in hanger lengths. */
static int judge_lifted(const tw_section *section, size_t support, const tw_limit *limit, double down_N, tw_verdict *place)
{
    const tw_support *at = &section->project->supports[support];
    const double *c = section->clamp + 3 * support;
    const double swing[3] = {c[0] - at->station_m, c[1] - at->offset_m, c[2] - at->elevation_m};
    double z = swing[2], away[3];
    double length = tw_hold_drop(at);
    if (at->hold != TW_HOLD_HANGER
        || (z < 0.0
            && tw_hold_reach(at, section->ahead + 2 * support, swing, away) >= at->hanger_length_m * (1.0 - 1e-6))) {
        return 0;
    }
    double value = fmin(down_N, 0.0);
    offer(place, value, limit->least, value - limit->least, 1.0 + fmax((z + length) / length, 1e-6));
    return 1;
}

static void judge_support(const tw_project *project, const tw_limit *limit, const tw_section *section,
                          const tw_section *bare, size_t support, tw_verdict *place)
{
    const tw_support *at = &project->supports[support];
    tw_support_state state;
    tw_section_support_state(limit->kind == TW_LIMIT_SWING ? bare : section, support, &state);
    if (limit->kind == TW_LIMIT_SWING) {
        if (at->hold == TW_HOLD_HANGER) {
            offer_most(place, state.swing_rad, limit->most);
        }
    } else if (limit->kind == TW_LIMIT_UPLIFT) {
        if (!judge_lifted(section, support, limit, state.down_N, place)) {
            offer_least(place, state.down_N, limit->least, weight_share(section, support));
        }
    } else {
        double most = isnan(limit->share) ? limit->most : limit->share * tw_line_capacity(at, limit->direction);
        if (!isnan(most)) {
            offer_most(place, component(&state, limit->direction), most);
        }
    }
    place->station_m = tw_route_support_station(project, support);
}

/* The other line of a spacing in a condition; NULL where there is none. */
static const tw_course *course_of(const tw_project *project, size_t limit, size_t condition)
{
    size_t row = limit * project->condition_count + condition;
    size_t course = project->course_count > 0 ? project->limit_course[row] : TW_NONE;
    return course < project->course_count ? &project->courses[course] : NULL;
}

static int looks_at_supports(tw_limit_kind kind)
{
    return kind == TW_LIMIT_SUPPORT_LOAD || kind == TW_LIMIT_UPLIFT || kind == TW_LIMIT_SWING;
}

tw_verdict tw_limit_judge(const tw_project *project, size_t limit, size_t condition, const tw_section *section,
                          const tw_section *bare)
{
    const tw_limit *rule = &project->limits[limit];
    const unsigned char *covers = project->limit_covers + limit * project->support_count;
    const tw_course *other = course_of(project, limit, condition);
    int supports = looks_at_supports(rule->kind);
    size_t count = supports ? project->support_count : section->span_count;
    const tw_verdict nowhere = {.span = TW_NONE,
                                .support = TW_NONE,
                                .station_m = (double)NAN,
                                .other_at_m = (double)NAN,
                                .other_position_m = {(double)NAN, (double)NAN, (double)NAN}};
    tw_verdict worst = nowhere;
    for (size_t k = 0; k < count; k++) {
        tw_verdict place = nowhere;
        if (!covers[k]) {
            continue;
        }
        if (supports) {
            place.support = k;
            judge_support(project, rule, section, bare, k, &place);
        } else {
            place.span = k;
            const keep_from spaced = {other, worst.judged ? worst.value : INFINITY};
            judge_span(project, rule, section, k, &spaced, &place);
        }
        if (place.judged && (!worst.judged || !(place.utilisation <= worst.utilisation))) {
            worst = place;
        }
    }
    return worst;
}

void tw_limit_judge_swap(const tw_project *project, size_t limit, size_t condition, const tw_section *section,
                         const tw_section *strung, tw_verdict *verdict)
{
    const tw_limit *rule = &project->limits[limit];
    const unsigned char *covers = project->limit_covers + limit * project->support_count;
    const tw_course *other = course_of(project, limit, condition);
    const tw_course *before = &project->courses[rule->strung_course - 1];
    for (size_t k = 0; other && verdict->judged && k < section->span_count; k++) {
        tw_crossing_place found;
        if (!covers[k] || !tw_crossing_swapped(section, other, strung, before, k, &found)
            || -fabs(found.gap_m) >= verdict->value) {
            continue;
        }
        offer_least(verdict, -fabs(found.gap_m), rule->least, 1.0);
        const tw_route_leg leg = tw_route_leg_of(project, k);
        verdict->span = k;
        verdict->station_m = tw_route_station(&leg, found.position);
        verdict->other_at_m = found.other_at_m;
        tw_copy(found.other_position, verdict->other_position_m);
    }
}
