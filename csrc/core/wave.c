#include "wave.h"

#include <math.h>

#include "gauss.h"
#include "vector.h"

enum { HALVINGS_MOST = 60 };

static double slowness(const tw_material *material, const tw_piece *piece, double s)
{
    double t[3];
    tw_piece_tension(piece, s, t);
    double T = tw_norm(t);
    return sqrt(tw_material_stretch(material, T) / T);
}

/* |t| changes by q per metre at most: where a stretch changes it by no more than half of its least, ten points leave
 * nothing. */
static int is_short(const tw_piece *piece, double from, double to)
{
    double q2 = tw_dot(piece->load, piece->load);
    double at = q2 > 0.0 ? tw_dot(piece->tension, piece->load) / q2 : 0.0;
    double t[3];
    tw_piece_tension(piece, fmin(fmax(at, from), to), t);
    return sqrt(q2) * (to - from) <= 0.5 * tw_norm(t);
}

static double passage(const tw_material *material, const tw_piece *piece, double from, double to, int halvings)
{
    double middle = 0.5 * (from + to), half = 0.5 * (to - from), sum = 0.0;
    if (halvings > 0 && !is_short(piece, from, to)) {
        return passage(material, piece, from, middle, halvings - 1) + passage(material, piece, middle, to, halvings - 1);
    }
    for (int i = 0; i < 5; i++) {
        sum += half * tw_gauss_ten_weight[i] * (slowness(material, piece, middle - half * tw_gauss_ten_point[i])
                                   + slowness(material, piece, middle + half * tw_gauss_ten_point[i]));
    }
    return sum;
}

double tw_wave_return_s(const tw_material *material, const tw_piece *pieces, size_t count, double mass_kg_per_m)
{
    double sum = 0.0;
    for (size_t p = 0; p < count; p++) {
        sum += passage(material, &pieces[p], 0.0, pieces[p].length_m, HALVINGS_MOST);
    }
    return 2.0 * sqrt(mass_kg_per_m) * sum;
}

double tw_wave_parabola_s(double sag_m)
{
    return 2.0 * sqrt(8.0 * sag_m / TW_GRAVITY);
}
