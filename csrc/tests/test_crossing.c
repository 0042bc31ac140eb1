/* Lines that cross in plan: where, how far apart, and whether they have changed places. */
#include "crossing.h"

#include "cases.h"
#include "check.h"
#include "expect.h"
#include "limit.h"
#include "trial.h"

static tw_arc straight(double x0, double y0, double x1, double y1, double z)
{
    double length = hypot(x1 - x0, y1 - y0);
    double slope[3] = {(x1 - x0) / length, (y1 - y0) / length, 0.0};
    tw_arc arc = {.at_m = {0.0, length}, .position = {{x0, y0, z}, {x1, y1, z}}};
    for (int end = 0; end < 2; end++) {
        for (int i = 0; i < 3; i++) {
            arc.slope[end][i] = slope[i];
        }
    }
    return arc;
}

/* 300 m level, 300.8 m long: the middle hangs 9.5 m below its ends. */
static tw_section *level(tw_case *c)
{
    case_begin(c);
    case_anchor(c, 0.0, 0.0);
    case_anchor(c, 300.0, 0.0);
    c->lengths_m[0] = 300.8;
    case_ready(c);
    return case_hung(c, TW_NONE);
}

static int swapped(const tw_section *s, const tw_arc *now, const tw_arc *before, tw_crossing_place *found)
{
    const tw_course a = {.arc_count = 1, .arcs = now}, b = {.arc_count = 1, .arcs = before};
    return tw_crossing_swapped(s, &a, s, &b, 0, found);
}

static void test_square_across(void)
{
    tw_case c;
    tw_crossing_place found;
    tw_section *s = level(&c);
    double position[3], tension[3];
    tw_section_at(s, 0.5 * 300.8, position, tension);
    tw_arc above = straight(150.0, -50.0, 150.0, 50.0, position[2] + 2.0);
    tw_arc below = straight(150.0, -50.0, 150.0, 50.0, position[2] - 1.5);
    CHECK(swapped(s, &below, &above, &found) == 1);
    CHECK_NEAR(found.gap_m, 1.5, 1e-6); /* level there: a step aside along the line changes nothing at first order */
    CHECK_NEAR(found.position[0], 150.0, 1e-3);
    CHECK_NEAR(found.other_at_m, 50.0, 1e-9);
    CHECK(found.over == 0);
    CHECK(swapped(s, &above, &above, &found) == 0 && swapped(s, &below, &below, &found) == 0);
    tw_arc away = straight(310.0, -50.0, 310.0, 50.0, -30.0);
    CHECK(swapped(s, &away, &above, &found) == 0 && swapped(s, &below, &away, &found) == 0);
    tw_section_free(s);
}

static void test_over_one_another(void)
{
    tw_case c;
    tw_crossing_place found;
    tw_section *s = level(&c);
    tw_arc above = straight(-10.0, 0.0, 310.0, 0.0, 3.0);
    tw_arc below = straight(-10.0, 0.0, 310.0, 0.0, -12.0);
    CHECK(swapped(s, &below, &above, &found) == 1);
    CHECK(found.over == 1);
    CHECK_NEAR(found.gap_m, 12.0, 1e-9); /* at the first clamp, the highest of all */
    tw_arc beside = straight(-10.0, 1.0, 310.0, 1.0, -12.0);
    CHECK(swapped(s, &beside, &above, &found) == 0);
    tw_arc aslant = straight(-10.0, -1.0, 310.0, 1.0, -12.0); /* swung: its order is not that of lines over one another */
    CHECK(swapped(s, &aslant, &above, &found) == 0);
    tw_section_free(s);
}

/* A trial judges with the course as strung that the limit names; without one, the distance alone. */
static void test_limit(void)
{
    tw_case c;
    size_t rows[1] = {0};
    double middle[3], tension[3];
    tw_section *s = level(&c);
    tw_section_at(s, 0.5 * 300.8, middle, tension);
    tw_arc arcs[2] = {straight(150.0, -50.0, 150.0, 50.0, middle[2] - 1.5),
                      straight(150.0, -50.0, 150.0, 50.0, middle[2] + 2.0)};
    tw_bow bows[2] = {{{0.0, 0.0, 0.0}, 0.0}, {{0.0, 0.0, 0.0}, 0.0}};
    tw_course courses[2] = {{1, &arcs[0], &bows[0]}, {1, &arcs[1], &bows[1]}};
    case_condition(&c, 15.0);
    tw_limit *limit = case_limit(&c, TW_LIMIT_SPACING, 1.0, NAN);
    c.applies[0] = 1;
    c.project.stringing.rule = TW_STRING_SPAN_LENGTHS;
    c.project.stringing.lengths_m = c.lengths_m;
    case_ready(&c);
    c.project.courses = courses;
    c.project.course_count = 2;
    c.project.limit_course = rows;
    for (size_t known = 0; known <= 2; known++) {
        tw_verdict v;
        limit->strung_course = known; /* 1: as strung it hangs where it hangs now */
        tw_trial *trial = case_trial(&c, NAN);
        CHECK(tw_trial_judge(trial, 0, 0, &c.options, &v) == TW_OK);
        CHECK_NEAR(v.value, known == 2 ? -1.5 : 1.5, 1e-6);
        CHECK((v.utilisation <= 1.0) == (known != 2));
        CHECK_NEAR(v.station_m, 150.0, 1e-3);
        tw_trial_free(trial);
    }
    tw_fault fault;
    limit->strung_course = 3;
    CHECK(tw_check_project(&c.project, &fault) == TW_ERROR_RANGE);
    tw_section_free(s);
}

int main(void)
{
    test_square_across();
    test_over_one_another();
    test_limit();
    return check_end("test_crossing");
}
