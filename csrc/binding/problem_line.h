/* problem_line: the line of a project's dict, with the parts of a curved law. */
#ifndef TW_PROBLEM_LINE_H
#define TW_PROBLEM_LINE_H

#include "python_api.h"

#include "line.h"

/* 0, or -1 and raises. */
int tw_problem_line_read(PyObject *row, tw_line *line);

#endif
