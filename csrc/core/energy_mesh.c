/* energy_mesh: makes the discretised line of energy.h out of the exact line of section.h. */
#include "energy.h"

#include <math.h>
#include <string.h>

#include "alloc.h"
#include "hold.h"
#include "route.h"
#include "sum.h"
#include "vector.h"

enum { BLOCK = TW_BLOCKTRI_SIZE };

/* A mesh leaves the force of a link within about 1e-8 of its own size; k l is this many times EA + F, so that the link's
 * length is then right to 1e-9. */
static const double link_over_line = 10.0;

/* A piece without length has no element; its point force falls on the node before. */
static size_t piece_elements(const tw_piece *piece, double span_length_m, size_t per_span)
{
    double share = (double)per_span * piece->length_m / span_length_m;
    if (!(piece->length_m > 0.0)) {
        return 0;
    }
    return share > 1.0 ? (size_t)(share + 0.5) : 1;
}

size_t tw_energy_elements(const tw_section *section, size_t per_span)
{
    size_t count = 0;
    for (size_t k = 0; k < section->span_count; k++) {
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            count += piece_elements(&section->pieces[p], section->length_m[k], per_span);
        }
    }
    return count;
}

/* A mesh leaves the clamp's place where the exact line has it in the directions that are free, and at the support itself in
 * those that are not. */
static void fix_hold(tw_energy_hold *hold, const tw_support *support)
{
    double rate[3];
    tw_hold_springs(support, rate);
    int hangs = tw_hold_link_m(support) > 0.0;
    int rigid[3];
    for (int i = 0; i < 3; i++) {
        rigid[i] = !hangs && !isfinite(rate[i]);
        hold->stiffness[i] = hangs || rigid[i] ? 0.0 : rate[i];
    }
    int turned = hold->ahead[1] != 0.0 && rigid[0] != rigid[1];
    hold->guided = turned;
    hold->fixed[0] = rigid[0] && !turned;
    hold->fixed[1] = rigid[1] && !turned;
    hold->fixed[2] = rigid[2];
    if (turned) {
        const double own[3] = {rigid[0] ? 1.0 : 0.0, rigid[1] ? 1.0 : 0.0, 0.0};
        tw_route_out_of_axes(hold->ahead, own, hold->guide);
    }
}

static void link_hold(tw_energy_hold *hold, const tw_section *section, size_t j)
{
    const tw_support *support = &section->project->supports[j];
    double end[2][3], tension[2];
    if (!(tw_hold_link_m(support) > 0.0)) {
        return;
    }
    hold->link_count = tw_hold_strings(support, hold->ahead, section->hold_force + 3 * j, end, tension);
    double whole = tw_norm(section->hold_force + 3 * j);
    for (int i = 0; i < hold->link_count; i++) {
        tw_energy_link *link = &hold->link[i];
        tw_axpy(hold->offset, -1.0, end[i], link->offset);
        link->length_m = support->hanger_length_m;
        link->over_m = tw_norm(link->offset) - link->length_m;
        link->force_N = tension[i];
        link->stiffness = link_over_line * (section->stiffness_N + whole) / link->length_m;
    }
}

static void place_hold(tw_energy_hold *hold, const tw_section *section, size_t j)
{
    const tw_support *support = &section->project->supports[j];
    const tw_support *datum = &section->project->supports[0];
    const double point[3] = {support->station_m - datum->station_m, support->offset_m - datum->offset_m,
                             support->elevation_m - datum->elevation_m};
    const double zero[3] = {datum->station_m, datum->offset_m, datum->elevation_m};
    hold->ahead[0] = section->ahead[2 * j];
    hold->ahead[1] = section->ahead[2 * j + 1];
    fix_hold(hold, support);
    for (int i = 0; i < 3; i++) {
        hold->place[i] = hold->fixed[i] ? point[i] : section->clamp[3 * j + (size_t)i] - zero[i];
        hold->offset[i] = hold->place[i] - point[i];
    }
    if (hold->guided) {
        double astray = tw_dot(hold->guide, hold->offset);
        tw_axpy(hold->place, -astray, hold->guide, hold->place);
        tw_axpy(hold->offset, -astray, hold->guide, hold->offset);
    }
    link_hold(hold, section, j);
}

/* One element of a span that starts at natural length s of the piece: edges, length, its share of the load. */
static void mesh_element(tw_energy *energy, size_t element, size_t span, const tw_piece *piece, double s, double length)
{
    double *edge = energy->edge + BLOCK * element;
    double *node = energy->load + BLOCK * element + 3; /* start, middle, end */
    double first[3], middle[3], last[3];
    energy->length_m[element] = length;
    energy->span[element] = span;
    for (int half = 0; half < 2; half++) {
        tw_piece_ahead(&energy->materials[span], piece, s + 0.5 * length * half, 0.5 * length, edge + 3 * half, NULL);
    }
    tw_piece_load(piece, s, first);
    tw_piece_load(piece, s + 0.5 * length, middle);
    tw_piece_load(piece, s + length, last);
    tw_axpy(node, length / 6.0, first, node);
    tw_axpy(node + 3, length / 1.5, middle, node + 3);
    tw_axpy(node + 6, length / 6.0, last, node + 6);
}

/* The edges of a span must reach from clamp to clamp; what they miss (the exact line's closing error and rounding) is
 * spread over them, so that the bracket is honest whatever the exact line was. */
static void close_span(tw_energy *energy, const tw_energy_hold *from, const tw_energy_hold *to, double span_length_m)
{
    tw_sum reached[3] = {{0.0, 0.0}};
    double missing[3];
    for (size_t e = 2 * from->block; e < 2 * to->block; e++) {
        for (int i = 0; i < 3; i++) {
            tw_sum_add(&reached[i], energy->edge[3 * e + (size_t)i]);
        }
    }
    for (int i = 0; i < 3; i++) {
        missing[i] = (to->place[i] - from->place[i]) - tw_sum_value(&reached[i]);
    }
    for (size_t e = 2 * from->block; e < 2 * to->block; e++) {
        double *edge = energy->edge + 3 * e;
        tw_axpy(edge, 0.5 * energy->length_m[e / 2] / span_length_m, missing, edge);
    }
}

static void mesh_span(tw_energy *energy, const tw_section *section, size_t span, size_t per_span)
{
    size_t element = energy->holds[span].block;
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        const tw_piece *piece = &section->pieces[p];
        size_t count = piece_elements(piece, section->length_m[span], per_span);
        for (size_t i = 0; i < count; i++) {
            double length = piece->length_m / (double)count;
            mesh_element(energy, element++, span, piece, length * (double)i, length);
        }
        double *end = energy->load + BLOCK * element + 3;
        tw_axpy(end, 1.0, piece->force, end);
    }
    energy->holds[span + 1].block = element;
    close_span(energy, &energy->holds[span], &energy->holds[span + 1], section->length_m[span]);
}

static void mesh_section(tw_energy *energy, const tw_section *section, size_t per_span)
{
    for (size_t j = 0; j < energy->hold_count; j++) {
        place_hold(&energy->holds[j], section, j);
    }
    for (size_t k = 0; k < section->span_count; k++) {
        mesh_span(energy, section, k, per_span);
    }
    for (size_t j = 0; j < energy->hold_count; j++) {
        double *end = energy->load + BLOCK * energy->holds[j].block + 3;
        tw_axpy(end, 1.0, section->clamp_load + 3 * j, end);
    }
}

tw_energy *tw_energy_create(const tw_section *section, size_t per_span)
{
    tw_energy *energy = tw_calloc(1, sizeof *energy);
    if (energy == NULL) {
        return NULL;
    }
    energy->element_count = tw_energy_elements(section, per_span);
    energy->hold_count = section->span_count + 1;
    energy->materials = tw_calloc(section->span_count, sizeof *energy->materials);
    energy->span = tw_calloc(energy->element_count, sizeof *energy->span);
    energy->edge = tw_calloc(energy->element_count, BLOCK * sizeof(double));
    energy->length_m = tw_calloc(energy->element_count, sizeof(double));
    energy->load = tw_calloc(energy->element_count + 1, BLOCK * sizeof(double));
    energy->holds = tw_calloc(energy->hold_count, sizeof *energy->holds);
    if (energy->materials == NULL || energy->span == NULL || energy->edge == NULL || energy->length_m == NULL || energy->load == NULL || energy->holds == NULL) {
        goto fail;
    }
    memcpy(energy->materials, section->materials, section->span_count * sizeof *energy->materials);
    mesh_section(energy, section, per_span);
    return energy;
fail:
    tw_energy_free(energy);
    return NULL;
}

void tw_energy_free(tw_energy *energy)
{
    if (energy != NULL) {
        tw_free(energy->materials);
        tw_free(energy->span);
        tw_free(energy->edge);
        tw_free(energy->length_m);
        tw_free(energy->load);
        tw_free(energy->holds);
        tw_free(energy);
    }
}
