#include "answer.h"

#include <math.h>
#include <numpy/arrayobject.h>
#include <string.h>

#include "fields.h"

static PyObject *triple(const double v[3])
{
    return Py_BuildValue("(NNN)", tw_fields_number(v[0]), tw_fields_number(v[1]), tw_fields_number(v[2]));
}

int tw_answer_status(PyObject *dict, tw_status status)
{
    return tw_fields_put(dict, "status", PyUnicode_FromString(tw_status_name(status))) < 0
                   || tw_fields_put(dict, "status_text", PyUnicode_FromString(tw_status_text(status))) < 0
               ? -1
               : 0;
}

/* List of dicts, one per row of an array of structs; position: offset of a double[3] to add, or TW_NONE. */
static PyObject *rows(field_table table, const void *in, size_t size, size_t count, size_t position)
{
    PyObject *list = PyList_New((Py_ssize_t)count);
    for (size_t i = 0; list && i < count; i++) {
        const char *row = (const char *)in + i * size;
        PyObject *dict = tw_fields_dict(table, row);
        if (dict && position != TW_NONE) {
            double place[3];
            memcpy(place, row + position, sizeof place);
            if (tw_fields_put(dict, "position_m", triple(place)) < 0) {
                Py_CLEAR(dict);
            }
        }
        if (!dict) {
            Py_CLEAR(list);
        } else {
            PyList_SET_ITEM(list, (Py_ssize_t)i, dict);
        }
    }
    return list;
}

static PyObject *lived_part(const tw_lived *lived)
{
    PyObject *dict = Py_BuildValue("{s:O,s:d}", "crept", lived->crept ? Py_True : Py_False, "permanent",
                                   lived->permanent);
    if (!dict || tw_fields_put(dict, "strain", tw_fields_number(lived->strain)) < 0
        || tw_fields_put(dict, "met", tw_fields_number(lived->met)) < 0
        || tw_fields_put(dict, "condition", tw_fields_index(lived->condition)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

/* The spans, each with what its parts have lived through. */
static PyObject *span_rows(const tw_project *project, const tw_settled *settled)
{
    size_t spans = project->support_count - 1;
    PyObject *list = rows(tw_span_state_table, settled->spans, sizeof(tw_span_state), spans, TW_NONE);
    for (size_t k = 0; list && k < spans; k++) {
        PyObject *parts = PyList_New(0);
        for (size_t i = 0; parts && settled->status == TW_OK && i < project->line.part_count; i++) {
            PyObject *part = lived_part(&settled->spans[k].lived[i]);
            if (!part || PyList_Append(parts, part) < 0) {
                Py_CLEAR(parts);
            }
            Py_XDECREF(part);
        }
        if (!parts || tw_fields_put(PyList_GET_ITEM(list, (Py_ssize_t)k), "lived", parts) < 0) {
            Py_CLEAR(list);
        }
    }
    return list;
}

PyObject *tw_answer_settled(const tw_project *project, size_t condition, const tw_settled *settled)
{
    PyObject *dict = tw_fields_dict(tw_settled_table, settled);
    size_t loads = project->conditions[condition].load_count;
    size_t supports = project->support_count;
    if (!dict || tw_answer_status(dict, settled->status) < 0
        || tw_fields_put(dict, "elements", PyLong_FromSize_t(settled->elements)) < 0
        || tw_fields_put(dict, "evaluations", PyLong_FromSize_t(settled->evaluations)) < 0
        || tw_fields_put(dict, "newton_steps", PyLong_FromSize_t(settled->newton_steps)) < 0
        || tw_fields_put(dict, "exact_steps", PyLong_FromSize_t(settled->exact_steps)) < 0
        || tw_fields_put(dict, "spans", span_rows(project, settled)) < 0
        || tw_fields_put(dict, "supports", rows(tw_support_state_table, settled->supports, sizeof(tw_support_state),
                                                supports, offsetof(tw_support_state, position_m))) < 0
        || tw_fields_put(dict, "marks", rows(tw_mark_state_table, settled->marks, sizeof(tw_mark_state),
                                             project->mark_count, offsetof(tw_mark_state, position_m))) < 0
        || tw_fields_put(dict, "loads", rows(tw_mark_state_table, settled->loads, sizeof(tw_mark_state), loads,
                                             offsetof(tw_mark_state, position_m))) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

PyObject *tw_answer_verdict(const tw_verdict *verdict)
{
    PyObject *dict = tw_fields_dict(tw_verdict_table, verdict);
    if (!dict || tw_fields_put(dict, "span", tw_fields_index(verdict->span)) < 0
        || tw_fields_put(dict, "support", tw_fields_index(verdict->support)) < 0
        || tw_fields_put(dict, "other_position_m", triple(verdict->other_position_m)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

static int put_row(PyObject *dict, size_t limit, size_t condition)
{
    return tw_fields_put(dict, "limit", tw_fields_index(limit)) < 0
                   || tw_fields_put(dict, "condition", tw_fields_index(condition)) < 0
               ? -1
               : 0;
}

static PyObject *window_end(const tw_window_end *end)
{
    PyObject *dict = tw_answer_verdict(&end->verdict);
    if (!dict || put_row(dict, end->limit, end->condition) < 0
        || tw_fields_put(dict, "why", PyUnicode_FromString(tw_status_name(end->why))) < 0
        || tw_fields_put(dict, "why_text", PyUnicode_FromString(tw_status_text(end->why))) < 0
        || tw_fields_put(dict, "pull_N", tw_fields_number(end->pull_N)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

/* The worse edge gives limit, condition and place; both stand under "edges". */
static PyObject *window_specify(const tw_window_specify *specify)
{
    const tw_window_end *low = &specify->edge[0], *high = &specify->edge[1];
    double t = specify->tolerance;
    PyObject *dict = window_end(low->verdict.utilisation > high->verdict.utilisation ? low : high);
    if (!dict || tw_fields_put(dict, "pull_N", tw_fields_number(specify->pull_N)) < 0
        || tw_fields_put(dict, "worst_utilisation", tw_fields_number(specify->worst_utilisation)) < 0
        || tw_fields_put(dict, "tolerance", tw_fields_number(t)) < 0
        || tw_fields_put(dict, "least_pull_N", tw_fields_number(specify->pull_N * (1.0 - t))) < 0
        || tw_fields_put(dict, "most_pull_N", tw_fields_number(specify->pull_N * (1.0 + t))) < 0
        || tw_fields_put(dict, "edges", Py_BuildValue("(NN)", window_end(low), window_end(high))) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

static PyObject *price(const tw_window_price *p)
{
    static const char *const variables[] = {"pull", "support_height", "support_station"};
    PyObject *dict = Py_BuildValue("{s:s,s:s}", "end", p->at_high ? "high" : "low", "variable", variables[p->variable]);
    if (!dict || put_row(dict, p->limit, p->condition) < 0
        || tw_fields_put(dict, "support", tw_fields_index(p->support)) < 0
        || tw_fields_put(dict, "margin_per_unit", tw_fields_number(p->margin_per_unit)) < 0
        || tw_fields_put(dict, "pull_per_unit", tw_fields_number(p->pull_per_unit)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

static PyObject *conflict(const tw_window_conflict *c)
{
    static const char *const sides[] = {"at least", "at most", "never"};
    PyObject *dict = Py_BuildValue("{s:s}", "side", sides[c->side]);
    if (!dict || put_row(dict, c->limit, c->condition) < 0
        || tw_fields_put(dict, "needs_N", tw_fields_number(c->needs_N)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

static PyObject *relax(const tw_window_relax *r)
{
    static const char *const kinds[] = {"allowance", "support_height", "support_station"};
    PyObject *dict = Py_BuildValue("{s:s,s:d,s:d,s:d}", "kind", kinds[r->kind], "by", r->by, "to", r->to, "pull_N",
                                   r->pull_N);
    if (!dict || tw_fields_put(dict, "limit", tw_fields_index(r->limit)) < 0
        || tw_fields_put(dict, "support", tw_fields_index(r->support)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}

#define LIST_OF(array, count, convert)                            \
    do {                                                          \
        list = PyList_New((Py_ssize_t)(count));                   \
        for (size_t i = 0; list && i < (count); i++) {            \
            PyObject *item = convert(&(array)[i]);                \
            if (!item) {                                          \
                Py_CLEAR(list);                                   \
            } else {                                              \
                PyList_SET_ITEM(list, (Py_ssize_t)i, item);       \
            }                                                     \
        }                                                         \
    } while (0)

static PyObject *price_list(const tw_window *window)
{
    PyObject *list;
    LIST_OF(window->price, window->price_count, price);
    return list;
}

static PyObject *conflict_list(const tw_window *window)
{
    PyObject *list;
    LIST_OF(window->conflict, window->conflict_count, conflict);
    return list;
}

static PyObject *relax_list(const tw_window *window)
{
    PyObject *list;
    LIST_OF(window->relax, window->relax_count, relax);
    return list;
}

typedef struct interval {
    double low, high;
} interval;

static PyObject *interval_pair(const interval *pair)
{
    return Py_BuildValue("(dd)", pair->low, pair->high);
}

static PyObject *interval_list(const tw_window *window)
{
    PyObject *list;
    const interval *pairs = (const interval *)(const void *)window->interval_N;
    LIST_OF(pairs, window->interval_count, interval_pair);
    return list;
}

static PyObject *row_list(const tw_window *window)
{
    PyObject *list = PyList_New((Py_ssize_t)window->row_count);
    for (size_t i = 0; list && i < window->row_count; i++) {
        PyObject *pair = Py_BuildValue("(nn)", (Py_ssize_t)window->row_limit[i], (Py_ssize_t)window->row_condition[i]);
        if (!pair) {
            Py_CLEAR(list);
        } else {
            PyList_SET_ITEM(list, (Py_ssize_t)i, pair);
        }
    }
    return list;
}

static PyObject *curves(const tw_window *window)
{
    npy_intp pulls = (npy_intp)window->curve_count;
    npy_intp shape[2] = {(npy_intp)window->row_count, pulls};
    PyObject *pull = PyArray_SimpleNew(1, &pulls, NPY_DOUBLE);
    PyObject *utilisation = PyArray_SimpleNew(2, shape, NPY_DOUBLE);
    PyObject *list = row_list(window);
    if (!pull || !utilisation || !list) {
        Py_XDECREF(pull);
        Py_XDECREF(utilisation);
        Py_XDECREF(list);
        return NULL;
    }
    memcpy(PyArray_DATA((PyArrayObject *)pull), window->curve_pull_N, window->curve_count * sizeof(double));
    double *out = PyArray_DATA((PyArrayObject *)utilisation);
    for (size_t r = 0; r < window->row_count; r++) {
        for (size_t k = 0; k < window->curve_count; k++) {
            out[r * window->curve_count + k] = window->curve[k * window->row_count + r];
        }
    }
    return Py_BuildValue("{s:N,s:N,s:N}", "pull_N", pull, "utilisation", utilisation, "rows", list);
}

PyObject *tw_answer_window(const tw_window *window)
{
    int open = window->interval_count > 0;
    int has_point = !isnan(window->specify.pull_N);
    PyObject *dict = Py_BuildValue("{s:O,s:(dd),s:n,s:n,s:O}", "open", open ? Py_True : Py_False, "range_N",
                                   window->range_low_N, window->range_high_N, "evaluations",
                                   (Py_ssize_t)window->evaluations, "settles", (Py_ssize_t)window->settles, "verified",
                                   window->verified ? Py_True : Py_False);
    if (!dict || tw_answer_status(dict, window->status) < 0
        || tw_fields_put(dict, "gap_relative", tw_fields_number(window->gap_relative)) < 0
        || tw_fields_put(dict, "intervals", interval_list(window)) < 0
        || tw_fields_put(dict, "low", open ? window_end(&window->low) : Py_NewRef(Py_None)) < 0
        || tw_fields_put(dict, "high", open ? window_end(&window->high) : Py_NewRef(Py_None)) < 0
        || tw_fields_put(dict, "specify", has_point ? window_specify(&window->specify) : Py_NewRef(Py_None)) < 0
        || tw_fields_put(dict, "prices", price_list(window)) < 0
        || tw_fields_put(dict, "conflict", conflict_list(window)) < 0
        || tw_fields_put(dict, "relax", relax_list(window)) < 0
        || tw_fields_put(dict, "curves", curves(window)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}
