#include "fields.h"

#include <math.h>
#include <string.h>

#include "crew.h"
#include "limit.h"

#define F(type, name, fallback) {#name, offsetof(type, name), fallback}
#define TABLE(fields) {fields, sizeof(fields) / sizeof(fields)[0]}

static const field line_fields[] = {
    F(tw_line, diameter_m, 0.0),
    F(tw_line, weight_N_per_m, NAN),
    F(tw_line, stiffness_N, NAN),
    F(tw_line, expansion_per_K, 0.0),
    F(tw_line, breaking_strength_N, NAN),
    F(tw_line, test_temperature_degC, 20.0),
    F(tw_line, bedding_in_strain, 0.0),
    F(tw_line, creep_coefficient, 0.0),
    F(tw_line, creep_exponent, 0.0),
    F(tw_line, creep_hours, 0.0),
};
const field_table tw_line_table = TABLE(line_fields);

static const field part_fields[] = {
    F(tw_part, valid_to, NAN),
    F(tw_part, final_stiffness_N, NAN),
    F(tw_part, expansion_per_K, 0.0),
};
const field_table tw_part_table = TABLE(part_fields);

static const field support_fields[] = {
    F(tw_support, station_m, NAN),
    F(tw_support, offset_m, 0.0),
    F(tw_support, elevation_m, NAN),
    F(tw_support, height_m, NAN),
    F(tw_support, hanger_length_m, 0.0),
    F(tw_support, hanger_spread_m, 0.0),
    F(tw_support, hanger_weight_N, 0.0),
    F(tw_support, sheave_friction, NAN),
    F(tw_support, hanger_wind_area_m2, 0.0),
    F(tw_support, stiffness_along_N_per_m, NAN),
    F(tw_support, stiffness_across_N_per_m, NAN),
    F(tw_support, stiffness_vertical_N_per_m, NAN),
    F(tw_support, capacity_along_N, NAN),
    F(tw_support, capacity_across_N, NAN),
    F(tw_support, capacity_down_N, NAN),
    F(tw_support, capacity_up_N, NAN),
};
const field_table tw_support_table = TABLE(support_fields);

static const field crossing_fields[] = {
    F(tw_crossing, from_m, NAN),
    F(tw_crossing, to_m, NAN),
    F(tw_crossing, top_m, NAN),
};
const field_table tw_crossing_table = TABLE(crossing_fields);

static const field condition_fields[] = {
    F(tw_condition, temperature_degC, NAN),
    F(tw_condition, ice_thickness_m, 0.0),
    F(tw_condition, ice_density_kg_per_m3, 0.0),
    F(tw_condition, wind_pressure_Pa, NAN),
    F(tw_condition, wind_speed_m_per_s, NAN),
    F(tw_condition, air_density_kg_per_m3, 1.225),
    F(tw_condition, wind_drag, 1.0),
    F(tw_condition, wind_angle_rad, 1.57079632679489661923),
    F(tw_condition, wind_bearing_rad, NAN),
    F(tw_condition, wind_altitude_m, NAN),
    F(tw_condition, resultant_addition_N_per_m, 0.0),
    F(tw_condition, factor_weight, 1.0),
    F(tw_condition, factor_ice, 1.0),
    F(tw_condition, factor_wind, 1.0),
    F(tw_condition, factor_load, 1.0),
};
const field_table tw_condition_table = TABLE(condition_fields);

static const field load_fields[] = {
    F(tw_load, from_m, NAN),
    F(tw_load, to_m, NAN),
};
const field_table tw_load_table = TABLE(load_fields);

static const field mark_fields[] = {
    F(tw_mark, at_m, NAN),
};
const field_table tw_mark_table = TABLE(mark_fields);

static const field limit_fields[] = {
    F(tw_limit, least, NAN), F(tw_limit, most, NAN), F(tw_limit, share, NAN),
    F(tw_limit, from_m, NAN), F(tw_limit, to_m, NAN),
};
const field_table tw_limit_table = TABLE(limit_fields);

static const field stringing_fields[] = {
    F(tw_stringing, temperature_degC, NAN),
    F(tw_stringing, value, NAN),
    F(tw_stringing, tolerance, 0.0),
    F(tw_stringing, friction, 0.0),
    F(tw_stringing, end_allowance_m, 0.0),
};
const field_table tw_stringing_table = TABLE(stringing_fields);

static const field span_state_fields[] = {
    F(tw_span_state, span_m, NAN),
    F(tw_span_state, rise_m, NAN),
    F(tw_span_state, natural_length_m, NAN),
    F(tw_span_state, line_length_m, NAN),
    F(tw_span_state, horizontal_tension_N, NAN),
    F(tw_span_state, tension_from_N, NAN),
    F(tw_span_state, tension_to_N, NAN),
    F(tw_span_state, tension_max_N, NAN),
    F(tw_span_state, sag_m, NAN),
    F(tw_span_state, sag_station_m, NAN),
    F(tw_span_state, slant_sag_m, NAN),
    F(tw_span_state, blowout_m, NAN),
    F(tw_span_state, low_station_m, NAN),
    F(tw_span_state, low_elevation_m, NAN),
    F(tw_span_state, slope_max, NAN),
    F(tw_span_state, permanent_strain, NAN),
    F(tw_span_state, small_deflection_sag_m, NAN),
};
const field_table tw_span_state_table = TABLE(span_state_fields);

static const field support_state_fields[] = {
    F(tw_support_state, along_N, NAN),
    F(tw_support_state, across_N, NAN),
    F(tw_support_state, down_N, NAN),
    F(tw_support_state, resultant_N, NAN),
    F(tw_support_state, swing_rad, NAN),
    F(tw_support_state, swing_along_rad, NAN),
    F(tw_support_state, swing_across_rad, NAN),
    F(tw_support_state, station_m, NAN),
};
const field_table tw_support_state_table = TABLE(support_state_fields);

static const field mark_state_fields[] = {
    F(tw_mark_state, at_length_m, NAN),
    F(tw_mark_state, tension_N, NAN),
    F(tw_mark_state, tension_beyond_N, NAN),
    F(tw_mark_state, station_m, NAN),
};
const field_table tw_mark_state_table = TABLE(mark_state_fields);

static const field settled_fields[] = {
    F(tw_settled, energy_J, NAN),
    F(tw_settled, energy_lower_J, NAN),
    F(tw_settled, gap_J, NAN),
    F(tw_settled, gap_relative, NAN),
    F(tw_settled, residual_N, NAN),
    F(tw_settled, closing_m, NAN),
    F(tw_settled, sheave_imbalance_N, NAN),
    F(tw_settled, load_mismatch, NAN),
};
const field_table tw_settled_table = TABLE(settled_fields);

static const field crew_span_fields[] = {
    F(tw_crew_span, horizontal_tension_N, NAN), F(tw_crew_span, tension_max_N, NAN),
    F(tw_crew_span, sag_m, NAN),                F(tw_crew_span, return_s, NAN),
    F(tw_crew_span, return_parabola_s, NAN),
};
const field_table tw_crew_span_table = TABLE(crew_span_fields);

static const field crew_length_fields[] = {
    F(tw_crew_length, natural_m, NAN),
    F(tw_crew_length, marked_m, NAN),
};
const field_table tw_crew_length_table = TABLE(crew_length_fields);

static const field crew_support_fields[] = {
    F(tw_crew_support, offset_m, NAN),
    F(tw_crew_support, offset_stretched_m, NAN),
    F(tw_crew_support, block_swing_rad, NAN),
    F(tw_crew_support, block_down_N, NAN),
    F(tw_crew_support, block_across_N, NAN),
    F(tw_crew_support, block_resultant_N, NAN),
};
const field_table tw_crew_support_table = TABLE(crew_support_fields);

static const field verdict_fields[] = {
    F(tw_verdict, value, NAN),
    F(tw_verdict, allowed, NAN),
    F(tw_verdict, margin, NAN),
    F(tw_verdict, utilisation, NAN),
    F(tw_verdict, station_m, NAN),
    F(tw_verdict, other_at_m, NAN),
};
const field_table tw_verdict_table = TABLE(verdict_fields);

static int is_listed(key_list names, const char *key)
{
    for (size_t i = 0; names && names[i]; i++) {
        if (strcmp(names[i], key) == 0) {
            return 1;
        }
    }
    return 0;
}

static int is_field(field_table table, const char *key)
{
    for (size_t i = 0; i < table.count; i++) {
        if (strcmp(table.fields[i].name, key) == 0) {
            return 1;
        }
    }
    return 0;
}

static int refuse_unknown(PyObject *dict, field_table table, key_list others)
{
    PyObject *key, *value;
    Py_ssize_t at = 0;
    while (PyDict_Next(dict, &at, &key, &value)) {
        const char *name = PyUnicode_Check(key) ? PyUnicode_AsUTF8(key) : NULL;
        if (!name || !(is_field(table, name) || is_listed(others, name))) {
            if (!PyErr_Occurred()) {
                PyErr_Format(PyExc_ValueError, "unknown key %R", key);
            }
            return -1;
        }
    }
    return 0;
}

PyObject *tw_fields_get(PyObject *dict, const char *key)
{
    PyObject *value = PyDict_GetItemString(dict, key);
    return value == Py_None ? NULL : value;
}

int tw_fields_read(PyObject *dict, field_table table, key_list others, void *out)
{
    if (!PyDict_Check(dict)) {
        PyErr_Format(PyExc_TypeError, "expected a dict, not %.80s", Py_TYPE(dict)->tp_name);
        return -1;
    }
    if (refuse_unknown(dict, table, others) < 0) {
        return -1;
    }
    for (size_t i = 0; i < table.count; i++) {
        PyObject *value = PyDict_GetItemString(dict, table.fields[i].name);
        double number = table.fields[i].fallback;
        if (value == Py_None) {
            number = NAN;
        } else if (value) {
            Py_INCREF(value); /* its __float__ may change the dict */
            number = PyFloat_AsDouble(value);
            Py_DECREF(value);
            if (number == -1.0 && PyErr_Occurred()) {
                return -1;
            }
        }
        memcpy((char *)out + table.fields[i].offset, &number, sizeof number);
    }
    return 0;
}

int tw_fields_choice(PyObject *dict, const char *key, key_list names, int fallback)
{
    PyObject *value = tw_fields_get(dict, key);
    if (!value && fallback >= 0) {
        return fallback;
    }
    const char *text = value && PyUnicode_Check(value) ? PyUnicode_AsUTF8(value) : NULL;
    for (int i = 0; text && names[i]; i++) {
        if (strcmp(names[i], text) == 0) {
            return i;
        }
    }
    if (!PyErr_Occurred()) {
        PyErr_Format(PyExc_ValueError, "%s: %R is none of the known names", key, value ? value : Py_None);
    }
    return -1;
}

int tw_fields_put(PyObject *dict, const char *key, PyObject *value)
{
    int result = value ? PyDict_SetItemString(dict, key, value) : -1;
    Py_XDECREF(value);
    return result;
}

PyObject *tw_fields_number(double value)
{
    if (isnan(value)) {
        Py_RETURN_NONE;
    }
    return PyFloat_FromDouble(value);
}

PyObject *tw_fields_index(size_t index)
{
    if (index == TW_NONE) {
        Py_RETURN_NONE;
    }
    return PyLong_FromSize_t(index);
}

PyObject *tw_fields_dict(field_table table, const void *in)
{
    PyObject *dict = PyDict_New();
    for (size_t i = 0; dict && i < table.count; i++) {
        double number;
        memcpy(&number, (const char *)in + table.fields[i].offset, sizeof number);
        if (tw_fields_put(dict, table.fields[i].name, tw_fields_number(number)) < 0) {
            Py_CLEAR(dict);
        }
    }
    return dict;
}
