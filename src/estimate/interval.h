/* SPDX-License-Identifier: GPL-3.0-or-later
 * Sets of abscissae compatible with a reading: Fieller's closed form and its nonlinear companion.
 */
#ifndef CE_ESTIMATE_INTERVAL_H
#define CE_ESTIMATE_INTERVAL_H

#include <chainend/base.h>

#include <stdbool.h>
#include <stddef.h>

/* A fitted line y = a + b x with the variances and the covariance of a and b. */
typedef struct {
    double a, b, var_a, var_b, cov_ab;
} ce_straight;

/* At most two closed intervals in rising order; limits may be infinite. */
typedef struct {
    size_t n;
    double low[2], high[2];
} ce_set;

/* g = t^2 var_b / b^2: the slope is significant at this t iff g < 1. */
double ce_fieller_g(const ce_straight *line, double t);

/* ce_fieller - all x with (y - a - b x)^2 <= t^2 [v + var_a + 2 x cov_ab + x^2 var_b].
 *   in   y  reading; v  its variance, >= 0; t  > 0
 *   ret  the set on the whole real line: one interval, two half lines, a half line, everything, or
 *        nothing (only with g >= 1 and v = 0)
 *   The discriminant is expanded so that the terms that cancel never appear; the roots are taken
 *   as q/A and C/q.
 *   Source: Fieller, J. R. Stat. Soc. B 16 (1954) 175 (from memory). */
ce_set ce_fieller(const ce_straight *line, double y, double v, double t);

/* The part of a set with x >= 0. */
ce_set ce_set_not_negative(const ce_set *set);

/* How a function whose sign decides membership is walked through. */
typedef struct {
    double (*outside)(double ln_z, void *context); /* > 0 outside the set                         */
    void *context;
    double at_zero;         /* its value at z = 0 (the asymptote)                                */
    double ln_low, ln_high; /* range searched; extended below until the sign is that at zero     */
    double ln_estimate;     /* a point known to be inside; NaN when there is none                */
    size_t nodes;           /* of the walk, e.g. 400                                             */
} ce_walk;

/* ce_invert_test - all z >= 0 where walk->outside <= 0, found by sign changes over ln z.
 *   out  set  limits to about 1e-14 relative; high = INFINITY when the far end is inside.
 *        A third and further interval is joined to the second: the answer is never too narrow.
 *   ret  CE_OK | CE_E_NOMEM | CE_E_DOMAIN (the function gave no number) */
ce_status ce_invert_test(const ce_walk *walk, ce_set *set, ce_error *err);

/* Root of a continuous function that changes sign between low and high (Brent's method of GSL).
 * NaN when it does not or memory is short. */
double ce_bracketed_root(double (*f)(double, void *), void *context, double low, double high);

#endif
