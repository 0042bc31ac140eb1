/* Clearance against dense sampling of line and profile: drawn profiles, ranges, crossings, lines that bulge up or turn back. */
#include "ground.h"
#include "route.h"

#include "cases.h"
#include "expect.h"
#include "vector.h"

enum { SAMPLES = 1500 };

static const tw_route_leg STRAIGHT = {0.0, {0.0, 0.0}, {1.0, 0.0}};

static void draw_profile(tw_case *c, double from, double to, double rough, unsigned long long *seed)
{
    size_t count = 2 + (size_t)(40.0 * (1.0 + check_draw(seed)));
    c->project.ground_count = 0;
    for (size_t k = 0; k < count; k++) {
        double x = from + (to - from) * ((double)k + (k > 0 && k + 1 < count ? 0.4 * check_draw(seed) : 0.0)) / (double)(count - 1);
        case_ground(c, x, rough * check_draw(seed) - 15.0);
    }
}

/* Elevation by walking the profile. */
static double elevation_by_walk(const tw_project *p, double x)
{
    for (size_t k = 0; k + 1 < p->ground_count; k++) {
        double a = p->ground_station_m[k], b = p->ground_station_m[k + 1];
        if (x >= a && x <= b) {
            double share = (x - a) / (b - a);
            return (1.0 - share) * p->ground_elevation_m[k] + share * p->ground_elevation_m[k + 1];
        }
    }
    return NAN;
}

typedef struct sampled {
    double clearance;
    int found;
    double station_low, station_high;
} sampled;

static sampled sample(const tw_section *s, size_t span, size_t crossing, double from, double to)
{
    const tw_project *p = s->project;
    sampled best = {INFINITY, 0, 0.0, 0.0};
    double before = 0.0;
    for (size_t k = 0; k < span; k++) {
        before += s->length_m[k];
    }
    for (int i = 0; i <= SAMPLES; i++) {
        double r[3];
        tw_section_at(s, before + s->length_m[span] * i / SAMPLES, r, NULL);
        if (r[0] < from || r[0] > to) {
            continue;
        }
        double below = elevation_by_walk(p, r[0]);
        if (crossing != TW_NONE) {
            const tw_crossing *over = &p->crossings[crossing];
            below = r[0] >= over->from_m && r[0] <= over->to_m ? over->top_m : (double)NAN;
        }
        if (!isnan(below)) {
            best.found = 1;
            best.clearance = fmin(best.clearance, r[2] - below);
        }
    }
    return best;
}

/* The closed form is the lowest, and as low as the place it names; sampling comes within `fine` of it. */
static void check_clearance(const tw_section *s, size_t span, size_t crossing, double from, double to, double fine)
{
    double clearance = NAN, station = NAN;
    double low = isnan(from) ? -INFINITY : from, high = isnan(to) ? INFINITY : to;
    int found = tw_ground_clearance(s, span, crossing, from, to, &clearance, &station);
    sampled best = sample(s, span, crossing, low, high);
    CHECK(found || !best.found);
    if (!found) {
        CHECK(isnan(clearance) && isnan(station));
        return;
    }
    CHECK(station >= low - 1e-9 && station <= high + 1e-9);
    CHECK(clearance <= best.clearance + 1e-9);
    CHECK(!best.found || clearance >= best.clearance - fine);
}

static tw_section *loaded_span(tw_case *c, unsigned long long *seed, double lift)
{
    double span = 150.0 + 100.0 * check_draw(seed);
    double rise = 0.3 * span * check_draw(seed);
    case_begin(c);
    case_anchor(c, 20.0, 5.0);
    case_anchor(c, 20.0 + span, 5.0 + rise)->offset_m = 10.0 * check_draw(seed);
    c->lengths_m[0] = hypot(span, rise) * (1.02 + 0.019 * check_draw(seed));
    case_condition(c, 15.0)->wind_pressure_Pa = 300.0;
    case_stretch(c, TW_PLACE_LENGTH, 0.2 * c->lengths_m[0], 0.7 * c->lengths_m[0], 6.0 * check_draw(seed), 0.0, lift);
    case_point(c, TW_PLACE_LENGTH, 0.4 * c->lengths_m[0], 300.0 * check_draw(seed), 0.0, 2e3 * check_draw(seed));
    case_ready(c);
    return case_hung(c, 0);
}

/* fine: where the line is steepest, a sample is SAMPLES of a length away and both slopes stay below about 4. */
static void test_drawn_profiles(double lift)
{
    unsigned long long seed = 41;
    for (int draw = 0; draw < 60; draw++) {
        tw_case c;
        tw_section *s = loaded_span(&c, &seed, lift);
        double span = c.supports[1].station_m - 20.0;
        draw_profile(&c, 20.0 + 0.2 * span * check_draw(&seed), 20.0 + span * (1.0 + 0.2 * check_draw(&seed)), 8.0, &seed);
        double from = 20.0 + 0.5 * span * (1.0 + check_draw(&seed)), to = from + 0.3 * span * (1.0 + check_draw(&seed));
        check_clearance(s, 0, TW_NONE, NAN, NAN, 1.5);
        check_clearance(s, 0, TW_NONE, from, to, 1.5);
        check_clearance(s, 0, TW_NONE, NAN, to, 1.5);
        check_clearance(s, 0, TW_NONE, from, NAN, 1.5);
        tw_section_free(s);
    }
}

/* One piece under a load straight up or down, over many points: most stretches of the profile are never looked at closely. */
static void test_whole_lines_over_rough_ground(double load)
{
    unsigned long long seed = 46;
    for (int draw = 0; draw < 60; draw++) {
        tw_case c;
        case_begin(&c);
        case_anchor(&c, -40.0, 5.0);
        case_anchor(&c, 120.0, 5.0 + 60.0 * check_draw(&seed));
        c.lengths_m[0] = hypot(160.0, c.supports[1].elevation_m - 5.0) * (1.03 + 0.029 * check_draw(&seed));
        case_condition(&c, 15.0);
        case_stretch(&c, TW_PLACE_WHOLE, NAN, NAN, 0.0, 0.0, load);
        case_ready(&c);
        tw_section *s = case_hung(&c, 0);
        draw_profile(&c, -60.0, 140.0, 1.0 + 20.0 * (draw % 3), &seed);
        check_clearance(s, 0, TW_NONE, NAN, NAN, 2.0);
        check_clearance(s, 0, TW_NONE, -10.0, 70.0, 2.0);
        tw_section_free(s);
    }
}

static void test_crossings(void)
{
    unsigned long long seed = 42;
    for (int draw = 0; draw < 60; draw++) {
        tw_case c;
        tw_section *s = loaded_span(&c, &seed, draw % 2 ? -5.0 : 40.0);
        double span = c.supports[1].station_m - 20.0;
        double from = 20.0 + span * check_draw(&seed);
        c.project.crossing_count = 1;
        c.crossings[0] = (tw_crossing){from, from + 0.2 * span * (1.1 + check_draw(&seed)), -10.0};
        check_clearance(s, 0, 0, NAN, NAN, 0.5);
        check_clearance(s, 0, 0, from + 0.05 * span, NAN, 0.5);
        tw_section_free(s);
    }
}

/* Pulled back by a wind along the route, the line passes some stations three times. */
static void test_a_line_that_turns_back(void)
{
    unsigned long long seed = 43;
    for (int draw = 0; draw < 30; draw++) {
        tw_case c;
        double turn;
        case_level(&c, 60.0);
        c.lengths_m[0] = 110.0 + 20.0 * check_draw(&seed);
        case_stretch(&c, TW_PLACE_WHOLE, NAN, NAN, -40.0, 0.0, 3.0);
        case_ready(&c);
        tw_section *s = case_hung(&c, 0);
        CHECK(tw_piece_turns(s->pieces, &STRAIGHT, &turn) == 1);
        draw_profile(&c, -60.0, 70.0, 5.0, &seed);
        check_clearance(s, 0, TW_NONE, NAN, NAN, 1.0);
        check_clearance(s, 0, TW_NONE, -30.0, -5.0, 1.0);
        tw_section_free(s);
    }
}

static void test_each_span_is_looked_at_by_itself(void)
{
    tw_case c;
    unsigned long long seed = 44;
    case_route(&c);
    draw_profile(&c, 80.0, 1400.0, 6.0, &seed);
    tw_section *s = case_hung(&c, 0);
    for (size_t span = 0; span < 4; span++) {
        check_clearance(s, span, TW_NONE, NAN, NAN, 0.2);
        check_clearance(s, span, TW_NONE, 500.0, 900.0, 0.2);
    }
    tw_section_free(s);
}

/* Own 30-digit oracle I(a): the lowest point is 10.3551736026 m below the supports, at mid-span. */
static void test_published_sag_over_flat_ground(void)
{
    tw_case c;
    double clearance, station;
    case_level(&c, 300.0);
    c.lengths_m[0] = 300.8;
    case_ground(&c, -10.0, -20.0);
    case_ground(&c, 310.0, -20.0);
    tw_section *s = case_hung(&c, TW_NONE);
    CHECK(tw_ground_clearance(s, 0, TW_NONE, NAN, NAN, &clearance, &station) == 1);
    CHECK_NEAR(clearance, 20.0 - 10.3551736026, 1e-9);
    CHECK_NEAR(station, 150.0, 1e-6);
    CHECK(tw_ground_clearance(s, 0, TW_NONE, 250.0, 260.0, &clearance, &station) == 1);
    CHECK_NEAR(station, 250.0, 1e-9);
    CHECK(tw_ground_clearance(s, 0, TW_NONE, 400.0, 500.0, &clearance, &station) == 0);
    c.project.ground_count = 0;
    CHECK(tw_ground_clearance(s, 0, TW_NONE, NAN, NAN, &clearance, &station) == 0);
    tw_section_free(s);
}

static void test_elevation(void)
{
    tw_case c;
    unsigned long long seed = 45;
    case_level(&c, 300.0);
    CHECK(isnan(tw_ground_elevation(&c.project, 10.0)));
    draw_profile(&c, 0.0, 300.0, 9.0, &seed);
    for (double x = 0.0; x <= 300.0; x += 0.7) {
        CHECK_NEAR(tw_ground_elevation(&c.project, x), elevation_by_walk(&c.project, x), 1e-10);
    }
    CHECK(isnan(tw_ground_elevation(&c.project, -1e-9)) && isnan(tw_ground_elevation(&c.project, 300.1)));
    CHECK(isnan(tw_ground_elevation(&c.project, NAN)));
    CHECK(tw_ground_elevation(&c.project, 300.0) == c.ground_elevation_m[c.project.ground_count - 1]);
}

int main(void)
{
    test_drawn_profiles(-20.0);
    test_drawn_profiles(60.0);
    test_whole_lines_over_rough_ground(-3.0);
    test_whole_lines_over_rough_ground(50.0);
    test_crossings();
    test_a_line_that_turns_back();
    test_each_span_is_looked_at_by_itself();
    test_published_sag_over_flat_ground();
    test_elevation();
    return check_end("test_ground");
}
