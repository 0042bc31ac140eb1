#include "section.h"

#include <math.h>
#include <string.h>

#include "alloc.h"
#include "load.h"
#include "route.h"
#include "vector.h"

static size_t loads_most(const tw_project *project)
{
    size_t most = 0;
    for (size_t c = 0; c < project->condition_count; c++) {
        if (project->conditions[c].load_count > most) {
            most = project->conditions[c].load_count;
        }
    }
    return most;
}

tw_section *tw_section_create(const tw_project *project)
{
    size_t spans = project->support_count - 1;
    size_t loads = loads_most(project);
    tw_section *section = tw_calloc(1, sizeof *section);
    if (!section) {
        return NULL;
    }
    section->project = project;
    section->span_count = spans;
    section->piece_capacity = spans + 2 * loads;
    section->pieces = tw_calloc(section->piece_capacity, sizeof *section->pieces);
    section->piece_first = tw_calloc(spans + 1, sizeof *section->piece_first);
    section->cut_m = tw_calloc(2 * loads + 1, sizeof(double));
    section->slack = tw_calloc(spans + 1, 1);
    section->run_first = tw_calloc(spans + 1, sizeof *section->run_first);
    section->length_m = tw_calloc(spans, sizeof(double));
    section->start_m = tw_calloc(spans + 1, sizeof(double));
    section->pull = tw_calloc(3 * spans, sizeof(double));
    section->clamp = tw_calloc(3 * (spans + 1), sizeof(double));
    section->clamp_load = tw_calloc(3 * (spans + 1), sizeof(double));
    section->hold_force = tw_calloc(3 * (spans + 1), sizeof(double));
    section->ahead = tw_calloc(2 * (spans + 1), sizeof(double));
    section->load_length_m = tw_calloc(loads + 1, sizeof(double));
    section->load_from_m = tw_calloc(loads + 1, sizeof(double));
    section->load_to_m = tw_calloc(loads + 1, sizeof(double));
    section->work = tw_calloc(TW_SECTION_WORK_PER_SPAN * spans + 3, sizeof(double));
    if (!section->pieces || !section->piece_first || !section->cut_m || !section->slack
        || !section->run_first || !section->start_m || !section->length_m || !section->pull
        || !section->clamp || !section->clamp_load || !section->hold_force || !section->ahead || !section->load_length_m
        || !section->load_from_m || !section->load_to_m || !section->work) {
        tw_section_free(section);
        return NULL;
    }
    return section;
}

void tw_section_free(tw_section *section)
{
    if (!section) {
        return;
    }
    tw_free(section->pieces);
    tw_free(section->piece_first);
    tw_free(section->cut_m);
    tw_free(section->slack);
    tw_free(section->run_first);
    tw_free(section->length_m);
    tw_free(section->start_m);
    tw_free(section->pull);
    tw_free(section->clamp);
    tw_free(section->clamp_load);
    tw_free(section->hold_force);
    tw_free(section->ahead);
    tw_free(section->load_length_m);
    tw_free(section->load_from_m);
    tw_free(section->load_to_m);
    tw_free(section->work);
    tw_free(section);
}

/* Plan direction of a span between its supports: the frame of "along" and "across". */
static void plan_direction(const tw_section *section, size_t span, double u[2])
{
    const tw_support *near = &section->project->supports[span];
    double x = near[1].station_m - near[0].station_m;
    double y = near[1].offset_m - near[0].offset_m;
    double run = hypot(x, y);
    u[0] = x / run;
    u[1] = y / run;
}

static void into_route(tw_frame frame, const double u[2], const double vector[3], double out[3])
{
    if (frame == TW_FRAME_ROUTE) {
        tw_copy(vector, out);
        return;
    }
    out[0] = u[0] * vector[0] - u[1] * vector[1];
    out[1] = u[1] * vector[0] + u[0] * vector[1];
    out[2] = vector[2];
}

/* Natural length of one end of a load's stretch. */
static tw_status place_length(tw_place place, double at_m, double whole, double total, const tw_section *strung,
                              double *s)
{
    switch (place) {
    case TW_PLACE_WHOLE: *s = whole; return TW_OK;
    case TW_PLACE_LENGTH: *s = at_m; return at_m >= 0.0 && at_m <= total * (1.0 + 1e-12) ? TW_OK : TW_ERROR_PLACE;
    case TW_PLACE_STATION: return strung ? tw_section_at_station(strung, at_m, s) : TW_ERROR_PLACE;
    }
    return TW_ERROR_PLACE;
}

/* A place within a thousand-millionth of a span of a clamp, or of a place of an earlier load, is that place to the last
 * digit: from here on places are compared exactly, so that each load acts once. */
static double snapped(const tw_section *section, size_t load, double s)
{
    double at = 0.0;
    double near = 0.0;
    for (size_t j = 0; j <= section->span_count; j++) {
        double behind = j > 0 ? section->length_m[j - 1] : INFINITY;
        double ahead = j < section->span_count ? section->length_m[j] : INFINITY;
        if (fabs(s - at) <= 1e-9 * fmin(behind, ahead)) {
            return at;
        }
        near = at < s ? 1e-9 * ahead : near;
        at += j < section->span_count ? ahead : 0.0;
    }
    for (size_t i = 0; i < load; i++) {
        if (fabs(s - section->load_from_m[i]) <= near) {
            return section->load_from_m[i];
        }
        if (fabs(s - section->load_to_m[i]) <= near) {
            return section->load_to_m[i];
        }
    }
    return s;
}

static tw_status place_loads(tw_section *section, const tw_load *loads, size_t count, const tw_section *strung)
{
    double total = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        total += section->length_m[k];
    }
    for (size_t i = 0; i < count; i++) {
        const tw_load *load = &loads[i];
        tw_status status = place_length(load->place, load->from_m, 0.0, total, strung, &section->load_from_m[i]);
        section->load_to_m[i] = section->load_from_m[i];
        if (status == TW_OK && !load->is_point) {
            status = place_length(load->place, load->to_m, total, total, strung, &section->load_to_m[i]);
        }
        if (status != TW_OK) {
            return status;
        }
        section->load_from_m[i] = snapped(section, i, section->load_from_m[i]);
        section->load_to_m[i] = snapped(section, i, section->load_to_m[i]);
        section->load_length_m[i] = load->is_point ? section->load_from_m[i] : (double)NAN;
    }
    return TW_OK;
}

/* Sorted places within (0, length) of a span that starts at natural length s0 where a load begins, ends or acts. */
static size_t cut_span(tw_section *section, size_t load_count, double s0, double length)
{
    size_t count = 0;
    for (size_t i = 0; i < load_count; i++) {
        const double places[2] = {section->load_from_m[i], section->load_to_m[i]};
        const double ends[2] = {places[0] - s0, places[1] - s0};
        for (int e = 0; e < 2; e++) {
            size_t k = count;
            if (places[e] <= s0 || places[e] >= s0 + length) {
                continue;
            }
            while (k > 0 && section->cut_m[k - 1] > ends[e]) {
                k--;
            }
            if (k > 0 && ends[e] == section->cut_m[k - 1]) {
                continue;
            }
            memmove(&section->cut_m[k + 1], &section->cut_m[k], (count - k) * sizeof(double));
            section->cut_m[k] = ends[e];
            count++;
        }
    }
    return count;
}

/* Uniform loads that cover a piece, and the point loads at its end. */
static void load_piece(const tw_section *section, const tw_load *loads, size_t load_count, const double u[2], double from,
                       double to, double s0, int last, tw_piece *piece)
{
    double vector[3];
    double middle = s0 + 0.5 * (from + to);
    for (size_t i = 0; i < load_count; i++) {
        into_route(loads[i].frame, u, loads[i].vector, vector);
        if (loads[i].is_point) {
            if (!last && section->load_from_m[i] - s0 == to) {
                tw_axpy(piece->force, 1.0, vector, piece->force);
            }
        } else if (section->load_from_m[i] < middle && middle < section->load_to_m[i]) {
            tw_axpy(piece->load, 1.0, vector, piece->load);
        }
    }
}

static void load_span(tw_section *section, size_t span, const double basic[3], const tw_load *loads, size_t load_count,
                      double s0)
{
    double u[2], vector[3];
    double length = section->length_m[span];
    size_t cuts = cut_span(section, load_count, s0, length);
    double from = 0.0;
    plan_direction(section, span, u);
    into_route(TW_FRAME_SPAN, u, basic, vector);
    for (size_t c = 0; c <= cuts; c++) {
        double to = c < cuts ? section->cut_m[c] : length;
        tw_piece *piece = &section->pieces[section->piece_count++];
        memset(piece, 0, sizeof *piece);
        piece->length_m = to - from;
        tw_copy(vector, piece->load);
        load_piece(section, loads, load_count, u, from, to, s0, c == cuts, piece);
        from = to;
    }
}

/* Half of each hanger's weight, and the point loads that act right at a clamp. */
static void load_clamps(tw_section *section, const tw_load *loads, size_t load_count)
{
    double s = 0.0;
    for (size_t j = 0; j <= section->span_count; j++) {
        const tw_support *support = &section->project->supports[j];
        double *g = section->clamp_load + 3 * j;
        size_t span = j < section->span_count ? j : j - 1;
        double u[2], vector[3];
        plan_direction(section, span, u);
        g[0] = g[1] = 0.0;
        g[2] = support->hold == TW_HOLD_HANGER ? -0.5 * support->hanger_weight_N : 0.0;
        for (size_t i = 0; i < load_count; i++) {
            if (loads[i].is_point && section->load_from_m[i] == s) {
                into_route(loads[i].frame, u, loads[i].vector, vector);
                tw_axpy(g, 1.0, vector, g);
            }
        }
        s += j < section->span_count ? section->length_m[j] : 0.0;
    }
}

tw_status tw_section_load(tw_section *section, size_t condition, const double *length_m, const tw_section *strung,
                          int with_addition)
{
    const tw_project *project = section->project;
    double reference = project->stringing.temperature_degC;
    double basic[3] = {0.0, 0.0, -project->line.weight_N_per_m};
    const tw_load *loads = NULL;
    size_t load_count = 0;
    double s0 = 0.0;
    section->material = tw_material_at(&project->line, reference, reference);
    if (condition != TW_NONE) {
        const tw_condition *state = &project->conditions[condition];
        section->material = tw_material_at(&project->line, state->temperature_degC, reference);
        tw_load_basic(&project->line, state, with_addition, basic);
        load_count = state->load_count;
        loads = load_count ? project->loads + state->load_first : NULL;
    }
    memcpy(section->length_m, length_m, section->span_count * sizeof(double));
    tw_route_ahead_all(project, section->ahead);
    tw_status status = place_loads(section, loads, load_count, strung);
    if (status != TW_OK) {
        return status;
    }
    section->piece_count = 0;
    for (size_t k = 0; k < section->span_count; k++) {
        section->piece_first[k] = section->piece_count;
        section->start_m[k] = s0;
        load_span(section, k, basic, loads, load_count, s0);
        s0 += section->length_m[k];
    }
    section->start_m[section->span_count] = s0;
    section->piece_first[section->span_count] = section->piece_count;
    load_clamps(section, loads, load_count);
    return TW_OK;
}
