/* check: the one copy of every range rule. */
#ifndef TW_CHECK_H
#define TW_CHECK_H

#include "line.h"

/* The first fault found: which number of which table row is outside its range, and what was expected. */
typedef struct tw_fault {
    char table[16];    /* "line", "supports", ... as the binding names them; empty: no fault */
    size_t index;      /* row; TW_NONE where the table has one */
    char field[32];
    char expected[72];
} tw_fault;

/* TW_OK, or TW_ERROR_RANGE with the fault filled. A pull is above 0 and no more than EA. */
tw_status tw_check_pull(const tw_project *project, double pull_N, tw_fault *fault);

tw_status tw_check_project(const tw_project *project, tw_fault *fault);
/* Observations of a survey on a project that holds; the table is "observations". */
tw_status tw_check_observations(const tw_project *project, const tw_observation *observations, size_t count,
                                tw_fault *fault);
tw_status tw_check_options(const tw_options *options, tw_fault *fault);

#endif
