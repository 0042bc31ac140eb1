/* places: position and tension at places of an exact line, as arrays. NULL and raises. */
#ifndef TW_PLACES_H
#define TW_PLACES_H

#include "python_api.h"

#include "section.h"

/* Evenly along the natural line, `points` a span and the end: dict of length_m (n), position_m (n, 3), tension_N (n). */
PyObject *tw_places_along(const tw_section *section, size_t points);

/* At stations [count]; NaN where the line does not pass. */
PyObject *tw_places_at(const tw_section *section, const double *stations, size_t count);

#endif
