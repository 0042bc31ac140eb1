/* curves: other lines' curves, read from a problem's dict and written for another problem. */
#ifndef TW_CURVES_H
#define TW_CURVES_H

#include "python_api.h"

#include "problem.h"
#include "section.h"

/* dict["curves"]: a list of arrays (arcs, 14), as tw_curves_along writes them; may be missing. 0, or -1 and raises. */
int tw_curves_read(PyObject *dict, problem *out);

/* row["curves"] of a limit: for each condition the number of a curve, or None; may be missing. 0, or -1 and raises. */
int tw_curves_read_limit(PyObject *row, size_t limit, problem *out);

void tw_curves_free(problem *in);

/* The hung line as an array (arcs, 14): natural lengths, positions and slopes of each arc's two ends. */
PyObject *tw_curves_along(const tw_section *section);

#endif
