/* Time that never goes back, deadlines, and the poll that is asked first. */
#include "clock.h"

#include <time.h>

#include "expect.h"

static int asked;

static int poll_answer(void *data)
{
    asked++;
    return *(int *)data;
}

static void test_time_does_not_go_back(void)
{
    double before = tw_clock_now();
    for (int i = 0; i < 10000; i++) {
        double now = tw_clock_now();
        CHECK(now >= before);
        before = now;
    }
}

static void test_a_deadline_is_that_many_seconds_away(void)
{
    double before = tw_clock_now();
    double deadline = tw_clock_deadline(5.0);
    CHECK(deadline >= before + 5.0 && deadline <= tw_clock_now() + 5.0);
}

static double calendar(void)
{
    struct timespec now;
    timespec_get(&now, TIME_UTC);
    return (double)now.tv_sec + 1e-9 * (double)now.tv_nsec;
}

/* Fractions of a second count: twenty milliseconds are some. */
static void test_it_runs_as_fast_as_the_calendar(void)
{
    double before = tw_clock_now(), began = calendar();
    while (calendar() - began < 0.02) {
    }
    double passed = tw_clock_now() - before;
    CHECK_NEAR(passed, calendar() - began, 0.015);
}

static void test_past_deadlines_stop_and_future_ones_do_not(void)
{
    tw_options options = tw_options_default();
    CHECK(tw_clock_check(&options, tw_clock_deadline(100.0)) == TW_OK);
    CHECK(tw_clock_check(&options, tw_clock_deadline(-1e-9)) == TW_DEADLINE);
    CHECK(tw_clock_check(&options, INFINITY) == TW_OK);
    CHECK(tw_clock_check(&options, NAN) == TW_DEADLINE);
}

static void test_the_poll_has_the_first_word(void)
{
    tw_options options = tw_options_default();
    int answer = 0;
    options.poll = poll_answer;
    options.poll_data = &answer;
    CHECK(tw_clock_check(&options, tw_clock_deadline(100.0)) == TW_OK && asked == 1);
    CHECK(tw_clock_check(&options, tw_clock_deadline(-1.0)) == TW_DEADLINE && asked == 2);
    answer = TW_DEADLINE;
    CHECK(tw_clock_check(&options, tw_clock_deadline(100.0)) == TW_DEADLINE && asked == 3);
    answer = -7;
    CHECK(tw_clock_check(&options, tw_clock_deadline(-1.0)) == TW_CANCELLED && asked == 4);
}

int main(void)
{
    test_time_does_not_go_back();
    test_a_deadline_is_that_many_seconds_away();
    test_it_runs_as_fast_as_the_calendar();
    test_past_deadlines_stop_and_future_ones_do_not();
    test_the_poll_has_the_first_word();
    return check_end("test_clock");
}
