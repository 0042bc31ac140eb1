#include "alloc_count.h"

#include <stdlib.h>

static size_t to_grant = TW_TEST_EACH;
static size_t to_refuse;
static size_t refused_count;
static size_t live_count;

void tw_test_refuse(size_t granted, size_t refused)
{
    to_grant = granted;
    to_refuse = refused;
    refused_count = 0;
}

void tw_test_fail_after(size_t granted)
{
    tw_test_refuse(granted, TW_TEST_EACH);
}

void tw_test_fail_never(void)
{
    to_grant = TW_TEST_EACH;
}

size_t tw_test_live(void)
{
    return live_count;
}

size_t tw_test_refused(void)
{
    return refused_count;
}

static int is_refused(void)
{
    if (to_grant > 0) {
        to_grant -= to_grant != TW_TEST_EACH;
        return 0;
    }
    if (to_refuse == 0)
        return 0;
    to_refuse -= to_refuse != TW_TEST_EACH;
    refused_count++;
    return 1;
}

void *tw_test_calloc(size_t count, size_t size)
{
    if (is_refused())
        return NULL;
    void *block = calloc(count, size);
    live_count += block != NULL;
    return block;
}

void tw_test_free(void *block)
{
    live_count -= block != NULL;
    free(block);
}
