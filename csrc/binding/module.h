/* module: the state of the extension module. */
#ifndef TW_MODULE_H
#define TW_MODULE_H

#include "python_api.h"

typedef struct module_state {
    PyObject *range_error; /* RangeError(ValueError): .path, .expected */
    PyObject *settle_error;/* SettleError(RuntimeError): .status */
    PyObject *project_type;
} module_state;

/* Heap type Project; NULL and raises. */
PyObject *tw_project_type(PyObject *module);

/* Adds the array kernels; -1 and raises. */
int tw_kernel_add(PyObject *module);

#endif
