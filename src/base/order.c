/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/order.h"

#include <gsl/gsl_statistics_double.h>
#include <math.h>

double ce_quantile(double *x, size_t n, double p)
{
    if (n == 0) return (double)NAN;
    double at = p * (double)(n - 1);
    size_t k = (size_t)at;
    double low = gsl_stats_select(x, 1, n, k), frac = at - (double)k;
    if (frac == 0.0 || k + 1 >= n) return low;
    return low + frac * (gsl_stats_select(x, 1, n, k + 1) - low);
}

double ce_median(double *x, size_t n)
{
    return ce_quantile(x, n, 0.5);
}

double ce_mad(double *x, size_t n)
{
    double m = ce_median(x, n);
    for (size_t i = 0; i < n; i++) x[i] = fabs(x[i] - m);
    return ce_median(x, n);
}
