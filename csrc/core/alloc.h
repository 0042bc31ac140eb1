/* alloc: the one door to the heap, so that a test can make each allocation fail in turn. */
#ifndef TW_ALLOC_H
#define TW_ALLOC_H

#include <stdlib.h>

#ifdef TW_ALLOC_TEST
void *tw_test_calloc(size_t count, size_t size);
void tw_test_free(void *block);
#define tw_calloc tw_test_calloc
#define tw_free tw_test_free
#else
#define tw_calloc calloc
#define tw_free free
#endif

#endif
