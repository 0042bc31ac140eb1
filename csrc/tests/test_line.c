/* The defaults are inside their own ranges, and are what they are said to be. */
#include "line.h"

#include "check.h"
#include "check.h"

tw_status tw_check_options(const tw_options *options, void *fault);

static void test_defaults(void)
{
    tw_options options = tw_options_default();
    CHECK(options.gap_relative == 1e-6);
    CHECK(options.residual_relative == 1e-9);
    CHECK(options.closing_relative > 0.0 && options.closing_relative <= 1e-10);
    CHECK(options.elements_per_span >= 1 && options.elements_per_span < options.elements_most);
    CHECK(options.scan_points >= 4);
    CHECK(options.seconds_most > 0.0 && isfinite(options.seconds_most));
    CHECK(options.verify == 1);
    CHECK(options.poll == NULL && options.poll_data == NULL);
}

int main(void)
{
    test_defaults();
    return check_end("test_line");
}
