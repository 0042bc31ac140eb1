/* section_solve: first pulls, the active set of slack hangers, and the hung section; see section.h for the formulas. */
#include <math.h>
#include <string.h>

#include "hold.h"
#include "section_feed.h"
#include "section_newton.h"
#include "uniform.h"
#include "vector.h"

enum { IMPATIENT_STEPS = 30, WARM_ROUNDS = 6 };
static const double CARRIES_NOTHING = 1e-3; /* force of a hanger over the largest tension */
static const double CARRIES_LITTLE = 0.1;
static const double SOFTEST = 2e-9; /* the last rounding of a slack hanger, over the largest tension */

static void mean_load(const tw_section *section, size_t span, double mean[3])
{
    mean[0] = mean[1] = mean[2] = 0.0;
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        const tw_piece *piece = &section->pieces[p];
        double total[3];
        tw_piece_total(piece, total);
        tw_axpy(mean, 1.0, total, mean);
        tw_axpy(mean, 1.0, piece->force, mean);
    }
    for (int i = 0; i < 3; i++) {
        mean[i] /= section->length_m[span];
    }
}

/* The tangent of a curved law at a tension, as a linear one. */
static void straighten(const tw_material *material, double tension_N, tw_uniform *span)
{
    tw_material_point at = tw_material_under(material, tension_N);
    span->stiffness_N = at.tangent_N;
    span->strain = material->strain + at.strain - tension_N / at.tangent_N;
}

/* First pulls: each span for itself between plumb clamps, its load spread evenly. */
static tw_status start_pulls(tw_section *section)
{
    for (size_t k = 0; k < section->span_count; k++) {
        const tw_support *near = &section->project->supports[k];
        double chord[3], mean[3], p[3], h, v;
        tw_hold_chord(near, near + 1, chord);
        chord[2] += tw_hold_drop(near);
        chord[2] -= tw_hold_drop(near + 1);
        mean_load(section, k, mean);
        double size = tw_norm(mean);
        for (int i = 0; i < 3; i++) {
            mean[i] = size > 0.0 ? mean[i] / size : (i == 2 ? -1.0 : 0.0);
        }
        double drop = tw_dot(chord, mean);
        tw_axpy(chord, -drop, mean, p);
        tw_uniform span = {tw_norm(p), drop, size, section->materials[k].stiffness_N,
                                 section->materials[k].strain};
        if (!(span.span > 0.0)) {
            return TW_NOT_SETTLED;
        }
        tw_status status = tw_uniform_settle(&span, section->length_m[k], &h, &v);
        if (status == TW_OK && section->materials[k].curve) {
            straighten(&section->materials[k], h, &span);
            status = tw_uniform_settle(&span, section->length_m[k], &h, &v);
        }
        if (status == TW_SLACK || status == TW_NOT_FINITE) {
            return status;
        }
        for (int i = 0; i < 3; i++) {
            section->pull[3 * k + (size_t)i] = h / span.span * p[i] + v * mean[i];
        }
    }
    return TW_OK;
}

/* Clamps: of holds that carry by their swing, of slack hangers by where their run passes. */
static void place_clamps(tw_section *section, const tw_section_scratch *s)
{
    for (size_t r = 0; r <= s->runs; r++) {
        size_t j = section->run_first[r];
        double a[3];
        tw_hold_attachment(&section->project->supports[j], a);
        tw_axpy(a, 1.0, s->swing + 3 * j, section->clamp + 3 * j);
    }
    for (size_t r = 0; r < s->runs; r++) {
        const double *start = section->clamp + 3 * section->run_first[r];
        for (size_t k = section->run_first[r] + 1; k < section->run_first[r + 1]; k++) {
            tw_axpy(start, 1.0, s->reach + 3 * k, section->clamp + 3 * k);
        }
    }
}

/* Positions, and D = sum over spans of -int W* and over holds of F . a + (hold energy), datum at the first support. */
static void finish(tw_section *section, const tw_section_scratch *s)
{
    double lower = 0.0, datum[3];
    place_clamps(section, s);
    tw_hold_attachment(&section->project->supports[0], datum);
    for (size_t j = 0; j <= section->span_count; j++) {
        const tw_support *support = &section->project->supports[j];
        const double *F = section->hold_force + 3 * j;
        double a[3];
        tw_hold_attachment(support, a);
        tw_axpy(a, -1.0, datum, a);
        lower += tw_dot(F, a) + tw_hold_energy(support, section->ahead + 2 * j, F, section->soft_N);
    }
    for (size_t r = 0; r < s->runs; r++) {
        const double *start = section->clamp + 3 * section->run_first[r];
        for (size_t k = section->run_first[r]; k < section->run_first[r + 1]; k++) {
            for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
                tw_piece *piece = &section->pieces[p];
                double conjugate;
                tw_axpy(piece->start, 1.0, start, piece->start);
                tw_piece_energy(&section->materials[k], piece, &conjugate, NULL, NULL);
                lower -= conjugate;
            }
        }
    }
    section->energy_lower_J = lower;
}

static double longest_chord(const tw_section *section)
{
    double longest = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        const tw_support *near = &section->project->supports[k];
        double chord[3];
        tw_hold_chord(near, near + 1, chord);
        longest = fmax(longest, fmax(tw_norm(chord), section->length_m[k]));
    }
    return longest;
}

static double largest_pull(const tw_section *section)
{
    double largest = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        largest = fmax(largest, tw_norm(section->pull + 3 * k));
    }
    return largest;
}

static int is_hanger(const tw_section *section, size_t j)
{
    return section->project->supports[j].hold == TW_HOLD_HANGER && section->feed[j] == TW_FEED_NONE;
}

/* Take the hangers that carry least as slack: all that carry next to nothing, or else the least of those that carry
 * little. Returns how many. */
static size_t slacken(tw_section *section)
{
    double largest = largest_pull(section);
    double least = CARRIES_LITTLE * largest;
    size_t at = 0, count = 0;
    for (size_t j = 1; j < section->span_count; j++) {
        double force = tw_norm(section->hold_force + 3 * j);
        if (!is_hanger(section, j) || section->slack[j]) {
            continue;
        }
        if (force < CARRIES_NOTHING * largest) {
            section->slack[j] = 1;
            count++;
        } else if (force < least) {
            least = force;
            at = j;
        }
    }
    if (count == 0 && at > 0) {
        section->slack[at] = 1;
        count = 1;
    }
    return count;
}

/* A slack hanger whose clamp is beyond its reach carries after all: start it with a small force. Returns how many. */
static size_t tighten(tw_section *section, const tw_section_scratch *s)
{
    double force = CARRIES_NOTHING * largest_pull(section);
    size_t count = 0;
    place_clamps(section, s);
    for (size_t j = 1; j < section->span_count; j++) {
        double swing[3], away[3];
        tw_hold_attachment(&section->project->supports[j], swing);
        tw_axpy(section->clamp + 3 * j, -1.0, swing, swing);
        double size = tw_hold_reach(&section->project->supports[j], section->ahead + 2 * j, swing, away);
        if (section->slack[j] && size > section->project->supports[j].hanger_length_m * (1.0 + 1e-11)) {
            section->slack[j] = 0;
            tw_axpy(section->pull + 3 * j, force / size, away, section->pull + 3 * j);
            count++;
        }
    }
    return count;
}

/* Active set over slack hangers, changed at most so many times. */
static tw_status iterate_slack(tw_section *section, const tw_options *options, tw_section_scratch *s, double scale,
                               size_t rounds)
{
    tw_section_patience how = {scale, options->newton_most < IMPATIENT_STEPS ? options->newton_most : IMPATIENT_STEPS, 0};
    tw_status status = TW_NOT_SETTLED;
    for (size_t round = 0; round < rounds; round++) {
        status = tw_section_iterate(section, options, s, &how);
        if (status == TW_OK) {
            if (tighten(section, s) == 0) {
                return TW_OK;
            }
        } else if (status != TW_NOT_SETTLED || how.patient) {
            return status;
        } else if (slacken(section) == 0) {
            how.patient = 1;
            how.steps = options->newton_most;
        }
    }
    return TW_NOT_SETTLED;
}

/* The hangers that the rounded-off kinks leave well inside their reach are slack: once more with those. */
static tw_status iterate_hardened(tw_section *section, const tw_options *options, tw_section_scratch *s, double scale)
{
    for (size_t j = 1; j < section->span_count; j++) {
        double away[3];
        double reach = tw_hold_reach(&section->project->supports[j], section->ahead + 2 * j, s->swing + 3 * j, away);
        section->slack[j] = is_hanger(section, j) && reach < section->project->supports[j].hanger_length_m * (1.0 - 1e-4);
    }
    section->soft_N = 0.0;
    return iterate_slack(section, options, s, scale, WARM_ROUNDS);
}

/* The last resort: follow the rounded-off kinks of l |F| down to next to nothing. */
static tw_status iterate_softened(tw_section *section, const tw_options *options, tw_section_scratch *s, double scale)
{
    const tw_section_patience how = {scale, options->newton_most, 1};
    memset(section->slack, 0, section->span_count + 1);
    tw_status status = start_pulls(section);
    double largest = largest_pull(section);
    for (double soft = 0.1; status == TW_OK && soft > SOFTEST; soft *= 0.1) {
        section->soft_N = soft * largest;
        status = tw_section_iterate(section, options, s, &how);
        largest = fmin(largest, largest_pull(section));
    }
    return status;
}

static int has_hanger(const tw_section *section)
{
    for (size_t j = 0; j <= section->span_count; j++) {
        if (is_hanger(section, j)) {
            return 1;
        }
    }
    return 0;
}

static tw_status iterate_cold(tw_section *section, const tw_options *options, tw_section_scratch *s, double scale)
{
    memset(section->slack, 0, section->span_count + 1);
    tw_status status = start_pulls(section);
    return status == TW_OK ? iterate_slack(section, options, s, scale, 4 * section->span_count + 4) : status;
}

/* Softened, then hardened; what the hardening cannot settle stays softened. */
static tw_status iterate_around_kinks(tw_section *section, const tw_options *options, tw_section_scratch *s, double scale)
{
    tw_status status = iterate_softened(section, options, s, scale);
    if (status != TW_OK) {
        return status;
    }
    status = iterate_hardened(section, options, s, scale);
    return status == TW_NOT_SETTLED ? iterate_softened(section, options, s, scale) : status;
}

tw_status tw_section_rest(tw_section *section, const tw_options *options, tw_section_scratch *s, int warm)
{
    double scale = longest_chord(section);
    section->soft_N = 0.0;
    tw_status status = warm ? iterate_slack(section, options, s, scale, WARM_ROUNDS) : TW_NOT_SETTLED;
    if (status == TW_NOT_SETTLED) {
        status = iterate_cold(section, options, s, scale);
    }
    if (status == TW_NOT_SETTLED && has_hanger(section)) {
        status = iterate_around_kinks(section, options, s, scale);
    }
    return status;
}

tw_status tw_section_solve(tw_section *section, const tw_options *options, int warm)
{
    tw_section_scratch s = tw_section_carve(section);
    section->steps = 0;
    tw_status status = tw_section_feeds(section) ? tw_section_run_over(section, options, &s, warm)
                                                 : tw_section_rest(section, options, &s, warm);
    if (status == TW_OK || tw_status_stops(status)) {
        finish(section, &s);
    }
    return status;
}
