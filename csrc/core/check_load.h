/* check_load: the rules of one load, and between the loads of a condition; part of check. */
#ifndef TW_CHECK_LOAD_H
#define TW_CHECK_LOAD_H

#include "line.h"

/* NULL, or what was expected of which field. */
const char *tw_check_load(const tw_load *load, size_t span_count, const char **field);

/* The same of a condition: shares of ice from 0 to 1, one carriage at most. */
const char *tw_check_condition_loads(const tw_project *project, size_t condition, const char **field);

#endif
