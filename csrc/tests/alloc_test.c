/* Every allocation fails in turn: the call says so, leaves nothing behind, and the next one is right to the last byte. */
#include "alloc_count.h"
#include "expect.h"
#include "fixture.h"
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
        status = tw_section_load(section, 0, lengths_m, strung, 1);
    }
    if (status == TW_OK) {
        status = tw_section_solve(section, &f->options, 0);
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
    tw_status status = trial ? tw_trial_string(trial, (double)NAN) : TW_ERROR_MEMORY;
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
        status = tw_trial_string(trial, 20e3);
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
    };
    static const unsigned char all[] = {1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1};
    fixture_three_spans(&f);
    f.condition.resultant_addition_N_per_m = 2.0;
    f.options.elements_per_span = 1; /* a mesh that has to be doubled */
    f.options.scan_points = 12;
    f.project.stringing.rule = TW_STRING_PULL;
    f.project.stringing.value = 20e3;
    f.project.limits = limits;
    f.project.limit_count = 3;
    f.project.limit_applies = all;
    f.project.limit_covers = all;
    refuse_each_way(&f, section_call, "section");
    refuse_each_way(&f, settle_call, "settle");
    refuse_each_way(&f, judge_call, "judge");
    refuse_each_way(&f, window_call, "open window");
    limits[0].most = 20e3;
    limits[2].most = 10.0;
    refuse_each_way(&f, window_call, "shut window");
    const tw_part part = {.loading_N = {0.0, 40e6, -1e9}, .creep_N = {0.0, 30e6}, .valid_to = 0.005,
                          .final_stiffness_N = 41e6, .expansion_per_K = 18e-6};
    f.project.line.parts[0] = part;
    f.project.line.part_count = 1;
    f.condition.state = TW_STATE_AFTER_CREEP;
    f.project.history.creep_condition = TW_NONE;
    refuse_each_way(&f, settle_call, "settle with a history");
    return check_end("alloc_test");
}
