/* section: spans coupled at their supports, hung exactly in one condition.
 *
 * Unknowns are the tension vectors R_k at each span's start. A hold j between spans k and k+1 takes the force
 * F_j = t_k(S) - R_{k+1} - G_j (force of the hold on the line; G_j: half the hanger's weight), and adds to the
 * complementary energy
 *     anchor  F.a            hanger  F.a - l |F|          post  F.a - F_x^2/(2 k_x) - F_y^2/(2 k_y)
 * so that D(R) = sum_spans [ -int W*(|t|) ds + load terms ] + sum_holds. -D is convex; its Hessian is block tridiagonal
 * with 3x3 blocks over the spans. Damped Newton.
 *
 * Over a sheave natural length moves between the spans: see section_feed.h. D and the bracket are those of the line at the
 * lengths found.
 *
 * l |F| has a kink at F = 0: a slack hanger. There F = 0 is kept as a constraint: the spans on both sides run through
 * as one, and the clamp only has to stay within l of the support. Which hangers are slack is found by an active set.
 */
#ifndef TW_SECTION_H
#define TW_SECTION_H

#include "line.h"
#include "material.h"
#include "span.h"

enum {
    TW_SECTION_WORK_PER_SPAN = 45, /* doubles of scratch */
    TW_SECTION_FEED_PER_SPAN = 65, /* and for natural lengths that move */
    TW_SECTION_RUN_PIECES = 64     /* of a span under a load per horizontal metre */
};

/* What natural length does at a support, see section_feed.h. */
typedef enum tw_feed {
    TW_FEED_NONE,   /* nothing: the line is clamped, or ends */
    TW_FEED_SHEAVE, /* runs over until the tension is the same on both sides, but for friction */
    TW_FEED_PLUMB,  /* is shifted until the horizontal tension is the same on both sides */
    TW_FEED_WINCH   /* comes in from outside until the span ahead has the horizontal tension winch_N */
} tw_feed;

typedef struct tw_section {
    const tw_project *project;
    size_t condition;        /* that was loaded; TW_NONE: bare */
    tw_material *materials;  /* [span_count] owned */
    tw_curve *curves;        /* [span_count] room for their laws; NULL on a linear line; owned */
    double stiffness_N;      /* largest of the materials */
    const tw_permanent *permanent; /* [span_count] what its history has left, borrowed; NULL: as strung */
    double temperature_degC; /* of the condition */
    int creeping;            /* 1: the parts' creep curves in place of their loading curves */
    size_t span_count;
    size_t piece_capacity;   /* allocated */
    size_t piece_count;
    tw_piece *pieces;        /* in order along the line; owned */
    size_t *piece_first;     /* [span_count + 1]: pieces of span k are piece_first[k] ... piece_first[k+1] - 1; owned */
    double *length_m;        /* [span_count] natural length of each span; owned */
    double *start_m;         /* [span_count + 1] natural length from the first support to each; owned */
    double *pull;            /* [3 span_count] tension vector at each span's start; owned */
    double *clamp;           /* [3 (span_count + 1)] where the line is held; owned */
    double *clamp_load;      /* [3 (span_count + 1)] G_j: load that acts at the clamp itself; owned */
    double *hold_force;      /* [3 (span_count + 1)] force of each hold on the line; owned */
    double *ahead;           /* [2 (span_count + 1)] axes of each support, see route.h; owned */
    double *load_length_m;   /* [loads of the condition] natural length of each point load, else NaN; owned */
    double *load_from_m;     /* [loads of the condition] natural length where each load begins; owned */
    double *load_to_m;       /* [loads of the condition] and ends; owned */
    double *cut_m;           /* scratch: where the loads cut one span; owned */
    double *work;            /* scratch of the solver; owned */
    unsigned char *slack;    /* [span_count + 1] 1: the hanger there hangs slack; owned */
    size_t *run_first;       /* [span_count + 1] scratch of the solver: runs of spans between holds that carry; owned */
    tw_feed *feed;           /* [span_count + 1] by the supports' holds at first; owned */
    double *moved_m;         /* [span_count + 1] natural length moved across each support into the span ahead; owned */
    double *feed_work;       /* scratch of section_feed; owned */
    size_t *feed_runs;       /* [span_count + 1] scratch of section_feed; owned */
    double *winch_N;         /* [span_count + 1] horizontal tension that a winch keeps in the span ahead; owned */
    int drag;                /* +1: friction lets the tension grow ahead over each sheave; -1: fall; 0: no friction */
    int fed;                 /* 1: moved_m has been put on the pieces since they were loaded */
    double *link_load;       /* [3 (span_count + 1)] the half of a link's weight and wind that its support takes; owned */
    double carriage_m;       /* natural length from the first support where the carriage stands; NaN: not known yet */
    double *run_vector;      /* [3 piece_capacity] loads per horizontal metre on each piece, N/m; NULL: no such load; owned */
    double *run_share;       /* [2 piece_capacity] horizontal over natural metre: at a piece's start, growth along it; owned */
    size_t run_pieces;       /* for how many pieces run_share is known; 0: not */
    double soft_N;           /* rounding of a slack hanger's kink, see hold.h; 0 but where nothing else settles */
    double energy_lower_J;   /* D, datum at the first support */
    double closing_m;        /* largest closing error */
    size_t steps;            /* Newton steps taken */
} tw_section;

/* Room for every condition of the project. NULL-safe free; create returns NULL without memory. */
tw_section *tw_section_create(const tw_project *project);
void tw_section_free(tw_section *section);

/* Put the loads of a condition on natural lengths `length_m` [span_count].
 * condition TW_NONE: the bare line at the stringing temperature.
 * strung: the bare strung section by which stations become natural lengths; NULL where no place is a station. */
tw_status tw_section_load(tw_section *section, size_t condition, const double *length_m, const tw_section *strung,
                          int with_addition);

/* Load and solve, with loads per horizontal metre brought into line with the shape and a carriage where it stands. warm: start
 * from the pulls, shares and the carriage's place already there. TW_ERROR_PLACE: a held carriage's station is off its span. */
tw_status tw_section_hang(tw_section *section, size_t condition, const double *length_m, const tw_section *strung,
                          int with_addition, const tw_options *options, int warm);

/* How far the loads are from what the hung shape asks for: the largest change of a load per run's share if it were brought
 * into line once more, and what a carriage still lacks of standing (the force that drives it on over the tension, or the
 * miss of its station over the span's length). */
double tw_section_runs_off(const tw_section *section);
double tw_section_carriage_off(const tw_section *section);
#define TW_SECTION_OFF_MOST 1e-9 /* of either, in a line that is settled */

/* Find the equilibrium. warm: start from the pulls already there. Fills everything from pull on. */
tw_status tw_section_solve(tw_section *section, const tw_options *options, int warm);

/* Natural length from the first support <-> span and length within it. */
void tw_section_locate(const tw_section *section, double s, size_t *span, double *within);
/* First natural length at which the line passes a station, or the clamp where an angle point skips it; TW_ERROR_PLACE when
 * there is none. */
tw_status tw_section_at_station(const tw_section *section, double station_m, double *s);
/* Position and tension vector at a natural length from the first support; either may be NULL. */
void tw_section_at(const tw_section *section, double s, double position[3], double tension[3]);
/* Station of the line's position at a natural length. */
double tw_section_station(const tw_section *section, double s, const double position[3]);

/* Tension vectors just before and just beyond a place; they differ where a point load acts. */
void tw_section_beside(const tw_section *section, double s, double before[3], double beyond[3]);

/* Stretch energy of a hung section, J. */
double tw_section_stored(const tw_section *section);

/* What the result keys ask for. */
void tw_section_span_state(const tw_section *section, size_t span, tw_span_state *state);
void tw_section_support_state(const tw_section *section, size_t support, tw_support_state *state);

#endif
