/* courses: other lines' courses, read from a problem's dict and written for another problem. */
#ifndef TW_COURSES_H
#define TW_COURSES_H

#include "python_api.h"

#include "problem.h"
#include "section.h"

/* dict["courses"]: a list of arrays (arcs, 14), as tw_courses_along writes them; may be missing. 0, or -1 and raises. */
int tw_courses_read(PyObject *dict, problem *out);

/* row["courses"] of a limit: for each condition the number of a course, or None; may be missing. 0, or -1 and raises. */
int tw_courses_read_limit(PyObject *row, size_t limit, problem *out);

void tw_courses_free(problem *in);

/* The hung line as an array (arcs, 14): natural lengths, positions and slopes of each arc's two ends. */
PyObject *tw_courses_along(const tw_section *section);

#endif
