/* SPDX-License-Identifier: GPL-3.0-or-later
 * Tests, outliers, between-sample variance, resampling limits. */
#include "check.h"

#include "fit/curves.h"
#include "fit/eiv.h"
#include "fit/series.h"
#include "fit/stats.h"

/* NIST/SEMATECH handbook, Grubbs' test (dataset eda35h1): G = 2.468765, one-sided critical value
 * 2.031652; the further digits and the p from R 4.2.2. */
static void grubbs_nist(void **state)
{
    (void)state;
    static const double y[] = {199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57};
    ce_test t = ce_grubbs(8, y);
    assert_close(t.statistic, 2.468765, 5e-7);
    assert_digits(t.statistic, 2.468764611, 1e-9);
    assert_digits(t.p, 3.0026387e-7, 1e-7);
    assert_close(ce_grubbs_critical(8, 0.05, 1), 2.031652, 5e-7);
    assert_digits(ce_grubbs_critical(8, 0.05, 2), 2.126645087, 1e-9);
    static const double crit[] = {1.154305, 1.481250, 1.715037, 1.887145,
                                  2.019969, 2.126645, 2.215004, 2.289954};
    for (size_t n = 3; n <= 10; n++)
        assert_close(ce_grubbs_critical(n, 0.05, 2), crit[n - 3], 5e-7);
    assert_true(isnan(ce_grubbs(2, y).statistic));
}

/* Critical |t*| at 5 %, Bonferroni over n (R 4.2.2). */
static void deleted_residuals(void **state)
{
    (void)state;
    static const double c[][3] = {{24, 2, 3.509857919}, {8, 2, 4.525716259}, {12, 2, 3.807878445}};
    for (size_t i = 0; i < 3; i++)
        assert_digits(ce_student_factor(1 - 0.05 / c[i][0], c[i][0] - c[i][1] - 1), c[i][2], 1e-9);
}

/* D. C. Montgomery, supplement S11: printed SSPE 3.0366, SSLOF 4.3005, F 1.42. */
static void lack_of_fit_montgomery(void **state)
{
    (void)state;
    static const double x[] = {1, 1, 2, 3.3, 3.3, 4, 4, 4, 5, 5.6, 5.6, 5.6, 6, 6, 6.5, 6.9};
    static const double y[] = {2.3, 1.8, 2.8, 1.8, 3.7, 2.6, 2.6, 2.2,
                               2.0, 3.5, 2.8, 2.1, 3.4, 3.2, 3.4, 5.0};
    double b[2] = {0, 1}, pure = 0;
    ce_nls *fit = fit_curve(&(curve){.n = 16, .p = 2, .x = x, .y = y, .f = line}, b);
    for (size_t i = 0, j; i < 16; i = j) {
        double mean = 0;
        for (j = i; j < 16 && x[j] == x[i]; j++) mean += y[j];
        mean /= (double)(j - i);
        for (size_t k = i; k < j; k++) pure += (y[k] - mean) * (y[k] - mean);
    }
    ce_test t = ce_lack_of_fit(fit->sum, pure, 16, 9, 2);
    assert_close(pure, 3.0366, 1e-4);
    assert_close(t.statistic, 1.42, 5e-3);
    assert_digits(b[0], 1.69672763, 1e-8);
    assert_digits(b[1], 0.25862977, 1e-8);
    assert_digits(pure, 3.03666667, 1e-8);
    assert_digits(fit->sum - pure, 4.30053829, 1e-8);
    assert_digits(t.statistic, 1.41620361, 1e-8);
    assert_digits(t.p, 0.32882304, 1e-7);
    ce_nls_free(fit);
}

/* Equal scatter and order of the residuals of the FF8 series (R 4.2.2; car 3.1-1). */
static void equal_scatter(void **state)
{
    (void)state;
    static const double bartlett[2][2] = {{10.402177055, 0.16690471}, {6.820795198, 0.44777425}};
    static const double levene[2][2] = {{0.57069943353, 0.76931159}, {0.58311824676, 0.76002753}};
    for (int s = 0; s < 2; s++) {
        double y[24];
        size_t g[24];
        for (size_t i = 0; i < 24; i++) {
            y[i] = s == 0 ? ff8a_tg[i / 3][i % 3] : ff8b_tg[i / 3][i % 3];
            g[i] = i / 3;
        }
        ce_test b = ce_bartlett(24, y, g, 8), l = ce_levene(24, y, g, 8);
        assert_digits(b.statistic, bartlett[s][0], 1e-8);
        assert_digits(b.p, bartlett[s][1], 1e-7);
        assert_digits(l.statistic, levene[s][0], 1e-8);
        assert_digits(l.p, levene[s][1], 1e-7);
    }
}

static void ordinary_diagnostics(void **state)
{
    (void)state;
    static const double press[2] = {15.398128148, 14.475863422};
    static const double durbin[2] = {2.091521917, 1.3791971457};
    static const double first[2][5] = {
        {-1.1335071907, -1.7349741822, -1.8244910192, 0.54481293199, -1.0977094806},
        {-0.16701459317, -0.26397285443, -0.25831310994, 0.012851867169, -0.15688639779}};
    for (int s = 0; s < 2; s++) {
        double x[24], y[24], b[2] = {388, -1.8e5};
        for (size_t i = 0; i < 24; i++) {
            x[i] = 1 / (s == 0 ? ff8a_mn : ff8b_mn)[i / 3];
            y[i] = s == 0 ? ff8a_tg[i / 3][i % 3] : ff8b_tg[i / 3][i % 3];
        }
        ce_nls *fit = fit_curve(&(curve){.n = 24, .p = 2, .x = x, .y = y, .f = line}, b);
        double sd = sqrt(fit->sum / 22);
        ce_residual_diagnostics d = ce_diagnose_residual(fit->r[0], fit->leverage[0], sd, 24, 2);
        assert_digits(ce_press(24, fit->r, fit->leverage), press[s], 1e-9);
        assert_digits(ce_durbin_watson(24, fit->r), durbin[s], 1e-9);
        assert_digits(fit->r[0], first[s][0], 1e-9);
        assert_digits(d.standardised, first[s][1], 1e-9);
        assert_digits(d.deleted, first[s][2], 1e-9);
        assert_digits(d.cook, first[s][3], 1e-9);
        assert_digits(d.dffits, first[s][4], 1e-9);
        ce_nls_free(fit);
    }
}

/* ---- between-sample variance ---------------------------------------------------------------- */

typedef struct {
    size_t n;
    const double *x, *y, *v; /* x NULL: a mean only */
    double theta[2];
} study;

/* Weighted sum of squares about the mean or the line, variances v + tau2, by our own solver. */
static double sum_about(double tau2, void *context)
{
    study *s = context;
    static const double zeros[32] = {0};
    ce_eiv_point p[32];
    for (size_t i = 0; i < s->n; i++)
        p[i] = (ce_eiv_point){.z = s->x == NULL ? zeros[i] : s->x[i],
                              .y = s->y[i],
                              .var_y = s->v[i] + tau2,
                              .count = 1,
                              .chain = {.ends = 2}};
    if (s->x == NULL) { /* the mean of Flory-Fox at 1/Mn = 0 */
        double w = 0, wy = 0, sum = 0;
        for (size_t i = 0; i < s->n; i++) w += 1 / p[i].var_y, wy += p[i].y / p[i].var_y;
        s->theta[0] = wy / w;
        for (size_t i = 0; i < s->n; i++)
            sum += (p[i].y - s->theta[0]) * (p[i].y - s->theta[0]) / p[i].var_y;
        return sum;
    }
    ce_eiv eiv;
    ce_nls_options o = CE_NLS_DEFAULT;
    assert_int_equal(ce_eiv_new(&eiv, ce_relation_model(CE_FLORY_FOX), s->n, p, &o), CE_OK);
    assert_int_equal(ce_eiv_fit(&eiv, NULL), CE_OK);
    s->theta[0] = eiv.theta[0];
    s->theta[1] = -eiv.theta[1];
    double sum = eiv.nls->sum;
    ce_eiv_free(&eiv);
    return sum;
}

/* Thirteen BCG trials (G. A. Colditz et al., J. Am. Med. Assoc. 271 (1994) 698, from memory, as in R
 * package metadat): positive and negative cases with and without vaccine, latitude. Log relative
 * risks; Paule-Mandel values of metafor 3.8-1. */
static void random_effects_bcg(void **state)
{
    (void)state;
    static const double d[13][5] = {
        {4, 119, 11, 128, 44},       {6, 300, 29, 274, 55},        {3, 228, 11, 209, 42},
        {62, 13536, 248, 12619, 52}, {33, 5036, 47, 5761, 13},     {180, 1361, 372, 1079, 44},
        {8, 2537, 10, 619, 19},      {505, 87886, 499, 87892, 13}, {29, 7470, 45, 7232, 27},
        {17, 1699, 65, 1600, 42},    {186, 50448, 141, 27197, 18}, {5, 2493, 3, 2338, 33},
        {27, 16886, 29, 17825, 33}};
    double x[13], y[13], v[13];
    for (size_t i = 0; i < 13; i++) {
        double t = d[i][0] + d[i][1], c = d[i][2] + d[i][3];
        x[i] = d[i][4];
        y[i] = log(d[i][0] / t / (d[i][2] / c));
        v[i] = 1 / d[i][0] - 1 / t + 1 / d[i][2] - 1 / c;
    }
    study mean = {13, NULL, y, v, {0}}, by_latitude = {13, x, y, v, {0}};
    assert_digits(sum_about(0, &mean), 152.2330081, 1e-9);
    assert_digits(ce_paule_mandel(sum_about, &mean, 12, 10), 0.3180684522, 1e-8);
    assert_digits(mean.theta[0], -0.7149681535, 1e-8);
    double tau2 = ce_paule_mandel(sum_about, &by_latitude, 11, 10);
    assert_digits(tau2, 0.1421319415, 1e-8);
    (void)sum_about(tau2, &by_latitude);
    assert_digits(by_latitude.theta[0], 0.2219159645, 1e-8);
    assert_digits(by_latitude.theta[1], -0.02856452589, 1e-8);
}

/* Balanced groups with one pooled variance: Paule-Mandel, DerSimonian-Laird, REML and the analysis of
 * variance agree. Returns tau2. */
static double balanced(size_t groups, size_t each, const double *y, double *grand, double *within)
{
    double mean[8], v[8], ss = 0;
    for (size_t g = 0; g < groups; g++) {
        mean[g] = 0;
        for (size_t i = 0; i < each; i++) mean[g] += y[g * each + i] / (double)each;
        for (size_t i = 0; i < each; i++)
            ss += (y[g * each + i] - mean[g]) * (y[g * each + i] - mean[g]);
    }
    *within = ss / (double)(groups * (each - 1));
    for (size_t g = 0; g < groups; g++) v[g] = *within / (double)each;
    study s = {groups, NULL, mean, v, {0}};
    double tau2 = ce_paule_mandel(sum_about, &s, (double)(groups - 1), 1e6);
    *grand = s.theta[0];
    return tau2;
}

static void random_effects_balanced(void **state)
{
    (void)state;
    double mean, within;
    /* J. C. Pinheiro and D. M. Bates, Mixed-Effects Models in S and S-PLUS (2000): rails (nlme; data
     * from memory, confirmed by the published estimates). */
    static const double rail[] = {55, 53,  54, 26, 37, 32, 78, 91, 85,
                                  92, 100, 96, 49, 51, 50, 80, 85, 83};
    double tau2 = balanced(6, 3, rail, &mean, &within);
    assert_digits(sqrt(tau2), 24.8054653, 1e-8);
    assert_digits(sqrt(within), 4.0207794, 1e-7);
    assert_digits(mean, 66.5, 1e-12);
    assert_digits(sqrt((tau2 + within / 3) / 6), 10.171037, 1e-7);
    /* O. L. Davies, Statistical Methods in Research and Production (1947): dyestuff (lme4; data from
     * memory likewise). */
    static const double dye[] = {1545, 1440, 1440, 1520, 1580, 1540, 1555, 1490, 1560, 1495,
                                 1595, 1550, 1605, 1510, 1560, 1445, 1440, 1595, 1465, 1545,
                                 1595, 1630, 1515, 1635, 1625, 1520, 1455, 1450, 1480, 1445};
    tau2 = balanced(6, 5, dye, &mean, &within);
    assert_digits(tau2, 1764.05, 1e-6);
    assert_digits(within, 2451.25, 1e-6);
    /* NIST StRD SiRstv, certified mean squares. */
    static const double si[] = {
        196.3052, 196.1240, 196.1890, 196.2569, 196.3403, 196.3042, 196.3825, 196.1669, 196.3257,
        196.0422, 196.1303, 196.2005, 196.2889, 196.0343, 196.1811, 196.2795, 196.1748, 196.1494,
        196.1485, 195.9885, 196.2119, 196.1051, 196.1850, 196.0052, 196.2090};
    tau2 = balanced(5, 5, si, &mean, &within);
    assert_digits(within, 1.08318280000000E-02, 1e-9);
    assert_digits((5 * tau2 + within) / within, 1.18046237440255, 1e-8);
    assert_digits(tau2, 3.90947480e-4, 1e-7);
}

static void no_excess_is_zero(void **state)
{
    (void)state;
    static const double y[] = {1, 1.1, 0.9}, v[] = {1, 1, 1};
    study s = {3, NULL, y, v, {0}};
    assert_true(ce_paule_mandel(sum_about, &s, 2, 10) == 0);
    static const double far[] = {0, 1000, -1000};
    study wide = {3, NULL, far, v, {0}};
    assert_true(isnan(ce_paule_mandel(sum_about, &wide, 2, 10)));
}

/* All 5^5 resamples of a ratio of sums (computed in NumPy for this project). */
static void bca_of_all_resamples(void **state)
{
    (void)state;
    static const double u[] = {13, 9, 21, 17, 30}, v[] = {10, 8, 15, 16, 19};
    double theta[3125], jack[5];
    for (size_t i = 0; i < 3125; i++) {
        double su = 0, sv = 0;
        for (size_t k = 0, code = i; k < 5; k++, code /= 5) su += u[code % 5], sv += v[code % 5];
        theta[i] = su / sv;
    }
    for (size_t j = 0; j < 5; j++) jack[j] = (90 - u[j]) / (68 - v[j]);
    ce_bca b = ce_bca_limits(3125, theta, 90.0 / 68, 5, jack, 0.95);
    assert_digits(b.jackknife_se, 0.11807055343, 1e-9);
    assert_digits(b.acceleration, 0.02477772025, 1e-9);
    assert_digits(b.z0, -0.0156419982704, 1e-9);
    assert_digits(b.alpha_low, 0.0287787472866, 1e-9);
    assert_digits(b.alpha_high, 0.978673415271, 1e-9);
    assert_digits(b.percentile_low, 1.12068965517, 1e-10);
    assert_digits(b.percentile_high, 1.49333333333, 1e-10);
    assert_digits(b.low, 1.12658227848, 1e-10);
    assert_digits(b.high, 1.5, 1e-10);
    assert_digits(b.sd, 0.0965787273381, 1e-10);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(grubbs_nist),
        cmocka_unit_test(deleted_residuals),
        cmocka_unit_test(lack_of_fit_montgomery),
        cmocka_unit_test(equal_scatter),
        cmocka_unit_test(ordinary_diagnostics),
        cmocka_unit_test(random_effects_bcg),
        cmocka_unit_test(random_effects_balanced),
        cmocka_unit_test(no_excess_is_zero),
        cmocka_unit_test(bca_of_all_resamples),
    };
    return cmocka_run_group_tests_name("fit/stats", tests, NULL, NULL);
}
