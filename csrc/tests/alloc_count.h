/* alloc_count: the heap of the tests, which counts its blocks and fails when asked to.
 *
 * Everything is compiled with -DTW_ALLOC_TEST, so that alloc.h leads here. Not for more than one thread.
 */
#ifndef TW_ALLOC_COUNT_H
#define TW_ALLOC_COUNT_H

#include <stddef.h>

#define TW_TEST_EACH ((size_t)-1)

/* Grant `granted` allocations, then refuse `refused` of them (TW_TEST_EACH: each one), then grant again. */
void tw_test_refuse(size_t granted, size_t refused);

/* Refuse each allocation after `granted` of them; and none from now on. */
void tw_test_fail_after(size_t granted);
void tw_test_fail_never(void);

size_t tw_test_live(void);    /* blocks granted and not freed yet */
size_t tw_test_refused(void); /* allocations refused since tw_test_refuse or tw_test_fail_after */

void *tw_test_calloc(size_t count, size_t size);
void tw_test_free(void *block);

#endif
