/* SPDX-License-Identifier: GPL-3.0-or-later
 * Least squares with errors in both variables. */
#ifndef CE_FIT_EIV_H
#define CE_FIT_EIV_H

#include "fit/model.h"
#include "fit/nls.h"

/* A fit of a model to points. Every point has its own unknown true z; for given parameters the most
 * likely one is found point by point, so that the solver sees only the model's parameters. The
 * minimum is that of the full problem (parameters and true z together), and (J'J)^-1 is the
 * parameters' block of the full inverse at the adjusted points: for a straight line York's
 * regression and his standard errors, for any curve those of orthogonal distance regression. */
typedef struct {
    const ce_model *model;
    size_t n;
    const ce_eiv_point *point; /* borrowed                                                   */
    double *zeta;   /* n: most likely true z, mol/g                                          */
    double *weight; /* n: 1/(var_y + slope^2 sd_z^2) there, 1/K^2                            */
    ce_nls *nls;
    ce_nls_options options;
    double theta[CE_MAX_PARAMETERS];
} ce_eiv;

/* Prepare for fits of a model to n points (n >= p). CE_OK | CE_E_ARG | CE_E_NOMEM. */
ce_status ce_eiv_new(ce_eiv *eiv, const ce_model *model, size_t n, const ce_eiv_point *point,
                     const ce_nls_options *options);
void ce_eiv_free(ce_eiv *eiv);
/* From the model's own start values, the best of them. */
ce_status ce_eiv_fit(ce_eiv *eiv, ce_error *err);
/* From eiv->theta: after a small change of the points. */
ce_status ce_eiv_refit(ce_eiv *eiv, ce_error *err);
/* The residuals and Jacobian of the reduced problem; context is a ce_eiv. */
void ce_eiv_residuals(const double *theta, double *r, double *J, void *context);
/* Variance in Tg of point i about the curve, taken at its stated z: var_y + slope^2 sd_z^2, and the
 * jet there. */
double ce_eiv_variance(const ce_eiv *eiv, size_t i, ce_jet *jet);

#endif
