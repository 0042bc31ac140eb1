/* Every allocation fails in turn: the call says so, leaves nothing behind, and the next one is right to the last byte. */
#include "alloc_count.h"
#include "course.h"
#include "crew.h"
#include "expect.h"
#include "fit.h"
#include "fixture.h"
#include "route.h"
#include "settle.h"
#include "stringing.h"
#include "trial.h"
#include "window.h"

enum { SPANS = 3 };

/* A call under test: does all of its work from nothing, frees it, and leaves a number that tells whether it was right. */
typedef tw_status (*call)(const fixture *f, double *answer);

static tw_status section_call(const fixture *f, double *answer)
{
    double lengths_m[SPANS], pull_N, work[7 * (SPANS + 1)];
    tw_section *strung = tw_section_create(&f->project);
    tw_section *section = tw_section_create(&f->project);
    tw_status status = strung && section ? TW_OK : TW_ERROR_MEMORY;
    if (status == TW_OK) {
        status = tw_stringing_lengths(&f->project, lengths_m, &pull_N, work);
    }
    if (status == TW_OK) {
        status = tw_section_load(strung, TW_NONE, lengths_m, NULL, 1);
    }
    if (status == TW_OK) {
        status = tw_section_solve(strung, &f->options, 0);
    }
    if (status == TW_OK) {
        status = tw_section_hang(section, 0, lengths_m, strung, 1, &f->options, 0);
    }
    if (status == TW_OK) {
        *answer = section->energy_lower_J;
    }
    tw_section_free(section);
    tw_section_free(strung);
    return status;
}

static tw_status settle_call(const fixture *f, double *answer)
{
    tw_settled out = {0};
    const tw_section *section;
    tw_trial *trial = tw_trial_create(&f->project);
    tw_status status = trial ? tw_trial_string(trial, (double)NAN, &f->options) : TW_ERROR_MEMORY;
    if (status == TW_OK) {
        status = tw_trial_section(trial, 0, &f->options, &section);
    }
    if (status == TW_OK) {
        status = tw_settle(section, &f->options, &out);
        CHECK(status == out.status);
        *answer = out.energy_J;
    }
    tw_trial_free(trial);
    return status;
}

static tw_status judge_call(const fixture *f, double *answer)
{
    tw_verdict verdict;
    tw_trial *trial = tw_trial_create(&f->project);
    tw_status status = trial ? TW_OK : TW_ERROR_MEMORY;
    *answer = 0.0;
    for (size_t i = 0; i < f->project.limit_count && status == TW_OK; i++) {
        status = tw_trial_string(trial, 20e3, &f->options);
        if (status == TW_OK) {
            status = tw_trial_judge(trial, i, 0, &f->options, &verdict);
        }
        if (status == TW_OK) {
            *answer += verdict.utilisation;
        }
    }
    tw_trial_free(trial);
    return status;
}

/* Strung over sheaves, one of which stays; then the crew's numbers. */
static tw_status crew_call(const fixture *f, double *answer)
{
    tw_trial *trial = tw_trial_create(&f->project);
    tw_crew *crew = trial ? tw_crew_create(&f->project, 2) : NULL;
    tw_status status = crew ? tw_trial_string(trial, 20e3, &f->options) : TW_ERROR_MEMORY;
    if (status == TW_OK) {
        crew->temperature_degC[1] = 20.0;
        status = tw_crew_fill(crew, trial, &f->options);
    }
    if (status == TW_OK) {
        *answer = crew->lengths[1].natural_m + crew->over[0].sag_m + crew->first[1].sag_m + crew->last[0].sag_m;
    }
    tw_crew_free(crew);
    tw_trial_free(trial);
    return status;
}

/* Open or shut, both are answers; the optimiser's work on the way is not repeated here. */
static tw_status window_call(const fixture *f, double *answer)
{
    tw_window *window = tw_window_create(&f->project, &f->options);
    tw_status status = window ? tw_window_search(&f->project, &f->options, window) : TW_ERROR_MEMORY;
    if (status == TW_OK) {
        *answer = window->specify.pull_N;
        CHECK(window->verified && window->interval_count > 0);
    } else if (status == TW_SHUT) {
        *answer = (double)(window->conflict_count + 100 * window->relax_count) + window->conflict[0].needs_N;
        status = TW_OK;
    }
    CHECK(window == NULL || status == TW_OK || window->interval_count == 0);
    tw_window_free(window);
    return status;
}

static tw_status fit_call(const fixture *f, double *answer)
{
    tw_observation seen[4];
    const double stations[4] = {1125.0, 1450.0, 1500.0, 1800.0}, elevations[4] = {121.0, 118.0, 119.0, 125.0};
    for (int i = 0; i < 4; i++) {
        const tw_observation one = {stations[i], elevations[i], i == 1 ? 0.0 : (double)NAN, 0.5, i < 2 ? 10.0 : 20.0};
        seen[i] = one;
    }
    tw_fit *fit = tw_fit_create(&f->project, seen, 4, TW_FIT_LENGTHS);
    tw_status status = fit ? tw_fit_search(&f->project, seen, 4, TW_FIT_LENGTHS, &f->options, fit) : TW_ERROR_MEMORY;
    CHECK(fit == NULL || fit->status == status);
    if (status == TW_OK) {
        *answer = fit->value[0] + fit->chi2;
    }
    tw_fit_free(fit);
    return status;
}

/* Refuse the first allocation (and refused_most - 1 more), then the second, and so on until the call needs none of them. */
static void refuse_in_turn(const fixture *f, call run, size_t refused_most, const char *name)
{
    double right = (double)NAN, answer;
    CHECK(run(f, &right) == TW_OK && isfinite(right));
    size_t granted = 0;
    for (;; granted++) {
        tw_test_refuse(granted, refused_most);
        answer = (double)NAN;
        tw_status status = run(f, &answer);
        size_t refused = tw_test_refused();
        tw_test_fail_never();
        CHECK(tw_test_live() == 0);
        if (refused == 0) {
            CHECK(status == TW_OK && answer == right);
            break;
        }
        CHECK(status == TW_ERROR_MEMORY);
        CHECK(run(f, &answer) == TW_OK && answer == right);
    }
    printf("%s: %zu allocations\n", name, granted);
    CHECK(granted > 0);
}

static void refuse_each_way(const fixture *f, call run, const char *name)
{
    refuse_in_turn(f, run, 1, name);
    refuse_in_turn(f, run, TW_TEST_EACH, name);
}

int main(void)
{
    fixture f;
    tw_limit limits[] = {
        {.kind = TW_LIMIT_TENSION, .least = NAN, .most = 60e3, .share = NAN, .from_m = NAN, .to_m = NAN},
        {.kind = TW_LIMIT_SWING, .least = NAN, .most = 0.6, .share = NAN, .from_m = NAN, .to_m = NAN},
        {.kind = TW_LIMIT_SAG, .least = NAN, .most = 25.0, .share = NAN, .from_m = NAN, .to_m = NAN},
        {.kind = TW_LIMIT_SPACING, .least = 10.0, .most = NAN, .share = NAN, .from_m = NAN, .to_m = NAN},
    };
    static const unsigned char all[] = {1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1};
    static const size_t course_of_limit[] = {TW_NONE, TW_NONE, TW_NONE, 0};
    const tw_arc above = {.at_m = {0.0, 950.0}, .position = {{1000.0, 0.0, 160.0}, {1950.0, 20.0, 170.0}},
                          .slope = {{1.0, 0.0, 0.0}, {1.0, 0.0, 0.0}}};
    tw_bow bow;
    tw_course_bows(&above, 0, 0, 1, &bow);
    const tw_course course = {1, &above, &bow};
    fixture_three_spans(&f);
    f.condition.resultant_addition_N_per_m = 2.0;
    f.options.elements_per_span = 1; /* a mesh that has to be doubled */
    f.options.scan_points = 12;
    f.project.stringing.rule = TW_STRING_PULL;
    f.project.stringing.value = 20e3;
    f.project.limits = limits;
    f.project.limit_count = 4;
    f.project.course_count = 1;
    f.project.courses = &course;
    f.project.limit_course = course_of_limit;
    f.project.limit_applies = all;
    f.project.limit_covers = all;
    refuse_each_way(&f, section_call, "section");
    refuse_each_way(&f, settle_call, "settle");
    refuse_each_way(&f, judge_call, "judge");
    refuse_each_way(&f, window_call, "open window");
    refuse_each_way(&f, fit_call, "fit");
    limits[0].most = 20e3;
    limits[2].most = 10.0;
    refuse_each_way(&f, window_call, "shut window");
    double stations[SPANS + 1];
    tw_route_measure(f.supports, SPANS + 1, stations);
    f.project.route_station_m = stations;
    refuse_each_way(&f, window_call, "window of a turning route");
    f.project.route_station_m = NULL;
    f.project.stringing.method = TW_METHOD_OVER_SHEAVES;
    f.project.stringing.friction = 0.02;
    f.supports[2].hold = TW_HOLD_SHEAVE;
    f.supports[2].sheave_friction = (double)NAN;
    refuse_each_way(&f, crew_call, "crew");
    refuse_each_way(&f, settle_call, "settle over a sheave");
    f.project.stringing.method = TW_METHOD_CLAMPED;
    f.supports[2].hold = TW_HOLD_HANGER;
    fixture_load(&f, (tw_load){.is_run = 1, .place = TW_PLACE_WHOLE, .from_m = NAN, .to_m = NAN, .vector = {0.0, 0.0, -5.0}});
    fixture_load(&f, (tw_load){.is_point = 1, .carriage = TW_CARRIAGE_FREE, .carriage_span = 1, .place = TW_PLACE_WHOLE,
                               .from_m = NAN, .to_m = NAN, .vector = {0.0, 0.0, -800.0}});
    refuse_each_way(&f, section_call, "run load and carriage");
    refuse_each_way(&f, settle_call, "settle with a carriage");
    f.condition.load_count = 0;
    const tw_part part = {.loading_N = {0.0, 40e6, -1e9}, .creep_N = {0.0, 30e6}, .valid_to = 0.005,
                          .final_stiffness_N = 41e6, .expansion_per_K = 18e-6};
    f.project.line.parts[0] = part;
    f.project.line.part_count = 1;
    f.condition.state = TW_STATE_AFTER_CREEP;
    f.project.history.creep_condition = TW_NONE;
    refuse_each_way(&f, settle_call, "settle with a history");
    return check_end("alloc_test");
}
