/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "fit/stats.h"

#include "base/order.h"

#include <gsl/gsl_cdf.h>

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const double none = (double)NAN;

double ce_student_two_sided(double t, double nu)
{
    if (isnan(t) || !(nu > 0)) return none;
    if (isinf(t)) return 0;
    return 2 * (nu > 1e9 ? gsl_cdf_ugaussian_Q(fabs(t)) : gsl_cdf_tdist_Q(fabs(t), nu));
}

double ce_student_factor(double level, double nu)
{
    if (!(level > 0 && level < 1 && nu > 0)) return none;
    double p = 0.5 * (1 - level);
    return nu > 1e9 ? gsl_cdf_ugaussian_Qinv(p) : gsl_cdf_tdist_Qinv(p, nu);
}

double ce_chi2_upper(double chi2, double nu)
{
    return chi2 >= 0 && nu > 0 ? gsl_cdf_chisq_Q(chi2, nu) : none;
}

double ce_f_upper(double f, double nu1, double nu2)
{
    if (!(f >= 0 && nu1 > 0 && nu2 > 0)) return none;
    return nu2 > 1e9 ? ce_chi2_upper(f * nu1, nu1) : gsl_cdf_fdist_Q(f, nu1, nu2);
}

ce_residual_diagnostics ce_diagnose_residual(double e, double h, double s, double n, double p)
{
    double r = e / (s * sqrt(1 - h)), left = n - p - r * r;
    double t = n - p - 1 > 0 ? r * sqrt((n - p - 1) / fmax(left, 0)) : none;
    return (ce_residual_diagnostics){.standardised = r,
                                     .deleted = t,
                                     .cook = r * r * h / ((1 - h) * p),
                                     .dffits = t * sqrt(h / (1 - h))};
}

double ce_bonferroni(double p, double n)
{
    return isnan(p) ? p : fmin(1, n * p);
}

double ce_press(size_t n, const double *e, const double *h)
{
    double s = 0;
    for (size_t i = 0; i < n; i++) s += e[i] / (1 - h[i]) * (e[i] / (1 - h[i]));
    return s;
}

double ce_log_likelihood(double rss, double n)
{
    return -0.5 * n * (log(rss / n) + 1 + log(2 * M_PI));
}

double ce_aicc(double log_likelihood, double k, double n)
{
    if (n <= k + 1) return (double)INFINITY;
    return -2 * log_likelihood + 2 * k + 2 * k * (k + 1) / (n - k - 1);
}

double ce_bic(double log_likelihood, double k, double n)
{
    return -2 * log_likelihood + k * log(n);
}

ce_test ce_lack_of_fit(double rss, double pure, double n, double k, double p)
{
    ce_test t = {.dof1 = k - p, .dof2 = n - k, .statistic = none, .p = none};
    if (!(t.dof1 > 0 && t.dof2 > 0 && pure > 0)) return t;
    t.statistic = fmax(rss - pure, 0) / t.dof1 / (pure / t.dof2);
    t.p = ce_f_upper(t.statistic, t.dof1, t.dof2);
    return t;
}

/* ---- equal scatter -------------------------------------------------------------------------- */

typedef struct {
    double n, mean, ss;
} group_sum;

/* k groups, or NULL. Freed by the caller. */
static group_sum *group_sums(size_t n, const double *value, const size_t *group, size_t k)
{
    group_sum *g = k == 0 ? NULL : calloc(k, sizeof *g);
    if (g == NULL) return NULL;
    for (size_t i = 0; i < n; i++) g[group[i]].n++, g[group[i]].mean += value[i];
    for (size_t j = 0; j < k; j++) g[j].mean /= g[j].n;
    for (size_t i = 0; i < n; i++) {
        double d = value[i] - g[group[i]].mean;
        g[group[i]].ss += d * d;
    }
    return g;
}

ce_test ce_bartlett(size_t n, const double *value, const size_t *group, size_t k)
{
    ce_test t = {.statistic = none, .p = none};
    group_sum *g = group_sums(n, value, group, k);
    if (g == NULL) return t;
    double nu = 0, ss = 0, logs = 0, inverse = 0, used = 0;
    for (size_t j = 0; j < k; j++) {
        if (g[j].n < 2) continue;
        double v = g[j].n - 1;
        used++, nu += v, ss += g[j].ss, inverse += 1 / v;
        logs += v * log(g[j].ss / v);
    }
    free(g);
    if (used < 2) return t;
    t.dof1 = used - 1;
    t.statistic = (nu * log(ss / nu) - logs) / (1 + (inverse - 1 / nu) / (3 * (used - 1)));
    if (!isfinite(t.statistic)) t.statistic = none;
    t.p = ce_chi2_upper(fmax(t.statistic, 0), t.dof1);
    if (isnan(t.statistic)) t.p = none;
    return t;
}

ce_test ce_levene(size_t n, const double *value, const size_t *group, size_t k)
{
    ce_test t = {.statistic = none, .p = none};
    double *d = n == 0 ? NULL : calloc(2 * n, sizeof *d), *members;
    group_sum *g = NULL;
    if (d == NULL) return t;
    members = d + n;
    for (size_t j = 0; j < k; j++) {
        size_t m = 0;
        for (size_t i = 0; i < n; i++)
            if (group[i] == j) members[m++] = value[i];
        double median = ce_median(members, m);
        for (size_t i = 0; i < n; i++)
            if (group[i] == j) d[i] = fabs(value[i] - median);
    }
    g = group_sums(n, d, group, k);
    if (g != NULL && k > 1 && n > k) {
        double mean = 0, between = 0, within = 0;
        for (size_t i = 0; i < n; i++) mean += d[i] / (double)n;
        for (size_t j = 0; j < k; j++) {
            between += g[j].n * (g[j].mean - mean) * (g[j].mean - mean);
            within += g[j].ss;
        }
        t.dof1 = (double)(k - 1);
        t.dof2 = (double)(n - k);
        t.statistic = within > 0 ? between / t.dof1 / (within / t.dof2) : none;
        t.p = ce_f_upper(t.statistic, t.dof1, t.dof2);
    }
    free(g);
    free(d);
    return t;
}

/* ---- outliers ------------------------------------------------------------------------------- */

ce_test ce_grubbs(size_t n, const double *value)
{
    ce_test t = {.statistic = none, .p = none};
    double mean = 0, ss = 0, worst = 0, m = (double)n;
    if (n < 3) return t;
    for (size_t i = 0; i < n; i++) mean += value[i] / m;
    for (size_t i = 0; i < n; i++) {
        double d = fabs(value[i] - mean);
        ss += d * d;
        worst = fmax(worst, d);
    }
    if (!(ss > 0)) return t;
    double g = worst / sqrt(ss / (m - 1)), left = (m - 1) * (m - 1) - m * g * g;
    t.statistic = g;
    t.dof1 = m - 2;
    double student = left > 0 ? sqrt(m * (m - 2) * g * g / left) : (double)INFINITY;
    t.p = ce_bonferroni(ce_student_two_sided(student, m - 2), m);
    return t;
}

double ce_grubbs_critical(size_t n, double alpha, int sides)
{
    if (n < 3) return none;
    double m = (double)n, t = gsl_cdf_tdist_Qinv(alpha / (sides * m), m - 2);
    return (m - 1) / sqrt(m) * sqrt(t * t / (m - 2 + t * t));
}

double ce_durbin_watson(size_t n, const double *e)
{
    double steps = 0, ss = 0;
    for (size_t i = 0; i < n; i++) {
        if (i > 0) steps += (e[i] - e[i - 1]) * (e[i] - e[i - 1]);
        ss += e[i] * e[i];
    }
    return steps / ss;
}

/* ---- between-sample variance ---------------------------------------------------------------- */

double ce_paule_mandel(double (*sum)(double, void *), void *context, double dof, double upper)
{
    double lo = 0, hi = upper, flo = sum(0, context) - dof, fhi;
    if (flo <= 0) return 0;
    fhi = sum(hi, context) - dof;
    if (!(fhi < 0)) return fhi == 0 ? hi : none;
    int side = 0;
    for (int i = 0; i < 200 && hi - lo > 1e-14 * hi; i++) {
        /* The sum falls steeply near 0: bisection in between keeps the secant honest. */
        double x =
            i % 3 == 2 || !isfinite(flo) ? 0.5 * (lo + hi) : (lo * fhi - hi * flo) / (fhi - flo);
        double f = sum(x, context) - dof;
        if (fabs(f) <= 1e-14 * dof) return x;
        if (!(f < 0)) {
            lo = x, flo = f;
            if (side > 0) fhi *= 0.5;
            side = 1;
        } else {
            hi = x, fhi = f;
            if (side < 0) flo *= 0.5;
            side = -1;
        }
    }
    return 0.5 * (lo + hi);
}

/* ---- resampling ----------------------------------------------------------------------------- */

static int rising(const void *l, const void *r)
{
    double a = *(const double *)l, b = *(const double *)r;
    return (a > b) - (a < b);
}

static double sorted_quantile(const double *x, size_t n, double p)
{
    double at = p * (double)(n - 1);
    size_t i = at >= (double)(n - 1) ? n - 1 : (size_t)at;
    return i + 1 < n ? x[i] + (at - (double)i) * (x[i + 1] - x[i]) : x[n - 1];
}

static void accelerate(ce_bca *b, size_t m, const double *jack)
{
    double mean = 0, cube = 0, square = 0, k = (double)m;
    for (size_t i = 0; i < m; i++) mean += jack[i] / k;
    for (size_t i = 0; i < m; i++) {
        double d = mean - jack[i];
        cube += d * d * d;
        square += d * d;
    }
    b->jackknife_se = sqrt((k - 1) / k * square);
    b->acceleration = square > 0 ? cube / (6 * pow(square, 1.5)) : 0;
}

ce_bca ce_bca_limits(size_t n, double *theta, double estimate, size_t m, const double *jack,
                     double level)
{
    ce_bca b = {0};
    double below = 0, square = 0;
    qsort(theta, n, sizeof *theta, rising);
    for (size_t i = 0; i < n; i++) {
        below += theta[i] < estimate;
        b.mean += theta[i] / (double)n;
    }
    for (size_t i = 0; i < n; i++) square += (theta[i] - b.mean) * (theta[i] - b.mean);
    b.sd = sqrt(square / (double)n);
    accelerate(&b, m, jack);
    double share = fmin(fmax(below / (double)n, 0.5 / (double)n), 1 - 0.5 / (double)n);
    b.z0 = gsl_cdf_ugaussian_Pinv(share);
    double z = gsl_cdf_ugaussian_Pinv(0.5 * (1 - level));
    b.alpha_low = gsl_cdf_ugaussian_P(b.z0 + (b.z0 + z) / (1 - b.acceleration * (b.z0 + z)));
    b.alpha_high = gsl_cdf_ugaussian_P(b.z0 + (b.z0 - z) / (1 - b.acceleration * (b.z0 - z)));
    b.low = sorted_quantile(theta, n, b.alpha_low);
    b.high = sorted_quantile(theta, n, b.alpha_high);
    b.percentile_low = sorted_quantile(theta, n, 0.5 * (1 - level));
    b.percentile_high = sorted_quantile(theta, n, 0.5 * (1 + level));
    return b;
}
