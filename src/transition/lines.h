/* SPDX-License-Identifier: GPL-3.0-or-later
 * Baselines on windows, and a smooth trace of the curve. */
#ifndef CE_TRANSITION_LINES_H
#define CE_TRANSITION_LINES_H

#include "transition/step.h"

/* A line with the covariance of (value at ref, slope), autocorrelation allowed for. */
typedef struct {
    ce_line line;
    double var_at, var_slope; /* uncorrelated: ref_K is the centre of the points               */
    double sd;                /* residual standard deviation, of a point of the curve           */
    double bend;              /* sag of a parabola through the points over their length; its   */
    double bend_u;            /* standard uncertainty                                           */
    size_t n;
} ce_fitted_line;

/* Least squares over low..high; false when fewer than 5 points lie there. */
bool ce_fit_line(const ce_curve *curve, ce_window window, ce_fitted_line *fit);

/* How far a window can be taken from its inner end in the direction of its outer one, to limit_K at
 * most, before the curve leaves the line of what lies nearer by more than tolerance. */
double ce_reach(const ce_curve *curve, double inner_K, double outer_K, double limit_K,
                double tolerance);

/* The curve smoothed by a cubic over T +- half_K. NaN when too few points lie there. */
double ce_smooth(const ce_curve *curve, double T, double half_K);

#endif
