/* limit: one rule, judged on one settled condition: value, margin, utilisation, and the place where it is worst (pure).
 *
 * Utilisation, 1 at the edge, holds below:
 *     most:   value / allowed
 *     least:  allowed / value while it holds, 2 - value / allowed when it fails (the two meet smoothly at 1 and stay
 *             finite); with least = 0:  1 - value / scale, not below 0, with 1 m for a clearance or a sag and the
 *             support's own share of line weight for uplift.
 * To add a limit kind: name it in line.h, judge it here, give its ranges in check.c, its keys in the Python model.
 */
#ifndef TW_LIMIT_H
#define TW_LIMIT_H

#include "line.h"
#include "section.h"

typedef struct tw_verdict {
    int judged;         /* 0: nothing of the line is under this limit here */
    double value;       /* m, N, rad, or rise over run; of the worst place */
    double allowed;     /* same unit */
    double margin;      /* positive: to spare */
    double utilisation; /* holds while <= 1 */
    size_t span;        /* worst place; TW_NONE where it is a support */
    size_t support;     /* TW_NONE where it is a span */
    double station_m;   /* NaN where the whole span is meant */
    double other_at_m;          /* spacing: natural length along the other line of its closest place; else NaN */
    double other_position_m[3]; /* spacing: that place, in this line's axes; else NaN */
} tw_verdict;

/* section: the condition, solved. bare: the same without the resultant addition, for swing; may equal section. */
tw_verdict tw_limit_judge(const tw_project *project, size_t limit, size_t condition, const tw_section *section,
                          const tw_section *bare);

/* A spacing judged: fails, with the gap below zero, where the lines have passed through each other since they were strung, bare
 * (section `strung`). */
void tw_limit_judge_swap(const tw_project *project, size_t limit, size_t condition, const tw_section *section,
                         const tw_section *strung, tw_verdict *verdict);

/* Same rule, its utilisation alone, from a value and an allowed value. */
double tw_limit_utilisation_most(double value, double most);
double tw_limit_utilisation_least(double value, double least, double scale);

#endif
