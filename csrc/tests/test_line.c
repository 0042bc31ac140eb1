/* The default options: inside their own ranges, without a poll, and as tight as the result promises. */
#include "line.h"

#include "../core/check.h"
#include "expect.h"

static void test_defaults_are_in_range(void)
{
    tw_options options = tw_options_default();
    tw_fault fault;
    CHECK(tw_check_options(&options, &fault) == TW_OK);
    CHECK(fault.table[0] == '\0');
}

static void test_defaults_promise_a_proof(void)
{
    tw_options options = tw_options_default();
    CHECK(options.gap_relative == 1e-6);
    CHECK(options.residual_relative == 1e-9);
    CHECK(options.closing_relative <= 1e-12);
    CHECK(options.verify == 1);
}

static void test_defaults_ask_nobody_and_end(void)
{
    tw_options options = tw_options_default();
    CHECK(options.poll == NULL && options.poll_data == NULL);
    CHECK(isfinite(options.seconds_most));
    CHECK(options.elements_per_span < options.elements_most);
}

static int say(void *data)
{
    return *(int *)data;
}

static void test_who_is_asked_says_how_it_ends(void)
{
    static const struct { int says; tw_status status; } cases[] = {
        {0, TW_OK}, {1, TW_CANCELLED}, {-5, TW_CANCELLED}, {TW_DEADLINE, TW_DEADLINE}};
    tw_options options = tw_options_default();
    CHECK(tw_options_ask(&options) == TW_OK);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        int says = cases[i].says;
        options.poll = say;
        options.poll_data = &says;
        CHECK(tw_options_ask(&options) == cases[i].status);
    }
}

int main(void)
{
    test_defaults_are_in_range();
    test_defaults_promise_a_proof();
    test_defaults_ask_nobody_and_end();
    test_who_is_asked_says_how_it_ends();
    return check_end("test_line");
}
