/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/step.h"

#include <math.h>
#include <stdlib.h>

/* Width of a cell in units of the finest: fine where the curve bends, coarse on the baselines. */
static double width_at(double off)
{
    off = fabs(off);
    return off < 40.0 ? 1.0 : off < 80.0 ? 2.0 : off < 160.0 ? 4.0 : 8.0;
}

ce_status ce_cells_make(const ce_curve *curve, double from_K, double to_K, double centre_K,
                        double fine_K, ce_cells *cells)
{
    const size_t room = (size_t)fmin((to_K - from_K) / fine_K + 8.0, (double)curve->n + 1.0);
    double *all = calloc(6 * room, sizeof *all);
    *cells = (ce_cells){.n = 0, .low = all};
    if (all == NULL) return CE_E_NOMEM;
    cells->high = all + room;
    cells->T = all + 2 * room;
    cells->y = all + 3 * room;
    cells->w = all + 4 * room;
    cells->sd = all + 5 * room;
    size_t i = ce_curve_index(curve, from_K);
    while (i < curve->n && curve->T[i] <= to_K && cells->n < room) {
        const double end =
            curve->T[i] + fine_K * width_at((curve->T[i] - centre_K) / fine_K) * 0.999;
        double sum_T = 0.0, sum_y = 0.0, sum_w = 0.0, first = curve->T[i], last = first;
        size_t k = 0;
        for (; i < curve->n && curve->T[i] < end && curve->T[i] <= to_K; i++, k++) {
            sum_T += curve->w[i] * curve->T[i];
            sum_y += curve->w[i] * curve->y[i];
            sum_w += curve->w[i];
            last = curve->T[i];
        }
        const double mean = sum_T / sum_w;
        const double half = k > 1 ? 0.5 * (last - first) * (double)k / (double)(k - 1) : 0.05;
        const size_t c = cells->n++;
        cells->T[c] = mean;
        cells->y[c] = sum_y / sum_w;
        cells->w[c] = sum_w;
        cells->low[c] = mean - half;
        cells->high[c] = mean + half;
        if (c > 0 && cells->low[c] < cells->high[c - 1] + 1e-3) cells->low[c] = cells->high[c - 1];
    }
    return CE_OK;
}

void ce_cells_free(ce_cells *cells)
{
    free(cells->low);
    *cells = (ce_cells){0};
}
