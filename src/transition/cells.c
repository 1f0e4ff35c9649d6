/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/step.h"

#include <math.h>
#include <stdlib.h>

/* Width of a cell: fine where the curve bends, coarse on the baselines. */
static double width_at(double off_K)
{
    const double off = fabs(off_K);
    return off < 10.0 ? 0.25 : off < 20.0 ? 0.5 : off < 40.0 ? 1.0 : 2.0;
}

ce_status ce_cells_make(const ce_curve *curve, double from_K, double to_K, double centre_K,
                        ce_cells *cells)
{
    const size_t room = (size_t)fmin((to_K - from_K) / 0.25 + 8.0, (double)curve->n + 1.0);
    double *all = malloc(5 * room * sizeof *all);
    *cells = (ce_cells){.n = 0, .low = all};
    if (all == NULL) return CE_E_NOMEM;
    cells->high = all + room;
    cells->T = all + 2 * room;
    cells->y = all + 3 * room;
    cells->w = all + 4 * room;
    size_t i = 0;
    while (i < curve->n && curve->T[i] < from_K) i++;
    while (i < curve->n && curve->T[i] <= to_K && cells->n < room) {
        const double end = curve->T[i] + width_at(curve->T[i] - centre_K) * 0.999;
        double sum_T = 0.0, sum_y = 0.0, first = curve->T[i], last = first;
        size_t k = 0;
        for (; i < curve->n && curve->T[i] < end && curve->T[i] <= to_K; i++, k++) {
            sum_T += curve->T[i];
            sum_y += curve->y[i];
            last = curve->T[i];
        }
        const double mean = sum_T / (double)k;
        const double half = k > 1 ? 0.5 * (last - first) * (double)k / (double)(k - 1) : 0.05;
        const size_t c = cells->n++;
        cells->T[c] = mean;
        cells->y[c] = sum_y / (double)k;
        cells->w[c] = (double)k;
        cells->low[c] = mean - half;
        cells->high[c] = mean + half;
        if (c > 0 && cells->low[c] < cells->high[c - 1]) cells->low[c] = cells->high[c - 1];
    }
    return CE_OK;
}

void ce_cells_free(ce_cells *cells)
{
    free(cells->low);
    *cells = (ce_cells){0};
}
