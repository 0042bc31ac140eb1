#include "uniform_curved.h"

#include <math.h>

#include "vector.h"

enum { STEPS_MOST = 60 };

tw_status tw_uniform_curved_length(const tw_material *material, const tw_uniform *span, double h_N, double *length_m,
                                double *v_N)
{
    const double start[3] = {0.0, 0.0, 0.0};
    double wanted = 4e-16 * (span->span + fabs(span->drop)), before = INFINITY;
    *length_m *= (1.0 + h_N / material->stiffness_N) / tw_material_stretch(material, h_N);
    for (int i = 0; i < STEPS_MOST; i++) {
        const double pull[3] = {h_N, 0.0, *v_N}; /* x across the load, z along it */
        tw_piece piece = {.length_m = *length_m, .load = {0.0, 0.0, span->weight}};
        double end[3], t[3], flexibility[6];
        tw_span_hang(material, &piece, 1, start, pull, end, t, flexibility);
        double miss[2] = {end[0] - span->span, end[2] - span->drop};
        double size = hypot(miss[0], miss[1]);
        double rate = tw_material_stretch(material, tw_norm(t)) / tw_norm(t);
        double a = rate * t[0], b = flexibility[2], c = rate * t[2], d = flexibility[5];
        double whole = a * d - b * c;
        if (!isfinite(size) || whole == 0.0) {
            return TW_NOT_FINITE;
        }
        if (size <= wanted || (size <= 1e-12 * span->span && size >= 0.5 * before)) {
            return TW_OK;
        }
        before = size;
        *length_m = fmax(*length_m - (d * miss[0] - b * miss[1]) / whole, 0.5 * *length_m);
        *v_N -= (a * miss[1] - c * miss[0]) / whole;
    }
    return TW_NOT_SETTLED;
}
