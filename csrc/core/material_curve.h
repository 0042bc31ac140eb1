/* material_curve: the curved law of a line, one or two parts under one stretch, as one piecewise polynomial (pure).
 *
 * Part i has the strain
 *     e_i = x - shift_i        shift_i = alpha_i (t - t_test) - e_s0 + (strains added to both)
 * at x = L - 1, where e_s0 makes the natural length unstressed at the stringing temperature as strung. Its force is
 *     loading   P(e) = sum c_k e^k for 0 <= e <= valid_to, straight on at its end slopes beyond them
 *     after a greatest strain, or creep:   E (e - permanent) up to the strain where that meets the loading curve again
 * and never less than nothing: a part goes slack, and the law has a knee there. The parts add.
 * Published laws give stress on the whole area per percent of strain: IEEE, AIEE conductor stress-strain tests; Grigsby
 * (ed.), Electric Power Generation, Transmission, and Distribution, ch. 14.
 */
#ifndef TW_MATERIAL_CURVE_H
#define TW_MATERIAL_CURVE_H

#include "line.h"

/* Each part has a knot where it begins to carry, where unloading meets loading, where its polynomial begins and ends. */
enum { TW_CURVE_KNOTS = 4 * TW_PARTS_MOST };

/* The force at strain x above the first knot, which is at 0; between knots a polynomial from the lower one. */
typedef struct tw_curve {
    size_t count; /* of knots; 0: no curve */
    double knot[TW_CURVE_KNOTS];
    double force_N[TW_CURVE_KNOTS];  /* at the knot */
    double energy_J[TW_CURVE_KNOTS]; /* int force dx up to the knot */
    double terms[TW_CURVE_KNOTS][TW_CURVE_TERMS];
} tw_curve;

/* What a history has left in one span. */
typedef struct tw_permanent {
    double part[TW_PARTS_MOST];  /* permanent strain of each part; -infinity: none */
    double meets[TW_PARTS_MOST]; /* part strain where its unloading line meets its loading curve; may be infinity */
    double strain;               /* bedding in, and creep given as strain */
} tw_permanent;

/* Nothing left yet. */
tw_permanent tw_permanent_none(void);

/* The law at a temperature, after what is permanent (NULL: nothing), or with creep curves for loading curves.
 * Returns the strain at which the line begins to carry. */
double tw_curve_build(const tw_line *line, double temperature_degC, double reference_degC, const tw_permanent *permanent,
                      int creeping, tw_curve *curve);

double tw_curve_force(const tw_curve *curve, double x);
double tw_curve_slope(const tw_curve *curve, double x);
double tw_curve_energy(const tw_curve *curve, double x);
double tw_curve_strain(const tw_curve *curve, double force_N); /* inverse of the force; force >= 0 */
double tw_curve_steepest(const tw_curve *curve);

/* Strain of a part at the stretch L as strung, and its force on the loading or the creep curve. */
double tw_part_strain(const tw_line *line, size_t part, double stretch, double temperature_degC, double reference_degC);
double tw_part_force(const tw_part *part, double strain, int creeping);

/* Takes in that a part was stretched to `strain` on its loading curve, or crept to it: what is permanent does not shrink. */
void tw_permanent_take(tw_permanent *permanent, const tw_line *line, size_t part, double strain, int creeping);

/* Whether any part has a creep curve. */
int tw_curve_creeps(const tw_line *line);

/* Creep strain c t^n of the line: the form of the predictor equations of CIGRE, Electra 75 (1981), stress held. */
double tw_curve_given_creep(const tw_line *line);

#endif
