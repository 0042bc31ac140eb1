/* line: the plain structs that describe a line, its supports, loading and limits, and what settles out of them.
 *
 * SI throughout, the unit in the name. Axes: x along the route (station), y across it (positive to the left when
 * looking ahead), z up (elevation); of a route that turns x is east and y north, and route.h says what a station is. Natural length s runs along the unstretched line at the stringing temperature,
 * from the first support. NaN marks an optional number that is not given. Nothing here owns memory unless its
 * comment says so.
 */
#ifndef TW_LINE_H
#define TW_LINE_H

#include <stddef.h>

#include "status.h"

#define TW_NONE ((size_t)-1) /* "no such index" */

enum { TW_CURVE_TERMS = 5, TW_PARTS_MOST = 2 };

/* One part of a line with a curved law (core, outer layers, or the whole); see material_curve.h. Strains are ratios. */
typedef struct tw_part {
    double loading_N[TW_CURVE_TERMS]; /* force of the part at strain e, first loading: sum loading_N[k] e^k */
    double creep_N[TW_CURVE_TERMS];   /* the same after long creep at constant force; creep_N[0] NaN: it does not creep */
    double valid_to;                  /* strain up to which both hold; beyond it they go on straight */
    double final_stiffness_N;         /* of unloading and reloading, per unit strain */
    double expansion_per_K;
} tw_part;

typedef struct tw_line {
    double diameter_m;          /* bare outside diameter; 0 where neither ice nor wind acts */
    double weight_N_per_m;      /* bare, per natural metre */
    double stiffness_N;         /* EA; of a curved line its greatest slope, by which pulls are bounded */
    double expansion_per_K;     /* thermal strain per kelvin; a curved line's parts have their own */
    double breaking_strength_N; /* NaN: not given */
    size_t part_count;          /* 0: linear */
    tw_part parts[TW_PARTS_MOST];
    double test_temperature_degC; /* at which the parts' laws were measured together */
    double bedding_in_strain;   /* in every state but the initial one */
    double creep_coefficient;   /* c of the creep strain c t^n, in the state after creep */
    double creep_exponent;      /* n */
    double creep_hours;         /* t */
} tw_line;

typedef enum tw_hold {
    TW_HOLD_ANCHOR, /* the line ends here; fixed point */
    TW_HOLD_HANGER, /* clamp at the lower end of a link that swings along and across */
    TW_HOLD_SHEAVE, /* natural length runs over it: equal tension on both sides; fixed, or swinging on a link */
    TW_HOLD_POST    /* clamp on an elastic support */
} tw_hold;

typedef struct tw_support {
    double station_m;   /* x: station on a straight route, east on one that turns */
    double offset_m;    /* y: offset to the left, or north */
    double elevation_m; /* of the point where the hold is fixed */
    double height_m;    /* above the ground profile where given so (elevation follows it when moved); else NaN */
    tw_hold hold;
    double hanger_length_m;           /* hanger, > 0, of each string; link of a swinging sheave, 0: the sheave is fixed */
    double hanger_spread_m;           /* hanger only: V, distance between its upper ends, across; 0: a single string */
    double hanger_weight_N;           /* hanger and sheave, >= 0; half of it acts at the clamp */
    double hanger_wind_area_m2;       /* hanger and sheave: drag area of the string (area times drag), half of it at the clamp */
    double sheave_friction;           /* sheave only: mu of T_1 = T_2 e^(mu theta), >= 0; enters the crew's range alone */
    double stiffness_along_N_per_m;   /* anchor or post, in the support's axes (route.h); infinity: rigid, as is an anchor's */
    double stiffness_across_N_per_m;  /* ... that is 0 or NaN */
    double stiffness_vertical_N_per_m;/* anchor only */
    double capacity_along_N;          /* capacities: NaN where not given */
    double capacity_across_N;
    double capacity_down_N;
    double capacity_up_N;
} tw_support;

typedef struct tw_crossing {
    double from_m; /* stations */
    double to_m;
    double top_m;  /* elevation */
} tw_crossing;

typedef enum tw_place {
    TW_PLACE_WHOLE,   /* the whole line */
    TW_PLACE_STATION, /* a station of the line as strung, bare; fixed on the line from then on */
    TW_PLACE_LENGTH   /* natural length from the first support */
} tw_place;

typedef enum tw_frame {
    TW_FRAME_SPAN, /* vector is (along the span's plan direction, across it to the left, up) */
    TW_FRAME_ROUTE /* vector is (x, y, z) */
} tw_frame;

typedef enum tw_carriage {
    TW_CARRIAGE_NONE, /* a load that is fixed on the line */
    TW_CARRIAGE_FREE, /* a force that rolls along the line to its lowest place, between the ends of its span */
    TW_CARRIAGE_HELD  /* a force braked at the station from_m, whatever the line does */
} tw_carriage;

typedef struct tw_load {
    int is_point;     /* 1: force at from_m; 0: load per natural metre between from_m and to_m */
    int is_run;       /* 1: a load per horizontal metre of the line as it hangs; not with is_point */
    int is_ramp;      /* 1: from vector at from_m to vector_to at to_m, linear along the line; neither point nor run */
    tw_carriage carriage; /* of a point load; at most one load of a condition has one */
    size_t carriage_span; /* the span on which it stands */
    tw_place place;
    tw_frame frame;
    double from_m;    /* NaN on the whole line */
    double to_m;      /* NaN on the whole line and for a point load */
    double vector[3]; /* N for a point load, N/m otherwise */
    double vector_to[3]; /* N/m, of a ramp only */
    const unsigned char *covers; /* [support_count - 1] the spans on which it acts; NULL: all. Borrowed */
} tw_load;

/* What the line has been through before a condition. */
typedef enum tw_state {
    TW_STATE_INITIAL,    /* nothing: as strung */
    TW_STATE_FINAL,      /* the heaviest condition of its history, and its bedding in */
    TW_STATE_AFTER_CREEP /* these, and creep at the everyday condition */
} tw_state;

typedef struct tw_condition {
    tw_state state;
    double temperature_degC;
    double ice_thickness_m;            /* radial */
    double ice_density_kg_per_m3;
    double wind_pressure_Pa;           /* NaN where given by speed */
    double wind_speed_m_per_s;         /* NaN where given by pressure */
    double air_density_kg_per_m3;      /* used with speed */
    double wind_drag;
    double wind_angle_rad;             /* from the span's direction, anticlockwise seen from above; pi/2: square, to the left */
    double wind_bearing_rad;           /* from which it blows, clockwise from north (y) as a compass; NaN: by the angle */
    double wind_altitude_m;            /* NaN: air_density_kg_per_m3; else the density of the standard atmosphere there */
    double resultant_addition_N_per_m; /* added to the length of the resultant of weight, ice and wind */
    double factor_weight;              /* of the line and hangers; each factor multiplies its action, >= 0 */
    double factor_ice;                 /* of the ice's weight, not of its diameter */
    double factor_wind;
    double factor_load;
    const double *ice_share;           /* [support_count - 1] share of the ice's weight on each span; NULL: 1. Borrowed */
    size_t load_first;                 /* this condition's own loads: project->loads[load_first ... + load_count - 1] */
    size_t load_count;
} tw_condition;

typedef enum tw_stringing_rule {
    TW_STRING_PULL,           /* value: horizontal tension, N, equal in every span, hangers plumb */
    TW_STRING_TENSION,        /* value: larger line tension at support `index`, N; equal horizontal tension */
    TW_STRING_SAG,            /* value: vertical sag of span `index`, m; equal horizontal tension */
    TW_STRING_TOTAL_LENGTH,   /* value: sum of natural lengths, m; equal horizontal tension */
    TW_STRING_SPAN_LENGTHS,   /* lengths_m: natural length of each span */
    TW_STRING_NONE            /* only a window search can run */
} tw_stringing_rule;

typedef enum tw_stringing_method {
    TW_METHOD_CLAMPED,     /* equal horizontal tension in every span, hangers plumb */
    TW_METHOD_OVER_SHEAVES /* pulled in over sheaves at every support between anchors, then clamped */
} tw_stringing_method;

typedef enum tw_stringing_clip {
    TW_CLIP_PLUMB, /* clamped where the hangers hang plumb: same natural length between anchors, equal horizontal tension */
    TW_CLIP_LIES   /* clamped where the line lies on its sheaves */
} tw_stringing_clip;

typedef struct tw_stringing {
    double temperature_degC; /* reference of all expansion; bare line, no ice, no wind */
    tw_stringing_rule rule;
    double value;
    size_t index;
    const double *lengths_m; /* [support_count - 1], TW_STRING_SPAN_LENGTHS only */
    double tolerance;        /* fraction of the pull that the crew keeps, >= 0 */
    tw_stringing_method method;
    tw_stringing_clip clip;  /* over sheaves only */
    double friction;         /* mu of the sheaves that the line is strung over and that have none of their own, >= 0 */
    double end_allowance_m;  /* added at each end of a section to the length that is cut, >= 0 */
} tw_stringing;

/* The conditions a line has met before those in a state other than the initial one. */
typedef struct tw_history_rule {
    const unsigned char *met; /* [condition_count] 1: met; NULL: all of them */
    size_t creep_condition;   /* everyday condition, or TW_NONE: bare at the stringing temperature */
} tw_history_rule;

typedef struct tw_mark {
    tw_place place; /* station as strung, or natural length; never WHOLE */
    double at_m;
} tw_mark;

typedef enum tw_limit_kind {
    TW_LIMIT_CLEARANCE,
    TW_LIMIT_TENSION,
    TW_LIMIT_SUPPORT_LOAD,
    TW_LIMIT_UPLIFT,
    TW_LIMIT_SWING,
    TW_LIMIT_SAG,
    TW_LIMIT_CATENARY_CONSTANT,
    TW_LIMIT_SLOPE,
    TW_LIMIT_SPACING
} tw_limit_kind;

typedef enum tw_direction {
    TW_DIRECTION_ALONG,
    TW_DIRECTION_ACROSS,
    TW_DIRECTION_DOWN,
    TW_DIRECTION_UP,
    TW_DIRECTION_RESULTANT
} tw_direction;

typedef struct tw_limit {
    tw_limit_kind kind;
    double least;           /* clearance m, uplift N, sag m, spacing m; NaN: none */
    double most;            /* tension N, support load N, swing rad, sag m, catenary constant m, slope (rise over run); NaN: none */
    double share;           /* of breaking strength (tension) or of capacity (support load); NaN: none */
    size_t crossing;        /* clearance: index, or TW_NONE for the ground */
    double from_m;          /* clearance: stations; NaN: the whole route */
    double to_m;
    tw_direction direction; /* support load */
    size_t strung_course; /* of a spacing: 1 + number of the other line's course as strung, bare; 0: not known */
} tw_limit;

/* A stretch of another line, natural length at_m[0] to at_m[1], as a cubic with these ends and derivatives. */
typedef struct tw_arc {
    double at_m[2];        /* natural length from the other line's first support; the second above the first */
    double position[2][3]; /* m, in this line's axes */
    double slope[2][3];    /* d position / d natural length */
} tw_arc;

/* How a stretch of line goes from its chord: each of its places is one of the chord's, and a share of `toward`, and no more
 * than `rest` in any direction. */
typedef struct tw_bow {
    double toward[3]; /* m */
    double rest;      /* m */
} tw_bow;

/* Another line, hung in a condition of its own: arcs that join end to end. */
typedef struct tw_course {
    size_t arc_count; /* >= 1 */
    const tw_arc *arcs;
    const tw_bow *bows; /* [2 arc_count - 1]: what tw_course_bows found */
} tw_course;

/* The whole problem. Arrays are borrowed and must outlive every call. */
typedef struct tw_project {
    tw_line line;
    size_t support_count; /* >= 2 */
    const tw_support *supports;
    const double *route_station_m; /* [support_count] by tw_route_measure where the route turns; NULL: straight */
    size_t ground_count; /* 0, or >= 2 */
    const double *ground_station_m; /* strictly increasing */
    const double *ground_elevation_m;
    size_t crossing_count;
    const tw_crossing *crossings;
    size_t condition_count; /* >= 1 */
    const tw_condition *conditions;
    size_t load_count;
    const tw_load *loads;
    size_t mark_count;
    const tw_mark *marks;
    size_t limit_count;
    const tw_limit *limits;
    const unsigned char *limit_applies; /* [limit_count][condition_count]: the limit is judged in the condition */
    const unsigned char *limit_covers;  /* [limit_count][support_count]: it looks at the support, or at the span that
                                           starts there (tension, sag, slope, catenary constant, clearance, spacing) */
    size_t course_count;                 /* 0 where no limit is a spacing */
    const tw_course *courses;
    const size_t *limit_course;          /* [limit_count][condition_count]: of a spacing, the course to keep from in the
                                           condition, else TW_NONE; NULL where course_count is 0 */
    tw_stringing stringing;
    tw_history_rule history;
} tw_project;

/* A place measured on the hanging line, bare and in still air. */
typedef struct tw_observation {
    double station_m;
    double elevation_m;
    double offset_m;         /* NaN: not measured */
    double sigma_m;          /* standard deviation of each coordinate; NaN in every observation, or in none */
    double temperature_degC; /* of the line */
} tw_observation;

#define TW_GRAVITY 9.80665 /* m/s2, standard gravity (ISO 80000-3) */

/* What a poll callback returns: 0 to go on, TW_DEADLINE where the time is up, anything else to cancel. Called often; it should
 * look at the clock first. The core has no clock of its own, so a deadline reaches it this way alone. */
typedef int (*tw_poll)(void *data);

typedef struct tw_options {
    double gap_relative;       /* widest bracket that counts as settled: (P - D) / (|stretch energy| + |work of loads|) */
    double residual_relative;  /* largest out-of-balance force over the largest tension, discretised line */
    double closing_relative;   /* largest closing error over the chord, exact line */
    size_t elements_per_span;  /* of the discretised line to begin with; doubled until the bracket closes */
    size_t elements_most;      /* whole line; the doubling stops here */
    size_t evaluations_most;   /* of the energy by the optimiser, per settle */
    size_t newton_most;        /* steps, per solve */
    double seconds_most;       /* monotonic deadline of one call */
    size_t scan_points;        /* pulls at which a window search looks first */
    int verify;                /* 1: a window's answers are settled with their bracket before they are returned */
    tw_poll poll;              /* may be NULL */
    void *poll_data;
} tw_options;

tw_options tw_options_default(void);

/* Whether to go on: TW_OK, TW_CANCELLED or TW_DEADLINE. */
tw_status tw_options_ask(const tw_options *options);

/* A condition that leaves the line bare and calm. */
tw_condition tw_line_bare(double temperature_degC);

/* Capacity of a support in a direction, N; NaN where none is given, and for the resultant. */
double tw_line_capacity(const tw_support *support, tw_direction direction);

/* What its history has left in one part of a span on a curved law. */
typedef struct tw_lived {
    double strain;    /* of the part now, at the span's mean stretch, without what is given as strain */
    double met;       /* greatest strain, of the span's mean stretch, from which it has unloaded; NaN: none */
    double permanent; /* the strain it kept of that; 0: none */
    size_t condition; /* the one that left it; TW_NONE: none, or creep on the bare line */
    int crept;        /* 1: creep left it */
} tw_lived;

/* One span in one condition. Tensions are magnitudes unless "horizontal". */
typedef struct tw_span_state {
    double span_m;                /* plan distance between the clamps */
    double rise_m;                /* far clamp above near clamp */
    double natural_length_m;
    double line_length_m;         /* stretched */
    double horizontal_tension_N;  /* component along the span's plan direction, at its start */
    double tension_from_N;
    double tension_to_N;
    double tension_max_N;
    double sag_m;                 /* greatest vertical distance from the chord down to the line */
    double sag_station_m;         /* where */
    double slant_sag_m;           /* greatest distance from the chord in the direction of the resultant load */
    double blowout_m;             /* greatest horizontal distance from the vertical plane of the chord */
    double low_station_m;         /* lowest point of the line between the clamps */
    double low_elevation_m;
    double slope_max;             /* |dz| over plan distance */
    double permanent_strain;      /* what history has added to the strain at this temperature and horizontal tension */
    double small_deflection_sag_m;/* taut-string sag under the same loads and horizontal tension */
    tw_lived lived[TW_PARTS_MOST]; /* of a curved law, part by part; filled by report */
} tw_span_state;

/* Force of the line and hold on the support in its axes (route.h), and where the line is held. */
typedef struct tw_support_state {
    double along_N;   /* positive ahead */
    double across_N;  /* positive to the left */
    double down_N;    /* positive downwards; negative is uplift */
    double resultant_N;
    double swing_rad; /* of a hanger from the vertical; else NaN */
    double swing_along_rad;  /* the same, seen from the side: positive ahead */
    double swing_across_rad; /* seen along the line: positive to the left */
    double station_m; /* where the support stands */
    double position_m[3];
} tw_support_state;

typedef struct tw_mark_state {
    double at_length_m; /* natural length from the first support */
    double tension_N;
    double tension_beyond_N; /* just beyond it: the same but where a point load acts */
    double station_m;
    double position_m[3];
} tw_mark_state;

/* One condition, settled. The arrays belong to the caller and have the project's counts; load marks are the
 * condition's point loads, in the order of its loads. */
typedef struct tw_settled {
    tw_status status;         /* TW_OK: settled, and proven so by the bracket */
    double energy_J;          /* potential energy of the discretised line's shape, integrated finely: from above */
    double energy_lower_J;    /* complementary energy of the exact line: from below */
    double gap_J;
    double gap_relative;
    double residual_N;        /* largest out-of-balance force on a node of the discretised line */
    double closing_m;         /* largest closing error of the exact line */
    double load_mismatch;     /* of loads that depend on the shape, see tw_section_runs_off; 0 without such loads */
    double sheave_imbalance_N;/* largest difference of tension across a sheave, exact line; 0 without sheaves */
    size_t elements;          /* of the discretised line */
    size_t evaluations;       /* of its energy by the optimiser */
    size_t newton_steps;      /* of its finish */
    size_t exact_steps;       /* Newton steps of the exact line */
    tw_span_state *spans;     /* [support_count - 1] */
    tw_support_state *supports; /* [support_count] */
    tw_mark_state *marks;     /* [mark_count], may be NULL when 0 */
    tw_mark_state *loads;     /* [load_count of the condition], point loads only; others NaN */
} tw_settled;

#endif
