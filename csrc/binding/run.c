#include "run.h"

#include <string.h>

#include "check.h"
#include "clock.h"
#include "fields.h"
#include "problem.h"

static const double SIGNAL_PERIOD_S = 0.02; /* well below the 0.1 s in which Ctrl-C has to end a search */

static int poll_signals(void *data)
{
    run_state *run = data;
    double now = tw_clock_now();
    if (!run->raised && now - run->last_s >= SIGNAL_PERIOD_S) {
        run->last_s = now;
        PyEval_RestoreThread(run->saved);
        run->raised = PyErr_CheckSignals() < 0;
        run->saved = PyEval_SaveThread();
    }
    return run->raised ? TW_CANCELLED : now < run->deadline ? TW_OK : TW_DEADLINE;
}

void tw_run_open(run_state *run, tw_options *options)
{
    run->raised = 0;
    run->last_s = tw_clock_now();
    run->deadline = tw_clock_deadline(options->seconds_most);
    options->poll = poll_signals;
    options->poll_data = run;
}

void tw_run_begin(run_state *run)
{
    run->saved = PyEval_SaveThread();
}

void tw_run_end(run_state *run)
{
    PyEval_RestoreThread(run->saved);
}

typedef struct whole_option {
    const char *name;
    size_t offset;
} whole_option;

static const whole_option whole_options[] = {
    {"elements_per_span", offsetof(tw_options, elements_per_span)},
    {"elements_most", offsetof(tw_options, elements_most)},
    {"evaluations_most", offsetof(tw_options, evaluations_most)},
    {"newton_most", offsetof(tw_options, newton_most)},
    {"scan_points", offsetof(tw_options, scan_points)},
};
static const whole_option real_options[] = {
    {"gap_relative", offsetof(tw_options, gap_relative)},
    {"residual_relative", offsetof(tw_options, residual_relative)},
    {"closing_relative", offsetof(tw_options, closing_relative)},
    {"seconds_most", offsetof(tw_options, seconds_most)},
};

/* 1: taken. 0: not this table's. -1: raised. */
static int take_whole(const char *name, PyObject *value, tw_options *options)
{
    for (size_t i = 0; i < sizeof whole_options / sizeof whole_options[0]; i++) {
        if (strcmp(whole_options[i].name, name) == 0) {
            size_t number = PyLong_AsSize_t(value);
            if (PyErr_Occurred() && PyErr_ExceptionMatches(PyExc_OverflowError)) {
                PyErr_Clear();
                number = 0; /* out of every range: the check says so */
            }
            memcpy((char *)options + whole_options[i].offset, &number, sizeof number);
            return PyErr_Occurred() ? -1 : 1;
        }
    }
    return 0;
}

static int take_real(const char *name, PyObject *value, tw_options *options)
{
    for (size_t i = 0; i < sizeof real_options / sizeof real_options[0]; i++) {
        if (strcmp(real_options[i].name, name) == 0) {
            double number = PyFloat_AsDouble(value);
            memcpy((char *)options + real_options[i].offset, &number, sizeof number);
            return PyErr_Occurred() ? -1 : 1;
        }
    }
    return 0;
}

static int take(const char *name, PyObject *value, tw_options *options)
{
    if (strcmp(name, "verify") == 0) {
        options->verify = PyObject_IsTrue(value);
        return options->verify < 0 ? -1 : 1;
    }
    int taken = take_whole(name, value, options);
    return taken ? taken : take_real(name, value, options);
}

int tw_run_options(PyObject *keywords, PyObject *range_error, tw_options *options)
{
    PyObject *key, *value;
    Py_ssize_t at = 0;
    tw_fault fault;
    *options = tw_options_default();
    while (keywords && PyDict_Next(keywords, &at, &key, &value)) {
        const char *name = PyUnicode_AsUTF8(key);
        int taken = name ? take(name, value, options) : -1;
        if (taken == 0) {
            PyErr_Format(PyExc_TypeError, "unknown option %R", key);
        }
        if (taken <= 0) {
            return -1;
        }
    }
    if (tw_check_options(options, &fault) != TW_OK) {
        tw_problem_raise(fault.table, fault.index, fault.field, fault.expected, range_error);
        return -1;
    }
    return 0;
}
