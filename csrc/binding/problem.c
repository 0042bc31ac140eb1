#include "problem.h"

#include <math.h>
#include <numpy/arrayobject.h>
#include <string.h>

#include "check.h"
#include "courses.h"
#include "fields.h"
#include "problem_line.h"
#include "route.h"

static const char *const hold_names[] = {"anchor", "hanger", "sheave", "post", NULL};
static const char *const state_names[] = {"initial", "final", "after creep", NULL};
static const char *const route_names[] = {"straight", "turning", NULL};
static const char *const place_names[] = {"whole", "station", "length", NULL};
static const char *const carriage_names[] = {"none", "free", "held", NULL};
static const char *const frame_names[] = {"span", "route", NULL};
static const char *const kind_names[] = {"clearance", "tension", "support_load", "uplift", "swing", "sag",
                                         "catenary_constant", "slope", "spacing", NULL};
static const char *const direction_names[] = {"along", "across", "down", "up", "resultant", NULL};
static const char *const method_names[] = {"clamped", "over_sheaves", NULL};
static const char *const clip_names[] = {"plumb", "lies", NULL};
static const char *const rule_names[] = {"pull", "tension", "sag", "total_length", "span_lengths", "none", NULL};

static const char *const problem_keys[] = {"line", "supports", "ground", "crossings", "conditions", "marks", "limits",
                                           "stringing", "history", "route", "courses", NULL};
static const char *const support_keys[] = {"hold", NULL};
static const char *const condition_keys[] = {"loads", "ice_share", "state", NULL};
static const char *const load_keys[] = {"is_point", "is_run", "place", "frame", "vector", "vector_to", "covers",
                                        "carriage", "carriage_span", NULL};
static const char *const mark_keys[] = {"place", NULL};
static const char *const limit_keys[] = {"kind", "crossing", "direction", "applies", "covers", "courses", "strung_course",
                                         NULL};
static const char *const stringing_keys[] = {"rule", "index", "lengths_m", "method", "clip", NULL};

void tw_problem_free(problem *in)
{
    for (size_t i = 0; i < in->project.load_count; i++) {
        PyMem_Free((void *)in->loads[i].covers);
    }
    for (size_t c = 0; in->conditions && c < in->condition_rows; c++) {
        PyMem_Free((void *)in->conditions[c].ice_share);
    }
    PyMem_Free(in->supports);
    PyMem_Free(in->route);
    PyMem_Free(in->ground);
    PyMem_Free(in->crossings);
    PyMem_Free(in->conditions);
    PyMem_Free(in->loads);
    PyMem_Free(in->marks);
    PyMem_Free(in->limits);
    PyMem_Free(in->applies);
    PyMem_Free(in->covers);
    PyMem_Free(in->lengths);
    PyMem_Free(in->met);
    tw_courses_free(in);
    memset(in, 0, sizeof *in);
}

/* dict[key] as an owned tuple (NULL and count 0 where missing), so that what it holds stays while numbers are taken out of
 * it; -1 and raises. */
static int rows_of(PyObject *dict, const char *key, PyObject **rows, size_t *count)
{
    PyObject *given = tw_fields_get(dict, key);
    *rows = NULL;
    *count = 0;
    if (!given) {
        return 0;
    }
    if (!PyList_Check(given) && !PyTuple_Check(given)) {
        PyErr_Format(PyExc_TypeError, "%s: expected a list", key);
        return -1;
    }
    *rows = PySequence_Tuple(given);
    *count = *rows ? (size_t)PyTuple_GET_SIZE(*rows) : 0;
    return *rows ? 0 : -1;
}

static PyObject *row_at(PyObject *rows, size_t index)
{
    return PyTuple_GET_ITEM(rows, (Py_ssize_t)index);
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

/* Reads one row of a table into the problem. */
typedef int (*row_reader)(PyObject *row, size_t index, problem *out);

/* dict[key] into zeroed room, row by row; the array and its count are set before the first row is read. */
static int read_table(PyObject *dict, const char *key, size_t size, void **array, size_t *count, row_reader read,
                      problem *out)
{
    PyObject *rows;
    int result = rows_of(dict, key, &rows, count);
    if (result == 0) {
        *array = room(*count, size);
        result = *array ? 0 : -1;
    }
    for (size_t i = 0; result == 0 && i < *count; i++) {
        result = read(row_at(rows, i), i, out);
    }
    Py_XDECREF(rows);
    return result;
}

static int read_support(PyObject *row, size_t index, problem *out)
{
    if (tw_fields_read(row, tw_support_table, support_keys, &out->supports[index]) < 0) {
        return -1;
    }
    int hold = tw_fields_choice(row, "hold", hold_names, TW_HOLD_ANCHOR);
    out->supports[index].hold = hold < 0 ? TW_HOLD_ANCHOR : (tw_hold)hold;
    return hold < 0 ? -1 : 0;
}

static int read_supports(PyObject *dict, problem *out)
{
    size_t count;
    if (read_table(dict, "supports", sizeof(tw_support), (void **)&out->supports, &count, read_support, out) < 0) {
        return -1;
    }
    out->project.supports = out->supports;
    out->project.support_count = count;
    return 0;
}

/* A turning route: station_m and offset_m of the supports are plan coordinates, and the stations are measured here. */
static int read_route(PyObject *dict, problem *out)
{
    int route = tw_fields_choice(dict, "route", route_names, 0);
    if (route == 1) {
        out->route = room(out->project.support_count, sizeof(double));
        if (!out->route) {
            return -1;
        }
        tw_route_measure(out->supports, out->project.support_count, out->route);
        out->project.route_station_m = out->route;
    }
    return route < 0 ? -1 : 0;
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
    PyObject *ground = Py_XNewRef(tw_fields_get(dict, "ground"));
    if (!ground) {
        return 0;
    }
    int known = tw_fields_read(ground, none, keys, NULL) == 0;
    PyArrayObject *station = known ? vector_of(ground, "station_m") : NULL;
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
    Py_DECREF(ground);
    return result;
}

static int read_crossing(PyObject *row, size_t index, problem *out)
{
    return tw_fields_read(row, tw_crossing_table, NULL, &out->crossings[index]);
}

static int read_crossings(PyObject *dict, problem *out)
{
    size_t count;
    if (read_table(dict, "crossings", sizeof(tw_crossing), (void **)&out->crossings, &count, read_crossing, out) < 0) {
        return -1;
    }
    out->project.crossings = out->crossings;
    out->project.crossing_count = count;
    return 0;
}

/* dict[key]: three numbers. */
static int read_vector(PyObject *row, const char *key, double vector[3])
{
    PyObject *given = tw_fields_get(row, key);
    PyObject *numbers = given ? PySequence_Tuple(given) : NULL;
    int result = numbers && PyTuple_GET_SIZE(numbers) == 3 ? 0 : -1;
    for (int i = 0; result == 0 && i < 3; i++) {
        vector[i] = PyFloat_AsDouble(PyTuple_GET_ITEM(numbers, i));
        result = PyErr_Occurred() ? -1 : 0;
    }
    Py_XDECREF(numbers);
    if (result < 0 && !PyErr_Occurred()) {
        PyErr_Format(PyExc_ValueError, "%s: expected three numbers", key);
    }
    return result;
}

/* A list of truths, or all true where missing. */
static int read_flags(PyObject *row, const char *key, unsigned char *flags, size_t count)
{
    PyObject *list;
    size_t given;
    int result = rows_of(row, key, &list, &given);
    if (result == 0 && list && given != count) {
        PyErr_Format(PyExc_ValueError, "%s: expected %zu entries, not %zu", key, count, given);
        result = -1;
    }
    for (size_t i = 0; result == 0 && i < count; i++) {
        int truth = list ? PyObject_IsTrue(row_at(list, i)) : 1;
        result = truth < 0 ? -1 : 0;
        flags[i] = (unsigned char)(truth > 0);
    }
    Py_XDECREF(list);
    return result;
}

/* dict["covers"]: one truth for each span, owned by the load; NULL where missing. */
static int read_load_covers(PyObject *row, size_t spans, tw_load *load)
{
    if (!tw_fields_get(row, "covers")) {
        return 0;
    }
    unsigned char *covers = room(spans, 1);
    load->covers = covers;
    return covers ? read_flags(row, "covers", covers, spans) : -1;
}

static int truth_of(PyObject *row, const char *key)
{
    PyObject *value = tw_fields_get(row, key);
    return value ? PyObject_IsTrue(value) : 0;
}

static int read_carriage(PyObject *row, tw_load *load)
{
    int carriage = tw_fields_choice(row, "carriage", carriage_names, TW_CARRIAGE_NONE);
    load->carriage = carriage < 0 ? TW_CARRIAGE_NONE : (tw_carriage)carriage;
    return carriage < 0 ? -1 : read_index(row, "carriage_span", &load->carriage_span);
}

static int read_load(PyObject *row, size_t spans, tw_load *load)
{
    if (tw_fields_read(row, tw_load_table, load_keys, load) < 0) {
        return -1;
    }
    int place = tw_fields_choice(row, "place", place_names, TW_PLACE_WHOLE);
    int frame = tw_fields_choice(row, "frame", frame_names, TW_FRAME_SPAN);
    int is_point = truth_of(row, "is_point"), is_run = truth_of(row, "is_run");
    if (place < 0 || frame < 0 || is_point < 0 || is_run < 0 || read_carriage(row, load) < 0) {
        return -1;
    }
    load->is_run = is_run;
    load->is_ramp = tw_fields_get(row, "vector_to") != NULL;
    if (load->is_ramp && read_vector(row, "vector_to", load->vector_to) < 0) {
        return -1;
    }
    load->place = (tw_place)place;
    load->frame = (tw_frame)frame;
    load->is_point = is_point;
    return read_vector(row, "vector", load->vector) < 0 ? -1 : read_load_covers(row, spans, load);
}

/* The loads of a condition go behind those already read. */
static int read_loads(PyObject *row, tw_condition *condition, problem *out)
{
    PyObject *rows;
    size_t count, before = out->project.load_count;
    int result = rows_of(row, "loads", &rows, &count);
    condition->load_first = before;
    condition->load_count = count;
    if (result == 0 && count > 0) {
        tw_load *grown = PyMem_Realloc(out->loads, (before + count) * sizeof(tw_load));
        result = grown ? 0 : (PyErr_NoMemory(), -1);
        out->loads = grown ? grown : out->loads;
    }
    for (size_t i = 0; result == 0 && i < count; i++) {
        tw_load load = {0};
        result = read_load(row_at(rows, i), out->project.support_count - 1, &load);
        out->loads[before + i] = load;
        out->project.load_count++; /* whole or not, so that what it owns is freed */
    }
    Py_XDECREF(rows);
    return result;
}

/* dict["ice_share"]: a share for each span, owned by the condition; NULL where missing. */
static int read_ice_share(PyObject *row, size_t spans, tw_condition *condition)
{
    if (!tw_fields_get(row, "ice_share")) {
        return 0;
    }
    PyArrayObject *array = vector_of(row, "ice_share");
    double *shares = array ? room(spans, sizeof(double)) : NULL;
    condition->ice_share = shares;
    if (shares && (size_t)PyArray_DIM(array, 0) != spans) {
        PyErr_Format(PyExc_ValueError, "ice_share: expected %zu entries", spans);
    } else if (shares) {
        memcpy(shares, PyArray_DATA(array), spans * sizeof(double));
    }
    Py_XDECREF(array);
    return PyErr_Occurred() ? -1 : 0;
}

static int read_condition(PyObject *row, size_t index, problem *out)
{
    out->condition_rows = index + 1;
    if (tw_fields_read(row, tw_condition_table, condition_keys, &out->conditions[index]) < 0
        || read_ice_share(row, out->project.support_count - 1, &out->conditions[index]) < 0) {
        return -1;
    }
    int state = tw_fields_choice(row, "state", state_names, TW_STATE_INITIAL);
    out->conditions[index].state = state < 0 ? TW_STATE_INITIAL : (tw_state)state;
    return state < 0 ? -1 : read_loads(row, &out->conditions[index], out);
}

static int read_conditions(PyObject *dict, problem *out)
{
    size_t count;
    if (read_table(dict, "conditions", sizeof(tw_condition), (void **)&out->conditions, &count, read_condition, out) < 0) {
        return -1;
    }
    out->project.conditions = out->conditions;
    out->project.condition_count = count;
    out->project.loads = out->loads;
    return 0;
}

static int read_mark(PyObject *row, size_t index, problem *out)
{
    if (tw_fields_read(row, tw_mark_table, mark_keys, &out->marks[index]) < 0) {
        return -1;
    }
    int place = tw_fields_choice(row, "place", place_names, TW_PLACE_STATION);
    out->marks[index].place = place < 0 ? TW_PLACE_STATION : (tw_place)place;
    return place < 0 ? -1 : 0;
}

static int read_marks(PyObject *dict, problem *out)
{
    size_t count;
    if (read_table(dict, "marks", sizeof(tw_mark), (void **)&out->marks, &count, read_mark, out) < 0) {
        return -1;
    }
    out->project.marks = out->marks;
    out->project.mark_count = count;
    return 0;
}

/* The tables of truths grow with the limits, row by row. */
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
    size_t strung;
    if (read_index(row, "strung_course", &strung) < 0) {
        return -1;
    }
    limit->strung_course = strung == TW_NONE ? 0 : strung + 1;
    limit->kind = (tw_limit_kind)kind;
    limit->direction = (tw_direction)direction;
    unsigned char *applies = PyMem_Realloc(out->applies, (index + 1) * conditions + 1);
    out->applies = applies ? applies : out->applies;
    unsigned char *covers = PyMem_Realloc(out->covers, (index + 1) * supports + 1);
    out->covers = covers ? covers : out->covers;
    if (!applies || !covers) {
        PyErr_NoMemory();
        return -1;
    }
    if (read_flags(row, "applies", out->applies + index * conditions, conditions) < 0) {
        return -1;
    }
    if (tw_courses_read_limit(row, index, out) < 0) {
        return -1;
    }
    return read_flags(row, "covers", out->covers + index * supports, supports);
}

static int read_limits(PyObject *dict, problem *out)
{
    size_t count;
    if (read_table(dict, "limits", sizeof(tw_limit), (void **)&out->limits, &count, read_limit, out) < 0) {
        return -1;
    }
    out->project.limits = out->limits;
    out->project.limit_count = count;
    out->project.limit_applies = out->applies;
    out->project.limit_covers = out->covers;
    out->project.limit_course = out->limit_course;
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

static int read_rule(PyObject *row, problem *out)
{
    tw_stringing *stringing = &out->project.stringing;
    if (tw_fields_read(row, tw_stringing_table, stringing_keys, stringing) < 0
        || read_index(row, "index", &stringing->index) < 0) {
        return -1;
    }
    int rule = tw_fields_choice(row, "rule", rule_names, TW_STRING_NONE);
    if (rule < 0) {
        return -1;
    }
    int method = tw_fields_choice(row, "method", method_names, TW_METHOD_CLAMPED);
    int clip = tw_fields_choice(row, "clip", clip_names, TW_CLIP_PLUMB);
    if (method < 0 || clip < 0) {
        return -1;
    }
    stringing->method = (tw_stringing_method)method;
    stringing->clip = (tw_stringing_clip)clip;
    stringing->rule = (tw_stringing_rule)rule;
    return rule == TW_STRING_SPAN_LENGTHS ? read_lengths(row, out) : 0;
}

static int read_line(PyObject *row, problem *out)
{
    return tw_problem_line_read(row, &out->project.line);
}

/* What a history leaves out is met, and creep is bare at the stringing temperature. */
static int read_history(PyObject *dict, problem *out)
{
    static const char *const keys[] = {"met", "creep_condition", NULL};
    static const field_table none = {NULL, 0};
    PyObject *row = Py_XNewRef(tw_fields_get(dict, "history"));
    size_t conditions = out->project.condition_count;
    out->project.history.creep_condition = TW_NONE;
    if (!row) {
        return 0;
    }
    int result = tw_fields_read(row, none, keys, NULL);
    if (result == 0 && !(out->met = room(conditions, 1))) {
        result = -1;
    }
    if (result == 0) {
        result = read_flags(row, "met", out->met, conditions);
        out->project.history.met = out->met;
    }
    if (result == 0) {
        result = read_index(row, "creep_condition", &out->project.history.creep_condition);
    }
    Py_DECREF(row);
    return result;
}

/* dict[key], held while it is read; -1 and raises, also where it is missing. */
static int read_part(PyObject *dict, const char *key, int (*read)(PyObject *, problem *), problem *out)
{
    PyObject *part = Py_XNewRef(tw_fields_get(dict, key));
    if (!part) {
        PyErr_Format(PyExc_ValueError, "%s is missing", key);
        return -1;
    }
    int result = read(part, out);
    Py_DECREF(part);
    return result;
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
    if (read_part(dict, "line", read_line, out) < 0 || read_supports(dict, out) < 0) {
        return -1;
    }
    if (out->project.support_count < 2) {
        tw_problem_raise("supports", TW_NONE, "count", "at least two supports", range_error);
        return -1;
    }
    if (read_route(dict, out) < 0 || read_ground(dict, out) < 0 || read_crossings(dict, out) < 0
        || read_conditions(dict, out) < 0 || read_marks(dict, out) < 0 || tw_courses_read(dict, out) < 0
        || read_limits(dict, out) < 0 || read_part(dict, "stringing", read_rule, out) < 0 || read_history(dict, out) < 0) {
        return -1;
    }
    if (tw_check_project(&out->project, &fault) != TW_OK) {
        tw_problem_raise(fault.table, fault.index, fault.field, fault.expected, range_error);
        return -1;
    }
    return 0;
}
