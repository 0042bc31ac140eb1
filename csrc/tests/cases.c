#include "cases.h"

#include <math.h>
#include <string.h>

#include "hold.h"
#include "vector.h"

static const double ABSENT = (double)NAN;

void case_begin(tw_case *c)
{
    memset(c, 0, sizeof *c);
    c->project.line.diameter_m = 0.02;
    c->project.line.weight_N_per_m = 15.97;
    c->project.line.stiffness_N = 34.7e6;
    c->project.line.expansion_per_K = 18.9e-6;
    c->project.line.breaking_strength_N = ABSENT;
    c->project.stringing.temperature_degC = 15.0;
    c->project.stringing.rule = TW_STRING_PULL;
    c->project.stringing.value = 20e3;
    c->options = tw_options_default();
}

void case_ready(tw_case *c)
{
    tw_project *p = &c->project;
    p->supports = c->supports;
    p->conditions = c->conditions;
    p->loads = c->loads;
    p->marks = c->marks;
    p->crossings = c->crossings;
    p->ground_station_m = c->ground_station_m;
    p->ground_elevation_m = c->ground_elevation_m;
    p->limits = c->limits;
    p->limit_applies = c->applies_table;
    p->limit_covers = c->covers_table;
    p->stringing.lengths_m = c->lengths_m;
    for (size_t i = 0; i < p->limit_count; i++) {
        for (size_t k = 0; k < p->condition_count; k++) {
            c->applies_table[i * p->condition_count + k] = (c->applies[i] >> k) & 1u;
        }
        for (size_t j = 0; j < p->support_count; j++) {
            c->covers_table[i * p->support_count + j] = (c->covers[i] >> j) & 1u;
        }
    }
}

void case_level(tw_case *c, double span_m)
{
    case_begin(c);
    case_anchor(c, 0.0, 0.0);
    case_anchor(c, span_m, 0.0);
    case_condition(c, 15.0);
    case_ready(c);
}

void case_route(tw_case *c)
{
    const double lengths_m[] = {250.9, 401.9, 301.4, 281.2};
    case_begin(c);
    case_post(c, 100.0, 40.0, 3e5, 2e5)->offset_m = -5.0;
    case_hanger(c, 350.0, 52.0, 2.0, 600.0)->offset_m = 5.0;
    case_post(c, 750.0, 47.0, 1.5e5, INFINITY)->offset_m = -3.0;
    case_hanger(c, 1050.0, 44.0, 1.5, 300.0);
    case_anchor(c, 1330.0, 60.0);
    memcpy(c->lengths_m, lengths_m, sizeof lengths_m);
    tw_condition *ice = case_condition(c, -5.0);
    ice->ice_thickness_m = 0.012;
    ice->wind_pressure_Pa = 190.0;
    ice->resultant_addition_N_per_m = 4.4;
    case_condition(c, 10.0)->wind_speed_m_per_s = 35.0;
    case_condition(c, 70.0);
    case_condition(c, -30.0);
    case_ready(c);
}

static tw_support *add_support(tw_case *c, tw_hold hold, double station_m, double elevation_m)
{
    tw_support *support = &c->supports[c->project.support_count++];
    support->hold = hold;
    support->station_m = station_m;
    support->elevation_m = elevation_m;
    support->height_m = ABSENT;
    support->stiffness_along_N_per_m = support->stiffness_across_N_per_m = INFINITY;
    support->stiffness_vertical_N_per_m = INFINITY;
    support->capacity_along_N = support->capacity_across_N = ABSENT;
    support->capacity_down_N = support->capacity_up_N = ABSENT;
    return support;
}

tw_support *case_anchor(tw_case *c, double station_m, double elevation_m)
{
    return add_support(c, TW_HOLD_ANCHOR, station_m, elevation_m);
}

tw_support *case_hanger(tw_case *c, double station_m, double elevation_m, double length_m, double weight_N)
{
    tw_support *support = add_support(c, TW_HOLD_HANGER, station_m, elevation_m);
    support->hanger_length_m = length_m;
    support->hanger_weight_N = weight_N;
    return support;
}

tw_support *case_post(tw_case *c, double station_m, double elevation_m, double along_N_per_m, double across_N_per_m)
{
    tw_support *support = add_support(c, TW_HOLD_POST, station_m, elevation_m);
    support->stiffness_along_N_per_m = along_N_per_m;
    support->stiffness_across_N_per_m = across_N_per_m;
    return support;
}

tw_condition *case_condition(tw_case *c, double temperature_degC)
{
    tw_condition *condition = &c->conditions[c->project.condition_count++];
    condition->temperature_degC = temperature_degC;
    condition->factor_weight = condition->factor_ice = condition->factor_wind = condition->factor_load = 1.0;
    condition->wind_bearing_rad = condition->wind_altitude_m = ABSENT;
    condition->ice_density_kg_per_m3 = 900.0;
    condition->wind_pressure_Pa = condition->wind_speed_m_per_s = ABSENT;
    condition->air_density_kg_per_m3 = 1.225;
    condition->wind_drag = 1.0;
    condition->wind_angle_rad = acos(0.0);
    condition->load_first = c->project.load_count;
    return condition;
}

tw_load *case_stretch(tw_case *c, tw_place place, double from_m, double to_m, double x, double y, double z)
{
    tw_load *load = &c->loads[c->project.load_count++];
    c->conditions[c->project.condition_count - 1].load_count++;
    load->place = place;
    load->from_m = from_m;
    load->to_m = to_m;
    load->vector[0] = x;
    load->vector[1] = y;
    load->vector[2] = z;
    return load;
}

tw_load *case_point(tw_case *c, tw_place place, double at_m, double x, double y, double z)
{
    tw_load *load = case_stretch(c, place, at_m, ABSENT, x, y, z);
    load->is_point = 1;
    return load;
}

tw_limit *case_limit(tw_case *c, tw_limit_kind kind, double least, double most)
{
    size_t i = c->project.limit_count++;
    tw_limit *limit = &c->limits[i];
    limit->kind = kind;
    limit->least = least;
    limit->most = most;
    limit->share = limit->from_m = limit->to_m = ABSENT;
    limit->crossing = TW_NONE;
    limit->direction = TW_DIRECTION_RESULTANT;
    c->applies[i] = c->covers[i] = ~0u;
    return limit;
}

void case_ground(tw_case *c, double station_m, double elevation_m)
{
    size_t k = c->project.ground_count++;
    c->ground_station_m[k] = station_m;
    c->ground_elevation_m[k] = elevation_m;
}

void case_mark(tw_case *c, tw_place place, double at_m)
{
    tw_mark *mark = &c->marks[c->project.mark_count++];
    mark->place = place;
    mark->at_m = at_m;
}

tw_section *case_hung(const tw_case *c, size_t condition)
{
    tw_section *section = tw_section_create(&c->project);
    tw_section *strung = tw_section_create(&c->project);
    tw_status status = section && strung ? TW_OK : TW_ERROR_MEMORY;
    if (status == TW_OK) {
        int hangs = tw_section_load(strung, TW_NONE, c->lengths_m, NULL, 0) == TW_OK
                    && tw_section_solve(strung, &c->options, 0) == TW_OK;
        status = tw_section_hang(section, condition, c->lengths_m, hangs ? strung : NULL, 1, &c->options, 0);
    }
    tw_section_free(strung);
    if (status == TW_OK) {
        return section;
    }
    tw_section_free(section);
    return NULL;
}

tw_trial *case_trial(const tw_case *c, double pull_N)
{
    tw_trial *trial = tw_trial_create(&c->project);
    if (trial && tw_trial_string(trial, pull_N, &c->options) == TW_OK) {
        return trial;
    }
    tw_trial_free(trial);
    return NULL;
}

double case_utilisation(const tw_case *c, double pull_N)
{
    const tw_project *p = &c->project;
    tw_trial *trial = case_trial(c, pull_N);
    double worst = trial ? 0.0 : 1000.0;
    for (size_t i = 0; trial && i < p->limit_count * p->condition_count; i++) {
        tw_verdict v;
        if (p->limit_applies[i]) {
            tw_status status = tw_trial_judge(trial, i / p->condition_count, i % p->condition_count, &c->options, &v);
            double u = status != TW_OK ? 1000.0 : v.judged ? v.utilisation : 0.0;
            worst = fmax(worst, isfinite(u) ? u : 1000.0);
        }
    }
    tw_trial_free(trial);
    return worst;
}

double case_edge(const tw_case *c, double holds_N, double fails_N)
{
    for (int i = 0; i < 45; i++) {
        double middle = 0.5 * (holds_N + fails_N);
        *(case_utilisation(c, middle) <= 1.0 ? &holds_N : &fails_N) = middle;
    }
    return holds_N;
}

size_t case_stretches(const tw_case *c, double low_N, double high_N, int points, double *edges, size_t most)
{
    size_t count = 0;
    double before = low_N;
    int inside = case_utilisation(c, low_N) <= 1.0;
    edges[0] = low_N;
    for (int k = 1; k <= points && count < most; k++) {
        double pull = low_N * pow(high_N / low_N, (double)k / points);
        int holds = case_utilisation(c, pull) <= 1.0;
        if (holds && !inside) {
            edges[2 * count] = case_edge(c, pull, before);
        } else if (!holds && inside) {
            edges[2 * count++ + 1] = case_edge(c, before, pull);
        }
        inside = holds;
        before = pull;
    }
    if (inside && count < most) {
        edges[2 * count++ + 1] = high_N;
    }
    return count;
}

double case_complementary(tw_section *section, const double *pull)
{
    const double zero[3] = {0.0, 0.0, 0.0};
    double behind[3] = {0.0, 0.0, 0.0};
    double lower = 0.0;
    double datum[3];
    tw_hold_attachment(&section->project->supports[0], datum);
    for (size_t j = 0; j <= section->span_count; j++) {
        const tw_support *support = &section->project->supports[j];
        double F[3], a[3];
        tw_copy(behind, F);
        tw_axpy(F, -1.0, section->clamp_load + 3 * j, F);
        if (j < section->span_count) {
            size_t first = section->piece_first[j], count = section->piece_first[j + 1] - first;
            double end[3];
            tw_axpy(F, -1.0, pull + 3 * j, F);
            tw_span_hang(&section->materials[j], section->pieces + first, count, zero, pull + 3 * j, end, behind, NULL);
        }
        tw_hold_attachment(support, a);
        tw_axpy(a, -1.0, datum, a);
        lower += tw_dot(F, a) + tw_hold_energy(support, section->ahead + 2 * j, F, section->soft_N);
    }
    for (size_t k = 0; k < section->span_count; k++) {
        for (size_t p = section->piece_first[k]; p < section->piece_first[k + 1]; p++) {
            double conjugate;
            tw_piece_energy(&section->materials[k], &section->pieces[p], &conjugate, NULL, NULL);
            lower -= conjugate;
        }
    }
    return lower;
}

void case_hill(tw_case *c)
{
    case_begin(c);
    case_anchor(c, 0.0, 100.0);
    case_hanger(c, 260.0, 125.0, 1.6, 450.0);
    case_hanger(c, 545.0, 170.0, 1.6, 450.0);
    case_anchor(c, 840.0, 214.0);
    case_hanger(c, 985.0, 238.0, 1.6, 450.0);
    case_anchor(c, 1255.0, 220.0);
    case_condition(c, 15.0);
    c->project.stringing.method = TW_METHOD_OVER_SHEAVES;
    case_ready(c);
}
