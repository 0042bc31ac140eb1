/* section_newton: damped Newton on the complementary energy of a section, for a given set of slack hangers. Shared by the
 * section's own files only; see section.h for the formulas. */
#ifndef TW_SECTION_NEWTON_H
#define TW_SECTION_NEWTON_H

#include "section.h"

/* Scratch, carved from section->work. A run is one span, or several joined at slack hangers. */
typedef struct tw_section_scratch {
    double *error;  /* [3 runs] closing error, the gradient of -D */
    double *step;   /* [3 runs] */
    double *before; /* [3 runs] pulls before the step */
    double *end;    /* [3 runs] end of each run, measured from its start clamp */
    double *far;    /* [3 n] tension at each span's end */
    double *reach;  /* [3 (n + 1)] slack clamps, measured from the start clamp of their run */
    double *bend;   /* [6 runs] flexibility of each run */
    double *diag;   /* [9 runs] */
    double *off;    /* [9 runs] */
    double *swing;  /* [3 (n + 1)] clamp measured from the support, of the holds that carry */
    size_t runs;
} tw_section_scratch;

typedef struct tw_section_patience {
    double scale;   /* longest chord, m */
    size_t steps;   /* Newton steps from here on */
    int patient;    /* 0: a step that has to be cut short ends the attempt: a hanger's kink is near */
} tw_section_patience;

tw_section_scratch tw_section_carve(const tw_section *section);

/* From the pulls that stand; closing_m and the steps are kept in the section. */
tw_status tw_section_iterate(tw_section *section, const tw_options *options, tw_section_scratch *s,
                             const tw_section_patience *how);

/* At rest with the natural lengths as they stand: from the pulls there (warm) or from afresh. */
tw_status tw_section_rest(tw_section *section, const tw_options *options, tw_section_scratch *s, int warm);

#endif
