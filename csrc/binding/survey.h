/* survey: points measured on a line as the core takes them, and the line that fits them as a dict. */
#ifndef TW_SURVEY_H
#define TW_SURVEY_H

#include "python_api.h"

#include "fit.h"

typedef struct survey {
    tw_observation *observations; /* owned */
    size_t count;
} survey;

/* From a dict of arrays of one size: station_m, elevation_m, temperature_degC; offset_m and sigma_m may be missing or NaN.
 * 0, or -1 and raises; range_error for a number out of range. Free in either case. */
int tw_survey_read(PyObject *dict, const tw_project *project, PyObject *range_error, survey *out);
void tw_survey_free(survey *in);

/* New dict. */
PyObject *tw_survey_answer(const tw_fit *fit);

#endif
