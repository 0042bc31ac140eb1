/* project: the heap type Project, an immutable deep copy of a problem with the calls that run on it. */
#include "project.h"

#include <math.h>

#include "answer.h"
#include "check.h"
#include "fields.h"
#include "module.h"
#include "report.h"
#include "window.h"

static PyObject *project_new(PyTypeObject *type, PyObject *args, PyObject *keywords)
{
    static char *names[] = {"problem", NULL};
    PyObject *dict;
    if (!PyArg_ParseTupleAndKeywords(args, keywords, "O!:Project", names, &PyDict_Type, &dict)) {
        return NULL;
    }
    module_state *state = PyType_GetModuleState(type);
    project_object *self = (project_object *)type->tp_alloc(type, 0);
    if (!self) {
        return NULL;
    }
    self->range_error = Py_NewRef(state->range_error);
    self->settle_error = Py_NewRef(state->settle_error);
    if (tw_problem_read(dict, self->range_error, &self->problem) < 0) {
        Py_DECREF(self);
        return NULL;
    }
    return (PyObject *)self;
}

static int project_traverse(PyObject *object, visitproc visit, void *arg)
{
    project_object *self = (project_object *)object;
    Py_VISIT(Py_TYPE(object));
    Py_VISIT(self->range_error);
    Py_VISIT(self->settle_error);
    return 0;
}

static int project_clear(PyObject *object)
{
    project_object *self = (project_object *)object;
    Py_CLEAR(self->range_error);
    Py_CLEAR(self->settle_error);
    return 0;
}

static void project_dealloc(PyObject *object)
{
    project_object *self = (project_object *)object;
    PyTypeObject *type = Py_TYPE(object);
    PyObject_GC_UnTrack(object);
    project_clear(object);
    tw_problem_free(&self->problem);
    type->tp_free(object);
    Py_DECREF(type);
}

int tw_project_keywords(project_object *self, PyObject *keywords, double *pull, tw_options *options)
{
    PyObject *rest = keywords ? PyDict_Copy(keywords) : PyDict_New();
    PyObject *value = rest ? PyDict_GetItemString(rest, "pull") : NULL;
    int result = rest ? 0 : -1;
    tw_fault fault;
    *pull = NAN;
    if (value) {
        *pull = value == Py_None ? (double)NAN : PyFloat_AsDouble(value);
        if (PyErr_Occurred() || PyDict_DelItemString(rest, "pull") < 0) {
            result = -1;
        } else if (value != Py_None && tw_check_pull(&self->problem.project, *pull, &fault) != TW_OK) {
            tw_problem_raise("stringing", TW_NONE, "pull", fault.expected, self->range_error);
            result = -1;
        }
    }
    if (result == 0) {
        result = tw_run_options(rest, self->range_error, options);
    }
    Py_XDECREF(rest);
    return result;
}

int tw_project_condition(project_object *self, Py_ssize_t index)
{
    if (index < 0 || (size_t)index >= self->problem.project.condition_count) {
        PyErr_SetString(PyExc_IndexError, "no such condition");
        return -1;
    }
    return 0;
}

PyObject *tw_project_raise(project_object *self, tw_status status)
{
    if (status == TW_ERROR_MEMORY) {
        return PyErr_NoMemory();
    }
    PyObject *error = PyObject_CallFunction(self->settle_error, "s", tw_status_text(status));
    PyObject *name = PyUnicode_FromString(tw_status_name(status));
    if (error && name && PyObject_SetAttrString(error, "status", name) == 0) {
        PyErr_SetObject(self->settle_error, error);
    }
    Py_XDECREF(error);
    Py_XDECREF(name);
    return NULL;
}

static PyObject *lengths_of(const tw_trial *trial)
{
    size_t spans = trial->project->support_count - 1;
    PyObject *list = PyList_New((Py_ssize_t)spans);
    for (size_t k = 0; list && k < spans; k++) {
        PyObject *number = PyFloat_FromDouble(trial->length_m[k]);
        if (!number) {
            Py_CLEAR(list);
        } else {
            PyList_SET_ITEM(list, (Py_ssize_t)k, number);
        }
    }
    return list;
}

tw_trial *tw_project_strung(project_object *self, double pull, run_state *run, const tw_options *options)
{
    tw_trial *trial = tw_trial_create(&self->problem.project);
    if (!trial) {
        PyErr_NoMemory();
        return NULL;
    }
    tw_run_begin(run);
    tw_status status = tw_trial_string(trial, pull, options);
    tw_run_end(run);
    if (status == TW_OK && !run->raised) {
        return trial;
    }
    if (!run->raised) {
        tw_project_raise(self, status);
    }
    tw_trial_free(trial);
    return NULL;
}

static PyObject *project_string(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    double pull;
    tw_options options;
    run_state run;
    if (!PyArg_ParseTuple(args, ":string") || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    tw_run_open(&run, &options);
    tw_trial *trial = tw_project_strung(self, pull, &run, &options);
    if (!trial) {
        return NULL;
    }
    PyObject *result = Py_BuildValue("{s:N,s:N}", "horizontal_tension_N", tw_fields_number(trial->pull_N), "lengths_m",
                                     lengths_of(trial));
    tw_trial_free(trial);
    return result;
}

/* Rows of plain doubles, all NaN: what is not reported is no number. */
static void *nan_rows(size_t count, size_t size)
{
    double *rows = PyMem_Calloc(count + 1, size);
    for (size_t i = 0; rows && i < count * size / sizeof(double); i++) {
        rows[i] = NAN;
    }
    return rows;
}

/* Room for everything a settled condition reports. */
static int settled_room(const tw_project *project, size_t condition, tw_settled *out)
{
    *out = (tw_settled){.status = TW_NOT_SETTLED, .energy_J = NAN, .energy_lower_J = NAN, .gap_J = NAN,
                        .gap_relative = NAN, .residual_N = NAN, .closing_m = NAN,
                        .sheave_imbalance_N = NAN, .load_mismatch = NAN};
    out->spans = nan_rows(project->support_count - 1, sizeof(tw_span_state));
    out->supports = nan_rows(project->support_count, sizeof(tw_support_state));
    out->marks = nan_rows(project->mark_count, sizeof(tw_mark_state));
    out->loads = nan_rows(project->conditions[condition].load_count, sizeof(tw_mark_state));
    return out->spans && out->supports && out->marks && out->loads;
}

static void settled_free(tw_settled *out)
{
    PyMem_Free(out->spans);
    PyMem_Free(out->supports);
    PyMem_Free(out->marks);
    PyMem_Free(out->loads);
}

static PyObject *project_settle(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    const tw_project *project = &self->problem.project;
    Py_ssize_t condition;
    double pull;
    tw_options options;
    run_state run;
    tw_settled settled;
    PyObject *result = NULL;
    if (!PyArg_ParseTuple(args, "n:settle", &condition) || tw_project_condition(self, condition) < 0
        || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    tw_trial *trial = tw_trial_create(project);
    if (!settled_room(project, (size_t)condition, &settled) || !trial) {
        PyErr_NoMemory();
        goto done;
    }
    tw_run_open(&run, &options);
    tw_run_begin(&run);
    settled.status = tw_trial_string(trial, pull, &options);
    if (settled.status == TW_OK) {
        tw_report_condition(trial, (size_t)condition, &options, &settled);
    }
    tw_run_end(&run);
    if (run.raised) {
        goto done;
    }
    if (settled.status < 0) {
        tw_project_raise(self, settled.status);
    } else {
        result = tw_answer_settled(project, (size_t)condition, &settled);
    }
done:
    settled_free(&settled);
    tw_trial_free(trial);
    return result;
}

/* One row of judge(): the verdict with its limit, condition and whether it holds. */
static PyObject *judged_row(const tw_verdict *verdict, size_t limit, size_t condition, tw_status status)
{
    PyObject *row = tw_answer_verdict(verdict);
    const char *word = status != TW_OK || !verdict->judged ? "undecided"
                       : verdict->utilisation <= 1.0 + 1e-9 ? "holds"
                                                            : "fails";
    if (!row || tw_fields_put(row, "limit", PyLong_FromSize_t(limit)) < 0
        || tw_fields_put(row, "condition", PyLong_FromSize_t(condition)) < 0
        || tw_fields_put(row, "status", PyUnicode_FromString(word)) < 0
        || tw_fields_put(row, "reason", PyUnicode_FromString(status != TW_OK ? tw_status_name(status) : "")) < 0) {
        Py_CLEAR(row);
    }
    return row;
}

/* Judges one row and appends it; -1 and raises. */
static int append_judged(PyObject *list, tw_trial *trial, size_t limit, size_t condition, run_state *run,
                         const tw_options *options)
{
    tw_verdict verdict = {0, NAN, NAN, NAN, NAN, TW_NONE, TW_NONE, NAN, NAN, {NAN, NAN, NAN}};
    tw_run_begin(run);
    tw_status status = tw_trial_judge(trial, limit, condition, options, &verdict);
    tw_run_end(run);
    if (run->raised || PyErr_CheckSignals() < 0) {
        return -1;
    }
    if (status == TW_OK && !verdict.judged) {
        verdict.value = verdict.allowed = verdict.margin = verdict.utilisation = NAN;
    }
    PyObject *row = judged_row(&verdict, limit, condition, status);
    int result = row ? PyList_Append(list, row) : -1;
    Py_XDECREF(row);
    return result;
}

static PyObject *project_judge(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    const tw_project *project = &self->problem.project;
    double pull;
    tw_options options;
    run_state run;
    if (!PyArg_ParseTuple(args, ":judge") || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    tw_run_open(&run, &options);
    tw_trial *trial = tw_project_strung(self, pull, &run, &options);
    if (!trial) {
        return NULL;
    }
    PyObject *list = PyList_New(0);
    for (size_t i = 0; list && i < project->limit_count; i++) {
        for (size_t c = 0; list && c < project->condition_count; c++) {
            if (project->limit_applies[i * project->condition_count + c]
                && append_judged(list, trial, i, c, &run, &options) < 0) {
                Py_CLEAR(list);
            }
        }
    }
    tw_trial_free(trial);
    return list;
}

/* Puts what was found so far on the pending KeyboardInterrupt, as .best; other exceptions pass as they are. */
static void attach_best(const tw_window *window)
{
    if (!PyErr_ExceptionMatches(PyExc_KeyboardInterrupt)) {
        return;
    }
    PyObject *type, *value, *traceback;
    PyErr_Fetch(&type, &value, &traceback);
    PyErr_NormalizeException(&type, &value, &traceback);
    PyObject *best = tw_answer_window(window);
    if (!best || PyObject_SetAttrString(value, "best", best) < 0) {
        PyErr_Clear();
    }
    Py_XDECREF(best);
    PyErr_Restore(type, value, traceback);
}

static PyObject *project_window(PyObject *object, PyObject *args, PyObject *keywords)
{
    project_object *self = (project_object *)object;
    double pull;
    tw_options options;
    run_state run;
    PyObject *result = NULL;
    if (!PyArg_ParseTuple(args, ":window") || tw_project_keywords(self, keywords, &pull, &options) < 0) {
        return NULL;
    }
    if (!isnan(pull)) {
        PyErr_SetString(PyExc_TypeError, "window: it searches the pull, and takes none");
        return NULL;
    }
    tw_window *window = tw_window_create(&self->problem.project, &options);
    if (!window) {
        return PyErr_NoMemory();
    }
    tw_run_open(&run, &options);
    tw_run_begin(&run);
    tw_status status = tw_window_search(&self->problem.project, &options, window);
    tw_run_end(&run);
    if (run.raised) {
        attach_best(window);
    } else if (status < 0) {
        tw_project_raise(self, status);
    } else {
        result = tw_answer_window(window);
    }
    tw_window_free(window);
    return result;
}

static PyMethodDef project_methods[] = {
    {"string", (PyCFunction)(void (*)(void))project_string, METH_VARARGS | METH_KEYWORDS,
     "string(*, pull=None) -> dict with horizontal_tension_N and lengths_m, one per span."},
    {"settle", (PyCFunction)(void (*)(void))project_settle, METH_VARARGS | METH_KEYWORDS,
     "settle(condition, *, pull=None, **options) -> dict of the settled condition, with its bracket."},
    {"judge", (PyCFunction)(void (*)(void))project_judge, METH_VARARGS | METH_KEYWORDS,
     "judge(*, pull=None, **options) -> list of dicts, one per limit and condition it applies to."},
    {"shape", (PyCFunction)(void (*)(void))tw_project_shape, METH_VARARGS | METH_KEYWORDS,
     "shape(condition, points=200, *, pull=None) -> dict of arrays along the exact line, points a span."},
    {"course", (PyCFunction)(void (*)(void))tw_project_course, METH_VARARGS | METH_KEYWORDS,
     "course(condition, *, pull=None) -> array (arcs, 14): the exact line as another project's `courses`."},
    {"at", (PyCFunction)(void (*)(void))tw_project_at, METH_VARARGS | METH_KEYWORDS,
     "at(condition, stations, *, pull=None) -> dict of arrays at the stations; NaN where the line does not pass."},
    {"window", (PyCFunction)(void (*)(void))project_window, METH_VARARGS | METH_KEYWORDS,
     "window(**options) -> dict of the pretension window. On Ctrl-C the KeyboardInterrupt carries .best."},
    {"sheet", (PyCFunction)(void (*)(void))tw_project_sheet, METH_VARARGS | METH_KEYWORDS,
     "sheet(temperatures, *, pull=None, **options) -> dict of what a crew needs, at the temperatures in degC."},
    {"fit", (PyCFunction)(void (*)(void))tw_project_fit, METH_VARARGS | METH_KEYWORDS,
     "fit(points, *, unknown=\"pull\", **options) -> dict of the line that fits measured points; points: dict of arrays."},
    {NULL, NULL, 0, NULL},
};

static PyType_Slot project_slots[] = {
    {Py_tp_doc, "Project(problem: dict): an immutable copy of a problem, in SI units."},
    {Py_tp_new, project_new},
    {Py_tp_dealloc, project_dealloc},
    {Py_tp_traverse, project_traverse},
    {Py_tp_clear, project_clear},
    {Py_tp_methods, project_methods},
    {0, NULL},
};

static PyType_Spec project_spec = {
    .name = "tautwise._core.Project",
    .basicsize = sizeof(project_object),
    .flags = Py_TPFLAGS_DEFAULT | Py_TPFLAGS_HAVE_GC | Py_TPFLAGS_IMMUTABLETYPE,
    .slots = project_slots,
};

PyObject *tw_project_type(PyObject *module)
{
    return PyType_FromModuleAndSpec(module, &project_spec, NULL);
}
