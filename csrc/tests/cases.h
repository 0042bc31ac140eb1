/* cases: whole projects for the tests, put together with few words. Everything not said is bare, absent or plain.
 *
 * A case holds its own data; case_ready points the project at them, so a case that was copied is made ready anew.
 */
#ifndef TW_CASES_H
#define TW_CASES_H

#include "section.h"
#include "trial.h"

enum { CASE_SUPPORTS = 12, CASE_CONDITIONS = 8, CASE_LOADS = 8, CASE_LIMITS = 8, CASE_PROFILE = 128 };

typedef struct tw_case {
    tw_project project;
    tw_options options;
    tw_support supports[CASE_SUPPORTS];
    double lengths_m[CASE_SUPPORTS];
    tw_condition conditions[CASE_CONDITIONS];
    tw_load loads[CASE_LOADS];
    tw_mark marks[4];
    tw_crossing crossings[4];
    double ground_station_m[CASE_PROFILE], ground_elevation_m[CASE_PROFILE];
    tw_limit limits[CASE_LIMITS];
    unsigned applies[CASE_LIMITS]; /* bit c: condition c; all at first */
    unsigned covers[CASE_LIMITS];  /* bit j: support or span j */
    unsigned char applies_table[CASE_LIMITS * CASE_CONDITIONS];
    unsigned char covers_table[CASE_LIMITS * CASE_SUPPORTS];
} tw_case;

/* 15.97 N/m and EA 34.7e6 N of the own oracles I, 18.9e-6 per kelvin, 20 mm, strung to 20 kN at 15 degC; no support yet. */
void case_begin(tw_case *c);
void case_ready(tw_case *c);

/* Level span between anchors, with one bare condition at 15 degC; ready. */
void case_level(tw_case *c, double span_m);

/* Five supports, every kind of hold, bends in plan, under ice, wind, heat and cold; ready, without limits. */
void case_route(tw_case *c);

tw_support *case_anchor(tw_case *c, double station_m, double elevation_m);
tw_support *case_hanger(tw_case *c, double station_m, double elevation_m, double length_m, double weight_N);
tw_support *case_post(tw_case *c, double station_m, double elevation_m, double along_N_per_m, double across_N_per_m);
tw_condition *case_condition(tw_case *c, double temperature_degC);
/* Loads belong to the condition added last. */
tw_load *case_point(tw_case *c, tw_place place, double at_m, double x, double y, double z);
tw_load *case_stretch(tw_case *c, tw_place place, double from_m, double to_m, double x, double y, double z);
tw_limit *case_limit(tw_case *c, tw_limit_kind kind, double least, double most);
void case_ground(tw_case *c, double station_m, double elevation_m);
void case_mark(tw_case *c, tw_place place, double at_m);

/* Six supports up and over a hill, an anchor in the middle; strung over sheaves. */
void case_hill(tw_case *c);

/* Solved on c->lengths_m in a condition (TW_NONE: bare); NULL when that fails. */
tw_section *case_hung(const tw_case *c, size_t condition);

/* A trial strung to a pull (NaN: by the rule); NULL when that fails. */
tw_trial *case_trial(const tw_case *c, double pull_N);

/* Worst utilisation at a pull, from a cold start: every limit in every condition it applies to; 1000 where one cannot be
 * settled. No part of any search. */
double case_utilisation(const tw_case *c, double pull_N);

/* The last pull that holds, between one that does and one that does not. */
double case_edge(const tw_case *c, double holds_N, double fails_N);

/* Open stretches between two pulls by that many points and bisection: their number, edges [2 most] ascending. */
size_t case_stretches(const tw_case *c, double low_N, double high_N, int points, double *edges, size_t most);

/* D of the section's loads at any pulls R [3 spans], by the definition of section.h. Leaves the pieces hung there. */
double case_complementary(tw_section *section, const double *pull);

#endif
