/* section_solve: damped Newton on the complementary energy of a section; see section.h for the formulas. */
#include <float.h>
#include <math.h>
#include <string.h>

#include "couple.h"
#include "hold.h"
#include "section.h"
#include "uniform.h"
#include "vector.h"

static const double SOFTEST = 2e-9; /* the last rounding of a slack hanger, over the largest tension */

/* Scratch, carved from section->work. */
typedef struct scratch {
    double *error;  /* [3 n] closing error, the gradient of -D */
    double *step;   /* [3 n] */
    double *before; /* [3 n] pulls before the step */
    double *end;    /* [3 n] end of each span, measured from its start clamp */
    double *far;    /* [3 n] tension at each span's end */
    double *bend;   /* [6 n] flexibility of each span */
    double *diag;   /* [9 n] */
    double *off;    /* [9 n] */
    double *swing;  /* [3 (n + 1)] clamp measured from the support */
} scratch;

static scratch carve(const tw_section *section)
{
    size_t n = section->span_count;
    scratch s;
    s.error = section->work;
    s.step = s.error + 3 * n;
    s.before = s.step + 3 * n;
    s.end = s.before + 3 * n;
    s.far = s.end + 3 * n;
    s.bend = s.far + 3 * n;
    s.diag = s.bend + 6 * n;
    s.off = s.diag + 9 * n;
    s.swing = s.off + 9 * n;
    return s;
}

/* F_j = t_{j-1}(S) - R_j - G_j. */
static void balance_holds(tw_section *section, const scratch *s)
{
    for (size_t j = 0; j <= section->span_count; j++) {
        double *F = section->hold_force + 3 * j;
        for (int i = 0; i < 3; i++) {
            double behind = j > 0 ? s->far[3 * (j - 1) + (size_t)i] : 0.0;
            double ahead = j < section->span_count ? section->pull[3 * j + (size_t)i] : 0.0;
            F[i] = behind - ahead - section->clamp_load[3 * j + (size_t)i];
        }
        tw_hold_swing(&section->project->supports[j], F, section->soft_N, s->swing + 3 * j);
    }
}

/* Closing error of every span at the present pulls; its largest size. */
static double close_up(tw_section *section, const scratch *s, int with_flexibility)
{
    const double zero[3] = {0.0, 0.0, 0.0};
    double worst = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        size_t first = section->piece_first[k];
        tw_span_hang(&section->material, section->pieces + first, section->piece_first[k + 1] - first, zero,
                     section->pull + 3 * k, s->end + 3 * k, s->far + 3 * k, with_flexibility ? s->bend + 6 * k : NULL);
    }
    balance_holds(section, s);
    for (size_t k = 0; k < section->span_count; k++) {
        double near[3], far[3];
        double *error = s->error + 3 * k;
        tw_hold_attachment(&section->project->supports[k], near);
        tw_hold_attachment(&section->project->supports[k + 1], far);
        for (int i = 0; i < 3; i++) {
            size_t at = 3 * k + (size_t)i;
            error[i] = s->end[at] - (far[i] - near[i]) + (s->swing[at] - s->swing[at + 3]);
        }
        double size = tw_norm(error);
        worst = size > worst || !isfinite(size) ? size : worst;
    }
    return worst;
}

static int newton_step(tw_section *section, const scratch *s)
{
    size_t n = section->span_count;
    memset(s->off, 0, 9 * n * sizeof(double));
    for (size_t k = 0; k < n; k++) {
        const double *b = s->bend + 6 * k;
        const double block[9] = {b[0], b[1], b[2], b[1], b[3], b[4], b[2], b[4], b[5]};
        double *diag = s->diag + 9 * k;
        memcpy(diag, block, sizeof block);
        tw_hold_flexibility(&section->project->supports[k], section->hold_force + 3 * k, section->soft_N, 1.0, diag);
        tw_hold_flexibility(&section->project->supports[k + 1], section->hold_force + 3 * k + 3, section->soft_N, 1.0,
                            diag);
        if (k + 1 < n) {
            tw_hold_flexibility(&section->project->supports[k + 1], section->hold_force + 3 * k + 3,
                                section->soft_N, -1.0, s->off + 9 * k);
        }
    }
    if (!tw_couple_factor(s->diag, s->off, n)) {
        return 0;
    }
    for (size_t i = 0; i < 3 * n; i++) {
        s->step[i] = -s->error[i];
    }
    tw_couple_solve(s->diag, s->off, n, s->step);
    return 1;
}

static double slope_along(const scratch *s, size_t n)
{
    double slope = 0.0;
    for (size_t i = 0; i < 3 * n; i++) {
        slope += s->step[i] * s->error[i];
    }
    return slope;
}

/* Go along the step until the slope of -D there is no steeper upwards than it went down at the start: -D is convex, so
 * a slope still downwards never overshoots. Returns the closing error, or infinity. */
static double advance(tw_section *section, const scratch *s)
{
    size_t n = section->span_count;
    double slope = fabs(slope_along(s, n));
    double factor = 1.0;
    memcpy(s->before, section->pull, 3 * n * sizeof(double));
    for (int cut = 0; cut < 60; cut++, factor *= 0.5) {
        for (size_t i = 0; i < 3 * n; i++) {
            section->pull[i] = s->before[i] + factor * s->step[i];
        }
        double worst = close_up(section, s, 1);
        if (isfinite(worst) && slope_along(s, n) <= 0.9 * slope + DBL_MIN) {
            return worst;
        }
    }
    return INFINITY;
}

static void mean_load(const tw_section *section, size_t span, double mean[3])
{
    mean[0] = mean[1] = mean[2] = 0.0;
    for (size_t p = section->piece_first[span]; p < section->piece_first[span + 1]; p++) {
        const tw_piece *piece = &section->pieces[p];
        tw_axpy(mean, piece->length_m, piece->load, mean);
        tw_axpy(mean, 1.0, piece->force, mean);
    }
    for (int i = 0; i < 3; i++) {
        mean[i] /= section->length_m[span];
    }
}

/* First pulls: each span for itself between plumb clamps, its load spread evenly. */
static tw_status start_pulls(tw_section *section)
{
    for (size_t k = 0; k < section->span_count; k++) {
        const tw_support *near = &section->project->supports[k];
        double a[3], chord[3], mean[3], p[3], h, v;
        tw_hold_attachment(near, a);
        tw_hold_attachment(near + 1, chord);
        tw_axpy(chord, -1.0, a, chord);
        chord[2] += near->hold == TW_HOLD_HANGER ? near->hanger_length_m : 0.0;
        chord[2] -= near[1].hold == TW_HOLD_HANGER ? near[1].hanger_length_m : 0.0;
        mean_load(section, k, mean);
        double size = tw_norm(mean);
        for (int i = 0; i < 3; i++) {
            mean[i] = size > 0.0 ? mean[i] / size : (i == 2 ? -1.0 : 0.0);
        }
        double drop = tw_dot(chord, mean);
        tw_axpy(chord, -drop, mean, p);
        const tw_uniform span = {tw_norm(p), drop, size, section->material.stiffness_N, section->material.strain};
        if (!(span.span > 0.0)) {
            return TW_NOT_SETTLED;
        }
        tw_status status = tw_uniform_settle(&span, section->length_m[k], &h, &v);
        if (status == TW_SLACK || status == TW_NOT_FINITE) {
            return status;
        }
        for (int i = 0; i < 3; i++) {
            section->pull[3 * k + (size_t)i] = h / span.span * p[i] + v * mean[i];
        }
    }
    return TW_OK;
}

/* Positions, and D = sum over spans of -int W* and over holds of F . a + (hold energy), datum at the first support. */
static void finish(tw_section *section, const scratch *s)
{
    double lower = 0.0, datum[3];
    tw_hold_attachment(&section->project->supports[0], datum);
    for (size_t j = 0; j <= section->span_count; j++) {
        const tw_support *support = &section->project->supports[j];
        const double *F = section->hold_force + 3 * j;
        double a[3];
        tw_hold_attachment(support, a);
        tw_axpy(a, 1.0, s->swing + 3 * j, section->clamp + 3 * j);
        tw_axpy(a, -1.0, datum, a);
        lower += tw_dot(F, a) + tw_hold_energy(support, F, section->soft_N);
    }
    for (size_t k = 0; k < section->span_count; k++) {
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            tw_piece *piece = &section->pieces[p];
            double conjugate;
            tw_axpy(piece->start, 1.0, section->clamp + 3 * k, piece->start);
            tw_piece_energies(&section->material, piece->tension, piece->load, piece->length_m, &conjugate, NULL, NULL);
            lower -= conjugate;
        }
    }
    section->energy_lower_J = lower;
}

static double longest_chord(const tw_section *section)
{
    double longest = 0.0;
    for (size_t k = 0; k < section->span_count; k++) {
        const tw_support *near = &section->project->supports[k];
        double chord[3], a[3];
        tw_hold_attachment(near, a);
        tw_hold_attachment(near + 1, chord);
        tw_axpy(chord, -1.0, a, chord);
        longest = fmax(longest, fmax(tw_norm(chord), section->length_m[k]));
    }
    return longest;
}

/* Newton from the pulls that stand. */
static tw_status iterate(tw_section *section, const tw_options *options, const scratch *s, double scale)
{
    double wanted = options->closing_relative * scale;
    double enough = 1e-10 * scale;
    size_t first = section->steps;
    double worst = close_up(section, s, 1);
    while (worst > wanted || section->steps == first) {
        double before = worst;
        if (section->steps - first >= options->newton_most || !isfinite(worst) || !newton_step(section, s)) {
            return TW_NOT_SETTLED;
        }
        worst = advance(section, s);
        section->steps++;
        section->closing_m = worst;
        if (!isfinite(worst)) {
            return TW_NOT_SETTLED;
        }
        if (before <= enough && worst > 0.25 * before) {
            break; /* at the floor of rounding */
        }
        if (options->poll && options->poll(options->poll_data)) {
            return TW_CANCELLED;
        }
    }
    return TW_OK;
}

static int has_hanger(const tw_section *section)
{
    for (size_t j = 0; j <= section->span_count; j++) {
        if (section->project->supports[j].hold == TW_HOLD_HANGER) {
            return 1;
        }
    }
    return 0;
}

/* A hanger may hang slack: follow the rounded-off kink of l |F| down to nothing. */
static tw_status iterate_softened(tw_section *section, const tw_options *options, const scratch *s, double scale)
{
    double largest = 0.0;
    tw_status status = start_pulls(section);
    for (size_t k = 0; k < section->span_count; k++) {
        largest = fmax(largest, tw_norm(section->pull + 3 * k));
    }
    for (double soft = 0.1; status == TW_OK && soft > SOFTEST; soft *= 0.1) {
        section->soft_N = soft * largest;
        status = iterate(section, options, s, scale);
    }
    return status;
}

tw_status tw_section_solve(tw_section *section, const tw_options *options, int warm)
{
    const scratch s = carve(section);
    double scale = longest_chord(section);
    section->steps = 0;
    section->soft_N = 0.0;
    tw_status status = warm ? iterate(section, options, &s, scale) : TW_NOT_SETTLED;
    if (status == TW_NOT_SETTLED) {
        status = start_pulls(section);
        if (status == TW_OK) {
            status = iterate(section, options, &s, scale);
        }
    }
    if (status == TW_NOT_SETTLED && has_hanger(section)) {
        status = iterate_softened(section, options, &s, scale);
    }
    if (status == TW_OK || status == TW_CANCELLED) {
        finish(section, &s);
    }
    return status;
}
