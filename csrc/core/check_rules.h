/* check_rules: what the files of the range rules share. */
#ifndef TW_CHECK_RULES_H
#define TW_CHECK_RULES_H

#include "check.h"

/* Fills the fault and returns TW_ERROR_RANGE. */
tw_status tw_check_fail(tw_fault *fault, const char *table, size_t index, const char *field, const char *expected);

tw_status tw_check_material(const tw_project *project, tw_fault *fault);

#endif
