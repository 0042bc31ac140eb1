#include "places.h"

#include <math.h>
#include <numpy/arrayobject.h>

#include "vector.h"

/* Arrays length_m (n), station_m (n), position_m (n, 3), tension_N (n) to be filled. */
typedef struct places {
    PyObject *length, *station, *position, *tension;
    double *s, *x, *r, *t;
} places;

static int places_create(npy_intp count, places *out)
{
    npy_intp shape[2] = {count, 3};
    out->length = PyArray_SimpleNew(1, &count, NPY_DOUBLE);
    out->station = PyArray_SimpleNew(1, &count, NPY_DOUBLE);
    out->position = PyArray_SimpleNew(2, shape, NPY_DOUBLE);
    out->tension = PyArray_SimpleNew(1, &count, NPY_DOUBLE);
    if (!out->length || !out->station || !out->position || !out->tension) {
        return -1;
    }
    out->s = PyArray_DATA((PyArrayObject *)out->length);
    out->x = PyArray_DATA((PyArrayObject *)out->station);
    out->r = PyArray_DATA((PyArrayObject *)out->position);
    out->t = PyArray_DATA((PyArrayObject *)out->tension);
    return 0;
}

static PyObject *places_dict(places *in, int failed)
{
    if (failed) {
        Py_XDECREF(in->length);
        Py_XDECREF(in->station);
        Py_XDECREF(in->position);
        Py_XDECREF(in->tension);
        return NULL;
    }
    return Py_BuildValue("{s:N,s:N,s:N,s:N}", "length_m", in->length, "station_m", in->station, "position_m", in->position, "tension_N", in->tension);
}

static void place_at(const tw_section *section, double s, places *out, size_t i)
{
    double tension[3];
    out->s[i] = s;
    tw_section_at(section, s, out->r + 3 * i, tension);
    out->t[i] = tw_norm(tension);
    out->x[i] = tw_section_station(section, s, out->r + 3 * i);
}

/* Points evenly along the natural line, `points` a span and the end. */
static void shape_points(const tw_section *section, size_t points, places *out)
{
    double passed = 0.0;
    size_t i = 0;
    for (size_t k = 0; k < section->span_count; k++) {
        for (size_t p = 0; p < points; p++) {
            place_at(section, passed + section->length_m[k] * (double)p / (double)points, out, i++);
        }
        passed += section->length_m[k];
    }
    place_at(section, passed, out, i);
}

static void station_points(const tw_section *section, const double *stations, size_t count, places *out)
{
    for (size_t i = 0; i < count; i++) {
        double s;
        if (tw_section_at_station(section, stations[i], &s) == TW_OK) {
            place_at(section, s, out, i);
        } else {
            out->s[i] = out->x[i] = out->t[i] = out->r[3 * i] = out->r[3 * i + 1] = out->r[3 * i + 2] = NAN;
        }
    }
}

PyObject *tw_places_along(const tw_section *section, size_t points)
{
    places out = {0};
    int failed = places_create((npy_intp)(section->span_count * points + 1), &out) < 0;
    if (!failed) {
        Py_BEGIN_ALLOW_THREADS
        shape_points(section, points, &out);
        Py_END_ALLOW_THREADS
    }
    return places_dict(&out, failed);
}

PyObject *tw_places_at(const tw_section *section, const double *stations, size_t count)
{
    places out = {0};
    int failed = places_create((npy_intp)count, &out) < 0;
    if (!failed) {
        Py_BEGIN_ALLOW_THREADS
        station_points(section, stations, count, &out);
        Py_END_ALLOW_THREADS
    }
    return places_dict(&out, failed);
}
