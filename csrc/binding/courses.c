#include "courses.h"

#include <numpy/arrayobject.h>
#include <string.h>

#include "course.h"
#include "fields.h"

enum { ARC_NUMBERS = 14 };
_Static_assert(sizeof(tw_arc) == ARC_NUMBERS * sizeof(double), "an arc is a row of numbers");

void tw_courses_free(problem *in)
{
    for (size_t k = 0; in->courses && k < in->project.course_count; k++) {
        PyMem_Free((void *)in->courses[k].arcs);
        PyMem_Free((void *)in->courses[k].bows);
    }
    PyMem_Free(in->courses);
    PyMem_Free(in->limit_course);
}

/* A list's or tuple's items, owned; NULL and raises. */
static PyObject *items_of(PyObject *given, const char *key)
{
    if (!PyList_Check(given) && !PyTuple_Check(given)) {
        PyErr_Format(PyExc_TypeError, "%s: expected a list", key);
        return NULL;
    }
    return PySequence_Tuple(given);
}

static int read_course(PyObject *given, tw_course *out)
{
    PyArrayObject *array = (PyArrayObject *)PyArray_FROM_OTF(given, NPY_DOUBLE, NPY_ARRAY_IN_ARRAY);
    int result = -1;
    if (array && PyArray_NDIM(array) == 2 && PyArray_DIM(array, 1) == ARC_NUMBERS && PyArray_DIM(array, 0) > 0) {
        size_t count = (size_t)PyArray_DIM(array, 0);
        tw_arc *arcs = PyMem_Malloc(count * sizeof *arcs);
        tw_bow *bows = PyMem_Malloc((2 * count - 1) * sizeof *bows);
        out->arcs = arcs;
        out->bows = bows;
        if (arcs && bows) {
            memcpy(arcs, PyArray_DATA(array), count * sizeof *arcs);
            tw_course_bows(arcs, 0, 0, count, bows);
            out->arc_count = count;
            result = 0;
        } else {
            PyErr_NoMemory();
        }
    } else if (array) {
        PyErr_SetString(PyExc_ValueError, "courses: expected arrays of shape (arcs, 14)");
    }
    Py_XDECREF(array);
    return result;
}

int tw_courses_read(PyObject *dict, problem *out)
{
    PyObject *given = tw_fields_get(dict, "courses");
    PyObject *items = given ? items_of(given, "courses") : NULL;
    if (!given) {
        return 0;
    }
    size_t count = items ? (size_t)PyTuple_GET_SIZE(items) : 0;
    int result = items ? 0 : -1;
    if (count > 0) {
        out->courses = PyMem_Calloc(count, sizeof *out->courses);
        result = out->courses ? 0 : (PyErr_NoMemory(), -1);
        out->project.course_count = out->courses ? count : 0;
    }
    for (size_t k = 0; result == 0 && k < count; k++) {
        result = read_course(PyTuple_GET_ITEM(items, (Py_ssize_t)k), &out->courses[k]);
    }
    out->project.courses = out->courses;
    Py_XDECREF(items);
    return result;
}

static int read_number(PyObject *given, size_t *course)
{
    *course = given == Py_None ? TW_NONE : PyLong_AsSize_t(given);
    return PyErr_Occurred() ? -1 : 0;
}

int tw_courses_read_limit(PyObject *row, size_t limit, problem *out)
{
    size_t conditions = out->project.condition_count;
    size_t *grown = PyMem_Realloc(out->limit_course, (limit + 1) * (conditions + 1) * sizeof *grown);
    if (!grown) {
        PyErr_NoMemory();
        return -1;
    }
    out->limit_course = grown;
    size_t *own = grown + limit * conditions;
    for (size_t c = 0; c < conditions; c++) {
        own[c] = TW_NONE;
    }
    PyObject *given = tw_fields_get(row, "courses");
    PyObject *items = given ? items_of(given, "courses") : NULL;
    int result = given && !items ? -1 : 0;
    if (items && (size_t)PyTuple_GET_SIZE(items) != conditions) {
        PyErr_Format(PyExc_ValueError, "courses: expected %zu entries, one for each condition", conditions);
        result = -1;
    }
    for (size_t c = 0; items && result == 0 && c < conditions; c++) {
        result = read_number(PyTuple_GET_ITEM(items, (Py_ssize_t)c), &own[c]);
    }
    Py_XDECREF(items);
    return result;
}

PyObject *tw_courses_along(const tw_section *section)
{
    npy_intp shape[2] = {0, ARC_NUMBERS};
    Py_BEGIN_ALLOW_THREADS
    shape[0] = (npy_intp)tw_course_arcs(section, NULL);
    Py_END_ALLOW_THREADS
    PyObject *array = PyArray_SimpleNew(2, shape, NPY_DOUBLE);
    if (array) {
        tw_arc *arcs = PyArray_DATA((PyArrayObject *)array);
        Py_BEGIN_ALLOW_THREADS
        tw_course_arcs(section, arcs);
        Py_END_ALLOW_THREADS
    }
    return array;
}
