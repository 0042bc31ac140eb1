#include "problem.h"

#include <math.h>
#include <numpy/arrayobject.h>
#include <string.h>

#include "check.h"
#include "fields.h"

static const char *const hold_names[] = {"anchor", "hanger", "sheave", "post", NULL};
static const char *const place_names[] = {"whole", "station", "length", NULL};
static const char *const frame_names[] = {"span", "route", NULL};
static const char *const kind_names[] = {"clearance", "tension", "support_load", "uplift", "swing", "sag",
                                         "catenary_constant", "slope", NULL};
static const char *const direction_names[] = {"along", "across", "down", "up", "resultant", NULL};
static const char *const rule_names[] = {"pull", "tension", "sag", "total_length", "span_lengths", "none", NULL};

static const char *const problem_keys[] = {"line", "supports", "ground", "crossings", "conditions", "marks", "limits",
                                           "stringing", NULL};
static const char *const support_keys[] = {"hold", NULL};
static const char *const condition_keys[] = {"loads", NULL};
static const char *const load_keys[] = {"is_point", "place", "frame", "vector", NULL};
static const char *const mark_keys[] = {"place", NULL};
static const char *const limit_keys[] = {"kind", "crossing", "direction", "applies", "covers", NULL};
static const char *const stringing_keys[] = {"rule", "index", "lengths_m", NULL};

void tw_problem_free(problem *in)
{
    PyMem_Free(in->supports);
    PyMem_Free(in->ground);
    PyMem_Free(in->crossings);
    PyMem_Free(in->conditions);
    PyMem_Free(in->loads);
    PyMem_Free(in->marks);
    PyMem_Free(in->limits);
    PyMem_Free(in->applies);
    PyMem_Free(in->covers);
    PyMem_Free(in->lengths);
    memset(in, 0, sizeof *in);
}

/* dict[key] as a list or tuple (NULL and count 0 where missing), or -1 and raises. */
static int rows_of(PyObject *dict, const char *key, PyObject **rows, size_t *count)
{
    *rows = tw_fields_get(dict, key);
    *count = 0;
    if (!*rows) {
        return 0;
    }
    if (!PyList_Check(*rows) && !PyTuple_Check(*rows)) {
        PyErr_Format(PyExc_TypeError, "%s: expected a list", key);
        return -1;
    }
    *count = (size_t)PySequence_Fast_GET_SIZE(*rows);
    return 0;
}

static PyObject *row_at(PyObject *rows, size_t index)
{
    return PySequence_Fast_GET_ITEM(rows, (Py_ssize_t)index);
}

/* Zeroed room for count rows, at least one. */
static void *room(size_t count, size_t size)
{
    void *block = PyMem_Calloc(count ? count : 1, size);
    if (!block) {
        PyErr_NoMemory();
    }
    return block;
}

static int read_index(PyObject *dict, const char *key, size_t *index)
{
    PyObject *value = tw_fields_get(dict, key);
    *index = TW_NONE;
    if (value) {
        *index = PyLong_AsSize_t(value);
        if (PyErr_Occurred()) {
            return -1;
        }
    }
    return 0;
}

static int read_supports(PyObject *dict, problem *out)
{
    PyObject *rows;
    size_t count;
    if (rows_of(dict, "supports", &rows, &count) < 0 || !(out->supports = room(count, sizeof(tw_support)))) {
        return -1;
    }
    for (size_t j = 0; j < count; j++) {
        PyObject *row = row_at(rows, j);
        if (tw_fields_read(row, tw_support_table, support_keys, &out->supports[j]) < 0) {
            return -1;
        }
        int hold = tw_fields_choice(row, "hold", hold_names, TW_HOLD_ANCHOR);
        if (hold < 0) {
            return -1;
        }
        out->supports[j].hold = (tw_hold)hold;
    }
    out->project.supports = out->supports;
    out->project.support_count = count;
    return 0;
}

static PyArrayObject *vector_of(PyObject *dict, const char *key)
{
    PyObject *value = tw_fields_get(dict, key);
    PyArrayObject *array = value ? (PyArrayObject *)PyArray_FROM_OTF(value, NPY_DOUBLE, NPY_ARRAY_IN_ARRAY) : NULL;
    if (!array || PyArray_NDIM(array) != 1) {
        Py_XDECREF(array);
        if (!PyErr_Occurred()) {
            PyErr_Format(PyExc_ValueError, "%s: expected a one-dimensional array of numbers", key);
        }
        return NULL;
    }
    return array;
}

static int read_ground(PyObject *dict, problem *out)
{
    static const char *const keys[] = {"station_m", "elevation_m", NULL};
    static const field_table none = {NULL, 0};
    PyObject *ground = tw_fields_get(dict, "ground");
    if (!ground) {
        return 0;
    }
    if (tw_fields_read(ground, none, keys, NULL) < 0) {
        return -1;
    }
    PyArrayObject *station = vector_of(ground, "station_m");
    PyArrayObject *elevation = station ? vector_of(ground, "elevation_m") : NULL;
    int result = -1;
    if (elevation) {
        size_t count = (size_t)PyArray_DIM(station, 0);
        if (count != (size_t)PyArray_DIM(elevation, 0)) {
            PyErr_SetString(PyExc_ValueError, "ground: station_m and elevation_m differ in length");
        } else if ((out->ground = room(2 * count, sizeof(double)))) {
            memcpy(out->ground, PyArray_DATA(station), count * sizeof(double));
            memcpy(out->ground + count, PyArray_DATA(elevation), count * sizeof(double));
            out->project.ground_count = count;
            out->project.ground_station_m = out->ground;
            out->project.ground_elevation_m = out->ground + count;
            result = 0;
        }
    }
    Py_XDECREF(station);
    Py_XDECREF(elevation);
    return result;
}

static int read_crossings(PyObject *dict, problem *out)
{
    PyObject *rows;
    size_t count;
    if (rows_of(dict, "crossings", &rows, &count) < 0 || !(out->crossings = room(count, sizeof(tw_crossing)))) {
        return -1;
    }
    for (size_t k = 0; k < count; k++) {
        if (tw_fields_read(row_at(rows, k), tw_crossing_table, NULL, &out->crossings[k]) < 0) {
            return -1;
        }
    }
    out->project.crossings = out->crossings;
    out->project.crossing_count = count;
    return 0;
}

static int read_load(PyObject *row, tw_load *load)
{
    if (tw_fields_read(row, tw_load_table, load_keys, load) < 0) {
        return -1;
    }
    int place = tw_fields_choice(row, "place", place_names, TW_PLACE_WHOLE);
    int frame = tw_fields_choice(row, "frame", frame_names, TW_FRAME_SPAN);
    PyObject *point = tw_fields_get(row, "is_point");
    int is_point = point ? PyObject_IsTrue(point) : 0;
    PyObject *vector = tw_fields_get(row, "vector");
    if (place < 0 || frame < 0 || is_point < 0) {
        return -1;
    }
    load->place = (tw_place)place;
    load->frame = (tw_frame)frame;
    load->is_point = is_point;
    return vector && PyArg_ParseTuple(vector, "ddd;vector takes three numbers", &load->vector[0], &load->vector[1],
                                      &load->vector[2])
               ? 0
               : (PyErr_Occurred() ? -1 : (PyErr_SetString(PyExc_ValueError, "a load needs a vector"), -1));
}

static int count_loads(PyObject *conditions, size_t count, size_t *total)
{
    *total = 0;
    for (size_t c = 0; c < count; c++) {
        PyObject *rows;
        size_t loads;
        PyObject *row = row_at(conditions, c);
        if (!PyDict_Check(row)) {
            PyErr_SetString(PyExc_TypeError, "conditions: expected dicts");
            return -1;
        }
        if (rows_of(row, "loads", &rows, &loads) < 0) {
            return -1;
        }
        *total += loads;
    }
    return 0;
}

static int read_conditions(PyObject *dict, problem *out)
{
    PyObject *rows, *load_rows;
    size_t count, total, loads, next = 0;
    if (rows_of(dict, "conditions", &rows, &count) < 0 || count_loads(rows, count, &total) < 0
        || !(out->conditions = room(count, sizeof(tw_condition))) || !(out->loads = room(total, sizeof(tw_load)))) {
        return -1;
    }
    for (size_t c = 0; c < count; c++) {
        PyObject *row = row_at(rows, c);
        tw_condition *condition = &out->conditions[c];
        if (tw_fields_read(row, tw_condition_table, condition_keys, condition) < 0
            || rows_of(row, "loads", &load_rows, &loads) < 0) {
            return -1;
        }
        condition->load_first = next;
        condition->load_count = loads;
        for (size_t i = 0; i < loads; i++) {
            if (read_load(row_at(load_rows, i), &out->loads[next++]) < 0) {
                return -1;
            }
        }
    }
    out->project.conditions = out->conditions;
    out->project.condition_count = count;
    out->project.loads = out->loads;
    out->project.load_count = total;
    return 0;
}

static int read_marks(PyObject *dict, problem *out)
{
    PyObject *rows;
    size_t count;
    if (rows_of(dict, "marks", &rows, &count) < 0 || !(out->marks = room(count, sizeof(tw_mark)))) {
        return -1;
    }
    for (size_t i = 0; i < count; i++) {
        PyObject *row = row_at(rows, i);
        if (tw_fields_read(row, tw_mark_table, mark_keys, &out->marks[i]) < 0) {
            return -1;
        }
        int place = tw_fields_choice(row, "place", place_names, TW_PLACE_STATION);
        if (place < 0) {
            return -1;
        }
        out->marks[i].place = (tw_place)place;
    }
    out->project.marks = out->marks;
    out->project.mark_count = count;
    return 0;
}

/* A list of truths, or all true where missing. */
static int read_flags(PyObject *row, const char *key, unsigned char *flags, size_t count)
{
    PyObject *list;
    size_t given;
    if (rows_of(row, key, &list, &given) < 0) {
        return -1;
    }
    if (!list) {
        memset(flags, 1, count);
        return 0;
    }
    if (given != count) {
        PyErr_Format(PyExc_ValueError, "%s: expected %zu entries, not %zu", key, count, given);
        return -1;
    }
    for (size_t i = 0; i < count; i++) {
        int truth = PyObject_IsTrue(row_at(list, i));
        if (truth < 0) {
            return -1;
        }
        flags[i] = (unsigned char)truth;
    }
    return 0;
}

static int read_limit(PyObject *row, size_t index, problem *out)
{
    tw_limit *limit = &out->limits[index];
    size_t conditions = out->project.condition_count, supports = out->project.support_count;
    if (tw_fields_read(row, tw_limit_table, limit_keys, limit) < 0) {
        return -1;
    }
    int kind = tw_fields_choice(row, "kind", kind_names, -1);
    int direction = tw_fields_choice(row, "direction", direction_names, TW_DIRECTION_RESULTANT);
    if (kind < 0 || direction < 0 || read_index(row, "crossing", &limit->crossing) < 0) {
        return -1;
    }
    limit->kind = (tw_limit_kind)kind;
    limit->direction = (tw_direction)direction;
    if (read_flags(row, "applies", out->applies + index * conditions, conditions) < 0) {
        return -1;
    }
    return read_flags(row, "covers", out->covers + index * supports, supports);
}

static int read_limits(PyObject *dict, problem *out)
{
    PyObject *rows;
    size_t count;
    if (rows_of(dict, "limits", &rows, &count) < 0 || !(out->limits = room(count, sizeof(tw_limit)))
        || !(out->applies = room(count * out->project.condition_count, 1))
        || !(out->covers = room(count * out->project.support_count, 1))) {
        return -1;
    }
    for (size_t i = 0; i < count; i++) {
        if (read_limit(row_at(rows, i), i, out) < 0) {
            return -1;
        }
    }
    out->project.limits = out->limits;
    out->project.limit_count = count;
    out->project.limit_applies = out->applies;
    out->project.limit_covers = out->covers;
    return 0;
}

static int read_lengths(PyObject *row, problem *out)
{
    size_t spans = out->project.support_count - 1;
    PyArrayObject *lengths = vector_of(row, "lengths_m");
    if (!lengths) {
        return -1;
    }
    int right = (size_t)PyArray_DIM(lengths, 0) == spans;
    if (!right) {
        PyErr_Format(PyExc_ValueError, "lengths_m: expected %zu natural lengths, one per span", spans);
    } else if ((out->lengths = room(spans, sizeof(double)))) {
        memcpy(out->lengths, PyArray_DATA(lengths), spans * sizeof(double));
        out->project.stringing.lengths_m = out->lengths;
    }
    Py_DECREF(lengths);
    return out->lengths ? 0 : -1;
}

static int read_stringing(PyObject *dict, problem *out)
{
    PyObject *row = tw_fields_get(dict, "stringing");
    tw_stringing *stringing = &out->project.stringing;
    if (!row) {
        PyErr_SetString(PyExc_ValueError, "stringing is missing");
        return -1;
    }
    if (tw_fields_read(row, tw_stringing_table, stringing_keys, stringing) < 0
        || read_index(row, "index", &stringing->index) < 0) {
        return -1;
    }
    int rule = tw_fields_choice(row, "rule", rule_names, TW_STRING_NONE);
    if (rule < 0) {
        return -1;
    }
    stringing->rule = (tw_stringing_rule)rule;
    return rule == TW_STRING_SPAN_LENGTHS ? read_lengths(row, out) : 0;
}

static int set_text(PyObject *object, const char *name, PyObject *text)
{
    int result = text ? PyObject_SetAttrString(object, name, text) : -1;
    Py_XDECREF(text);
    return result;
}

void tw_problem_raise(const char *table, size_t index, const char *name, const char *expected, PyObject *range_error)
{
    PyObject *path = index == TW_NONE ? PyUnicode_FromFormat("%s.%s", table, name)
                                      : PyUnicode_FromFormat("%s[%zu].%s", table, index, name);
    PyObject *message = path ? PyUnicode_FromFormat("%U: expected %s", path, expected) : NULL;
    PyObject *error = message ? PyObject_CallOneArg(range_error, message) : NULL;
    if (error && set_text(error, "path", Py_NewRef(path)) == 0
        && set_text(error, "expected", PyUnicode_FromString(expected)) == 0) {
        PyErr_SetObject(range_error, error);
    }
    Py_XDECREF(path);
    Py_XDECREF(message);
    Py_XDECREF(error);
}

int tw_problem_read(PyObject *dict, PyObject *range_error, problem *out)
{
    static const field_table none = {NULL, 0};
    tw_fault fault;
    memset(out, 0, sizeof *out);
    if (tw_fields_read(dict, none, problem_keys, NULL) < 0) {
        return -1;
    }
    PyObject *line = tw_fields_get(dict, "line");
    if (!line) {
        PyErr_SetString(PyExc_ValueError, "line is missing");
        return -1;
    }
    if (tw_fields_read(line, tw_line_table, NULL, &out->project.line) < 0 || read_supports(dict, out) < 0) {
        return -1;
    }
    if (out->project.support_count < 2) {
        tw_problem_raise("supports", TW_NONE, "count", "at least two supports", range_error);
        return -1;
    }
    if (read_ground(dict, out) < 0 || read_crossings(dict, out) < 0 || read_conditions(dict, out) < 0
        || read_marks(dict, out) < 0 || read_limits(dict, out) < 0 || read_stringing(dict, out) < 0) {
        return -1;
    }
    if (tw_check_project(&out->project, &fault) != TW_OK) {
        tw_problem_raise(fault.table, fault.index, fault.field, fault.expected, range_error);
        return -1;
    }
    return 0;
}
