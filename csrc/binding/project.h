/* project: the heap type Project, as the files of its methods share it. */
#ifndef TW_BINDING_PROJECT_H
#define TW_BINDING_PROJECT_H

#include "python_api.h"

#include "problem.h"
#include "run.h"
#include "trial.h"

typedef struct project_object {
    PyObject_HEAD
    problem problem;
    PyObject *range_error;
    PyObject *settle_error;
} project_object;

/* Takes `pull` out of a copy of the keywords; the rest are options. 0, or -1 and raises. */
int tw_project_keywords(project_object *self, PyObject *keywords, double *pull, tw_options *options);

/* Whether there is such a condition: 0, or -1 and raises. */
int tw_project_condition(project_object *self, Py_ssize_t index);

/* Raises SettleError with .status, or MemoryError; NULL. */
PyObject *tw_project_raise(project_object *self, tw_status status);

/* A trial strung to a pull, or by the project's rule; NULL and raises. */
tw_trial *tw_project_strung(project_object *self, double pull, run_state *run, const tw_options *options);

/* Methods. */
PyObject *tw_project_shape(PyObject *object, PyObject *args, PyObject *keywords);
PyObject *tw_project_course(PyObject *object, PyObject *args, PyObject *keywords);
PyObject *tw_project_at(PyObject *object, PyObject *args, PyObject *keywords);
PyObject *tw_project_sheet(PyObject *object, PyObject *args, PyObject *keywords);
PyObject *tw_project_fit(PyObject *object, PyObject *args, PyObject *keywords);

#endif
