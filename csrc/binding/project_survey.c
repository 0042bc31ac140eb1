/* project_survey: the method that fits a line to measured points. */
#include "project.h"

#include "fields.h"
#include "survey.h"

/* Takes `unknown` out of the keywords, "pull" where it is missing. */
static int take_unknown(PyObject *keywords, PyObject **rest, tw_fit_unknown *unknown)
{
    static const char *const names[] = {"pull", "lengths", NULL};
    *rest = keywords ? PyDict_Copy(keywords) : PyDict_New();
    int word = *rest ? tw_fields_choice(*rest, "unknown", names, TW_FIT_PULL) : -1;
    if (word < 0 || (PyDict_GetItemString(*rest, "unknown") && PyDict_DelItemString(*rest, "unknown") < 0)) {
        Py_CLEAR(*rest);
        return -1;
    }
    *unknown = (tw_fit_unknown)word;
    return 0;
}

static PyObject *run_fit(project_object *self, const survey *points, tw_fit_unknown unknown, tw_options *options)
{
    run_state run;
    PyObject *result = NULL;
    tw_fit *fit = tw_fit_create(&self->problem.project, points->observations, points->count, unknown);
    if (!fit) {
        return PyErr_NoMemory();
    }
    tw_run_open(&run, options);
    tw_run_begin(&run);
    tw_status status = tw_fit_search(&self->problem.project, points->observations, points->count, unknown, options, fit);
    tw_run_end(&run);
    if (!run.raised) {
        result = status < 0 ? tw_project_raise(self, status) : tw_survey_answer(fit);
    }
    tw_fit_free(fit);
    return result;
}

PyObject *tw_project_fit(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    PyObject *given, *rest = NULL, *result = NULL;
    tw_fit_unknown unknown;
    tw_options options;
    survey points = {0};
    if (!PyArg_ParseTuple(args, "O!:fit", &PyDict_Type, &given) || take_unknown(keywords, &rest, &unknown) < 0) {
        return NULL;
    }
    if (tw_run_options(rest, self->range_error, &options) == 0
        && tw_survey_read(given, &self->problem.project, self->range_error, &points) == 0) {
        result = run_fit(self, &points, unknown, &options);
    }
    tw_survey_free(&points);
    Py_DECREF(rest);
    return result;
}
