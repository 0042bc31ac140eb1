#include "problem_line.h"

#include <math.h>

#include "fields.h"

/* dict[key] as coefficients, the rest 0; missing: the first is NaN. */
static int read_terms(PyObject *dict, const char *key, double terms[TW_CURVE_TERMS])
{
    PyObject *given = tw_fields_get(dict, key);
    PyObject *row = given ? PySequence_Tuple(given) : NULL;
    int result = given && !row ? -1 : 0;
    Py_ssize_t count = row ? PyTuple_GET_SIZE(row) : 0;
    terms[0] = (double)NAN;
    if (count > TW_CURVE_TERMS) {
        PyErr_Format(PyExc_ValueError, "%s: at most %d coefficients", key, (int)TW_CURVE_TERMS);
        result = -1;
    }
    for (Py_ssize_t i = 0; result == 0 && i < count; i++) {
        terms[i] = PyFloat_AsDouble(PyTuple_GET_ITEM(row, i));
        result = PyErr_Occurred() ? -1 : 0;
    }
    Py_XDECREF(row);
    return result;
}

static int read_part(PyObject *row, tw_part *part)
{
    static const char *const keys[] = {"loading_N", "creep_N", NULL};
    if (tw_fields_read(row, tw_part_table, keys, part) < 0 || read_terms(row, "loading_N", part->loading_N) < 0) {
        return -1;
    }
    return read_terms(row, "creep_N", part->creep_N);
}

int tw_problem_line_read(PyObject *row, tw_line *line)
{
    static const char *const keys[] = {"parts", NULL};
    if (tw_fields_read(row, tw_line_table, keys, line) < 0) {
        return -1;
    }
    PyObject *given = tw_fields_get(row, "parts");
    PyObject *parts = given ? PySequence_Tuple(given) : NULL;
    int result = given && !parts ? -1 : 0;
    Py_ssize_t count = parts ? PyTuple_GET_SIZE(parts) : 0;
    if (count > TW_PARTS_MOST) {
        PyErr_Format(PyExc_ValueError, "parts: at most %d", (int)TW_PARTS_MOST);
        result = -1;
    }
    for (Py_ssize_t i = 0; result == 0 && i < count; i++) {
        result = read_part(PyTuple_GET_ITEM(parts, i), &line->parts[i]);
        line->part_count = (size_t)(i + 1);
    }
    Py_XDECREF(parts);
    return result;
}
