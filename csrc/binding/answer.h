/* answer: the core's results as dicts. NULL and raises. */
#ifndef TW_ANSWER_H
#define TW_ANSWER_H

#include "python_api.h"

#include "crew.h"
#include "line.h"
#include "window.h"

PyObject *tw_answer_settled(const tw_project *project, size_t condition, const tw_settled *settled);
PyObject *tw_answer_window(const tw_window *window);

/* span, support, value, allowed, margin, utilisation, station_m of a verdict. */
PyObject *tw_answer_verdict(const tw_verdict *verdict);

/* dict["status"], dict["status_text"]; -1 and raises. */
int tw_answer_status(PyObject *dict, tw_status status);

/* The numbers of a crew sheet. */
PyObject *tw_answer_crew(const tw_crew *crew);

#endif
