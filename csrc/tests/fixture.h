/* fixture: small problems for the tests, built by hand. The data live in the fixture, which must stay where it is. */
#ifndef TW_FIXTURE_H
#define TW_FIXTURE_H

#include <math.h>
#include <string.h>

#include "section.h"

typedef struct fixture {
    tw_support supports[8];
    double lengths_m[7];
    tw_condition condition;
    tw_load loads[4];
    tw_project project;
    tw_options options;
} fixture;

/* A bare line at its stringing temperature with no support yet. */
static inline void fixture_begin(fixture *f, double weight_N_per_m, double stiffness_N)
{
    memset(f, 0, sizeof *f);
    f->project.line.weight_N_per_m = weight_N_per_m;
    f->project.line.stiffness_N = stiffness_N;
    f->project.line.breaking_strength_N = (double)NAN;
    f->project.supports = f->supports;
    f->project.conditions = &f->condition;
    f->project.condition_count = 1;
    f->project.loads = f->loads;
    f->condition.factor_weight = f->condition.factor_ice = f->condition.factor_wind = f->condition.factor_load = 1.0;
    f->condition.wind_bearing_rad = f->condition.wind_altitude_m = (double)NAN;
    f->condition.wind_speed_m_per_s = 0.0;
    f->condition.wind_pressure_Pa = (double)NAN;
    f->options = tw_options_default();
}

/* The next support; length_m: natural length of the span that ends there, not read for the first. */
static inline tw_support *fixture_support(fixture *f, tw_hold hold, double station_m, double elevation_m, double length_m)
{
    size_t j = f->project.support_count++;
    tw_support *support = &f->supports[j];
    support->hold = hold;
    support->station_m = station_m;
    support->elevation_m = elevation_m;
    if (j > 0) {
        f->lengths_m[j - 1] = length_m;
    }
    return support;
}

static inline void fixture_load(fixture *f, tw_load load)
{
    f->loads[f->project.load_count++] = load;
    f->condition.load_count = f->project.load_count;
}

/* Solved in its only condition; NULL when that fails. */
static inline tw_section *fixture_solve(const fixture *f)
{
    tw_section *section = tw_section_create(&f->project);
    if (section == NULL) {
        return NULL;
    }
    if (tw_section_load(section, 0, f->lengths_m, NULL, 0) == TW_OK &&
        tw_section_solve(section, &f->options, 0) == TW_OK) {
        return section;
    }
    tw_section_free(section);
    return NULL;
}

/* One span between anchors. */
static inline void fixture_span(fixture *f, double span_m, double rise_m, double length_m, double weight_N_per_m,
                                double stiffness_N)
{
    fixture_begin(f, weight_N_per_m, stiffness_N);
    fixture_support(f, TW_HOLD_ANCHOR, 0.0, 0.0, 0.0);
    fixture_support(f, TW_HOLD_ANCHOR, span_m, rise_m, length_m);
}

/* 250, 400 and 300 m on a post, two hangers and an anchor, with wind on all of it and a point load in the second span:
 * every kind of hold, every kind of load. */
static inline void fixture_three_spans(fixture *f)
{
    tw_load wind = {.place = TW_PLACE_WHOLE, .vector = {0.0, 4.0, -3.0}};
    tw_load point = {.is_point = 1, .place = TW_PLACE_LENGTH, .from_m = 400.0, .vector = {200.0, 100.0, -900.0}};
    tw_support *s;
    fixture_begin(f, 15.97, 34.7e6);
    wind.from_m = wind.to_m = point.to_m = (double)NAN;
    s = fixture_support(f, TW_HOLD_POST, 1000.0, 120.0, 0.0);
    s->stiffness_along_N_per_m = 2e5;
    s->stiffness_across_N_per_m = INFINITY;
    for (int j = 0; j < 2; j++) {
        s = fixture_support(f, TW_HOLD_HANGER, j ? 1650.0 : 1250.0, j ? 135.0 : 128.0, j ? 402.2 : 250.4);
        s->hanger_length_m = 2.0;
        s->hanger_weight_N = 600.0;
    }
    fixture_support(f, TW_HOLD_ANCHOR, 1950.0, 131.0, 300.9);
    fixture_load(f, wind);
    fixture_load(f, point);
}

#endif
