/* history: what the conditions a line has met leave in it, span by span.
 *
 * Each met condition is settled with the line as strung; the greatest strain of each part, from the span's mean stretch
 * (stretched over natural length), sets its permanent stretch. Creep: the line is settled in the everyday condition with
 * its creep curves in place of the loading curves, and unloads from there along the final modulus. Of the two the larger
 * stays, part by part. Strains given as such (bedding in, c t^n) are added.
 */
#ifndef TW_HISTORY_H
#define TW_HISTORY_H

#include "section.h"

typedef struct tw_history {
    const tw_project *project;
    tw_section *section;     /* where what has to be settled apart is settled; owned */
    tw_permanent *heaviest;  /* [support_count - 1] of state final; owned */
    tw_permanent *crept;     /* [support_count - 1] of state after creep; owned */
    tw_lived *lived;         /* [2][support_count - 1][TW_PARTS_MOST] where each part's stretch is from, final then after
                                creep; its `strain` is not set; owned */
    int ready;               /* 1: they are those of the present natural lengths */
} tw_history;

/* Whether any condition has a state other than the initial one. */
int tw_history_needed(const tw_project *project);
int tw_history_met(const tw_project *project, size_t condition);

/* NULL without memory; free is NULL-safe. */
tw_history *tw_history_create(const tw_project *project);
void tw_history_free(tw_history *history);

/* Forgets everything. */
void tw_history_begin(tw_history *history);

/* Settles a condition as strung in the history's own section, or with creep curves; strung as for tw_section_load. */
tw_status tw_history_settle(tw_history *history, size_t condition, const double *length_m, const tw_section *strung,
                            int creeping, const tw_options *options);

/* Takes in a settled section of a condition, as strung. */
void tw_history_meet(tw_history *history, const tw_section *section, size_t condition);

/* Takes in the everyday condition as it stands in the history's section, and adds what is given as strain. */
void tw_history_end(tw_history *history, int crept);

/* Where the stretch of each part of a span is from, [TW_PARTS_MOST]; NULL as strung, or before the history is ready. */
const tw_lived *tw_history_lived(const tw_history *history, tw_state state, size_t span);

/* [support_count - 1] for a state; NULL as strung. */
const tw_permanent *tw_history_of(const tw_history *history, tw_state state);

#endif
