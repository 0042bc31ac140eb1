#include "wave.h"

#include <math.h>

#include "vector.h"

enum { STRETCHES_MOST = 4096 };
static const double gravity = 9.80665; /* m/s2, standard */

/* Gauss-Legendre, ten points. */
static const double point[5] = {0.1488743389816312, 0.4333953941292472, 0.6794095682990244, 0.8650633666889845,
                                0.9739065285171717};
static const double weight[5] = {0.2955242247147529, 0.2692667193099963, 0.2190863625159820, 0.1494513491505806,
                                 0.0666713443086881};

static double slowness(const tw_material *material, const tw_piece *piece, double s)
{
    double t[3];
    tw_piece_tension(piece, s, t);
    double T = tw_norm(t);
    return sqrt(tw_material_stretch(material, T) / T);
}

/* |t| changes along a piece at most by q: where half a stretch changes it by no more than a quarter of its least, ten points
 * leave nothing. */
static size_t stretches(const tw_piece *piece)
{
    double q2 = tw_dot(piece->load, piece->load);
    double at = q2 > 0.0 ? tw_dot(piece->tension, piece->load) / q2 : 0.0;
    double t[3];
    tw_piece_tension(piece, fmin(fmax(at, 0.0), piece->length_m), t);
    double count = ceil(2.0 * sqrt(q2) * piece->length_m / tw_norm(t));
    return count > 1.0 ? (count < STRETCHES_MOST ? (size_t)count : STRETCHES_MOST) : 1;
}

double tw_wave_return_s(const tw_material *material, const tw_piece *pieces, size_t count, double mass_kg_per_m)
{
    double sum = 0.0;
    for (size_t p = 0; p < count; p++) {
        size_t parts = stretches(&pieces[p]);
        double half = 0.5 * pieces[p].length_m / (double)parts;
        for (size_t k = 0; k < parts; k++) {
            double middle = half * (double)(2 * k + 1);
            for (int i = 0; i < 5; i++) {
                sum += half * weight[i] * (slowness(material, &pieces[p], middle - half * point[i])
                                           + slowness(material, &pieces[p], middle + half * point[i]));
            }
        }
    }
    return 2.0 * sqrt(mass_kg_per_m) * sum;
}

double tw_wave_parabola_s(double sag_m)
{
    return 2.0 * sqrt(8.0 * sag_m / gravity);
}
