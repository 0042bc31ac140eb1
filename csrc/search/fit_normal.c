/* fit_normal: the normal equations of a fit. In logarithms of pulls their columns are lengths of like size, so that their
 * squared condition costs no digit that matters; scaled to a unit diagonal first. */
#include <math.h>
#include <string.h>

#include "fit_search.h"

tw_status tw_fit_normal_form(const tw_fit_model *model, tw_fit_normal *normal, const double *jacobian,
                             const double *residual)
{
    size_t n = normal->count, rows = model->row_count;
    memset(normal->matrix, 0, n * n * sizeof(double));
    memset(normal->gradient, 0, n * sizeof(double));
    for (size_t r = 0; r < rows; r++) {
        const double *row = jacobian + r * n;
        tw_status status = tw_fit_clock(model);
        if (status != TW_OK) {
            return status;
        }
        for (size_t i = 0; i < n; i++) {
            normal->gradient[i] += row[i] * residual[r];
            for (size_t j = 0; row[i] != 0.0 && j <= i; j++) {
                normal->matrix[i * n + j] += row[i] * row[j];
            }
        }
    }
    for (size_t i = 0; i < n; i++) {
        normal->scale[i] = sqrt(normal->matrix[i * n + i]);
    }
    for (size_t i = 0; i < n; i++) {
        for (size_t j = 0; j <= i; j++) {
            double both = normal->scale[i] * normal->scale[j];
            normal->matrix[i * n + j] = i == j ? 1.0 : both > 0.0 ? normal->matrix[i * n + j] / both : 0.0;
        }
    }
    return TW_OK;
}

tw_status tw_fit_normal_factor(const tw_fit_model *model, tw_fit_normal *normal, double damping, double least,
                               size_t *unknown)
{
    size_t n = normal->count;
    *unknown = TW_NONE;
    for (size_t i = 0; i < n; i++) {
        double *row = normal->factor + i * n;
        tw_status status = tw_fit_clock(model);
        if (status != TW_OK) {
            return status;
        }
        for (size_t j = 0; j <= i; j++) {
            const double *other = normal->factor + j * n;
            double sum = normal->matrix[i * n + j] + (i == j ? damping : 0.0);
            for (size_t k = 0; k < j; k++) {
                sum -= row[k] * other[k];
            }
            if (i == j && !(sum > 0.0 && sqrt(sum) * normal->scale[i] > least)) {
                *unknown = i;
                return TW_OK;
            }
            row[j] = i == j ? sqrt(sum) : sum / other[j];
        }
    }
    return TW_OK;
}

void tw_fit_normal_solve(const tw_fit_normal *normal, const double *g, double *x)
{
    size_t n = normal->count;
    for (size_t i = 0; i < n; i++) {
        x[i] = -g[i] / normal->scale[i];
        for (size_t k = 0; k < i; k++) {
            x[i] -= normal->factor[i * n + k] * x[k];
        }
        x[i] /= normal->factor[i * n + i];
    }
    for (size_t i = n; i-- > 0;) {
        for (size_t k = i + 1; k < n; k++) {
            x[i] -= normal->factor[k * n + i] * x[k];
        }
        x[i] /= normal->factor[i * n + i];
    }
    for (size_t i = 0; i < n; i++) {
        x[i] /= normal->scale[i];
    }
}
