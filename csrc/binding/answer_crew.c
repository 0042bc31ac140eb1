/* answer_crew: the numbers of a crew sheet as a dict. */
#include "answer.h"

#include <math.h>

#include "fields.h"

static PyObject *rows(field_table table, const void *in, size_t size, size_t count)
{
    PyObject *list = PyList_New((Py_ssize_t)count);
    for (size_t i = 0; list && i < count; i++) {
        PyObject *row = tw_fields_dict(table, (const char *)in + i * size);
        if (!row) {
            Py_CLEAR(list);
        } else {
            PyList_SET_ITEM(list, (Py_ssize_t)i, row);
        }
    }
    return list;
}

static PyObject *span_rows(const tw_crew *crew, const tw_crew_span *spans)
{
    return rows(tw_crew_span_table, spans, sizeof *spans, crew->span_count);
}

/* One entry for each temperature, the stringing's last. */
static PyObject *temperature_rows(const tw_crew *crew)
{
    PyObject *list = PyList_New((Py_ssize_t)crew->temperature_count + 1);
    for (size_t t = 0; list && t <= crew->temperature_count; t++) {
        PyObject *row = Py_BuildValue("{s:d}", "temperature_degC", crew->temperature_degC[t]);
        if (!row || tw_fields_put(row, "over", span_rows(crew, crew->over + t * crew->span_count)) < 0
            || tw_fields_put(row, "clamped", span_rows(crew, crew->clamped + t * crew->span_count)) < 0) {
            Py_XDECREF(row);
            Py_CLEAR(list);
        } else {
            PyList_SET_ITEM(list, (Py_ssize_t)t, row);
        }
    }
    return list;
}

PyObject *tw_answer_crew(const tw_crew *crew)
{
    PyObject *dict = Py_BuildValue("{s:O,s:O}", "over_sheaves", crew->over_sheaves ? Py_True : Py_False, "rubs",
                                   crew->rubs ? Py_True : Py_False);
    if (!dict || tw_fields_put(dict, "horizontal_tension_N", tw_fields_number(crew->pull_N)) < 0
        || tw_fields_put(dict, "temperatures", temperature_rows(crew)) < 0
        || tw_fields_put(dict, "first", span_rows(crew, crew->first)) < 0
        || tw_fields_put(dict, "last", span_rows(crew, crew->last)) < 0
        || tw_fields_put(dict, "lengths",
                         rows(tw_crew_length_table, crew->lengths, sizeof(tw_crew_length), crew->span_count)) < 0
        || tw_fields_put(dict, "supports", rows(tw_crew_support_table, crew->supports, sizeof(tw_crew_support),
                                                crew->span_count + 1)) < 0) {
        Py_CLEAR(dict);
    }
    return dict;
}
