/* span: the exact line by complementary energy, one stretch of uniform load at a time (pure).
 *
 * A piece is a stretch of natural length l under a uniform load q per natural metre, a point force at its end.
 * With the tension vector t(s) = t0 - q s (it points along the line, towards growing s):
 *     r(l) - r(0) = int_0^l t/|t| W*'(|t|) ds                         closed form on a linear line
 *     D           = t(S).r1 - R.r0 - int W*(|t|) ds
 * All closed forms below are written without cancellation from slack-deep to bar-tight lines: with q = |q| e,
 * t = a e + b, b normal to e, h = |b|, T = |t|, x = |q| l / (T0 + T1):
 *     int ds/T   = (l / (T0 + T1)) 2 atanh(x)/x
 *     int a/T ds = l (a0 + a1) / (T0 + T1)
 * A curved law (material_curve.h) adds what it has beyond the line of its greatest slope, by quadrature; a load that varies,
 * q(s) = q + s q', is all quadrature: see span_curved.h.
 * Source of the elastic catenary: Irvine, Cable Structures (1981), ch. 1, in vector form.
 */
#ifndef TW_SPAN_H
#define TW_SPAN_H

#include "line.h"
#include "material.h"
#include "route.h"

typedef struct tw_piece {
    double length_m;   /* natural, >= 0 */
    double load[3];    /* N per natural metre, route axes; where it varies, at the piece's start */
    double ramp[3];    /* its growth per natural metre, N/m2; zero where uniform */
    double force[3];   /* N, point force at the piece's end; zero where none */
    double tension[3]; /* tension vector at the start: set by tw_span_hang */
    double start[3];   /* position of the start, m: set by tw_span_hang */
} tw_piece;

/* Displacement over `length` of a uniform load that starts with `tension`; adds nothing, writes `displacement`.
 * flexibility: d displacement / d tension, symmetric, stored xx xy xz yy yz zz; may be NULL. */
void tw_piece_displacement(const tw_material *material, const double tension[3], const double load[3], double length,
                           double displacement[3], double flexibility[6]);

/* int W* ds, the stored energy int W ds at the stretch that carries t, and the stretched length; any may be NULL. */
void tw_piece_energies(const tw_material *material, const double tension[3], const double load[3], double length,
                       double *conjugate_J, double *stored_J, double *line_length_m);

/* The same for a hung piece, whatever its load: over `length` from natural length s on, and over all of it. */
void tw_piece_ahead(const tw_material *material, const tw_piece *piece, double s, double length, double displacement[3],
                    double flexibility[6]);
void tw_piece_energy(const tw_material *material, const tw_piece *piece, double *conjugate_J, double *stored_J,
                     double *line_length_m);

/* Load per natural metre at natural length s; total load of a piece without its point force; whether it varies. */
void tw_piece_load(const tw_piece *piece, double s, double load[3]);
void tw_piece_total(const tw_piece *piece, double total[3]);
int tw_piece_varies(const tw_piece *piece);

/* Tension vector at natural length s from the piece's start. */
void tw_piece_tension(const tw_piece *piece, double s, double tension[3]);

/* Position at natural length s from the piece's start. */
void tw_piece_position(const tw_material *material, const tw_piece *piece, double s, double position[3]);

/* Natural lengths within a piece where direction . t = 0, -1 for none: one, or up to two in order where the load varies. */
void tw_piece_stationary(const tw_piece *piece, const double direction[3], double places[2]);

/* The place within a piece where the station turns back (no tension along the leg): returns 1 and where, or 0. The first of
 * two under a load along the route that varies. */
int tw_piece_turns(const tw_piece *piece, const tw_route_leg *leg, double *s);

/* Natural length at which the piece passes a station, between s0 and s1 (stations x0 and x1), where the station grows or
 * falls throughout. */
double tw_piece_at_station(const tw_material *material, const tw_piece *piece, const tw_route_leg *leg, double s0, double s1,
                           double x0, double x1, double station_m);

/* Hang `count` pieces from `start` with tension `pull` at the span's start: fills tension and start of each piece;
 * writes the end position, the end tension, and the 3x3 flexibility (may be NULL). O(count). */
void tw_span_hang(const tw_material *material, tw_piece *pieces, size_t count, const double start[3],
                  const double pull[3], double end[3], double end_tension[3], double flexibility[6]);

/* Greatest value of direction . (r - origin) over the hung pieces; s_at: natural length from the span's start. The
 * extremes within a piece lie where direction . t = 0, linear in s or quadratic where the load varies: closed form. */
double tw_span_extreme(const tw_material *material, const tw_piece *pieces, size_t count, const double direction[3],
                       const double origin[3], double *s_at);

/* The linear measure of "distance from the chord in the direction of the load": direction . chord = 0 and
 * direction . load/|load| = 1, for a chord (span_m, 0, rise_m) and a load in the span's own axes (along, across, up).
 * Zero where there is no load across the chord. */
void tw_span_slant(double span_m, double rise_m, const double load[3], double direction[3]);

/* Greatest |t_z| / |t_xy| over the hung pieces. */
double tw_span_slope(const tw_piece *pieces, size_t count);

/* Greatest tension magnitude: |t| is convex in s, so it sits at a piece's end, but where the load varies. */
double tw_span_tension_max(const tw_piece *pieces, size_t count);

#endif
