/* window_explain: the limits that exclude one another, and the smallest single changes that open a shut window. */
#include <math.h>
#include <string.h>

#include "route.h"
#include "window_search.h"

static const double FURTHEST_M = 200.0;   /* no relaxation moves a support further */
static const double OPENER = 1e-6;        /* a relaxed allowance is rounded open by this share */

/* Mask every row but one, or none. */
static void mask_all_but(tw_window_run *run, size_t row)
{
    memset(run->masked, row == TW_NONE ? 0 : 1, run->window->row_count);
    if (row != TW_NONE) {
        run->masked[row] = 0;
    }
}

/* Where a row that fails at curve point `from` holds, looking upwards or downwards. */
static int needs(tw_window_run *run, size_t row, size_t from, int up, double *pull_N)
{
    const tw_window *w = run->window;
    size_t before = from;
    while (up ? before + 1 < w->curve_count : before > 0) {
        size_t next = up ? before + 1 : before - 1;
        if (w->curve[next * w->row_count + row] <= 1.0) {
            mask_all_but(run, row);
            *pull_N = tw_window_boundary(run, w->curve_pull_N[next], w->curve_pull_N[before]);
            mask_all_but(run, TW_NONE);
            return 1;
        }
        before = next;
    }
    return 0;
}

/* One entry per limit and side: the most demanding. */
static void add_conflict(tw_window *w, const tw_window_conflict *entry)
{
    for (size_t i = 0; i < w->conflict_count; i++) {
        tw_window_conflict *other = &w->conflict[i];
        if (other->limit == entry->limit && other->side == entry->side) {
            int harder = entry->side == TW_SIDE_AT_LEAST ? entry->needs_N > other->needs_N
                         : entry->side == TW_SIDE_AT_MOST ? entry->needs_N < other->needs_N
                                                          : 0;
            if (harder) {
                *other = *entry;
            }
            return;
        }
    }
    w->conflict[w->conflict_count++] = *entry;
}

/* What still fails where an entry is just satisfied: its opponent, where f has no two branches that meet at its lowest. */
static void find_opponent(tw_window_run *run, const tw_window_conflict *entry)
{
    tw_window *w = run->window;
    int up = entry->side == TW_SIDE_AT_MOST;
    size_t row, k = up ? 0 : w->curve_count - 1;
    if (entry->side == TW_SIDE_NEVER || !(tw_window_try(run, entry->needs_N, run->u) > 1.0)) {
        return;
    }
    tw_window_worst(run, run->u, &row);
    while (up ? k + 1 < w->curve_count && w->curve_pull_N[k + 1] <= entry->needs_N
              : k > 0 && w->curve_pull_N[k - 1] >= entry->needs_N) {
        k = up ? k + 1 : k - 1;
    }
    tw_window_conflict other = {w->row_limit[row], w->row_condition[row], NAN, up ? TW_SIDE_AT_LEAST : TW_SIDE_AT_MOST};
    if (w->curve[k * w->row_count + row] > 1.0 && needs(run, row, k, up, &other.needs_N)) {
        add_conflict(w, &other);
    }
}

static void find_conflict(tw_window_run *run, size_t at)
{
    tw_window *w = run->window;
    for (size_t r = 0; r < w->row_count && run->stop == TW_OK; r++) {
        if (w->curve[at * w->row_count + r] <= 1.0) {
            continue;
        }
        tw_window_conflict entry = {w->row_limit[r], w->row_condition[r], NAN, TW_SIDE_NEVER};
        if (needs(run, r, at, 1, &entry.needs_N)) {
            entry.side = TW_SIDE_AT_LEAST;
        } else if (needs(run, r, at, 0, &entry.needs_N)) {
            entry.side = TW_SIDE_AT_MOST;
        }
        add_conflict(w, &entry);
    }
    for (size_t i = 0, count = w->conflict_count; i < count && run->stop == TW_OK; i++) {
        const tw_window_conflict entry = w->conflict[i];
        find_opponent(run, &entry);
    }
}

/* Worst utilisation of one limit's rows at a pull, with its verdict. */
static double limit_at(tw_window_run *run, size_t limit, double pull_N, tw_verdict *worst)
{
    const tw_window *w = run->window;
    double most = -1.0;
    tw_window_try(run, pull_N, run->u);
    for (size_t r = 0; r < w->row_count; r++) {
        tw_verdict verdict;
        if (w->row_limit[r] == limit && run->u[r] > most) {
            most = tw_window_row(run, r, &verdict);
            *worst = verdict;
        }
    }
    return most;
}

/* 1: with this limit's allowance changed by a factor, every row holds at the pull. */
static int opens(tw_window_run *run, size_t limit, int least, double factor, double pull_N)
{
    tw_limit *changed = &run->limits[limit];
    const tw_limit home = *changed;
    changed->least *= least ? factor : 1.0;
    changed->most *= least ? 1.0 : factor;
    changed->share *= least ? 1.0 : factor;
    int moved = run->moved;
    run->moved = 1; /* no pull of the user's own project */
    double f = tw_window_try(run, pull_N, run->u);
    *changed = home;
    run->moved = moved;
    return f <= TW_WINDOW_HOLDS;
}

/* The least allowance of one limit at which the others leave it a pull. */
static void relax_allowance(tw_window_run *run, size_t limit)
{
    tw_window *w = run->window;
    double lowest = INFINITY, at = NAN;
    for (size_t r = 0; r < w->row_count; r++) {
        run->masked[r] = w->row_limit[r] == limit;
    }
    size_t count = tw_window_intervals(run, w->interval_N, run->curve_capacity);
    for (size_t i = 0; i < count; i++) {
        for (size_t k = 0; k < w->curve_count + 2; k++) {
            double pull = k < 2 ? w->interval_N[2 * i + k] : w->curve_pull_N[k - 2];
            tw_verdict verdict;
            if (pull < w->interval_N[2 * i] || pull > w->interval_N[2 * i + 1]) {
                continue;
            }
            double f = limit_at(run, limit, pull, &verdict);
            if (f < lowest) {
                lowest = f;
                at = pull;
            }
        }
    }
    memset(run->masked, 0, w->row_count);
    tw_verdict verdict;
    if (isnan(at) || run->stop != TW_OK || !(limit_at(run, limit, at, &verdict) > 1.0) || !verdict.judged) {
        return;
    }
    int least = verdict.value < verdict.allowed;
    double to = verdict.value * (least ? 1.0 - OPENER : 1.0 + OPENER);
    if (to > 0.0 && opens(run, limit, least, to / verdict.allowed, at)) {
        const tw_window_relax entry = {TW_RELAX_ALLOWANCE, limit, TW_NONE, to - verdict.allowed, to, at};
        w->relax[w->relax_count++] = entry;
    }
}

/* The lowest f of the project as it stands now, near a pull. */
static double lowest_f(tw_window_run *run, double near_N, double *pull_N)
{
    const tw_window *w = run->window;
    enum { POINTS = 13 };
    double low = fmax(w->range_low_N, near_N / 4.0), high = fmin(w->range_high_N, near_N * 4.0);
    double pull[POINTS];
    size_t best = 0;
    double lowest = INFINITY;
    for (size_t k = 0; k < POINTS; k++) {
        pull[k] = low * pow(high / low, (double)k / (POINTS - 1));
        double f = tw_window_try(run, pull[k], run->u);
        if (f < lowest) {
            lowest = f;
            best = k;
        }
    }
    double f = tw_window_minimax(run, pull[best > 0 ? best - 1 : 0], pull[best + 1 < POINTS ? best + 1 : best], 0.0,
                                 pull_N);
    if (lowest < f) {
        *pull_N = pull[best];
        return lowest;
    }
    return f;
}

/* How far a support can go each way: not past its neighbours, not off the profile. */
static double furthest(const tw_window_run *run, size_t support, tw_relax_kind kind, double sign)
{
    const tw_project *p = &run->project;
    double most = FURTHEST_M;
    double x = tw_route_support_station(p, support);
    if (kind == TW_RELAX_SUPPORT_HEIGHT) {
        return most;
    }
    if (sign < 0.0 && support > 0) {
        most = fmin(most, 0.9 * (x - tw_route_support_station(p, support - 1)));
    } else if (sign > 0.0 && support + 1 < p->support_count) {
        most = fmin(most, 0.9 * (tw_route_support_station(p, support + 1) - x));
    }
    if (p->ground_count > 0) {
        most = fmin(most, sign < 0.0 ? x - p->ground_station_m[0] : p->ground_station_m[p->ground_count - 1] - x);
    }
    return fmax(most, 0.0);
}

typedef struct mover {
    tw_window_run *run;
    tw_support home;
    size_t support;
    tw_relax_kind kind;
    double near_N;
    double pull_N;
} mover;

static double moved_f(mover *m, double by)
{
    tw_window_move(m->run, &m->home, m->support, m->kind == TW_RELAX_SUPPORT_STATION, by);
    return lowest_f(m->run, m->near_N, &m->pull_N);
}

/* Grow the move until a pull exists, then halve back to the smallest. Returns the move, or 0. */
static double smallest_move(mover *m, double sign, double most)
{
    double shut = 0.0, open = 0.0;
    double by = 0.05;
    double before = INFINITY;
    while (open == 0.0 && shut < most && m->run->stop == TW_OK) {
        by = fmin(by, most);
        double f = moved_f(m, sign * by);
        if (f <= 1.0) {
            open = by;
        } else if (f > before + 1e-6) {
            return 0.0; /* it gets worse this way */
        } else {
            before = f;
            shut = by;
            by *= 2.0;
        }
    }
    while (open > 0.0 && open - shut > fmax(1e-4, 1e-4 * open) && m->run->stop == TW_OK) {
        double middle = 0.5 * (shut + open);
        if (moved_f(m, sign * middle) <= 1.0) {
            open = middle;
        } else {
            shut = middle;
        }
    }
    return sign * open;
}

static void relax_support(tw_window_run *run, size_t support, tw_relax_kind kind, double near_N)
{
    tw_window *w = run->window;
    mover m = {run, run->supports[support], support, kind, near_N, near_N};
    double base = moved_f(&m, 0.0);
    double up = moved_f(&m, 0.1), down = moved_f(&m, -0.1);
    double sign = up < down ? 1.0 : -1.0;
    double by = 0.0;
    if (fmin(up, down) < base - 1e-9) {
        by = smallest_move(&m, sign, furthest(run, support, kind, sign));
    }
    if (by != 0.0 && run->stop == TW_OK && moved_f(&m, by) <= 1.0) {
        const tw_support *at = &run->supports[support];
        double to = kind == TW_RELAX_SUPPORT_STATION ? tw_route_support_station(&run->project, support) : at->elevation_m;
        const tw_window_relax entry = {kind, TW_NONE, support, by, to, m.pull_N};
        w->relax[w->relax_count++] = entry;
    }
    tw_window_move(run, &m.home, support, 0, 0.0);
}

/* The supports beside the places where the limits in conflict are worst. */
static size_t concerned(tw_window_run *run, double pull_N, size_t *supports)
{
    const tw_window *w = run->window;
    size_t count = 0;
    for (size_t i = 0; i < w->conflict_count; i++) {
        tw_verdict verdict;
        limit_at(run, w->conflict[i].limit, pull_N, &verdict);
        size_t first, last;
        int placed = tw_window_beside(&verdict, &first, &last);
        for (size_t j = first; placed && j <= last; j++) {
            size_t k = 0;
            while (k < count && supports[k] != j) {
                k++;
            }
            if (k == count && count < TW_WINDOW_RELAX_SUPPORTS_MOST) {
                supports[count++] = j;
            }
        }
    }
    return count;
}

tw_status tw_window_explain_shut(tw_window_run *run)
{
    tw_window *w = run->window;
    size_t at = tw_window_curve_best(run, 0.0, INFINITY);
    size_t supports[TW_WINDOW_RELAX_SUPPORTS_MOST];
    double pull = w->curve_pull_N[at];
    find_conflict(run, at);
    tw_status known = run->stop;
    for (size_t i = 0; i < w->conflict_count && run->stop == TW_OK; i++) {
        size_t seen = 0;
        while (seen < i && w->conflict[seen].limit != w->conflict[i].limit) {
            seen++;
        }
        if (seen == i) {
            relax_allowance(run, w->conflict[i].limit);
        }
    }
    size_t count = concerned(run, pull, supports);
    for (size_t k = 0; k < count && run->stop == TW_OK; k++) {
        relax_support(run, supports[k], TW_RELAX_SUPPORT_HEIGHT, pull);
        relax_support(run, supports[k], TW_RELAX_SUPPORT_STATION, pull);
    }
    w->interval_count = 0;
    return known != TW_OK ? known : run->stop == TW_OK || run->stop == TW_DEADLINE ? TW_SHUT : run->stop;
}
