/* The list of outcomes and errors: each has its own name and a text, and its sign says which of the two it is. */
#include "status.h"

#include <string.h>

#include "expect.h"

typedef struct entry {
    tw_status status;
    const char *symbol;
} entry;

static const entry entries[] = {
#define ENTRY(symbol, value, name, text) {symbol, #symbol},
    TW_STATUS_LIST(ENTRY)
#undef ENTRY
};
enum { COUNT = sizeof entries / sizeof entries[0] };

static void test_every_status_has_name_and_text(void)
{
    for (size_t i = 0; i < COUNT; i++) {
        CHECK(strlen(tw_status_name(entries[i].status)) > 1);
        CHECK(strlen(tw_status_text(entries[i].status)) > 3);
        CHECK(strcmp(tw_status_name(entries[i].status), "unknown") != 0);
    }
}

static void test_names_and_values_are_unique(void)
{
    for (size_t i = 0; i < COUNT; i++) {
        for (size_t j = 0; j < i; j++) {
            CHECK(entries[i].status != entries[j].status);
            CHECK(strcmp(tw_status_name(entries[i].status), tw_status_name(entries[j].status)) != 0);
        }
    }
}

static void test_errors_are_negative_and_outcomes_are_not(void)
{
    for (size_t i = 0; i < COUNT; i++) {
        int is_error = strncmp(entries[i].symbol, "TW_ERROR_", 9) == 0;
        CHECK((entries[i].status < 0) == is_error);
        CHECK((strncmp(tw_status_name(entries[i].status), "error_", 6) == 0) == is_error);
    }
    CHECK(TW_OK == 0);
}

static void test_a_number_outside_the_list_is_unknown(void)
{
    CHECK(strcmp(tw_status_name((tw_status)12345), "unknown") == 0);
    CHECK(strcmp(tw_status_text((tw_status)12345), "unknown status") == 0);
}

static void test_two_outcomes_are_stops(void)
{
    for (size_t i = 0; i < COUNT; i++) {
        tw_status status = entries[i].status;
        CHECK(tw_status_stops(status) == (status == TW_CANCELLED || status == TW_DEADLINE));
    }
}

int main(void)
{
    test_every_status_has_name_and_text();
    test_names_and_values_are_unique();
    test_errors_are_negative_and_outcomes_are_not();
    test_a_number_outside_the_list_is_unknown();
    test_two_outcomes_are_stops();
    return check_end("test_status");
}
