/* problem: the dict that describes a project, copied deeply into the core's structs. */
#ifndef TW_PROBLEM_H
#define TW_PROBLEM_H

#include "python_api.h"

#include "line.h"

typedef struct problem {
    tw_project project; /* its arrays are the ones below */
    tw_support *supports;
    double *route; /* stations of the supports, where the route turns */
    double *ground; /* stations, then elevations */
    tw_crossing *crossings;
    tw_condition *conditions;
    size_t condition_rows; /* read so far */
    tw_load *loads;
    tw_mark *marks;
    tw_limit *limits;
    unsigned char *applies;
    unsigned char *covers;
    double *lengths;
    unsigned char *met;
    tw_course *courses; /* each with arcs and reach of its own */
    size_t *limit_course;
} problem;

/* 0, or -1 and raises; range_error is raised with .path and .expected for a number out of range. */
int tw_problem_read(PyObject *dict, PyObject *range_error, problem *out);
void tw_problem_free(problem *in);

/* Raises range_error from a fault that the core found. */
void tw_problem_raise(const char *table, size_t index, const char *name, const char *expected, PyObject *range_error);

#endif
