/* SPDX-License-Identifier: GPL-3.0-or-later
 * What is known of a reading and of the curve it is held against, as variances with degrees of
 * freedom: the one place where an unknown and a fit meet. */
#ifndef CE_ESTIMATE_LAW_H
#define CE_ESTIMATE_LAW_H

#include <chainend/estimate.h>

/* An unknown prepared for a fit. */
typedef struct {
    ce_fit fit; /* shallow copy: pooled run scatter in run_sd_K, run_nu, covariance_run; borrows */
    ce_molar like; /* dispersity and chain ends; mn_g_mol 1 */
    double level;
    double mean_K;
    double runs;       /* in all                                                                  */
    double var_run;    /* variance of the mean with fit.run_nu degrees, K^2                       */
    double var_own;    /* the same with nu_own degrees (own scatter, not pooled)                  */
    double nu_own;     /* degrees of freedom of own scatter                                       */
    double var_sample; /* excess_tau squared, excess_nu degrees                                   */
    double var_exact;  /* stated, exactly known                                                   */
    double var_noise;  /* part of the above that is noise and windows: budget only                */
    double var_scale;  /* temperature scale, when it does not cancel                              */
    double rate_K;     /* shift of the reading by one standard uncertainty of the rate slope      */
    bool common_mn;    /* the common part of the certificates counts                              */
    double run_sd_K, own_sd_K; /* for the report                                                  */
    bool pooled;
    unsigned flags; /* CE_EST_*                                                                   */
} ce_law;

/* CE_OK or CE_E_ARG / CE_E_DOMAIN with a message. */
ce_status ce_law_prepare(ce_law *law, const ce_fit *fit, const ce_unknown *unknown, double level,
                         ce_error *err);

/* Variance of the reading alone, K^2. */
double ce_law_reading_variance(const ce_law *law);

/* The curve at a molar mass together with what is common to all standards. */
typedef struct {
    ce_prediction at;
    double var_common_mn, var_rate; /* K^2; the rate's includes the reading's part */
    double variance;                /* of reading minus curve, K^2                 */
} ce_held;
/* z = 1/Mn >= 0. CE_OK or CE_E_DOMAIN. */
ce_status ce_law_hold(const ce_law *law, double z, ce_held *held);
/* Welch-Satterthwaite degrees of freedom of held->variance. */
double ce_law_nu(const ce_law *law, const ce_held *held);

/* The molar with the law's dispersity and chain ends at z = 1/Mn >= 0. */
ce_molar ce_law_molar(const ce_law *law, double z);

/* Two-sided Student factor; normal when nu is infinite. NaN unless 0 < level < 1 and nu > 0. */
double ce_student(double level, double nu);

/* The relations linear in their parameters, Tg = a - K x with x = coefficient z^power. False for
 * the others. */
bool ce_law_linear(const ce_law *law, double *coefficient, double *power);

/* Smallest and largest standard, g/mol; false when the fit has no points. */
bool ce_fit_span(const ce_fit *fit, double *low, double *high);

#endif
