/* SPDX-License-Identifier: GPL-3.0-or-later
 * One segment as a curve over temperature, and the relaxation model of its step fitted to it. */
#ifndef CE_TRANSITION_STEP_H
#define CE_TRANSITION_STEP_H

#include "transition/relax.h"

#include <chainend/transition.h>

#include <stdbool.h>
#include <stddef.h>

/* A segment on rising temperature, at most a few thousand points (means over equal cells of
 * temperature: sorts and bounds the cost in one pass), the signal turned so that the liquid lies
 * above the glass: endothermic up on heating, exothermic up on cooling. */
typedef struct {
    size_t n;
    double *T, *y, *w; /* owned, one block; w = number of points in the mean                    */
    bool cooling;      /* measured on the way down                                              */
    double noise;      /* standard deviation of one recorded point, robust; 0 is possible       */
    double slow_noise; /* what it would be if the noise of means over 0.5 K were white  */
    double spacing;    /* mean distance of the points, K                                        */
} ce_curve;

/* n >= 2 points in any order. CE_OK | CE_E_NOMEM. */
ce_status ce_curve_make(size_t n, const double *T, const double *y, bool cooling, ce_curve *curve);
void ce_curve_free(ce_curve *curve);
/* First point at or above a temperature; n when there is none. */
size_t ce_curve_index(const ce_curve *curve, double T);

/* Means over cells of temperature, fine near the step, coarse away from it. */
typedef struct {
    size_t n;
    double *low, *high; /* the cells                                                            */
    double *T, *y, *w;  /* mean temperature, mean signal, number of points                      */
    double *sd;         /* what the model may miss there, besides the noise; 0 to begin with    */
} ce_cells;

enum { CE_SHAPES = 9, CE_LINEAR = 6, CE_FREE = CE_SHAPES + CE_LINEAR };

/* The fitted model: Cp-like signal = glass line + step * (step height along Tf) + start-up. */
typedef struct {
    bool cooling;
    bool aged;               /* annealing and instrument lag are fitted too                   */
    double ref_K;            /* origin of the lines                                           */
    double fine_K;           /* step of the integration near the transition                   */
    double hook_from_K;      /* where the segment starts                                      */
    double shape[CE_SHAPES]; /* see model.c                                                   */
    double linear[CE_LINEAR];
    double centre[CE_SHAPES]; /* of the prior                                                  */
    double sigma;             /* sd of a recorded point, for the weights                       */
    double least_sd;          /* what it may miss in any cell for now, in the signal's unit       */
    double total;             /* chi-square with that of the priors                            */
    double misfit;            /* reduced chi-square against sigma                              */
    double cov[CE_FREE][CE_FREE]; /* of shape and linear parameters at sigma                    */
    size_t iterations;
} ce_model;

/* Both baselines, in the curve's own orientation. */
typedef struct {
    ce_line glass, liquid;
} ce_lines;
static inline double ce_line_at(const ce_line *line, double T)
{
    return line->at_ref + line->slope * (T - line->ref_K);
}

ce_status ce_cells_make(const ce_curve *curve, double from_K, double to_K, double centre_K,
                        double fine_K, ce_cells *cells);
void ce_cells_free(ce_cells *cells);

/* The fit linearised at its solution: rows are the cells and the priors of linear parameters. */
typedef struct {
    size_t n, cells;
    double *J; /* owned; column by column: J[parameter * n + row], weighted                     */
    double *r; /* residuals, weighted, of the rows                                              */
} ce_design;
void ce_design_free(ce_design *design);

/* Fit from a start: ce_model_start() or an earlier fit; sigma and the kind of model are taken from
 * the model as it comes in. design may be NULL. CE_OK | CE_E_NOFIT | CE_E_NOMEM. */
ce_status ce_model_fit(const ce_cells *cells, double step, ce_model *model, ce_design *design);
/* First-order change of all parameters when each cell's weight is multiplied by share[cell]. */
ce_status ce_model_reweigh(const ce_design *design, const double *share, double shift[CE_FREE]);
/* A first guess for a step of this half-step temperature and width; sigma > 0. */
ce_model ce_model_start(bool cooling, double centre_K, double width_K, double sigma,
                        double hook_from_K);
/* Another start: ln of Tr^2/h in K, ln of the odds of x over it, cooled before at another rate (ln of
 * its ratio to the scan), annealed (ln of time times rate of the scan in K; 0 = not) so far below. */
typedef struct {
    double unit, x, cooling, age, age_below_K;
} ce_past;
void ce_model_history(ce_model *model, const ce_past *history);
/* How well a start does without any iteration, in model->total; its Tr is moved so that the half-step
 * lies at the model's origin. CE_OK | CE_E_NOMEM. */
ce_status ce_model_try(const ce_cells *cells, double step, ce_model *model);
/* The columns of the linear parameters at n cells, row by row, phi[n * CE_LINEAR], and the fictive
 * temperatures tf[n]. Scratch: step[n]. */
void ce_model_columns(const ce_model *model, size_t n, const double *low, const double *high,
                      double *phi, double *tf, double *step);
/* The curve they make, without the start-up. */
void ce_model_combine(const ce_model *model, size_t n, const double *phi, double *y);
ce_lines ce_model_lines(const ce_model *model);
/* The start-up at a temperature, in the signal's unit. */
double ce_model_hook(const ce_model *model, double T);
/* Shift of the equal-area temperature against the fictive one by the instrument's lag, K. */
double ce_model_lag(const ce_model *model);
/* Move one of the CE_FREE parameters, shape first; its step for differentiation. */
void ce_model_move(ce_model *model, size_t parameter, double by);
double ce_model_increment(const ce_model *model, size_t parameter);

#endif
