/* SPDX-License-Identifier: GPL-3.0-or-later
 * A fit in the making, shared by the files of this room. */
#ifndef CE_FIT_FITTING_H
#define CE_FIT_FITTING_H

#include "fit/eiv.h"

typedef struct {
    size_t n_standards;
    const ce_standard *standard;
    ce_fit *fit;
    const ce_model *model;
    bool on_runs; /* scatter "residuals": the points are runs, of unit variance            */
    size_t n;     /* points                                                                */
    ce_eiv_point *point;
    double *var_run; /* n: the part of var_y that is run scatter                            */
    size_t *sample;  /* n: which standard                                                   */
    bool mn_uncertain, mn_unstated; /* some certificate has an uncertainty; some states none */
    ce_eiv eiv;
    double scale2; /* variance of unit weight: s^2 on runs, else 1                          */
} ce_fitting;

/* sample.c: check the standards, settle where the scatter comes from, make the points and fill
 * fit->point, fit->run, run_sd_K, run_nu. */
ce_status ce_prepare(ce_fitting *f, ce_error *err);
void ce_fitting_free(ce_fitting *f);

/* excess.c: fit, test for excess scatter, include it as the options say, refit. */
ce_status ce_fit_with_excess(ce_fitting *f, ce_error *err);
/* Degrees of freedom of the variances about the curve, taken together: Satterthwaite on the mean
 * shares of run scatter and found excess. */
double ce_fitting_nu(const ce_fitting *f);

/* diagnose.c: points and runs, leave-one-out, curvature, lack of fit, robust fits. */
ce_status ce_diagnose(ce_fitting *f, ce_error *err);
/* resample.c */
ce_status ce_resample(ce_fitting *f, ce_error *err);
/* compare.c */
ce_status ce_compare(ce_fitting *f, ce_error *err);
/* advise.c: what the numbers mean, in plain words, into fit->warnings. */
ce_status ce_advise(ce_fitting *f);

#endif
