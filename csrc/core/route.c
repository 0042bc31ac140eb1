#include "route.h"

#include <math.h>

#include "vector.h"

double tw_route_direction(const tw_support *near, double d[2])
{
    double x = near[1].station_m - near[0].station_m;
    double y = near[1].offset_m - near[0].offset_m;
    double run = hypot(x, y);
    d[0] = x / run;
    d[1] = y / run;
    return run;
}

void tw_route_measure(const tw_support *supports, size_t count, double *station_m)
{
    double d[2];
    station_m[0] = 0.0;
    for (size_t j = 1; j < count; j++) {
        station_m[j] = station_m[j - 1] + tw_route_direction(&supports[j - 1], d);
    }
}

double tw_route_support_station(const tw_project *project, size_t support)
{
    return project->route_station_m ? project->route_station_m[support] : project->supports[support].station_m;
}

tw_route_leg tw_route_leg_of(const tw_project *project, size_t span)
{
    tw_route_leg leg = {0.0, {0.0, 0.0}, {1.0, 0.0}};
    if (project->route_station_m) {
        const tw_support *near = &project->supports[span];
        leg.origin_m = project->route_station_m[span];
        leg.at[0] = near->station_m;
        leg.at[1] = near->offset_m;
        tw_route_direction(near, leg.ahead);
    }
    return leg;
}

double tw_route_station(const tw_route_leg *leg, const double r[3])
{
    return leg->origin_m + ((r[0] - leg->at[0]) * leg->ahead[0] + (r[1] - leg->at[1]) * leg->ahead[1]);
}

double tw_route_left(const tw_route_leg *leg, const double r[3])
{
    return (r[1] - leg->at[1]) * leg->ahead[0] - (r[0] - leg->at[0]) * leg->ahead[1];
}

double tw_route_rate(const tw_route_leg *leg, const double v[3])
{
    return v[0] * leg->ahead[0] + v[1] * leg->ahead[1];
}

void tw_route_ahead(const tw_project *project, size_t support, double ahead[2])
{
    double behind[2], next[2];
    ahead[0] = 1.0;
    ahead[1] = 0.0;
    if (!project->route_station_m) {
        return;
    }
    size_t last = project->support_count - 1;
    tw_route_direction(&project->supports[support > 0 ? support - 1 : 0], behind);
    tw_route_direction(&project->supports[support < last ? support : last - 1], next);
    double x = behind[0] + next[0], y = behind[1] + next[1];
    double size = hypot(x, y);
    ahead[0] = x / size;
    ahead[1] = y / size;
}

void tw_route_ahead_all(const tw_project *project, double *ahead)
{
    for (size_t j = 0; j < project->support_count; j++) {
        tw_route_ahead(project, j, ahead + 2 * j);
    }
}

double tw_route_turn_cosine(const tw_project *project, size_t support)
{
    double behind[2], next[2];
    if (!project->route_station_m || support == 0 || support + 1 == project->support_count) {
        return 1.0;
    }
    tw_route_direction(&project->supports[support - 1], behind);
    tw_route_direction(&project->supports[support], next);
    return behind[0] * next[0] + behind[1] * next[1];
}

void tw_route_into_axes(const double ahead[2], const double v[3], double out[3])
{
    if (ahead[1] == 0.0 && ahead[0] == 1.0) { /* not even the sign of a zero changes on a straight route */
        tw_copy(v, out);
        return;
    }
    out[0] = v[0] * ahead[0] + v[1] * ahead[1];
    out[1] = v[1] * ahead[0] - v[0] * ahead[1];
    out[2] = v[2];
}

void tw_route_out_of_axes(const double ahead[2], const double v[3], double out[3])
{
    const double back[2] = {ahead[0], -ahead[1]};
    tw_route_into_axes(back, v, out);
}
