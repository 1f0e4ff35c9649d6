/* SPDX-License-Identifier: GPL-3.0-or-later
 * The published and frozen Flory-Fox series. Numbers of the FF8 series were computed once with R
 * 4.2.2 and SciPy 1.10.1; those of the exercise by ordinary least squares in 1/Mn. */
#include "check.h"

#include "fit/series.h"
#include "fit/stats.h"

static ce_fit fit_or_fail(size_t n, const ce_standard *s, ce_fit_options o)
{
    ce_fit fit;
    ce_error err = CE_ERROR_INIT;
    ce_status status = ce_fit_relation(n, s, &o, &fit, &err);
    if (status != CE_OK) print_error("%s\n", err.message);
    assert_int_equal(status, CE_OK);
    return fit;
}

static ce_fit fit_ff8(const double *mn, const double (*tg)[FF8_RUNS], double r, ce_scatter scatter,
                      ce_excess excess)
{
    ce_standard s[FF8_SAMPLES];
    ff8_standards(mn, tg, r, s);
    ce_fit_options o = ce_fit_options_default();
    o.scatter = scatter;
    o.excess = excess;
    return fit_or_fail(FF8_SAMPLES, s, o);
}

static void ordinary_ff8a(void **state)
{
    (void)state;
    ce_fit f = fit_ff8(ff8a_mn, ff8a_tg, 0, CE_SCATTER_RESIDUALS, CE_EXCESS_AUTO);
    const ce_parameter *a = &f.parameter[0], *k = &f.parameter[1];
    assert_digits(a->value, 388.16375474, 1.3e-11);
    assert_digits(k->value, 179800.49511, 1e-10);
    assert_digits(a->u, 0.19578137537, 1e-10);
    assert_digits(k->u, 959.45442398, 1e-10);
    assert_digits(f.covariance[1], 113.95950408, 1e-10);
    assert_digits(f.covariance[1] / (a->u * k->u), 0.60667322176, 1e-10);
    assert_digits(f.chi2, 12.789623, 1e-7);
    assert_digits(f.residual_sd_K, 0.76246081866, 1e-10);
    assert_true(f.dof == 22 && f.run_nu == 22);
    assert_close(a->nu, 22, 1e-9);
    assert_close(k->nu, 22, 1e-9);
    assert_digits(ce_student_factor(0.95, 22), 2.0738730679, 1e-10);
    assert_digits(a->low, 387.75772902, 1e-10);
    assert_digits(a->high, 388.56978047, 1e-10);
    assert_digits(k->low, 177810.70842, 1e-10);
    assert_digits(k->high, 181790.2818, 1e-10);
    assert_digits(f.log_likelihood, -26.501488501, 1e-10);
    assert_digits(f.aicc, 60.202977001, 1e-10);
    assert_digits(ce_bic(f.log_likelihood, 3, 24), 62.537138492, 1e-10);
    assert_digits(f.lack_of_fit_F, 1.0484930259, 1e-10);
    assert_digits(f.lack_of_fit_p, 0.43156178833, 1e-9);
    assert_true(f.lack_of_fit_dof1 == 6 && f.lack_of_fit_dof2 == 16);
    assert_digits(f.run[0].residual_K, -1.1335071907, 1e-10);
    assert_digits(f.run[0].leverage, 0.26577788081, 1e-10);
    assert_digits(f.run[3].leverage, 0.066888068274, 1e-10);
    assert_digits(f.run[21].leverage, 0.064644485309, 1e-10);
    assert_digits(f.run[0].deleted_t, -1.8244910192, 1e-10);
    assert_digits(f.run[11].deleted_t, 3.4107033032, 1e-10);
    assert_digits(f.run[11].deleted_p, 0.0631462511, 1e-9);
    assert_true(f.run[11].flags == 0);
    assert_digits(f.curvature_F, 2.777157162, 1e-9);
    assert_digits(f.curvature_p, 0.1104649067, 1e-9);
    assert_digits(f.bartlett_p, 0.16690471, 1e-7);
    assert_digits(f.levene_p, 0.76931159, 1e-7);
    ce_fit_free(&f);
}

static void ordinary_bands_ff8a(void **state)
{
    (void)state;
    ce_fit f = fit_ff8(ff8a_mn, ff8a_tg, 0, CE_SCATTER_RESIDUALS, CE_EXCESS_AUTO);
    ce_molar m = {20000, (double)NAN, 2};
    ce_band one, three;
    assert_int_equal(ce_fit_band(&f, &m, 0, 1, 0, &one), CE_OK);
    assert_int_equal(ce_fit_band(&f, &m, 0, 3, 0.95, &three), CE_OK);
    assert_digits(one.tg_K, 379.17372999, 1e-10);
    assert_digits(one.u_mean_K, 0.17098473181, 1e-10);
    assert_digits(one.mean_low_K, 378.81912936, 1e-10);
    assert_digits(one.mean_high_K, 379.52833062, 1e-10);
    assert_digits(one.new_low_K, 377.55321046, 1e-10);
    assert_digits(one.new_high_K, 380.79424952, 1e-10);
    assert_digits(three.new_low_K, 378.19434808, 1e-10);
    assert_digits(three.new_high_K, 380.1531119, 1e-10);
    assert_digits(one.curve_low_K, 378.72502249, 1e-10);
    assert_digits(one.curve_high_K, 379.6224375, 1e-10);
    ce_fit_free(&f);
}

static void ordinary_ff8b(void **state)
{
    (void)state;
    ce_fit f = fit_ff8(ff8b_mn, ff8b_tg, 0.05, CE_SCATTER_RESIDUALS, CE_EXCESS_AUTO);
    assert_digits(f.parameter[0].value, 387.71819759, 1.3e-11);
    assert_digits(f.parameter[1].value, 173258.38319, 1e-10);
    assert_digits(f.parameter[0].u, 0.18918055766, 1e-10);
    assert_digits(f.parameter[1].u, 901.58609612, 1e-10);
    assert_digits(f.covariance[1], 102.6279185, 1e-9);
    assert_digits(f.parameter[1].low, 171388.60807, 1e-10);
    assert_digits(f.aicc, 58.783771422, 1e-10);
    assert_digits(f.lack_of_fit_F, 5.9085499498, 1e-9);
    assert_digits(f.lack_of_fit_p, 0.0020642626689, 1e-8);
    assert_digits(f.curvature_F, 7.552518859, 1e-9);
    assert_digits(f.curvature_p, 0.01204754437, 1e-8);
    assert_digits(f.bartlett_p, 0.44777425, 1e-7);
    assert_digits(f.levene_p, 0.76002753, 1e-7);
    /* Ordinary least squares under uncertain Mn is the wrong model, and it says so. */
    assert_true(ce_messages_count(&f.warnings, CE_WARNING) > 0);
    assert_non_null(
        strstr(f.warnings.item[0].at.message, "certificates' uncertainty of Mn is ignored"));
    ce_fit_free(&f);
}

static void york_ff8b(void **state)
{
    (void)state;
    ce_fit f = fit_ff8(ff8b_mn, ff8b_tg, 0.05, CE_SCATTER_AUTO, CE_EXCESS_AUTO);
    assert_int_equal(f.options.scatter, CE_SCATTER_REPEATS);
    assert_int_equal(f.options.excess, CE_EXCESS_NONE);
    assert_digits(f.parameter[0].value, 388.097441455, 1e-12);
    assert_digits(f.parameter[1].value, 181094.913516, 1e-11);
    assert_digits(f.parameter[0].u, 0.1718367308, 1e-9);
    assert_digits(f.parameter[1].u, 5062.003324, 1e-9);
    /* cov(a, slope) is -447.23; cov(a, K) has the other sign. */
    assert_digits(f.covariance[1], 447.2343988, 1e-9);
    assert_digits(f.chi2, 7.1747580787, 1e-10);
    assert_digits(f.chi2_p, 0.30498775, 1e-7);
    assert_digits(f.run_sd_K, 0.4840497564, 1e-9);
    assert_true(f.run_nu == 16);
    ce_fit_free(&f);
}

/* Welch-Satterthwaite degrees of freedom for the mean of m runs of an unknown. */
static void degrees_of_freedom_ff8b(void **state)
{
    (void)state;
    ce_fit f = fit_ff8(ff8b_mn, ff8b_tg, 0.05, CE_SCATTER_REPEATS, CE_EXCESS_NONE);
    static const struct {
        double z0, m, nu, t;
    } check[] = {
        {3.208121108e-4, 3, 777.38546, 1.9630203}, {9.993346088e-5, 3, 124.23371, 1.9792434},
        {2.262593342e-5, 3, 18.162196, 2.099578},  {6.060034673e-6, 3, 17.299575, 2.1070359},
        {5.380684258e-7, 3, 17.913671, 2.101648},  {6.060034673e-6, 1, 16.498736, 2.1147091}};
    for (size_t i = 0; i < sizeof check / sizeof *check; i++) {
        ce_molar m = {1 / check[i].z0, (double)NAN, 2};
        ce_prediction p;
        assert_int_equal(ce_fit_predict(&f, &m, &p), CE_OK);
        double nu = ce_fit_nu(&f, &p, f.run_sd_K * f.run_sd_K / check[i].m);
        assert_digits(nu, check[i].nu, 1e-7);
        assert_digits(ce_student_factor(0.95, nu), check[i].t, 1e-7);
    }
    ce_fit_free(&f);
}

static void bands_ff8b(void **state)
{
    (void)state;
    ce_fit f = fit_ff8(ff8b_mn, ff8b_tg, 0.05, CE_SCATTER_REPEATS, CE_EXCESS_NONE);
    ce_molar m = {20000, (double)NAN, 2};
    ce_band exact, uncertain;
    assert_int_equal(ce_fit_band(&f, &m, 0, 1, 0, &exact), CE_OK);
    assert_int_equal(ce_fit_band(&f, &m, 0.05, 1, 0, &uncertain), CE_OK);
    assert_digits(exact.tg_K, 379.0426958, 1e-9);
    assert_digits(exact.u_mean_K, 0.22105229, 1e-7);
    assert_close(exact.mean_low_K, 378.60724, 1e-5);
    assert_close(exact.mean_high_K, 379.47815, 1e-5);
    assert_digits(exact.u_new_K, 0.53213559, 1e-7);
    assert_close(exact.new_low_K, 377.93619, 1e-5);
    assert_close(exact.new_high_K, 380.1492, 1e-5);
    assert_digits(uncertain.u_new_K, 0.69866969, 1e-7);
    ce_fit_free(&f);
}

static void excess_ff8b(void **state)
{
    (void)state;
    ce_fit add = fit_ff8(ff8b_mn, ff8b_tg, 0, CE_SCATTER_REPEATS, CE_EXCESS_ADDITIVE);
    assert_digits(add.excess_tau_K * add.excess_tau_K, 0.3833645685, 1e-9);
    assert_digits(add.parameter[0].value, 387.7181976, 1e-9);
    assert_digits(add.parameter[1].value, 173258.3832, 1e-9);
    assert_digits(add.parameter[0].u, 0.3006977112, 1e-9);
    assert_digits(add.parameter[1].u, 1433.048295, 1e-9);
    assert_digits(add.chi2, 35.4512997, 1e-8);
    assert_true(add.excess_nu == 6);
    ce_fit_free(&add);
    ce_fit mult = fit_ff8(ff8b_mn, ff8b_tg, (double)NAN, CE_SCATTER_REPEATS, CE_EXCESS_AUTO);
    assert_int_equal(mult.options.excess, CE_EXCESS_MULTIPLICATIVE);
    assert_digits(mult.excess_r, 0.05827751445, 1e-9);
    assert_digits(mult.parameter[0].value, 388.1240339, 1e-9);
    assert_digits(mult.parameter[1].value, 181852.1902, 1e-9);
    assert_digits(mult.parameter[0].u, 0.17748268, 1e-7);
    assert_digits(mult.parameter[1].u, 5790.0309, 1e-7);
    ce_fit_free(&mult);
}

/* Within-sample contrasts carry no information: with exact Mn the fit of the means is weighted
 * least squares, and of balanced runs the ordinary line. */
static void exact_molar_mass_is_weighted_least_squares(void **state)
{
    (void)state;
    ce_fit f = fit_ff8(ff8a_mn, ff8a_tg, 0, CE_SCATTER_REPEATS, CE_EXCESS_NONE);
    assert_digits(f.parameter[0].value, 388.16375474, 1.3e-11);
    assert_digits(f.parameter[1].value, 179800.49511, 1e-10);
    /* The standard errors of the ordinary fit, times s_w/s. */
    double ratio = sqrt(9.1801333333 / 16) / 0.76246081866;
    assert_digits(f.parameter[0].u, 0.19578137537 * ratio, 1e-9);
    assert_close(f.parameter[0].nu, 16, 1e-9);
    /* The same lack of fit as on the runs. */
    assert_digits(f.lack_of_fit_F, 1.0484930259, 1e-9);
    assert_digits(f.lack_of_fit_p, 0.43156178833, 1e-9);
    ce_fit_free(&f);
}

static void published_exercise(void **state)
{
    (void)state;
    ce_standard s[EXERCISE_SAMPLES];
    exercise_standards(s);
    ce_fit f = fit_or_fail(EXERCISE_SAMPLES, s, ce_fit_options_default());
    assert_int_equal(f.options.scatter, CE_SCATTER_RESIDUALS);
    assert_close(f.parameter[0].value, 379.39157, 5e-6);
    assert_close(f.parameter[1].value, 99223.275, 5e-4);
    assert_close(f.parameter[0].u, 0.692, 5e-4);
    assert_close(f.parameter[1].u, 806.9, 0.05);
    assert_close(f.parameter[0].high - f.parameter[0].value, 1.7779, 5e-5);
    assert_close(f.parameter[1].value - f.parameter[1].low, 2074.219, 5e-4);
    assert_close(f.residual_sd_K, 1.424356, 5e-7);
    assert_close(f.chi2, 10.1440, 5e-5);
    assert_close(f.covariance[1] / (f.parameter[0].u * f.parameter[1].u), 0.6278, 5e-5);
    static const double residual[] = {1.05, -2.17, -0.59, 1.45, -0.85, 0.03, 1.07};
    for (size_t i = 0; i < EXERCISE_SAMPLES; i++)
        assert_close(f.point[i].residual_K, residual[i], 5e-3);
    static const double at[][4] = {{2000, 329.7799, 1.3861, 3.9150},
                                   {10000, 369.4692, 1.6556, 4.0183},
                                   {50000, 377.4071, 1.7521, 4.0591}};
    for (size_t i = 0; i < 3; i++) {
        ce_molar m = {at[i][0], (double)NAN, 2};
        ce_band b;
        assert_int_equal(ce_fit_band(&f, &m, 0, 1, 0, &b), CE_OK);
        assert_close(b.tg_K, at[i][1], 5e-5);
        assert_close(b.mean_high_K - b.tg_K, at[i][2], 5.1e-5);
        assert_close(b.new_high_K - b.tg_K, at[i][3], 5.1e-5);
    }
    static const double mn[][2] = {{300, 1249.8}, {360, 5116.8}, {370, 10565}, {375, 22594}};
    for (size_t i = 0; i < 4; i++) {
        double m;
        assert_int_equal(ce_fit_mn(&f, mn[i][0], &s[0].molar, &m), CE_OK);
        assert_digits(m, mn[i][1], 5e-5);
    }
    double m;
    assert_int_equal(ce_fit_mn(&f, 380, &s[0].molar, &m), CE_E_DOMAIN);
    assert_true(isnan(m));
    /* Residual s.d. of the other relations, as far as they were computed. */
    assert_close(f.comparison[CE_UEBERREITER_KANIG].residual_sd_K, 10.8, 0.05);
    assert_close(f.comparison[CE_UEBERREITER_KANIG].tg_inf_K, 391.9, 0.05);
    assert_close(f.comparison[CE_ODRISCOLL_SANAYEI].residual_sd_K, 7.56, 0.005);
    assert_close(f.comparison[CE_ODRISCOLL_SANAYEI].tg_inf_K, 402.3, 0.05);
    assert_true(f.comparison[CE_FLORY_FOX].weight > 0.99);
    ce_fit_free(&f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(ordinary_ff8a),
        cmocka_unit_test(ordinary_bands_ff8a),
        cmocka_unit_test(ordinary_ff8b),
        cmocka_unit_test(york_ff8b),
        cmocka_unit_test(degrees_of_freedom_ff8b),
        cmocka_unit_test(bands_ff8b),
        cmocka_unit_test(excess_ff8b),
        cmocka_unit_test(exact_molar_mass_is_weighted_least_squares),
        cmocka_unit_test(published_exercise),
    };
    return cmocka_run_group_tests_name("fit/flory_fox", tests, NULL, NULL);
}
