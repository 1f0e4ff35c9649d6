/* SPDX-License-Identifier: GPL-3.0-or-later
 * The constructions of ISO 11357-2 and ASTM E1356 and the equal areas, on a smooth trace. */
#ifndef CE_TRANSITION_CONSTRUCT_H
#define CE_TRANSITION_CONSTRUCT_H

#include "transition/step.h"

/* The curve without noise, on equidistant temperatures. */
typedef struct {
    size_t n;
    const double *T, *y;
} ce_trace;

typedef struct {
    double at[CE_CONSTRUCTIONS]; /* NaN = does not exist                                        */
    ce_line tangent;
    double step;          /* liquid minus glass line at the half-step                    */
    double overshoot;     /* height above the liquid line over the step                  */
    double low_K, high_K; /* where the trace has risen by 0.1 and by 0.9                 */
    double shoulder_K;    /* over which it stays within 0.05 of half the height          */
    double apart[CE_CONSTRUCTIONS]; /* onset, inflection and end by the tangent at another place
                                     * that is nearly as steep, minus those above; 0 = none       */
} ce_points;

/* Standard uncertainty of the half-step on a shoulder near half of its height, where the curve meets the
 * half line anywhere if the lines are off by a few hundredths of the step (uniform distribution), K; 0
 * without one: a step takes a tenth to a seventh of its rise there. */
double ce_shoulder_doubt(const ce_points *points);
/* The same of onset, inflection and end where a shoulder makes two places nearly as steep, K. */
double ce_tangent_doubt(const ce_points *points, ce_construction construction);

/* False when the trace does not cross between the lines. area_K: the equal-area temperature is
 * sought with the integral taken from the first point of the trace to this temperature. */
bool ce_construct(const ce_trace *trace, const ce_lines *lines, double area_K, ce_points *points);

#endif
