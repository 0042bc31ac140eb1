/* fields: tables that tie the core's structs to Python dicts, and the small converters that read and write by them.
 * A key of a dict is the name of the struct's field; None stands for NaN. */
#ifndef TW_FIELDS_H
#define TW_FIELDS_H

#include "python_api.h"

#include "line.h"

typedef struct field {
    const char *name;
    size_t offset;
    double fallback; /* when the key is missing; NaN also for None */
} field;

typedef struct field_table {
    const field *fields;
    size_t count;
} field_table;

extern const field_table tw_part_table;
extern const field_table tw_line_table, tw_support_table, tw_crossing_table, tw_condition_table, tw_load_table,
    tw_mark_table, tw_limit_table, tw_stringing_table; /* read */
extern const field_table tw_span_state_table, tw_support_state_table, tw_mark_state_table,
    tw_settled_table, tw_verdict_table; /* written */

/* Keys beyond the table that a dict may hold; ends with NULL. */
typedef const char *const *key_list;

/* Reads every table field of a dict into the struct; refuses unknown keys and what is no number. 0, or -1 and raises. */
int tw_fields_read(PyObject *dict, field_table table, key_list others, void *out);

/* One of `names` (ends with NULL) -> its index. fallback < 0: the key must be there. -1 and raises otherwise. */
int tw_fields_choice(PyObject *dict, const char *key, key_list names, int fallback);

/* dict[key] as a borrowed reference; NULL without an error where it is missing or None. */
PyObject *tw_fields_get(PyObject *dict, const char *key);

/* Struct -> new dict; NaN becomes None. */
PyObject *tw_fields_dict(field_table table, const void *in);

/* dict[key] = value, stealing value; -1 where value is NULL or it fails. */
int tw_fields_put(PyObject *dict, const char *key, PyObject *value);

/* float, or None for NaN. */
PyObject *tw_fields_number(double value);
/* int, or None for TW_NONE. */
PyObject *tw_fields_index(size_t index);

/* What a crew sheet holds of spans, lengths and supports. */
extern const field_table tw_crew_span_table, tw_crew_length_table, tw_crew_support_table;

#endif
