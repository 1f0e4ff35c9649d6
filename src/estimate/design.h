/* SPDX-License-Identifier: GPL-3.0-or-later
 * Internal to the room: the design of a calibration, its standards as they are and as they might be. */
#ifndef CE_ESTIMATE_DESIGN_H
#define CE_ESTIMATE_DESIGN_H

#include <chainend/estimate.h>

/* One standard: gradient of Tg by the parameters, and what its mean varies by. */
typedef struct {
    double gradient[CE_MAX_PARAMETERS];
    double slope_u_K; /* |dTg/dMn| u(Mn): the certificate's part                              */
    double mn_g_mol;
    double runs;
    size_t point; /* of the fit; SIZE_MAX = new                                               */
} ce_design_point;

typedef struct {
    const ce_fit *fit;
    ce_plan_options o;
    double level;
    size_t n;
    ce_design_point *point; /* room for all steps */
    double unknown_runs;
    size_t n_targets;
    const ce_prediction *at;
    const ce_plan_target *target;
} ce_design;

/* A standard at a molar mass, its effective variance by the slope of the fitted curve. CE_OK or
 * CE_E_DOMAIN. */
ce_status ce_design_make_point(const ce_fit *fit, const ce_molar *molar, double mn_u_g_mol,
                               double runs, size_t point, ce_design_point *q);
/* Covariance of the parameters, p x p: inverse of the information matrix. False when singular. */
bool ce_design_covariance(const ce_design *d, double C[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS]);

#endif
