/* window_price: what a metre of a support or a newton of pull moves at the ends of an open window. */
#include <math.h>

#include "ground.h"
#include "route.h"
#include "window_search.h"

static const double MOVE_M = 1e-3;        /* central differences of a support's place */
static const double PULL_STEP = 1e-5;     /* and of the pull, relative */

/* Margin of a row at a pull; NaN where it cannot be judged. */
static double margin_at(tw_window_run *run, size_t row, double pull_N)
{
    tw_verdict verdict;
    tw_status status = tw_trial_string(run->trial, pull_N, run->options);
    tw_window_latch(run, status);
    if (status != TW_OK || tw_window_row(run, row, &verdict) >= TW_WINDOW_UNSETTLED || !verdict.judged) {
        return NAN;
    }
    return verdict.margin;
}

void tw_window_move(tw_window_run *run, const tw_support *home, size_t support, int station, double by)
{
    tw_support *at = &run->supports[support];
    *at = *home;
    if (station) {
        double ahead[2];
        tw_route_ahead(&run->project, support, ahead); /* of the support at home */
        at->station_m += by * ahead[0];
        at->offset_m += by * ahead[1];
    }
    if (run->route_m) {
        tw_route_measure(run->supports, run->project.support_count, run->route_m);
    }
    if (station) {
        double ground = tw_ground_elevation(&run->project, tw_route_support_station(&run->project, support));
        if (!isnan(home->height_m) && !isnan(ground)) {
            at->elevation_m = ground + home->height_m;
        }
    } else {
        at->elevation_m += by;
    }
    run->moved = by != 0.0;
}

int tw_window_beside(const tw_verdict *verdict, size_t *first, size_t *last)
{
    *first = verdict->support != TW_NONE ? verdict->support : verdict->span;
    *last = verdict->support != TW_NONE ? *first : *first + 1;
    return *first != TW_NONE;
}

static size_t find_row(const tw_window *w, size_t limit, size_t condition)
{
    for (size_t r = 0; r < w->row_count; r++) {
        if (w->row_limit[r] == limit && w->row_condition[r] == condition) {
            return r;
        }
    }
    return TW_NONE;
}

static void add_price(tw_window *w, const tw_window_price *price)
{
    if (w->price_count < TW_WINDOW_PRICES_MOST && isfinite(price->margin_per_unit)) {
        w->price[w->price_count++] = *price;
    }
}

static void price_support(tw_window_run *run, tw_window_price price, size_t row, double pull_N, double per_pull)
{
    const tw_support home = run->supports[price.support];
    int station = price.variable == TW_VARIABLE_SUPPORT_STATION;
    tw_window_move(run, &home, price.support, station, MOVE_M);
    double up = margin_at(run, row, pull_N);
    tw_window_move(run, &home, price.support, station, -MOVE_M);
    double down = margin_at(run, row, pull_N);
    tw_window_move(run, &home, price.support, station, 0.0);
    double here = margin_at(run, row, pull_N);
    price.margin_per_unit = isnan(up) ? (here - down) / MOVE_M : isnan(down) ? (up - here) / MOVE_M
                                                                              : (up - down) / (2.0 * MOVE_M);
    price.pull_per_unit = -price.margin_per_unit / per_pull;
    add_price(run->window, &price);
}

static void price_end(tw_window_run *run, const tw_window_end *end, int at_high)
{
    size_t row = find_row(run->window, end->limit, end->condition);
    if (row == TW_NONE) {
        return;
    }
    double step = PULL_STEP * end->pull_N;
    double per_pull = (margin_at(run, row, end->pull_N + step) - margin_at(run, row, end->pull_N - step)) / (2.0 * step);
    tw_window_price price = {at_high, end->limit, end->condition, TW_VARIABLE_PULL, TW_NONE, per_pull, NAN};
    add_price(run->window, &price);
    size_t first, last;
    int placed = tw_window_beside(&end->verdict, &first, &last);
    for (size_t j = first; placed && j <= last; j++) {
        price.support = j;
        price.variable = TW_VARIABLE_SUPPORT_HEIGHT;
        price_support(run, price, row, end->pull_N, per_pull);
        price.variable = TW_VARIABLE_SUPPORT_STATION;
        price_support(run, price, row, end->pull_N, per_pull);
    }
}

void tw_window_prices(tw_window_run *run)
{
    price_end(run, &run->window->low, 0);
    price_end(run, &run->window->high, 1);
}
