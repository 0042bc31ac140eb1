#include "survey.h"

#include <math.h>
#include <numpy/arrayobject.h>
#include <string.h>

#include "answer.h"
#include "check.h"
#include "fields.h"
#include "problem.h"

typedef struct column {
    const char *name;
    size_t offset;
    int optional;
} column;

static const column columns[] = {
    {"station_m", offsetof(tw_observation, station_m), 0},
    {"elevation_m", offsetof(tw_observation, elevation_m), 0},
    {"temperature_degC", offsetof(tw_observation, temperature_degC), 0},
    {"offset_m", offsetof(tw_observation, offset_m), 1},
    {"sigma_m", offsetof(tw_observation, sigma_m), 1},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

/* The first column sets the count; missing optional columns are NaN. */
static int read_column(PyObject *dict, const column *c, survey *out)
{
    PyObject *given = tw_fields_get(dict, c->name);
    if (!given && !c->optional) {
        PyErr_Format(PyExc_ValueError, "%s is missing", c->name);
        return -1;
    }
    PyArrayObject *values = given ? (PyArrayObject *)PyArray_FROM_OTF(given, NPY_DOUBLE, NPY_ARRAY_IN_ARRAY) : NULL;
    if (given && !values) {
        return -1;
    }
    if (values && PyArray_NDIM(values) == 1 && !out->observations) {
        out->count = (size_t)PyArray_DIM(values, 0);
        out->observations = PyMem_Calloc(out->count + 1, sizeof(tw_observation));
        if (!out->observations) {
            Py_DECREF(values);
            PyErr_NoMemory();
            return -1;
        }
    }
    if (values && (PyArray_NDIM(values) != 1 || (size_t)PyArray_DIM(values, 0) != out->count)) {
        PyErr_Format(PyExc_ValueError, "%s: expected one number for each point", c->name);
        Py_DECREF(values);
        return -1;
    }
    for (size_t i = 0; i < out->count; i++) {
        double number = values ? ((const double *)PyArray_DATA(values))[i] : (double)NAN;
        memcpy((char *)&out->observations[i] + c->offset, &number, sizeof number);
    }
    Py_XDECREF(values);
    return 0;
}

int tw_survey_read(PyObject *dict, const tw_project *project, PyObject *range_error, survey *out)
{
    static const char *const names[] = {"station_m", "elevation_m", "temperature_degC", "offset_m", "sigma_m", NULL};
    static const field_table none = {NULL, 0};
    tw_fault fault;
    if (tw_fields_read(dict, none, names, NULL) < 0) {
        return -1;
    }
    for (size_t i = 0; i < COLUMNS; i++) {
        if (read_column(dict, &columns[i], out) < 0) {
            return -1;
        }
    }
    if (tw_check_observations(project, out->observations, out->count, &fault) != TW_OK) {
        tw_problem_raise(fault.table, fault.index, fault.field, fault.expected, range_error);
        return -1;
    }
    return 0;
}

void tw_survey_free(survey *in)
{
    PyMem_Free(in->observations);
    in->observations = NULL;
}

/* List of floats, None for NaN. */
static PyObject *numbers(const double *values, size_t count)
{
    PyObject *list = PyList_New((Py_ssize_t)count);
    for (size_t i = 0; list && i < count; i++) {
        PyObject *number = tw_fields_number(values[i]);
        if (!number) {
            Py_CLEAR(list);
        } else {
            PyList_SET_ITEM(list, (Py_ssize_t)i, number);
        }
    }
    return list;
}

/* One dict for each unknown: what it is, its value and its row of covariances. */
static PyObject *unknowns(const tw_fit *fit)
{
    PyObject *list = PyList_New((Py_ssize_t)fit->unknown_count);
    for (size_t u = 0; list && u < fit->unknown_count; u++) {
        PyObject *dict = Py_BuildValue("{s:N,s:N,s:N}", "span", tw_fields_index(fit->span[u]), "value",
                                       tw_fields_number(fit->value[u]), "covariance",
                                       numbers(fit->covariance + u * fit->unknown_count, fit->unknown_count));
        if (!dict) {
            Py_CLEAR(list);
        } else {
            PyList_SET_ITEM(list, (Py_ssize_t)u, dict);
        }
    }
    return list;
}

PyObject *tw_survey_answer(const tw_fit *fit)
{
    size_t n = fit->observation_count;
    PyObject *dict = PyDict_New();
    if (!dict || tw_answer_status(dict, fit->status) < 0
        || tw_fields_put(dict, "has_values", PyBool_FromLong(fit->has_values)) < 0
        || tw_fields_put(dict, "undetermined", tw_fields_index(fit->undetermined)) < 0
        || tw_fields_put(dict, "rows", PyLong_FromSize_t(fit->row_count)) < 0
        || tw_fields_put(dict, "steps", PyLong_FromSize_t(fit->steps)) < 0
        || tw_fields_put(dict, "evaluations", PyLong_FromSize_t(fit->evaluations)) < 0
        || tw_fields_put(dict, "step_relative", tw_fields_number(fit->step_relative)) < 0
        || tw_fields_put(dict, "chi2", tw_fields_number(fit->chi2)) < 0
        || tw_fields_put(dict, "unknowns", unknowns(fit)) < 0
        || tw_fields_put(dict, "lengths_m", numbers(fit->length_m, fit->span_count)) < 0
        || tw_fields_put(dict, "length_rates", numbers(fit->length_rate, fit->span_count)) < 0
        || tw_fields_put(dict, "residuals_m", numbers(fit->residual_m, n)) < 0
        || tw_fields_put(dict, "offset_residuals_m", numbers(fit->residual_m + n, n)) < 0
        || tw_fields_put(dict, "leverages", numbers(fit->leverage, n)) < 0
        || tw_fields_put(dict, "offset_leverages", numbers(fit->leverage + n, n)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}
