/* fit: the line that hangs closest to points measured on it, by least squares.
 *
 * Unknown is the pull of the whole line, or the natural length of every span that carries points. The weighted squares
 *     chi2 = sum_i ((measured_i - line_i) / sigma_i)^2        over elevations, and offsets where they were measured
 * are made least by the method of Levenberg and Marquardt (Marquardt, J. SIAM 11, 1963, 431-441) on the exact line, bare,
 * at each point's temperature. Derivatives are central differences of exact lines. The search runs in the logarithm of
 * the pull, or of the pull at which a lone span between plumb clamps would have the length: sags are near to exponential
 * in it, and every length from slack to pretensioned is a number. Covariance: (J^T W J)^-1, as in any book on linear
 * least squares.
 */
#ifndef TW_FIT_H
#define TW_FIT_H

#include "line.h"

typedef enum tw_fit_unknown {
    TW_FIT_PULL,   /* one pull, hangers plumb, as strung by that rule */
    TW_FIT_LENGTHS /* one natural length for each span with points; the others as by the one pull that fits best */
} tw_fit_unknown;

/* Points this close to a support, as a share of the span, tell of no span: its length is not asked of them. */
#define TW_FIT_INNER 1e-3

typedef struct tw_fit {
    tw_status status;
    int has_values;            /* 1: what follows describes a point; with TW_OK the least squares, else the best so far */
    size_t span_count;
    size_t observation_count;
    size_t unknown_count;      /* 1, or the spans with points */
    size_t *span;              /* [unknown_count] which span's length; TW_NONE: the pull; owned */
    size_t *place;             /* [observation_count] the span in whose inner part each point lies, or TW_NONE; owned */
    double *value;             /* [unknown_count] N or m; owned */
    double *covariance;        /* [unknown_count^2] of value, N^2 or m^2: times s^2 where no sigma was given; owned; zero unless TW_OK */
    double *length_m;          /* [span_count] natural lengths; owned */
    double *length_rate;       /* [span_count] of each length per newton of the pull, m/N; NaN: lengths; owned */
    double *residual_m;        /* [2 observation_count] measured less line: elevations, offsets (NaN: none); owned */
    double *leverage;          /* [2 observation_count] share of each measurement in its own fitted value; NaN unless TW_OK;
                                  owned */
    double chi2;               /* sum of squares over sigma^2; m^2 where no sigma was given */
    size_t row_count;          /* elevations and offsets measured */
    double step_relative;      /* of the pull, what a last step at the answer would still move, by other differences */
    size_t undetermined;       /* a span whose length no point shows, with TW_UNDETERMINED; else TW_NONE */
    size_t steps;              /* tried */
    size_t evaluations;        /* sets of residuals computed, derivatives included */
} tw_fit;

/* Room for the answer; NULL without memory. NULL-safe free. Observations as tw_check_observations passes them. */
tw_fit *tw_fit_create(const tw_project *project, const tw_observation *observations, size_t count,
                      tw_fit_unknown unknown);
void tw_fit_free(tw_fit *fit);

/* The search. TW_OK: found, and judged again. TW_UNDETERMINED: fewer measurements than unknowns, or points that do not show
 * them. TW_EVALUATION_LIMIT (options->evaluations_most bounds the steps), TW_DEADLINE, TW_CANCELLED: the best so far.
 * TW_NOT_SETTLED, TW_SLACK, TW_NOT_FINITE: no least squares found. Errors: memory. */
tw_status tw_fit_search(const tw_project *project, const tw_observation *observations, size_t count,
                        tw_fit_unknown unknown, const tw_options *options, tw_fit *fit);

#endif
