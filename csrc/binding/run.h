/* run: core calls with the GIL released, that look at the clock, then at Ctrl-C, and end at the deadline. */
#ifndef TW_RUN_H
#define TW_RUN_H

#include "python_api.h"

#include "line.h"

typedef struct run_state {
    PyThreadState *saved;
    double last_s; /* when signals were looked at last */
    double deadline;
    int raised;    /* a signal handler raised: the error is set */
} run_state;

/* Options from keyword arguments named as the fields of tw_options, over the defaults; 0, or -1 and raises. */
int tw_run_options(PyObject *keywords, PyObject *range_error, tw_options *options);

/* Sets the poll of the options, which is there as long as the run is; options->seconds_most counts from here on. */
void tw_run_open(run_state *run, tw_options *options);

/* Release the GIL; take it back. raised: the error is set. */
void tw_run_begin(run_state *run);
void tw_run_end(run_state *run);

#endif
