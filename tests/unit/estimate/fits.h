/* SPDX-License-Identifier: GPL-3.0-or-later
 * Fits filled by hand with published or independently computed numbers, so that the estimates are
 * tested apart from the fitter. */
#ifndef CE_TEST_FITS_H
#define CE_TEST_FITS_H

#include <chainend/estimate.h>

#include <math.h>
#include <string.h>

/* A line in 1/Mn whose whole covariance comes from the run scatter: an ordinary fit. */
static inline ce_fit ordinary_fit(double a, double k, double var_a, double var_k, double cov_ak,
                                  double s, double nu)
{
    ce_fit fit;
    memset(&fit, 0, sizeof fit);
    fit.options.relation = CE_FLORY_FOX;
    fit.options.scatter = CE_SCATTER_RESIDUALS;
    fit.options.excess = CE_EXCESS_NONE;
    fit.options.level = 0.95;
    fit.p = 2;
    fit.parameter[0].value = a;
    fit.parameter[1].value = k;
    const double c[4] = {var_a, cov_ak, cov_ak, var_k};
    memcpy(fit.covariance, c, sizeof c);
    memcpy(fit.covariance_run, c, sizeof c);
    fit.run_sd_K = s;
    fit.run_nu = nu;
    fit.excess_nu = (double)INFINITY;
    fit.dof = nu;
    return fit;
}

/* Ordinary least squares of y on x = 1/Mn, textbook formulas: for the published lines. */
static inline ce_fit line_through(size_t n, const double *x, const double *y)
{
    double xm = 0.0, ym = 0.0, sxx = 0.0, sxy = 0.0, rss = 0.0;
    for (size_t i = 0; i < n; i++) xm += x[i] / (double)n, ym += y[i] / (double)n;
    for (size_t i = 0; i < n; i++) {
        sxx += (x[i] - xm) * (x[i] - xm);
        sxy += (x[i] - xm) * (y[i] - ym);
    }
    double b = sxy / sxx, a = ym - b * xm;
    for (size_t i = 0; i < n; i++) rss += (y[i] - a - b * x[i]) * (y[i] - a - b * x[i]);
    double s2 = rss / (double)(n - 2);
    return ordinary_fit(a, -b, s2 * (1.0 / (double)n + xm * xm / sxx), s2 / sxx, xm * s2 / sxx,
                        sqrt(s2), (double)(n - 2));
}

static const double ff8_exact_mn[8] = {2000, 4000, 8000, 16000, 35000, 70000, 150000, 300000};
static const double ff8a_tg[24] = {297.13, 298.63, 298.03, 343.73, 343.76, 344.16, 366.32, 364.96,
                                   365.07, 376.51, 376.87, 379.01, 382.76, 383.07, 383.13, 385.97,
                                   384.65, 386.30, 385.53, 386.54, 387.23, 387.28, 387.64, 387.45};
static const double ff8b_mn[8] = {1930, 4010, 7690, 16600, 35900, 68800, 155000, 293000};
static const double ff8b_tg[24] = {297.78, 298.61, 298.82, 343.73, 343.39, 343.66, 364.79, 365.64,
                                   366.13, 376.31, 376.63, 376.47, 382.37, 383.14, 381.71, 385.49,
                                   385.84, 385.86, 386.42, 387.43, 386.92, 388.00, 387.97, 387.13};

/* Series FF8a, ordinary least squares on the 24 runs. */
static inline ce_fit ff8a_fit(void)
{
    double x[24];
    for (size_t i = 0; i < 24; i++) x[i] = 1.0 / ff8_exact_mn[i / 3];
    return line_through(24, x, ff8a_tg);
}

/* Series FF8b: York's line through the sample means, sd(z) = 5 % (computed with R and numpy for
 * this project: a, K, their standard errors and covariance); the run part of the covariance from
 * w_j = 1/(s_w^2/n_j + (K r z_j)^2). */
static inline ce_fit ff8b_fit(void)
{
    const double a = 388.097441455, k = 181094.913516, s = 0.4840497564, r = 0.05;
    const double sa = 0.1718367308, sk = 5062.003324, cov_ab = -447.2343988;
    ce_fit fit = ordinary_fit(a, k, sa * sa, sk * sk, -cov_ab, s, 16.0);
    fit.options.scatter = CE_SCATTER_REPEATS;
    double z[8], w[8], sum = 0.0, mean = 0.0, sxx = 0.0;
    for (int j = 0; j < 8; j++) {
        z[j] = 1.0 / ff8b_mn[j];
        w[j] = 1.0 / (s * s / 3.0 + k * k * r * r * z[j] * z[j]);
        sum += w[j];
        mean += w[j] * z[j];
    }
    mean /= sum;
    for (int j = 0; j < 8; j++) sxx += w[j] * (z[j] - mean) * (z[j] - mean);
    double run[4] = {0.0};
    for (int j = 0; j < 8; j++) {
        double lk = w[j] * (mean - z[j]) / sxx; /* dK/dTg_j */
        double la = w[j] / sum + mean * lk;     /* da/dTg_j */
        double v = s * s / 3.0;
        run[0] += la * la * v;
        run[1] += la * lk * v;
        run[3] += lk * lk * v;
    }
    run[2] = run[1];
    memcpy(fit.covariance_run, run, sizeof run);
    fit.dof = 6.0;
    return fit;
}

/* n standards borrowed into a fit made by hand. */
static inline void give_points(ce_fit *fit, ce_fit_point *point, size_t n, const double *mn)
{
    memset(point, 0, n * sizeof *point);
    for (size_t j = 0; j < n; j++)
        point[j].molar = (ce_molar){.mn_g_mol = mn[j], .mw_g_mol = mn[j], .chain_ends = 2.0};
    fit->point = point;
    fit->n_points = n;
}

/* One reading that is the mean of m runs. */
static inline ce_unknown mean_reading(const double *tg_K, size_t m)
{
    ce_unknown u = ce_unknown_default();
    u.n = 1;
    u.tg_K = tg_K;
    u.mean_of = m;
    return u;
}

#endif
