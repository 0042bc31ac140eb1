/* report: one condition settled in full: exact states of spans, supports and marks, with the bracket as its proof. */
#ifndef TW_REPORT_H
#define TW_REPORT_H

#include "line.h"
#include "trial.h"

/* trial: strung. Fills all of out, whose arrays the caller supplies. Returns out->status. */
tw_status tw_report_condition(tw_trial *trial, size_t condition, const tw_options *options, tw_settled *out);

#endif
