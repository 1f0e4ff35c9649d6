/* SPDX-License-Identifier: GPL-3.0-or-later
 * Order statistics of small and large samples. Arrays are reordered in place where it says so. */
#ifndef CE_BASE_ORDER_H
#define CE_BASE_ORDER_H

#include <stddef.h>

/* MAD of a normal sample times this is its standard deviation: 1/Phi^-1(3/4) (from memory). */
#define CE_MAD_TO_SD 1.482602218505602

/* Median; x is reordered; NaN when n is 0. O(n). */
double ce_median(double *x, size_t n);
/* Median absolute deviation from the median (not scaled); x is overwritten; NaN when n is 0. */
double ce_mad(double *x, size_t n);
/* Quantile 0 <= p <= 1 by linear interpolation between order statistics at p (n - 1) (type 7 of
 * Hyndman and Fan, Am. Stat. 50 (1996) 361, from memory); x is reordered; NaN when n is 0. */
double ce_quantile(double *x, size_t n, double p);

#endif
