/* fit_search: what the files of fit share. */
#ifndef TW_FIT_SEARCH_H
#define TW_FIT_SEARCH_H

#include "fit.h"
#include "trial.h"

/* The bare line at the survey's temperatures as a function of the unknowns. */
typedef struct tw_fit_model {
    const tw_project *given;
    tw_project bare;           /* the same line with the survey's temperatures as its conditions, strung to length_m */
    const tw_observation *seen;
    size_t count;
    size_t span_count;
    tw_fit_unknown unknown;
    size_t unknown_count;
    const size_t *span;        /* [unknown_count] */
    const size_t *place;       /* [count] each observation's span, or TW_NONE */
    double *sums;              /* [2 span_count] of the parabolas to begin with; owned */
    size_t row_count;
    tw_condition *conditions;  /* [count] owned */
    size_t *condition;         /* [count] of each observation; owned */
    double *length_m;          /* [span_count] owned */
    double *work;              /* of stringing; owned */
    tw_pulling *pulling;       /* how it is strung over sheaves; NULL: clamped; owned */
    double *side;              /* [2 row_count] of derivatives; owned */
    tw_trial *trial;           /* owned */
    double sigma_m;            /* least of the given; 1 without */
    double scale_m;            /* longest span */
    const tw_options *options;
    double deadline;
    size_t evaluations;
} tw_fit_model;

/* TW_OK or TW_ERROR_MEMORY; close in either case. */
tw_status tw_fit_open(tw_fit_model *model);
void tw_fit_close(tw_fit_model *model);

/* The span in whose inner part a point lies, or TW_NONE; by bisection. */
size_t tw_fit_span_of(const tw_project *project, double station_m);

/* Natural lengths at the unknowns q (logarithms of pulls) into model->length_m. */
tw_status tw_fit_lengths(tw_fit_model *model, const double *q);

/* Residuals in sigmas of model->sigma_m: measured less line, elevations first, then the offsets that were measured.
 * out [row_count]. */
tw_status tw_fit_residuals(tw_fit_model *model, const double *q, double *out);

/* The same, derived by each unknown: out [row_count][unknown_count], central differences of +-step; q is restored. */
tw_status tw_fit_derivatives(tw_fit_model *model, double *q, double step, double *out);

/* Whether to go on: the clock and the poll. */
tw_status tw_fit_clock(const tw_fit_model *model);

/* Where to begin: each span as a parabola through its points; for the pull one parabola's pull through all. */
void tw_fit_start(const tw_fit_model *model, double *q);

/* Square system of least squares: A = J^T J, scaled to a unit diagonal in place. */
typedef struct tw_fit_normal {
    size_t count;
    double *factor;   /* [count^2] Cholesky factor of the scaled A + damping, lower */
    double *matrix;   /* [count^2] scaled A */
    double *scale;    /* [count] roots of A's diagonal */
    double *gradient; /* [count] J^T r */
} tw_fit_normal;

/* Both ask the model's clock. unknown: one whose pivot is not above least, in J's unit: the others determine it, or no row
 * shows it; TW_NONE where the factor is there. */
tw_status tw_fit_normal_form(const tw_fit_model *model, tw_fit_normal *normal, const double *jacobian,
                             const double *residual);
tw_status tw_fit_normal_factor(const tw_fit_model *model, tw_fit_normal *normal, double damping, double least,
                               size_t *unknown);
/* x = -(A + damping)^-1 g for any g [count]; x may be g. */
void tw_fit_normal_solve(const tw_fit_normal *normal, const double *g, double *x);

#endif
