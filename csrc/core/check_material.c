/* check_material: the range rules of curved laws, creep and history. */
#include <math.h>
#include <string.h>

#include "check_rules.h"
#include "material_curve.h"
#include "polynomial.h"

static const double COEFFICIENT_MOST = 1e20; /* N per strain^4 of the largest lines stays below */

/* Least slope on [0, end]: at an end, or where the second derivative, a parabola, is zero. */
static double least_slope(const double terms[TW_CURVE_TERMS], double end)
{
    double a = 12.0 * terms[4], b = 6.0 * terms[3], c = 2.0 * terms[2];
    double least = fmin(tw_polynomial_slope(terms, 0.0), tw_polynomial_slope(terms, end));
    double root = b * b - 4.0 * a * c;
    double q = -0.5 * (b + copysign(sqrt(fmax(root, 0.0)), b));
    const double places[2] = {a != 0.0 ? q / a : -1.0, q != 0.0 ? c / q : -1.0};
    for (int i = 0; root >= 0.0 && i < 2; i++) {
        if (places[i] > 0.0 && places[i] < end) {
            least = fmin(least, tw_polynomial_slope(terms, places[i]));
        }
    }
    return least;
}

static int in_range(const double terms[TW_CURVE_TERMS])
{
    for (int k = 0; k < TW_CURVE_TERMS; k++) {
        if (!(fabs(terms[k]) <= COEFFICIENT_MOST)) {
            return 0;
        }
    }
    return 1;
}

static tw_status check_loading(const tw_part *part, size_t i, tw_fault *fault)
{
    if (!in_range(part->loading_N)) {
        return tw_check_fail(fault, "parts", i, "loading_N", "finite coefficients");
    }
    if (!(part->valid_to > 0.0 && part->valid_to <= 0.2)) {
        return tw_check_fail(fault, "parts", i, "valid_to", "a strain above 0, up to 20 %");
    }
    if (!(least_slope(part->loading_N, part->valid_to) > 0.0)) {
        return tw_check_fail(fault, "parts", i, "loading_N", "a curve that grows from 0 to valid_to");
    }
    if (!(tw_polynomial_value(part->loading_N, part->valid_to) > 0.0)) {
        return tw_check_fail(fault, "parts", i, "loading_N", "a curve that carries something at valid_to");
    }
    return TW_OK;
}

/* Near the origin published fits of the two curves cross; in the upper half of their range creep must take force away. */
static tw_status check_creep(const tw_part *part, size_t i, tw_fault *fault)
{
    double end = part->valid_to;
    if (isnan(part->creep_N[0])) {
        return TW_OK;
    }
    if (!in_range(part->creep_N)) {
        return tw_check_fail(fault, "parts", i, "creep_N", "finite coefficients");
    }
    if (!(least_slope(part->creep_N, end) > 0.0 && tw_polynomial_value(part->creep_N, end) > 0.0)) {
        return tw_check_fail(fault, "parts", i, "creep_N", "a curve that grows from 0 to valid_to");
    }
    for (int half = 1; half <= 2; half++) {
        double at = 0.5 * half * end;
        double excess = tw_polynomial_value(part->creep_N, at) - tw_polynomial_value(part->loading_N, at);
        if (excess > 1e-9 * tw_polynomial_value(part->loading_N, end)) {
            return tw_check_fail(fault, "parts", i, "creep_N", "no more force than on first loading: creep lengthens");
        }
    }
    return TW_OK;
}

static tw_status check_part(const tw_part *part, size_t i, tw_fault *fault)
{
    tw_status status = check_loading(part, i, fault);
    if (status == TW_OK) {
        status = check_creep(part, i, fault);
    }
    if (status == TW_OK && !(part->final_stiffness_N > 0.0 && part->final_stiffness_N <= 1e14)) {
        status = tw_check_fail(fault, "parts", i, "final_stiffness_N", "a stiffness above 0, up to 1e14 N");
    }
    if (status == TW_OK && !(fabs(part->expansion_per_K) <= 1e-3)) {
        status = tw_check_fail(fault, "parts", i, "expansion_per_K", "an expansion within 1e-3 per kelvin");
    }
    return status;
}

static tw_status check_parts(const tw_project *p, tw_fault *fault)
{
    const tw_line *line = &p->line;
    if (line->part_count > TW_PARTS_MOST) {
        return tw_check_fail(fault, "line", TW_NONE, "parts", "at most two parts");
    }
    if (line->part_count > 0 && !(fabs(line->test_temperature_degC) <= 500.0)) {
        return tw_check_fail(fault, "line", TW_NONE, "test_temperature_degC", "a temperature within 500 degC");
    }
    tw_status status = TW_OK;
    for (size_t i = 0; status == TW_OK && i < line->part_count; i++) {
        status = check_part(&line->parts[i], i, fault);
    }
    return status;
}

static tw_status check_strains(const tw_line *line, tw_fault *fault)
{
    if (!(line->bedding_in_strain >= 0.0 && line->bedding_in_strain <= 0.2)) {
        return tw_check_fail(fault, "line", TW_NONE, "bedding_in_strain", "a strain from 0 to 20 %");
    }
    if (!(line->creep_coefficient >= 0.0 && line->creep_coefficient <= 0.2)) {
        return tw_check_fail(fault, "line", TW_NONE, "creep_coefficient", "a creep strain from 0 to 20 %, not negative");
    }
    if (!(line->creep_exponent >= 0.0 && line->creep_exponent <= 1.0)) {
        return tw_check_fail(fault, "line", TW_NONE, "creep_exponent", "an exponent from 0 to 1");
    }
    if (!(line->creep_hours >= 0.0 && line->creep_hours <= 1e8)) {
        return tw_check_fail(fault, "line", TW_NONE, "creep_hours", "a time from 0 to 1e8 h");
    }
    return tw_curve_given_creep(line) <= 0.2 ? TW_OK
                                      : tw_check_fail(fault, "line", TW_NONE, "creep_hours", "a creep of at most 20 % in all");
}

/* Cold must not shrink a part to nothing. */
static tw_status check_cold(const tw_project *p, tw_fault *fault)
{
    for (size_t c = 0; c < p->condition_count; c++) {
        double warmer = p->conditions[c].temperature_degC - p->stringing.temperature_degC;
        for (size_t i = 0; i < p->line.part_count; i++) {
            if (p->line.parts[i].expansion_per_K * warmer <= -0.5) {
                return tw_check_fail(fault, "conditions", c, "temperature_degC", "a thermal strain above -0.5");
            }
        }
    }
    return TW_OK;
}

tw_status tw_check_material(const tw_project *project, tw_fault *fault)
{
    size_t everyday = project->history.creep_condition;
    tw_status status = check_parts(project, fault);
    if (status == TW_OK) {
        status = check_cold(project, fault);
    }
    if (status == TW_OK) {
        status = check_strains(&project->line, fault);
    }
    if (status == TW_OK && everyday != TW_NONE && everyday >= project->condition_count) {
        status = tw_check_fail(fault, "history", TW_NONE, "creep_condition", "a condition that exists");
    }
    return status;
}
