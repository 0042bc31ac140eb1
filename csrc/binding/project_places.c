/* project_places: the methods that hand out places on an exact line. */
#include "project.h"

#include <numpy/arrayobject.h>

#include "courses.h"
#include "places.h"

/* 0, or -1 and raises. */
static int solve_exact(project_object *self, tw_trial *trial, double pull, size_t condition, tw_options *options,
                       const tw_section **section)
{
    run_state run;
    tw_run_open(&run, options);
    tw_run_begin(&run);
    tw_status status = tw_trial_string(trial, pull, options);
    if (status == TW_OK) {
        status = tw_trial_section(trial, condition, options, section);
    }
    tw_run_end(&run);
    if (!run.raised && status != TW_OK) {
        tw_project_raise(self, status);
    }
    return !run.raised && status == TW_OK ? 0 : -1;
}

PyObject *tw_project_shape(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    Py_ssize_t condition, points = 200;
    double pull;
    tw_options options;
    const tw_section *section = NULL;
    if (!PyArg_ParseTuple(args, "n|n:shape", &condition, &points) || tw_project_condition(self, condition) < 0
        || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    if (points < 1 || points > 1000000) {
        PyErr_SetString(PyExc_ValueError, "points: expected 1 to 1,000,000 a span");
        return NULL;
    }
    tw_trial *trial = tw_trial_create(&self->problem.project);
    if (!trial) {
        return PyErr_NoMemory();
    }
    int solved = solve_exact(self, trial, pull, (size_t)condition, &options, &section) == 0;
    PyObject *result = solved ? tw_places_along(section, (size_t)points) : NULL;
    tw_trial_free(trial);
    return result;
}

PyObject *tw_project_course(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    Py_ssize_t condition;
    double pull;
    tw_options options;
    const tw_section *section = NULL;
    if (!PyArg_ParseTuple(args, "n:course", &condition) || tw_project_condition(self, condition) < 0
        || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    tw_trial *trial = tw_trial_create(&self->problem.project);
    if (!trial) {
        return PyErr_NoMemory();
    }
    int solved = solve_exact(self, trial, pull, (size_t)condition, &options, &section) == 0;
    PyObject *result = solved ? tw_courses_along(section) : NULL;
    tw_trial_free(trial);
    return result;
}

PyObject *tw_project_at(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    Py_ssize_t condition;
    PyObject *given;
    double pull;
    tw_options options;
    const tw_section *section = NULL;
    if (!PyArg_ParseTuple(args, "nO:at", &condition, &given) || tw_project_condition(self, condition) < 0
        || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    PyArrayObject *stations = (PyArrayObject *)PyArray_FROM_OTF(given, NPY_DOUBLE, NPY_ARRAY_IN_ARRAY);
    tw_trial *trial = stations ? tw_trial_create(&self->problem.project) : NULL;
    PyObject *result = NULL;
    if (stations && !trial) {
        PyErr_NoMemory();
    } else if (stations && PyArray_NDIM(stations) != 1) {
        PyErr_SetString(PyExc_ValueError, "stations: expected a one-dimensional array");
    } else if (stations && solve_exact(self, trial, pull, (size_t)condition, &options, &section) == 0) {
        result = tw_places_at(section, PyArray_DATA(stations), (size_t)PyArray_DIM(stations, 0));
    }
    tw_trial_free(trial);
    Py_XDECREF(stations);
    return result;
}
