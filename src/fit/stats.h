/* SPDX-License-Identifier: GPL-3.0-or-later
 * Tests and diagnostics of ordinary statistics that the fit reports. NaN where not defined. */
#ifndef CE_FIT_STATS_H
#define CE_FIT_STATS_H

#include <stddef.h>

/* P(|t_nu| > t); nu may be infinite. */
double ce_student_two_sided(double t, double nu);
/* Student quantile for a two-sided interval of this level; nu > 0, may be infinite. */
double ce_student_factor(double level, double nu);
/* P(F > f) with nu2 = infinity the chi-square limit. */
double ce_f_upper(double f, double nu1, double nu2);
double ce_chi2_upper(double chi2, double nu);

/* Residuals of a least-squares fit, n of them with p parameters and leverages h. */
typedef struct {
    double standardised; /* e/(s sqrt(1 - h))                                            */
    double deleted;      /* the same with s from the others: t with n - p - 1 degrees     */
    double cook, dffits;
} ce_residual_diagnostics;
/* R. D. Cook and S. Weisberg, Residuals and Influence in Regression (1982), from memory. */
ce_residual_diagnostics ce_diagnose_residual(double e, double h, double s, double n, double p);
/* min(1, n p): p of the worst of n (Bonferroni). */
double ce_bonferroni(double p, double n);
/* Sum of squared deleted prediction errors, sum (e/(1-h))^2. */
double ce_press(size_t n, const double *e, const double *h);

/* Gaussian log-likelihood of n residuals at the maximum, variance estimated; AIC counts p + 1. */
double ce_log_likelihood(double rss, double n);
/* AIC + 2k(k+1)/(n-k-1), k parameters in all (C. M. Hurvich and C.-L. Tsai, Biometrika 76 (1989)
 * 297, from memory); infinite when n <= k + 1. */
double ce_aicc(double log_likelihood, double k, double n);
double ce_bic(double log_likelihood, double k, double n);

typedef struct {
    double statistic, dof1, dof2, p;
} ce_test;
/* Lack of fit: residual sum of squares rss (n runs, p parameters) against pure error (k samples).
 */
ce_test ce_lack_of_fit(double rss, double pure, double n, double k, double p);
/* Groups of runs: value[n], group[n] = 0..k-1. Bartlett, Proc. R. Soc. A 160 (1937) 268 (from
 * memory); samples of one run are left out. A group without scatter makes it NaN. */
ce_test ce_bartlett(size_t n, const double *value, const size_t *group, size_t k);
/* Levene's test about medians, M. B. Brown and A. B. Forsythe, J. Am. Stat. Assoc. 69 (1974) 364
 * (from memory). NaN also when out of memory. */
ce_test ce_levene(size_t n, const double *value, const size_t *group, size_t k);
/* Grubbs' statistic of the most extreme value and its two-sided p (Bonferroni bound, exact up to
 * 1), F. E. Grubbs, Technometrics 11 (1969) 1 (from memory). */
ce_test ce_grubbs(size_t n, const double *value);
/* Its critical value; two-sided: alpha/(2n), one-sided: alpha/n. */
double ce_grubbs_critical(size_t n, double alpha, int sides);
double ce_durbin_watson(size_t n, const double *e);

/* Paule and Mandel, J. Res. Natl. Bur. Stand. 87 (1982) 377: the variance component (or relative
 * uncertainty) x >= 0 at which a falling sum of squares equals its degrees of freedom. 0 when it is
 * not larger at 0; NaN when it is still larger at upper. sum may return NaN: taken as too large. */
double ce_paule_mandel(double (*sum)(double x, void *context), void *context, double dof,
                       double upper);

/* Bias-corrected and accelerated limits (B. Efron, J. Am. Stat. Assoc. 82 (1987) 171, from memory).
 * theta: n resampled values, sorted here; jack: m leave-one-out values. */
typedef struct {
    double z0, acceleration, alpha_low, alpha_high;
    double low, high, percentile_low, percentile_high, sd, mean, jackknife_se;
} ce_bca;
ce_bca ce_bca_limits(size_t n, double *theta, double estimate, size_t m, const double *jack,
                     double level);

#endif
