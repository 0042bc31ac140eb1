/* module: tautwise._core, multi-phase initialisation. */
#define TW_IMPORTS_NUMPY
#include "python_api.h"

#include <numpy/arrayobject.h>
#include <numpy/ufuncobject.h>

#include "fields.h"
#include "line.h"
#include "module.h"
#include "optimise.h"
#include "status.h"

static PyObject *defaults(void)
{
    const tw_options o = tw_options_default();
    return Py_BuildValue("{s:d,s:d,s:d,s:n,s:n,s:n,s:n,s:d,s:n,s:O}", "gap_relative", o.gap_relative,
                         "residual_relative", o.residual_relative, "closing_relative", o.closing_relative,
                         "elements_per_span", (Py_ssize_t)o.elements_per_span, "elements_most",
                         (Py_ssize_t)o.elements_most, "evaluations_most", (Py_ssize_t)o.evaluations_most, "newton_most",
                         (Py_ssize_t)o.newton_most, "seconds_most", o.seconds_most, "scan_points",
                         (Py_ssize_t)o.scan_points, "verify", o.verify ? Py_True : Py_False);
}

static PyObject *statuses(void)
{
    PyObject *dict = PyDict_New();
#define PUT_STATUS(symbol, value, name, text)                                     \
    if (dict && tw_fields_put(dict, name, PyUnicode_FromString(text)) < 0) {      \
        Py_CLEAR(dict);                                                           \
    }
    TW_STATUS_LIST(PUT_STATUS)
#undef PUT_STATUS
    return dict;
}

static PyObject *nlopt_version_text(void)
{
    int major, minor, bugfix;
    tw_optimise_version(&major, &minor, &bugfix);
    return PyUnicode_FromFormat("%d.%d.%d", major, minor, bugfix);
}

static int add_stolen(PyObject *module, const char *name, PyObject *value)
{
    int result = value ? PyModule_AddObjectRef(module, name, value) : -1;
    Py_XDECREF(value);
    return result;
}

static int module_exec(PyObject *module)
{
    module_state *state = PyModule_GetState(module);
    if (PyArray_ImportNumPyAPI() < 0 || PyUFunc_ImportUFuncAPI() < 0) {
        return -1;
    }
    state->range_error = PyErr_NewExceptionWithDoc("tautwise._core.RangeError", "A number is outside its range.",
                                                   PyExc_ValueError, NULL);
    state->settle_error = PyErr_NewExceptionWithDoc("tautwise._core.SettleError", "A call ended without its result.",
                                                    PyExc_RuntimeError, NULL);
    if (!state->range_error || !state->settle_error) {
        return -1;
    }
    state->project_type = tw_project_type(module);
    if (!state->project_type || PyModule_AddObjectRef(module, "Project", state->project_type) < 0
        || PyModule_AddObjectRef(module, "RangeError", state->range_error) < 0
        || PyModule_AddObjectRef(module, "SettleError", state->settle_error) < 0
        || add_stolen(module, "DEFAULTS", defaults()) < 0 || add_stolen(module, "STATUS", statuses()) < 0
        || add_stolen(module, "NLOPT_VERSION", nlopt_version_text()) < 0) {
        return -1;
    }
    return tw_kernel_add(module);
}

static int module_traverse(PyObject *module, visitproc visit, void *arg)
{
    module_state *state = PyModule_GetState(module);
    Py_VISIT(state->range_error);
    Py_VISIT(state->settle_error);
    Py_VISIT(state->project_type);
    return 0;
}

static int module_clear(PyObject *module)
{
    module_state *state = PyModule_GetState(module);
    Py_CLEAR(state->range_error);
    Py_CLEAR(state->settle_error);
    Py_CLEAR(state->project_type);
    return 0;
}

static PyModuleDef_Slot module_slots[] = {
    {Py_mod_exec, module_exec},
#if PY_VERSION_HEX >= 0x030C0000
    {Py_mod_multiple_interpreters, Py_MOD_MULTIPLE_INTERPRETERS_NOT_SUPPORTED},
#endif
#if PY_VERSION_HEX >= 0x030D0000
    {Py_mod_gil, Py_MOD_GIL_NOT_USED},
#endif
    {0, NULL},
};

static struct PyModuleDef module_definition = {
    PyModuleDef_HEAD_INIT,
    .m_name = "tautwise._core",
    .m_doc = "The C core of Tautwise: settled lines, limits, searches and array kernels, in SI units.",
    .m_size = sizeof(module_state),
    .m_slots = module_slots,
    .m_traverse = module_traverse,
    .m_clear = module_clear,
};

PyMODINIT_FUNC PyInit__core(void);

PyMODINIT_FUNC PyInit__core(void)
{
    return PyModuleDef_Init(&module_definition);
}
