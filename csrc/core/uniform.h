/* uniform: one span under one uniform load, in the plane of that load; the scalar kernel behind the array functions.
 *
 * The elastic catenary of Irvine, Cable Structures (1981), ch. 1, in the unknowns h (tension across the load, constant)
 * and v (tension along the load at the start), with the cancellation-free forms of span.h.
 */
#ifndef TW_UNIFORM_H
#define TW_UNIFORM_H

#include "line.h"
#include "span.h"
#include "status.h"

typedef struct tw_uniform {
    double span;        /* across the load direction, m, > 0 */
    double drop;        /* far end along the load direction, m */
    double weight;      /* N per natural metre, >= 0 */
    double stiffness_N; /* EA */
    double strain;      /* e0 */
} tw_uniform;

/* Natural length -> h and v. TW_SLACK: no load and longer than the chord. */
tw_status tw_uniform_settle(const tw_uniform *span, double natural_length_m, double *h_N, double *v_N);

/* h > 0 -> natural length and v. */
tw_status tw_uniform_length(const tw_uniform *span, double h_N, double *natural_length_m, double *v_N);

/* A span in route axes: plan distance and rise between its ends, load down and across per natural metre. */
typedef struct tw_plain_span {
    double span_m;
    double rise_m;
    double natural_length_m; /* ignored by tw_plain_span_length */
    double stiffness_N;
    double weight_N_per_m;
    double across_N_per_m;
    double strain;
} tw_plain_span;

typedef struct tw_plain_state {
    double horizontal_tension_N; /* along the span's plan direction */
    double tension_from_N;
    double tension_to_N;
    double sag_m;
    double slant_sag_m;
    double line_length_m;
} tw_plain_state;

/* Both refuse what is not finite or out of range with TW_ERROR_RANGE. */
tw_status tw_plain_span_settle(const tw_plain_span *span, tw_plain_state *state);
tw_status tw_plain_span_length(const tw_plain_span *span, double horizontal_tension_N, double *natural_length_m);

#endif
