/* crew: the numbers of a crew sheet: what is cut, pulled, measured and clamped when a line is strung.
 *
 * All of it bare, without wind. Lengths are natural ones, at the stringing temperature. At another temperature the line over
 * the sheaves has the natural length between anchors that it is to keep, so that the same length is clamped on any day.
 */
#ifndef TW_CREW_H
#define TW_CREW_H

#include "line.h"
#include "trial.h"

/* One span at one temperature; NaN where that state does not exist. */
typedef struct tw_crew_span {
    double horizontal_tension_N;
    double tension_max_N;
    double sag_m;
    double return_s;          /* one return of a wave, exact; see wave.h */
    double return_parabola_s; /* and as common practice takes it from the sag */
} tw_crew_span;

/* A length of line, natural, and under the pull at the stringing temperature. */
typedef struct tw_crew_length {
    double natural_m;
    double marked_m; /* natural_m times the stretch under the pull (under the span's horizontal tension where there is none) */
} tw_crew_length;

/* A support: where the line is clamped, seen from where it lies on the sheave. */
typedef struct tw_crew_support {
    double offset_m;           /* plumb mark less sheave mark, natural length, positive ahead */
    double offset_stretched_m; /* the same as measured along the line on its sheaves */
    double block_swing_rad;    /* of the swinging sheave from the vertical; NaN where there is none */
    double block_down_N;       /* on the support, line and half the link; negative is uplift; NaN but over sheaves */
    double block_across_N;     /* ... across, positive to the left (route.h); NaN but over sheaves */
    double block_resultant_N;  /* ... all of it, with what acts along; NaN but over sheaves */
} tw_crew_support;

typedef struct tw_crew {
    double pull_N;                 /* horizontal tension of each section's first span, NaN for given lengths */
    int over_sheaves;              /* 1: over and the offsets are there */
    int rubs;                      /* 1: a sheave has friction, and first and last are there */
    size_t span_count;
    size_t temperature_count;
    double *temperature_degC;      /* [temperature_count + 1] the last is that of the stringing; owned */
    tw_crew_span *over;            /* [temperature_count + 1][span_count] on its sheaves; owned */
    tw_crew_span *clamped;         /* [temperature_count + 1][span_count] once clamped; owned */
    tw_crew_span *first;           /* [span_count] pulled from the first end, against friction: the tension falls ahead */
    tw_crew_span *last;            /* [span_count] pulled from the last end to what its last span has without friction */
    tw_crew_length *lengths;       /* [span_count] owned */
    tw_crew_support *supports;     /* [span_count + 1] owned */
} tw_crew;

/* Room for so many temperatures; NULL without memory. NULL-safe free. */
tw_crew *tw_crew_create(const tw_project *project, size_t temperature_count);
void tw_crew_free(tw_crew *crew);

/* Fills all but the temperatures, which stand, from a trial that is strung. A state that does not settle stays NaN.
 * TW_CANCELLED, TW_DEADLINE: the options' poll said so. TW_ERROR_MEMORY. */
tw_status tw_crew_fill(tw_crew *crew, tw_trial *trial, const tw_options *options);

#endif
