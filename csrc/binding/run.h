/* run: a core call with the GIL released, that looks at the clock and then at Ctrl-C. */
#ifndef TW_RUN_H
#define TW_RUN_H

#include "python_api.h"

#include "line.h"

typedef struct run_state {
    PyThreadState *saved;
    double last_s; /* when signals were looked at last */
    int raised;    /* a signal handler raised: the error is set */
} run_state;

/* Options from keyword arguments named as the fields of tw_options, over the defaults; 0, or -1 and raises. */
int tw_run_options(PyObject *keywords, PyObject *range_error, tw_options *options);

/* Release the GIL and set the poll; take the GIL back. */
void tw_run_begin(run_state *run, tw_options *options);
void tw_run_end(run_state *run);

#endif
