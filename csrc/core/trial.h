/* trial: one set of natural lengths tried in every condition; the workspace of all searches.
 *
 * Each condition keeps its own section, so that the next pull starts from the last equilibria, drawn on in a line. Nothing is
 * allocated after creation.
 */
#ifndef TW_TRIAL_H
#define TW_TRIAL_H

#include "history.h"
#include "limit.h"
#include "line.h"
#include "pulling.h"
#include "section.h"

typedef struct tw_trial {
    const tw_project *project;
    double pull_N;         /* NaN: natural lengths were given */
    double *length_m;      /* [support_count - 1] owned */
    double *string_work;   /* scratch of stringing; owned */
    tw_pulling *pulling;   /* NULL where no sheave is in play; owned */
    tw_section *strung;    /* bare, at stringing; solved on demand */
    int strung_ready;
    tw_section **sections; /* [condition_count] owned */
    int *solved;           /* [condition_count] 1: sections[c] is at the present lengths */
    int *warm;             /* [condition_count] how many of the last two solves are a start */
    double *at_N;          /* [condition_count] pull of the last solve; owned */
    double *before_N;      /* [condition_count] and of the one before; owned */
    double **before;       /* [condition_count][3 (support_count - 1)] its span pulls; owned */
    tw_section *bare;      /* the condition without its resultant addition, for swing */
    size_t bare_condition; /* which one it holds, or TW_NONE */
    tw_history *history;   /* NULL where every condition is as strung; owned */
    size_t settles;        /* sections solved so far */
} tw_trial;

tw_trial *tw_trial_create(const tw_project *project);
void tw_trial_free(tw_trial *trial);

/* String to a pull, or by the project's own rule when pull is NaN. Forgets what was solved. */
tw_status tw_trial_string(tw_trial *trial, double pull_N, const tw_options *options);

/* The bare strung line, solved. */
tw_status tw_trial_strung(tw_trial *trial, const tw_options *options, const tw_section **section);

/* A condition, solved at the present lengths. */
tw_status tw_trial_section(tw_trial *trial, size_t condition, const tw_options *options, const tw_section **section);

/* The same without its resultant addition, from which swing is taken. */
tw_status tw_trial_bare(tw_trial *trial, size_t condition, const tw_options *options, const tw_section **section);

/* One limit in one condition. */
tw_status tw_trial_judge(tw_trial *trial, size_t limit, size_t condition, const tw_options *options,
                         tw_verdict *verdict);

#endif
