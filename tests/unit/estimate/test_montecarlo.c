/* SPDX-License-Identifier: GPL-3.0-or-later
 * Propagation of distributions (JCGM 101:2008) against the closed form that normal inputs have here:
 * P(1/Mn <= q) = Phi[(K q - (a - Tg))/sqrt(v0 + va + q^2 vK + 2 q cov)], computed with SciPy. And the answer
 * turned round: Tg from Mn, then Mn from that Tg, for every relation. */
#include "check.h"

#include "estimate/fits.h"

#include <gsl/gsl_errno.h>

static ce_monte_carlo sampled(double tg_K, size_t runs, bool normal)
{
    const ce_fit fit = ff8a_fit();
    ce_unknown u = ce_unknown_default();
    ce_monte_carlo_options o = ce_monte_carlo_options_default();
    ce_monte_carlo r;
    ce_error err = CE_ERROR_INIT;
    u.n = 1;
    u.tg_K = &tg_K;
    u.mean_of = runs;
    o.normal = normal;
    assert_int_equal(ce_monte_carlo_mn(&fit, &u, 0.0, &o, &r, &err), CE_OK);
    return r;
}

static void limits_of_normal_inputs(void **state)
{
    (void)state;
    ce_monte_carlo r = sampled(384.0, 3, true);
    assert_true(r.settled && r.trials >= 10000);
    assert_digits(1.0 / r.high_g_mol, 1.794896054e-5, 4e-3);
    assert_digits(1.0 / r.low_g_mol, 2.834429604e-5, 4e-3);
    r = sampled(387.0, 3, true);
    assert_digits(1.0 / r.high_g_mol, 1.223839402e-6, 4e-2); /* a limit near zero */
    assert_digits(1.0 / r.low_g_mol, 1.169544685e-5, 4e-3);
    assert_close(r.p_none, 0.0078561939, 8e-4);
    r = sampled(390.5, 1, true); /* well above the plateau */
    assert_true(r.p_none > 0.95 && isinf(r.median_g_mol));
}

/* With finite degrees of freedom: Fieller's interval with Student's t, within the sampling. */
static void agrees_with_the_interval(void **state)
{
    (void)state;
    const ce_fit fit = ff8a_fit();
    const double tg = 384.0;
    ce_unknown u = ce_unknown_default();
    ce_estimate e;
    u.n = 1;
    u.tg_K = &tg;
    assert_int_equal(ce_estimate_mn(&fit, &u, 0.0, &e, NULL), CE_OK);
    const ce_monte_carlo r = sampled(tg, 1, false);
    assert_digits(r.low_g_mol, e.low_g_mol, 1.5e-2);
    assert_digits(r.high_g_mol, e.high_g_mol, 1.5e-2);
}

static void the_seed_decides(void **state)
{
    (void)state;
    const ce_monte_carlo a = sampled(384.0, 3, true), b = sampled(384.0, 3, true);
    assert_true(a.low_g_mol == b.low_g_mol && a.high_g_mol == b.high_g_mol && a.trials == b.trials);
}

/* GUM (JCGM 100:2008) H.3: the calibration of a thermometer, whose printed results are
 * y1 = -0.1712(29), y2 = 0.00218(67), r = -0.93, b(30) = -0.1494(41); here to more digits (numpy). */
static void gum_h3(void **state)
{
    (void)state;
    static const double t[] = {21.521, 22.012, 22.512, 23.003, 23.507, 23.999,
                               24.513, 25.002, 25.503, 26.010, 26.511};
    static const double b[] = {-.171, -.169, -.166, -.159, -.164, -.165,
                               -.156, -.157, -.159, -.161, -.160};
    double x[11];
    for (size_t i = 0; i < 11; i++) x[i] = t[i] - 20.0;
    const ce_fit fit = line_through(11, x, b);
    assert_digits(fit.parameter[0].value, -0.1712037901, 1e-9);
    assert_digits(sqrt(fit.covariance[0]), 0.002877597835, 1e-9);
    assert_digits(fit.parameter[1].value, -0.00218269774, 1e-8);
    assert_digits(sqrt(fit.covariance[3]), 0.0006679387732, 1e-9);
    const double at_30 = fit.covariance[0] - 20.0 * fit.covariance[1] + 100.0 * fit.covariance[3];
    assert_digits(sqrt(at_30), 0.004138595753, 1e-9);
}

static void there_and_back(void **state)
{
    (void)state;
    static const double theta[CE_RELATIONS][CE_MAX_PARAMETERS] = {
        [CE_FLORY_FOX] = {388, 1.8e5},         [CE_UEBERREITER_KANIG] = {388, 500},
        [CE_ODRISCOLL_SANAYEI] = {388, 1.4e4}, [CE_OGAWA] = {388, 1.8e5},
        [CE_LOG_PLATEAU] = {388, 70, 30000},   [CE_LOG_THREE] = {388, 120, 45, 6000, 60000}};
    static const double mn[] = {1500.0, 2500.0, 9000.0, 25000.0, 29000.0};
    for (int r = 0; r < CE_RELATIONS; r++) {
        ce_fit fit = ordinary_fit(0, 0, 1, 1, 0, 0.3, 20);
        fit.options.relation = (ce_relation)r;
        fit.p = ce_relation_parameters((ce_relation)r);
        for (size_t i = 0; i < fit.p; i++) {
            fit.parameter[i].value = theta[r][i];
            for (size_t k = 0; k < fit.p; k++)
                fit.covariance[i * fit.p + k] = fit.covariance_run[i * fit.p + k] =
                    i == k ? 1e-8 * theta[r][i] * theta[r][i] : 0.0;
        }
        for (size_t i = 0; i < sizeof mn / sizeof *mn; i++) {
            const ce_molar molar = {mn[i], 1.1 * mn[i], 2.0};
            ce_tg_estimate t;
            ce_estimate e;
            ce_error err = CE_ERROR_INIT;
            assert_int_equal(ce_estimate_tg(&fit, &molar, 0.0, 1, 0.0, &t, &err), CE_OK);
            ce_unknown u = ce_unknown_default();
            u.n = 1;
            u.tg_K = &t.tg_K;
            u.mw_over_mn = 1.1;
            assert_int_equal(ce_estimate_mn(&fit, &u, 0.0, &e, &err), CE_OK);
            assert_digits(e.mn_g_mol, mn[i], 1e-9);
            assert_true(e.low_g_mol < mn[i]);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(limits_of_normal_inputs), cmocka_unit_test(agrees_with_the_interval),
        cmocka_unit_test(the_seed_decides),        cmocka_unit_test(gum_h3),
        cmocka_unit_test(there_and_back),
    };
    (void)gsl_set_error_handler_off();
    return cmocka_run_group_tests_name("estimate/montecarlo", tests, NULL, NULL);
}
