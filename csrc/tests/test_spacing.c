/* The least distance to another line's arcs: closed forms, brute force on drawn pairs, the tree of reaches, touching lines,
 * folded lines, and the limit that judges it. */
#include "spacing.h"

#include <string.h>

#include "cases.h"
#include "check.h"
#include "course.h"
#include "expect.h"
#include "limit.h"
#include "vector.h"

enum { ARCS_MOST = 45000 };
static tw_arc arcs[ARCS_MOST];
static tw_bow bows[2 * ARCS_MOST];

/* Arcs of a section, moved. */
static tw_course course_of(const tw_section *s, double x, double y, double z)
{
    const double by[3] = {x, y, z};
    size_t count = tw_course_arcs(s, NULL);
    CHECK(count > 0 && count <= ARCS_MOST);
    CHECK(tw_course_arcs(s, arcs) == count);
    for (size_t i = 0; i < count; i++) {
        tw_axpy(arcs[i].position[0], 1.0, by, arcs[i].position[0]);
        tw_axpy(arcs[i].position[1], 1.0, by, arcs[i].position[1]);
    }
    tw_course_bows(arcs, 0, 0, count, bows);
    const tw_course course = {count, arcs, bows};
    return course;
}

static tw_section *make_span(tw_case *c, double span_m, double rise_m, double length_m)
{
    case_level(c, span_m);
    c->supports[1].elevation_m = rise_m;
    c->lengths_m[0] = length_m;
    return case_hung(c, 0);
}

/* f is bent 1e-7 of itself by a coarse grid, and never below the search's answer. */
static double brute(const tw_section *s, const tw_course *other, size_t samples)
{
    double least = INFINITY, total = 0.0, r[3], place[3], off[3];
    for (size_t k = 0; k < s->span_count; k++) {
        total += s->length_m[k];
    }
    for (size_t i = 0; i <= samples; i++) {
        tw_section_at(s, total * (double)i / (double)samples, r, NULL);
        for (size_t j = 0; j < other->arc_count; j++) {
            for (int u = 0; u <= 2; u++) {
                tw_course_at(&other->arcs[j], 0.5 * u, place, NULL, NULL);
                tw_axpy(r, -1.0, place, off);
                least = fmin(least, tw_norm(off));
            }
        }
    }
    return least;
}

static double least_of(const tw_section *s, const tw_course *other)
{
    double least = INFINITY;
    for (size_t k = 0; k < s->span_count; k++) {
        tw_spacing found;
        CHECK(tw_spacing_least(s, k, other, INFINITY, &found) == 1);
        double off[3];
        tw_axpy(found.position, -1.0, found.other_position, off);
        CHECK_NEAR(tw_norm(off), found.distance_m, 1e-12 * (1.0 + found.distance_m));
        least = fmin(least, found.distance_m);
    }
    return least;
}

static double chords(const double a0[3], const double a1[3], const double b0[3], const double b1[3])
{
    double off[3];
    tw_spacing_of_chords(a0, a1, b0, b1, off);
    return tw_norm(off);
}

static double off_chord(const double point[3], const double a[3], const double b[3])
{
    double off[3];
    tw_course_off_chord(point, a, b, off);
    return tw_norm(off);
}

static void test_chords(void)
{
    const double o[3] = {0, 0, 0}, x[3] = {2, 0, 0}, y0[3] = {1, -1, 3}, y1[3] = {1, 5, 3}, far[3] = {7, 0, 4};
    const double p0[3] = {-1, 4, 0}, p1[3] = {9, 4, 0};
    CHECK_NEAR(chords(o, x, y0, y1), 3.0, 1e-15);
    CHECK_NEAR(chords(o, x, p0, p1), 4.0, 1e-15);  /* parallel, beside */
    CHECK_NEAR(chords(o, x, far, far), sqrt(41.0), 1e-14);
    CHECK_NEAR(chords(x, x, o, o), 2.0, 1e-15);
    CHECK_NEAR(chords(far, far, o, x), sqrt(41.0), 1e-14);
    CHECK_NEAR(chords(o, x, x, far), 0.0, 1e-15);
    unsigned long long seed = 7;
    for (int n = 0; n < 2000; n++) {
        double e[4][3], best = INFINITY;
        for (int i = 0; i < 12; i++) {
            e[i / 3][i % 3] = 10.0 * check_draw(&seed);
        }
        double d = chords(e[0], e[1], e[2], e[3]);
        for (int i = 0; i <= 40; i++) {
            double a[3], step[3];
            tw_axpy(e[1], -1.0, e[0], step);
            tw_axpy(e[0], i / 40.0, step, a);
            best = fmin(best, off_chord(a, e[2], e[3]));
        }
        /* A grid of 1/40 of at most 35 m is off by at most half a step. */
        CHECK(d <= best + 1e-12 && best - d <= 0.5);
    }
}

/* The middle of each arc against the exact line, the ends to the last bit. */
static void test_arcs_follow_the_line(void)
{
    tw_case c;
    case_route(&c);
    case_point(&c, TW_PLACE_LENGTH, 400.0, 0.0, 500.0, -2000.0);
    case_ready(&c);
    tw_section *s = case_hung(&c, c.project.condition_count - 1);
    CHECK(s != NULL);
    tw_course course = course_of(s, 0.0, 0.0, 0.0);
    double worst = 0.0;
    for (size_t i = 0; i < course.arc_count; i++) {
        double r[3], place[3];
        tw_course_at(&arcs[i], 0.5, place, NULL, NULL);
        tw_section_at(s, 0.5 * (arcs[i].at_m[0] + arcs[i].at_m[1]), r, NULL);
        tw_axpy(r, -1.0, place, r);
        worst = fmax(worst, tw_norm(r));
        CHECK(i == 0 || memcmp(arcs[i].position[0], arcs[i - 1].position[1], sizeof arcs[i].position[0]) == 0);
        CHECK(i == 0 || arcs[i].at_m[0] == arcs[i - 1].at_m[1]);
    }
    /* 1e-10 by the choice of the arcs; places of a line 1300 m long are known to 1e-12, clamps to the closing error. */
    CHECK(worst <= 1e-10 + 2e-9);
    tw_section_free(s);
}

/* Every arc lies within the bow of every run that holds it, in any direction n: no place of it goes further along n than
 * the chord's ends, its share of the bow and the rest. */
static void check_bow(const tw_course *course, size_t node, size_t first, size_t last, const double n[3])
{
    const tw_bow *bow = &course->bows[node];
    const double *a = course->arcs[first].position[0], *b = course->arcs[last - 1].position[1];
    double most = fmax(tw_dot(n, a), tw_dot(n, b)) + fmax(0.0, tw_dot(n, bow->toward)) + bow->rest;
    for (size_t i = first; i < last; i++) {
        double place[3];
        tw_course_at(&course->arcs[i], 0.37, place, NULL, NULL);
        CHECK(tw_dot(n, place) <= most + 1e-12);
        CHECK(off_chord(place, a, b) <= tw_course_reach(bow) + 1e-12);
    }
    if (last - first > 1) {
        size_t middle = first + (last - first) / 2;
        check_bow(course, node + 1, first, middle, n);
        check_bow(course, node + 2 * (middle - first), middle, last, n);
    }
}

static void test_bows_hold_what_they_say(void)
{
    tw_case c;
    unsigned long long seed = 3;
    case_route(&c);
    tw_section *s = case_hung(&c, 0);
    tw_course course = course_of(s, 0.0, 0.0, 0.0);
    for (int k = 0; k < 6; k++) {
        double n[3] = {0.1 * check_draw(&seed), check_draw(&seed), check_draw(&seed)};
        double size = tw_norm(n);
        for (int i = 0; i < 3; i++) {
            n[i] /= size;
        }
        check_bow(&course, 0, 0, course.arc_count, n);
    }
    tw_section_free(s);
}

/* A cubic that bends one way, then the other, and out of its plane: no place of it is off its chord by more than it says. */
static void test_bow_of_a_winding_arc(void)
{
    const tw_arc arc = {{0.0, 10.0}, {{0.0, 0.0, 0.0}, {10.0, 0.0, 0.0}}, {{1.0, 0.5, 0.1}, {1.0, 0.6, -0.2}}};
    for (int k = 0; k < 24; k++) {
        const double n[3] = {0.0, cos(0.2618 * k), sin(0.2618 * k)};
        tw_bow bow = tw_course_arc_bow(&arc, 0.1, 0.9);
        double first[3], last[3], place[3], off[3];
        tw_course_at(&arc, 0.1, first, NULL, NULL);
        tw_course_at(&arc, 0.9, last, NULL, NULL);
        for (int i = 1; i < 50; i++) {
            tw_course_at(&arc, 0.1 + 0.016 * i, place, NULL, NULL);
            tw_course_off_chord(place, first, last, off);
            CHECK(tw_dot(n, off) <= fmax(0.0, tw_dot(n, bow.toward)) + bow.rest + 1e-14);
        }
    }
}

static void test_the_same_line_beside_itself(void)
{
    tw_case c;
    tw_section *s = make_span(&c, 300.0, 12.0, 301.5);
    for (double y = 1e-3; y < 100.0; y *= 7.0) {
        tw_course course = course_of(s, 0.0, y, 0.0);
        CHECK_NEAR(least_of(s, &course), y, 2.0 * TW_SPACING_NEARER);
    }
    tw_course course = course_of(s, 0.0, 0.0, 0.0);
    CHECK(least_of(s, &course) <= TW_SPACING_TOUCH);
    tw_section_free(s);
}

/* Drawn lines, taut to deep, with a route of four spans as the other: no sampled place is nearer, and the grid is near. */
static void test_drawn_pairs(void)
{
    unsigned long long seed = 11;
    tw_case route;
    case_route(&route);
    tw_section *other = case_hung(&route, 0);
    CHECK(other != NULL);
    for (int n = 0; n < 40; n++) {
        tw_case c;
        double span = 200.0 + 150.0 * check_draw(&seed), rise = 40.0 * check_draw(&seed);
        double slack = 1.0005 + 0.05 * (1.0 + check_draw(&seed));
        tw_section *s = make_span(&c, span, rise, hypot(span, rise) * slack);
        CHECK(s != NULL);
        tw_course course = course_of(other, -300.0 + 300.0 * check_draw(&seed), 20.0 * check_draw(&seed), 40.0 * check_draw(&seed));
        double found = least_of(s, &course), sampled = brute(s, &course, 200);
        CHECK(found <= sampled + 1e-12);
        /* Half a step of each grid: 200 samples of at most 420 m, halves of arcs of at most 4 m. */
        CHECK(sampled - found <= 1.05 + 1.0);
        tw_section_free(s);
    }
    tw_section_free(other);
}

/* Nearly no tension at its lowest place: the line folds there, and neither arcs nor search run away. */
static void test_a_line_that_hangs_folded(void)
{
    tw_case c;
    tw_section *s = make_span(&c, 1.0, 0.0, 80.0);
    CHECK(s != NULL);
    tw_course course = course_of(s, 3.0, 0.0, 0.0);
    CHECK(course.arc_count < 2000);
    double sampled = brute(s, &course, 200);
    double found = least_of(s, &course);
    CHECK(found <= sampled && sampled - found < 0.05);
    CHECK_NEAR(found, 2.0, 0.01); /* its right leg beside the other's left one */
    tw_section_free(s);
}

static void test_no_length(void)
{
    tw_case c;
    tw_spacing found;
    tw_section *s = make_span(&c, 300.0, 0.0, 300.5);
    tw_course course = course_of(s, 0.0, 1.0, 0.0);
    for (size_t p = 0; p < s->piece_count; p++) {
        s->pieces[p].length_m = 0.0;
    }
    CHECK(tw_spacing_least(s, 0, &course, INFINITY, &found) == 0);
    tw_section_free(s);
}

/* The limit: value, place, and how much of it is used; none where there is no course for the condition. */
static void test_limit(void)
{
    tw_case c;
    tw_fault fault;
    size_t rows[2] = {0, TW_NONE};
    tw_section *s = make_span(&c, 300.0, 0.0, 300.8);
    tw_course course = course_of(s, 0.0, 4.0, 0.0);
    case_condition(&c, 40.0);
    case_limit(&c, TW_LIMIT_SPACING, 3.0, NAN);
    c.applies[0] = 1;
    case_ready(&c);
    c.project.courses = &course;
    c.project.course_count = 1;
    c.project.limit_course = rows;
    CHECK(tw_check_project(&c.project, &fault) == TW_OK);
    tw_verdict v = tw_limit_judge(&c.project, 0, 0, s, s);
    CHECK(v.judged == 1 && v.span == 0 && v.support == TW_NONE);
    CHECK_NEAR(v.value, 4.0, 1e-12);
    CHECK_NEAR(v.utilisation, 0.75, 1e-12);
    CHECK_NEAR(v.other_position_m[1], 4.0, 1e-12);
    CHECK_NEAR(v.other_position_m[0], v.station_m, 1e-6);
    CHECK(v.other_at_m >= 0.0 && v.other_at_m <= 300.8);
    CHECK(tw_limit_judge(&c.project, 0, 1, s, s).judged == 0);
    c.project.course_count = 0;
    CHECK(tw_limit_judge(&c.project, 0, 0, s, s).judged == 0);
    CHECK(tw_check_project(&c.project, &fault) == TW_ERROR_RANGE && strcmp(fault.field, "courses") == 0);
    tw_section_free(s);
}

static void expect_refused(const tw_case *c, const char *table, const char *field)
{
    tw_fault fault;
    CHECK(tw_check_project(&c->project, &fault) == TW_ERROR_RANGE);
    CHECK(strcmp(fault.table, table) == 0 && strcmp(fault.field, field) == 0 && fault.index == 0);
}

static void test_what_is_refused(void)
{
    tw_case c;
    size_t rows[1] = {0};
    tw_section *s = make_span(&c, 300.0, 0.0, 300.8);
    tw_course course = course_of(s, 0.0, 4.0, 0.0);
    tw_limit *limit = case_limit(&c, TW_LIMIT_SPACING, 3.0, NAN);
    case_ready(&c);
    c.project.courses = &course;
    c.project.course_count = 1;
    c.project.limit_course = rows;
    limit->least = 0.0;
    expect_refused(&c, "limits", "least");
    limit->least = 3.0;
    limit->most = 5.0;
    expect_refused(&c, "limits", "least");
    limit->most = NAN;
    rows[0] = 1;
    expect_refused(&c, "limits", "courses");
    rows[0] = 0;
    course.arc_count = 0;
    expect_refused(&c, "courses", "arcs");
    course.arc_count = 3;
    arcs[1].position[0][2] += 1e-6;
    expect_refused(&c, "courses", "arcs");
    arcs[1].position[0][2] = arcs[0].position[1][2];
    arcs[2].at_m[1] = arcs[2].at_m[0];
    expect_refused(&c, "courses", "arcs");
    arcs[2].at_m[1] = NAN;
    expect_refused(&c, "courses", "arcs");
    tw_section_free(s);
}

int main(void)
{
    test_chords();
    test_arcs_follow_the_line();
    test_bows_hold_what_they_say();
    test_bow_of_a_winding_arc();
    test_the_same_line_beside_itself();
    test_drawn_pairs();
    test_a_line_that_hangs_folded();
    test_no_length();
    test_limit();
    test_what_is_refused();
    return check_end("test_spacing");
}
