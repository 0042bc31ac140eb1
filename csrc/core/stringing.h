/* stringing: the natural lengths that the stringing rule gives, bare at the stringing temperature.
 *
 * Every rule but a list of lengths strings the line to one horizontal tension, the pull, equal in every span, with the
 * hangers plumb; the rules differ in what fixes the pull.
 */
#ifndef TW_STRINGING_H
#define TW_STRINGING_H

#include "line.h"

/* Scratch that the functions below ask for, in doubles. */
#define TW_STRINGING_WORK(project) (7 * (project)->support_count)

/* Natural length of each span, length_m [support_count - 1], for a given pull. */
tw_status tw_stringing_at_pull(const tw_project *project, double pull_N, double *length_m, double *work);

/* The same for the project's own rule; pull_N: the pull found, NaN for a list of lengths.
 * TW_OUT_OF_REACH: no pull does it. TW_ERROR_RANGE: the project has no rule. */
tw_status tw_stringing_lengths(const tw_project *project, double *length_m, double *pull_N, double *work);

/* Another way to string to one horizontal tension: writes natural lengths [n], tension vectors at the spans' starts [3 n]
 * and clamps measured from the supports [3 (n + 1)]. On entry they are those of equal horizontal tension. */
typedef struct tw_stringing_way {
    tw_status (*string)(void *data, double pull_N, double *length_m, double *pull, double *swing);
    void *data;
} tw_stringing_way;

/* As above by another way: to a given pull, or where pull_N comes as NaN by the project's own rule. Not for a list of
 * lengths. */
tw_status tw_stringing_by(const tw_project *project, const tw_stringing_way *way, double *length_m, double *pull_N,
                          double *work);

/* Pulls between which a search looks: from a line that sags about two thirds of its longest span, to the breaking
 * strength (or, without one, to twice the largest tension or catenary limit, or 2 % of EA). */
void tw_stringing_range(const tw_project *project, double *low_N, double *high_N);

#endif
