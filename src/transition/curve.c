/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/step.h"

#include "base/order.h"

#include <math.h>
#include <stdlib.h>

enum { MOST_CELLS = 4096, MOST_DIFFERENCES = 8192 };
/* Noise is taken to be independent from one such stretch to the next; over less it may be correlated
 * by the filter of the instrument. Steps are smooth over four of them. */
static const double correlated_K = 0.5;

/* Half of the values are equal to their neighbours: what is left is the resolution of the record, which
 * is as good as a noise uniform over one step of it. */
static double resolution_of(const double *y, size_t n)
{
    double least = HUGE_VAL;
    for (size_t i = 1; i < n; i++)
        if (y[i] != y[i - 1]) least = fmin(least, fabs(y[i] - y[i - 1]));
    return isfinite(least) ? least / sqrt(12.0) : 0.0;
}

/* Standard deviation of the means of so many neighbours. Third differences of white noise have twenty
 * times its variance; what is smooth over four means they leave out, and the median looks past the rest
 * of the step and of the start-up. */
static double noise_of_means(const double *y, size_t n, size_t of, double *scratch)
{
    const size_t means = n / of, stride = 1 + means / MOST_DIFFERENCES;
    size_t k = 0;
    for (size_t i = 0; i + 3 < means && k < MOST_DIFFERENCES; i += stride, k++) {
        double m[4] = {0};
        for (size_t j = 0; j < 4 * of; j++) m[j / of] += y[i * of + j];
        scratch[k] = (m[3] - 3.0 * (m[2] - m[1]) - m[0]) / (double)of / sqrt(20.0);
    }
    return CE_MAD_TO_SD * ce_mad(scratch, k);
}

ce_status ce_curve_make(size_t n, const double *T, const double *y, bool cooling, ce_curve *curve)
{
    *curve = (ce_curve){.cooling = cooling};
    const size_t cells = n < MOST_CELLS ? n : MOST_CELLS;
    double *all = calloc(3 * cells + MOST_DIFFERENCES, sizeof *all);
    if (all == NULL) return CE_E_NOMEM;
    curve->T = all;
    curve->y = all + cells;
    curve->w = all + 2 * cells;
    double low = T[0], high = T[0];
    for (size_t i = 1; i < n; i++) {
        low = fmin(low, T[i]);
        high = fmax(high, T[i]);
    }
    const double width = (high - low) / (double)cells, turn = cooling ? -1.0 : 1.0;
    for (size_t i = 0; i < n && width > 0.0; i++) {
        size_t k = (size_t)((T[i] - low) / width);
        if (k >= cells) k = cells - 1;
        curve->T[k] += T[i];
        curve->y[k] += turn * y[i];
        curve->w[k] += 1.0;
    }
    for (size_t k = 0; k < cells; k++) {
        const double w = curve->w[k];
        if (w <= 0.0) continue;
        curve->T[curve->n] = curve->T[k] / w;
        curve->y[curve->n] = curve->y[k] / w;
        curve->w[curve->n++] = w;
    }
    curve->noise = noise_of_means(y, n, 1, all + 3 * cells);
    if (!(curve->noise > 0.0)) curve->noise = resolution_of(y, n);
    const size_t of = (size_t)(correlated_K * (double)n / fmax(high - low, correlated_K));
    curve->slow_noise = curve->noise;
    if (of > 1)
        curve->slow_noise =
            fmax(curve->noise, sqrt((double)of) * noise_of_means(y, n, of, all + 3 * cells));
    curve->spacing = curve->n > 1 ? (high - low) / (double)(curve->n - 1) : 0.0;
    return CE_OK;
}

void ce_curve_free(ce_curve *curve)
{
    free(curve->T);
    *curve = (ce_curve){0};
}

size_t ce_curve_index(const ce_curve *curve, double T)
{
    size_t low = 0, high = curve->n;
    while (low < high) {
        const size_t mid = low + (high - low) / 2;
        if (curve->T[mid] < T)
            low = mid + 1;
        else
            high = mid;
    }
    return low;
}
