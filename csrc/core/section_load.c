/* section_load: the loads of a condition put on the natural lengths of a section. */
#include <math.h>
#include <string.h>

#include "hold.h"
#include "load.h"
#include "route.h"
#include "section_load.h"
#include "vector.h"

/* What is being put on. */
typedef struct loading {
    const tw_condition *state;
    const tw_load *loads;
    size_t count;
    const tw_section *strung;
    int with_addition;
} loading;

/* A load's vector in the plan's axes; d: the span's direction. */
static void into_route(tw_frame frame, const double d[2], const double vector[3], double out[3])
{
    if (frame == TW_FRAME_ROUTE) {
        tw_copy(vector, out);
    } else {
        tw_route_out_of_axes(d, vector, out);
    }
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

/* One end of a stretch. Where the pull draws the line's own end inwards, a station between that clamp and its support is the
 * end of the line. */
static tw_status stretch_end(const loading *on, const tw_load *load, int far, double total, double *s)
{
    double at_m = far ? load->to_m : load->from_m, whole = far ? total : 0.0;
    tw_status status = place_length(load->place, at_m, whole, total, on->strung, s);
    if (status != TW_ERROR_PLACE || load->place != TW_PLACE_STATION || !on->strung) {
        return status;
    }
    size_t n = on->strung->span_count, end = far ? n : 0;
    const tw_route_leg leg = tw_route_leg_of(on->strung->project, far ? n - 1 : 0);
    double clamp_m = tw_route_station(&leg, on->strung->clamp + 3 * end);
    double support_m = tw_route_support_station(on->strung->project, end);
    if (far ? at_m < clamp_m || at_m > support_m : at_m > clamp_m || at_m < support_m) {
        return status;
    }
    *s = whole;
    return TW_OK;
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

/* Where a carriage stands: as known, or to begin with at its place as strung, or in the middle of its span. */
static tw_status place_carriage(tw_section *section, const tw_load *load, double total, const tw_section *strung, double *s)
{
    double start = section->start_m[load->carriage_span], length = section->length_m[load->carriage_span];
    tw_status status = TW_OK;
    if (isnan(section->carriage_m)) {
        section->carriage_m = start + 0.5 * length;
        if (load->place != TW_PLACE_WHOLE) {
            status = place_length(load->place, load->from_m, 0.0, total, strung, &section->carriage_m);
        }
    }
    section->carriage_m = fmin(fmax(section->carriage_m, start), start + length);
    *s = section->carriage_m;
    return status;
}

static tw_status place_load(tw_section *section, const loading *on, size_t i, double total)
{
    const tw_load *load = &on->loads[i];
    double *from = &section->load_from_m[i];
    if (load->carriage != TW_CARRIAGE_NONE) {
        return place_carriage(section, load, total, on->strung, from);
    }
    if (load->is_point) {
        return place_length(load->place, load->from_m, 0.0, total, on->strung, from);
    }
    tw_status status = stretch_end(on, load, 0, total, from);
    return status == TW_OK ? stretch_end(on, load, 1, total, &section->load_to_m[i]) : status;
}

static tw_status place_loads(tw_section *section, const loading *on)
{
    double total = section->start_m[section->span_count];
    for (size_t i = 0; i < on->count; i++) {
        const tw_load *load = &on->loads[i];
        tw_status status = place_load(section, on, i, total);
        if (load->is_point) {
            section->load_to_m[i] = section->load_from_m[i];
        }
        if (status != TW_OK) {
            return status;
        }
        section->load_from_m[i] = snapped(section, i, section->load_from_m[i]);
        section->carriage_m = load->carriage != TW_CARRIAGE_NONE ? section->load_from_m[i] : section->carriage_m;
        section->load_to_m[i] = snapped(section, i, section->load_to_m[i]);
        section->load_length_m[i] = load->is_point ? section->load_from_m[i] : (double)NAN;
    }
    return TW_OK;
}

/* One more place among the sorted ones, unless it is there. */
static size_t cut_at(tw_section *section, size_t count, double place)
{
    size_t k = count;
    while (k > 0 && section->cut_m[k - 1] > place) {
        k--;
    }
    if (k > 0 && place == section->cut_m[k - 1]) {
        return count;
    }
    memmove(&section->cut_m[k + 1], &section->cut_m[k], (count - k) * sizeof(double));
    section->cut_m[k] = place;
    return count + 1;
}

static int acts_on(const tw_load *load, size_t span)
{
    return !load->covers || load->covers[span];
}

/* Many more places under a load per run, none so near to another that a sliver is left between them. */
static size_t cut_for_run(tw_section *section, size_t count, double length)
{
    double part = length / TW_SECTION_RUN_PIECES;
    for (int i = 1; i < TW_SECTION_RUN_PIECES; i++) {
        int free = 1;
        for (size_t k = 0; free && k < count; k++) {
            free = fabs(section->cut_m[k] - part * i) > 0.01 * part;
        }
        count = free ? cut_at(section, count, part * i) : count;
    }
    return count;
}

/* Sorted places within (0, length) of a span where a load begins, ends or acts. */
static size_t cut_span(tw_section *section, const loading *on, size_t span)
{
    double s0 = section->start_m[span], length = section->length_m[span];
    size_t count = 0;
    int run = 0;
    for (size_t i = 0; i < on->count; i++) {
        const double places[2] = {section->load_from_m[i], section->load_to_m[i]};
        if (!acts_on(&on->loads[i], span)) {
            continue;
        }
        run |= on->loads[i].is_run && places[0] < s0 + length && places[1] > s0;
        for (int e = 0; e < 2; e++) {
            if (places[e] > s0 && places[e] < s0 + length) {
                count = cut_at(section, count, places[e] - s0);
            }
        }
    }
    return run ? cut_for_run(section, count, length) : count;
}

/* A load per length on a piece that begins at natural length `at` from the first support. */
static void load_stretch(const tw_section *section, const tw_load *load, size_t i, const double u[2], double factor,
                         double at, tw_piece *piece)
{
    double vector[3], to[3];
    into_route(load->frame, u, load->vector, vector);
    tw_axpy(piece->load, factor, vector, piece->load);
    if (load->is_ramp) {
        double stretch = section->load_to_m[i] - section->load_from_m[i];
        into_route(load->frame, u, load->vector_to, to);
        tw_axpy(to, -1.0, vector, to);
        tw_axpy(piece->load, factor * (at - section->load_from_m[i]) / stretch, to, piece->load);
        tw_axpy(piece->ramp, factor / stretch, to, piece->ramp);
    }
}

/* Loads that cover a piece, and the point loads at its end. */
static void load_piece(const tw_section *section, const loading *on, size_t span, const double u[2], double from, double to,
                       int last, tw_piece *piece)
{
    double s0 = section->start_m[span], middle = s0 + 0.5 * (from + to), factor = on->state->factor_load;
    double vector[3];
    for (size_t i = 0; i < on->count; i++) {
        const tw_load *load = &on->loads[i];
        int covered = section->load_from_m[i] < middle && middle < section->load_to_m[i] && acts_on(load, span);
        if (load->is_point) {
            if (!last && section->load_from_m[i] - s0 == to) {
                into_route(load->frame, u, load->vector, vector);
                tw_axpy(piece->force, factor, vector, piece->force);
            }
        } else if (covered && load->is_run) {
            double *run = section->run_vector + 3 * (piece - section->pieces);
            into_route(load->frame, u, load->vector, vector);
            tw_axpy(run, factor, vector, run);
        } else if (covered) {
            load_stretch(section, load, i, u, factor, s0 + from, piece);
        }
    }
}

static void load_span(tw_section *section, const loading *on, size_t span)
{
    double u[2], vector[3], basic[3];
    size_t cuts = cut_span(section, on, span);
    double from = 0.0;
    tw_route_direction(&section->project->supports[span], u);
    tw_load_basic(&section->project->line, on->state, tw_load_ice_share(on->state, span), tw_load_wind_angle(on->state, u),
                  on->with_addition, basic);
    into_route(TW_FRAME_SPAN, u, basic, vector);
    for (size_t c = 0; c <= cuts; c++) {
        double to = c < cuts ? section->cut_m[c] : section->length_m[span];
        tw_piece *piece = &section->pieces[section->piece_count++];
        memset(piece, 0, sizeof *piece);
        piece->length_m = to - from;
        tw_copy(vector, piece->load);
        if (section->run_vector) {
            memset(section->run_vector + 3 * (piece - section->pieces), 0, 3 * sizeof(double));
        }
        load_piece(section, on, span, u, from, to, c == cuts, piece);
        from = to;
    }
}

/* Half of each hanger's weight and wind, and the point loads that act right at a clamp. A hanger looks at the span ahead; so
 * does a load "along" or "across" at an angle point. */
static void load_clamps(tw_section *section, const loading *on)
{
    for (size_t j = 0; j <= section->span_count; j++) {
        const tw_support *support = &section->project->supports[j];
        double *g = section->clamp_load + 3 * j;
        size_t span = j < section->span_count ? j : j - 1;
        double u[2], vector[3];
        tw_route_direction(&section->project->supports[span], u);
        g[0] = g[1] = g[2] = 0.0;
        if (tw_hold_link_m(support) > 0.0) {
            tw_load_hanger(support, on->state, tw_load_wind_angle(on->state, u), vector);
            into_route(TW_FRAME_SPAN, u, vector, g);
        }
        tw_copy(g, section->link_load + 3 * j);
        for (size_t i = 0; i < on->count; i++) {
            if (on->loads[i].is_point && section->load_from_m[i] == section->start_m[j]) {
                into_route(on->loads[i].frame, u, on->loads[i].vector, vector);
                tw_axpy(g, on->state->factor_load, vector, g);
            }
        }
    }
}

/* Loads per run as the last shape makes them, or as the chord does. */
static void put_runs(tw_section *section)
{
    int known = section->run_pieces == section->piece_count;
    for (size_t k = 0; section->run_vector && k < section->span_count; k++) {
        double d[2], run = tw_route_direction(&section->project->supports[k], d);
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            double *share = section->run_share + 2 * p;
            const double *vector = section->run_vector + 3 * p;
            tw_piece *piece = &section->pieces[p];
            if (!known) {
                share[0] = run / section->length_m[k];
                share[1] = 0.0;
            }
            tw_axpy(piece->load, share[0], vector, piece->load);
            tw_axpy(piece->ramp, share[1], vector, piece->ramp);
        }
    }
    section->run_pieces = section->piece_count;
}

void tw_section_load_vector(const tw_section *section, size_t condition, const tw_load *load, size_t span, double out[3])
{
    double u[2];
    tw_route_direction(&section->project->supports[span], u);
    into_route(load->frame, u, load->vector, out);
    double factor = section->project->conditions[condition].factor_load;
    for (int i = 0; i < 3; i++) {
        out[i] *= factor;
    }
}

static void set_materials(tw_section *section, double temperature_degC)
{
    const tw_line *line = &section->project->line;
    double reference = section->project->stringing.temperature_degC;
    section->temperature_degC = temperature_degC;
    section->stiffness_N = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        tw_curve *curve = section->curves ? &section->curves[k] : NULL;
        if (k > 0 && !section->permanent) {
            section->materials[k] = section->materials[0];
        } else if (section->creeping) {
            section->materials[k] = tw_material_creeping(line, temperature_degC, reference, curve);
        } else {
            section->materials[k] = tw_material_after(line, temperature_degC, reference,
                                                      section->permanent ? &section->permanent[k] : NULL, curve);
        }
        section->stiffness_N = fmax(section->stiffness_N, section->materials[k].stiffness_N);
    }
}

tw_status tw_section_load(tw_section *section, size_t condition, const double *length_m, const tw_section *strung,
                          int with_addition)
{
    const tw_project *project = section->project;
    double reference = project->stringing.temperature_degC;
    const tw_condition bare = tw_line_bare(reference);
    loading on = {&bare, NULL, 0, strung, with_addition};
    set_materials(section, condition != TW_NONE ? project->conditions[condition].temperature_degC : reference);
    if (condition != TW_NONE) {
        on.state = &project->conditions[condition];
        on.count = on.state->load_count;
        on.loads = on.count ? project->loads + on.state->load_first : NULL;
    }
    section->condition = condition;
    memcpy(section->length_m, length_m, section->span_count * sizeof(double));
    for (size_t k = 0; k < section->span_count; k++) {
        section->start_m[k + 1] = section->start_m[k] + length_m[k];
    }
    tw_route_ahead_all(project, section->ahead);
    tw_status status = place_loads(section, &on);
    if (status != TW_OK) {
        return status;
    }
    section->piece_count = 0;
    section->fed = 0;
    for (size_t k = 0; k < section->span_count; k++) {
        section->piece_first[k] = section->piece_count;
        load_span(section, &on, k);
    }
    section->piece_first[section->span_count] = section->piece_count;
    load_clamps(section, &on);
    put_runs(section);
    return TW_OK;
}
