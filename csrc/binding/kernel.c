/* kernel: the array functions settle_spans and natural_length, as gufuncs over scalar core slots. */
#include "python_api.h"

#include <fenv.h>
#include <math.h>
#include <numpy/arrayobject.h>
#include <numpy/ufuncobject.h>

#include "module.h"
#include "uniform.h"

enum { INPUTS = 7, SETTLE_OUTPUTS = 7, LENGTH_OUTPUTS = 2 };

static double input(char **args, const npy_intp *steps, int slot, npy_intp item)
{
    return *(const double *)(args[slot] + item * steps[slot]);
}

static void output(char **args, const npy_intp *steps, int slot, npy_intp item, double value)
{
    *(double *)(args[slot] + item * steps[slot]) = value;
}

static void output_status(char **args, const npy_intp *steps, int slot, npy_intp item, tw_status status)
{
    *(npy_int32 *)(args[slot] + item * steps[slot]) = (npy_int32)status;
}

/* Slots in order: span, rise, natural_length or horizontal_tension, stiffness, weight, across, strain. */
static tw_plain_span read_span(char **args, const npy_intp *steps, npy_intp item)
{
    tw_plain_span span = {
        .span_m = input(args, steps, 0, item),
        .rise_m = input(args, steps, 1, item),
        .natural_length_m = input(args, steps, 2, item),
        .stiffness_N = input(args, steps, 3, item),
        .weight_N_per_m = input(args, steps, 4, item),
        .across_N_per_m = input(args, steps, 5, item),
        .strain = input(args, steps, 6, item),
    };
    return span;
}

static void settle_loop(char **args, const npy_intp *dimensions, const npy_intp *steps, void *NPY_UNUSED(data))
{
    for (npy_intp i = 0; i < dimensions[0]; i++) {
        const tw_plain_span span = read_span(args, steps, i);
        tw_plain_state state = {NAN, NAN, NAN, NAN, NAN, NAN};
        tw_status status = tw_plain_span_settle(&span, &state);
        const double values[] = {state.horizontal_tension_N, state.tension_from_N, state.tension_to_N,
                                 state.sag_m,                state.slant_sag_m,    state.line_length_m};
        for (int k = 0; k < SETTLE_OUTPUTS - 1; k++) {
            output(args, steps, INPUTS + k, i, status == TW_OK ? values[k] : (double)NAN);
        }
        output_status(args, steps, INPUTS + SETTLE_OUTPUTS - 1, i, status);
    }
    feclearexcept(FE_ALL_EXCEPT); /* the items' statuses say it, not a warning */
}

static void length_loop(char **args, const npy_intp *dimensions, const npy_intp *steps, void *NPY_UNUSED(data))
{
    for (npy_intp i = 0; i < dimensions[0]; i++) {
        const tw_plain_span span = read_span(args, steps, i);
        double length = NAN;
        tw_status status = tw_plain_span_length(&span, span.natural_length_m, &length);
        output(args, steps, INPUTS, i, status == TW_OK ? length : (double)NAN);
        output_status(args, steps, INPUTS + 1, i, status);
    }
    feclearexcept(FE_ALL_EXCEPT);
}

static PyUFuncGenericFunction settle_loops[] = {settle_loop};
static PyUFuncGenericFunction length_loops[] = {length_loop};
static void *no_data[] = {NULL};
static const char settle_types[INPUTS + SETTLE_OUTPUTS] = {
    NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE,
    NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_INT32,
};
static const char length_types[INPUTS + LENGTH_OUTPUTS] = {
    NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_DOUBLE, NPY_INT32,
};

typedef struct kernel {
    const char *name;
    const char *doc;
    PyUFuncGenericFunction *loops;
    const char *types;
    int outputs;
    const char *signature;
} kernel;

static const kernel kernels[] = {
    {"settle_spans",
     "settle_spans(span, rise, natural_length, stiffness, weight, across, strain)\n"
     "-> horizontal_tension, tension_from, tension_to, sag, slant_sag, line_length, status",
     settle_loops, settle_types, SETTLE_OUTPUTS, "(),(),(),(),(),(),()->(),(),(),(),(),(),()"},
    {"natural_length",
     "natural_length(span, rise, horizontal_tension, stiffness, weight, across, strain) -> natural_length, status",
     length_loops, length_types, LENGTH_OUTPUTS, "(),(),(),(),(),(),()->(),()"},
};

int tw_kernel_add(PyObject *module)
{
    for (size_t i = 0; i < sizeof kernels / sizeof kernels[0]; i++) {
        const kernel *k = &kernels[i];
        PyObject *ufunc = PyUFunc_FromFuncAndDataAndSignature(k->loops, no_data, k->types, 1, INPUTS, k->outputs,
                                                              PyUFunc_None, k->name, k->doc, 0, k->signature);
        int result = ufunc ? PyModule_AddObjectRef(module, k->name, ufunc) : -1;
        Py_XDECREF(ufunc);
        if (result < 0) {
            return -1;
        }
    }
    return 0;
}
