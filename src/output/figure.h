/* SPDX-License-Identifier: GPL-3.0-or-later
 * Figures as self-contained gnuplot scripts. Each function writes one script and returns the height of the
 * figure in units of its width, or 0 when out of memory. */
#ifndef CE_OUTPUT_FIGURE_H
#define CE_OUTPUT_FIGURE_H

#include <chainend/fit.h>
#include <chainend/series.h>

#include "output/estimate.h"

#include <stdio.h>

/* A run with its baselines, tangent, windows and every construction; the run must have been kept. */
double ce_figure_run(const ce_evaluation *evaluation, ce_construction take, FILE *to);

/* Tg against log Mn and against 1/Mn: standards with both error bars, curve, confidence and prediction band,
 * unknowns with their intervals, ceiling. */
double ce_figure_calibration(const ce_estimate_result *result, FILE *to);

#endif
