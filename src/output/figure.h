/* SPDX-License-Identifier: GPL-3.0-or-later
 * Figures as self-contained gnuplot scripts. Each function writes one script and returns the height of the
 * figure in units of its width, or 0 when out of memory. */
#ifndef CE_OUTPUT_FIGURE_H
#define CE_OUTPUT_FIGURE_H

#include <chainend/fit.h>
#include <chainend/series.h>

#include "output/check.h"
#include "output/estimate.h"

#include <stdio.h>

/* A run with its baselines, tangent, windows and every construction; the run must have been kept. */
double ce_figure_run(const ce_evaluation *evaluation, ce_construction take, FILE *to);

/* Tg against log Mn and against 1/Mn: standards with both error bars, curve, confidence and prediction band,
 * unknowns with their intervals, ceiling. */
double ce_figure_calibration(const ce_estimate_result *result, FILE *to);

/* One run of a series, evaluated; the run must have been kept. */
typedef struct {
    const char *sample, *run; /* as the series names them                                        */
    double mn_g_mol;          /* NaN = unknown                                                   */
    const ce_evaluation *evaluation;
} ce_figure_item;
typedef struct {
    size_t n;
    const ce_figure_item *item;
    const char *polymer;
    ce_construction take;
} ce_figure_runs;

/* Every curve of a series from glassy (0) to liquid line (1), shifted upwards one after the other, with its
 * Tg. Refused runs are left out. */
double ce_figure_overlay(const ce_figure_runs *runs, FILE *to);
/* Every run in a small panel of its own with windows and Tg; flagged and refused ones stand out. */
double ce_figure_contact(const ce_figure_runs *runs, FILE *to);

/* Residuals of the standards in units of their uncertainty against Mn. */
double ce_figure_residuals(const ce_fit *fit, const char *polymer, FILE *to);
/* Leverage, Cook's distance and the shift of Tg_inf and K when a standard is left out. */
double ce_figure_influence(const ce_fit *fit, const char *polymer, FILE *to);
/* Every relation that could be fitted, as difference from the one that was chosen. fits: one for each
 * relation, fits[r].p = 0 = could not be fitted. */
double ce_figure_relations(const ce_fit *fit, const ce_fit fits[CE_RELATIONS], const char *polymer,
                           FILE *to);
/* Half-width of the interval of Mn over Mn, for one run and for three of an unknown. */
double ce_figure_range(const ce_fit *fit, const char *polymer, FILE *to);
/* Control chart: single runs in units of their uncertainty, with warning and action limits. */
double ce_figure_control(const ce_check_result *result, FILE *to);

#endif
