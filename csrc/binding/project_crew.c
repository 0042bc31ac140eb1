/* project_crew: the method that fills a crew sheet. */
#include "project.h"

#include <numpy/arrayobject.h>
#include <string.h>

#include "answer.h"
#include "crew.h"

/* Temperatures of a sheet: a copy of the array, with room for one more; NULL and raises. */
static tw_crew *crew_at(const tw_project *project, PyObject *given)
{
    PyArrayObject *degC = (PyArrayObject *)PyArray_FROM_OTF(given, NPY_DOUBLE, NPY_ARRAY_IN_ARRAY);
    tw_crew *crew = NULL;
    if (degC && (PyArray_NDIM(degC) != 1 || PyArray_DIM(degC, 0) > 10000)) {
        PyErr_SetString(PyExc_ValueError, "temperatures: expected a one-dimensional array of up to 10,000");
    } else if (degC) {
        size_t count = (size_t)PyArray_DIM(degC, 0);
        crew = tw_crew_create(project, count);
        if (crew) {
            memcpy(crew->temperature_degC, PyArray_DATA(degC), count * sizeof(double));
        } else {
            PyErr_NoMemory();
        }
    }
    Py_XDECREF(degC);
    return crew;
}

PyObject *tw_project_sheet(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    PyObject *given, *result = NULL;
    double pull;
    tw_options options;
    run_state run;
    if (!PyArg_ParseTuple(args, "O:sheet", &given) || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    tw_crew *crew = crew_at(&self->problem.project, given);
    tw_run_open(&run, &options);
    tw_trial *trial = crew ? tw_project_strung(self, pull, &run, &options) : NULL;
    if (trial) {
        tw_run_begin(&run);
        tw_status status = tw_crew_fill(crew, trial, &options);
        tw_run_end(&run);
        if (!run.raised) {
            result = status == TW_OK ? tw_answer_crew(crew) : tw_project_raise(self, status);
        }
    }
    tw_trial_free(trial);
    tw_crew_free(crew);
    return result;
}
