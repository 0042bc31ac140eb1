/* python_api: the one way in to Python.h and NumPy, with the API level stated once. */
#ifndef TW_PYTHON_API_H
#define TW_PYTHON_API_H

#define PY_SSIZE_T_CLEAN
#include <Python.h>

#define NPY_NO_DEPRECATED_API NPY_1_25_API_VERSION
#define NPY_TARGET_VERSION NPY_1_25_API_VERSION
#define PY_ARRAY_UNIQUE_SYMBOL tautwise_ARRAY_API
#define PY_UFUNC_UNIQUE_SYMBOL tautwise_UFUNC_API
#ifndef TW_IMPORTS_NUMPY
#define NO_IMPORT_ARRAY
#define NO_IMPORT_UFUNC
#endif

#endif
