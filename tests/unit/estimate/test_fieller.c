/* SPDX-License-Identifier: GPL-3.0-or-later
 * Inverse sets against published and independently computed values. Unless a source stands beside
 * them the values were computed with numpy and R for this project. */
#include "check.h"

#include "fits.h"

#include "estimate/interval.h"
#include "estimate/law.h"

static ce_estimate estimate(const ce_fit *fit, double tg_K, size_t m, double level)
{
    ce_estimate e;
    ce_error err = CE_ERROR_INIT;
    ce_unknown u = mean_reading(&tg_K, m);
    assert_int_equal(ce_estimate_mn(fit, &u, level, &e, &err), CE_OK);
    return e;
}

static void ordinary_sets_of_ff8a(void **state)
{
    (void)state;
    ce_fit fit = ff8a_fit();
    assert_digits(fit.parameter[0].value, 388.16375474, 1e-10);
    assert_digits(fit.parameter[1].value, 179800.49511, 1e-10);
    static const struct {
        double tg;
        size_t m;
        double z0, se, z1, z2;
    } row[] = {{330, 1, 3.234905149e-4, 4.457292562e-6, 3.142705173e-4, 3.327594322e-4},
               {384, 1, 2.315763781e-5, 4.361227055e-6, 1.410011761e-5, 3.219050488e-5},
               {370, 3, 1.010217171e-4, 2.599664405e-6, 9.562722282e-5, 1.064106326e-4},
               {387, 3, 6.472477972e-6, 2.671223381e-6, 9.179715885e-7, 1.199824384e-5}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        ce_estimate e = estimate(&fit, row[i].tg, row[i].m, 0.0);
        assert_int_equal(e.bound, CE_TWO_SIDED);
        assert_digits(e.nu, 22.0, 1e-12);
        assert_digits(e.t, 2.0738730679, 1e-10);
        assert_digits(1.0 / e.mn_g_mol, row[i].z0, 2e-9);
        assert_digits(e.u_log / e.mn_g_mol, row[i].se, 1e-8);
        assert_digits(1.0 / e.high_g_mol, row[i].z1, 1e-8);
        assert_digits(1.0 / e.low_g_mol, row[i].z2, 1e-8);
    }
    ce_estimate e = estimate(&fit, 388.0, 3, 0.0);
    assert_int_equal(e.bound, CE_LOWER_ONLY);
    assert_digits(e.low_g_mol, 155024.51, 1e-7);
    assert_true(isnan(e.high_g_mol));
    assert_digits(1.0 / e.mn_g_mol, 9.107580254e-7, 1e-8);
    e = estimate(&fit, 390.5, 1, 0.0);
    assert_int_equal(e.bound, CE_ABOVE_PLATEAU);
    assert_true(isnan(e.low_g_mol) && isnan(e.high_g_mol) && isnan(e.mn_g_mol));
    assert_digits(e.g, 1.2247e-4, 1e-4);
}

/* The limits on the real line, the negative ones included. */
static void limits_beyond_the_asymptote(void **state)
{
    (void)state;
    ce_fit fit = ff8a_fit();
    ce_straight line = {.a = fit.parameter[0].value,
                        .b = -fit.parameter[1].value,
                        .var_a = fit.covariance[0],
                        .var_b = fit.covariance[3],
                        .cov_ab = -fit.covariance[1]};
    double t = ce_student(0.95, 22.0), v = fit.run_sd_K * fit.run_sd_K;
    ce_set set = ce_fieller(&line, 390.5, v, t);
    assert_int_equal(set.n, 1);
    assert_digits(set.low[0], -2.211342629e-5, 1e-9);
    assert_digits(set.high[0], -3.907166515e-6, 1e-9);
    set = ce_fieller(&line, 388.0, v / 3.0, t);
    assert_digits(set.low[0], -4.659179944e-6, 1e-9);
    assert_digits(set.high[0], 6.450593022e-6, 1e-9);
}

static void york_sets_of_ff8b(void **state)
{
    (void)state;
    ce_fit fit = ff8b_fit();
    static const struct {
        double tg;
        size_t m;
        double z0, nu, t, z1, z2;
    } row[] = {
        {330, 3, 3.208121108e-4, 777.38546, 1.9630203, 3.046837701e-4, 3.387726702e-4},
        {370, 3, 9.993346088e-5, 124.23371, 1.9792434, 9.444990779e-5, 1.059234666e-4},
        {384, 3, 2.262593342e-5, 18.162196, 2.099578, 1.896182385e-5, 2.63257944e-5},
        {387, 3, 6.060034673e-6, 17.299575, 2.1070359, 2.27686731e-6, 9.763881963e-6},
        {387, 1, 6.060034673e-6, 16.498736, 2.1147091, 6.264739141e-8, 1.197752108e-5},
    };
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        ce_estimate e = estimate(&fit, row[i].tg, row[i].m, 0.0);
        assert_int_equal(e.bound, CE_TWO_SIDED);
        assert_digits(1.0 / e.mn_g_mol, row[i].z0, 1e-9);
        assert_digits(e.nu, row[i].nu, 2e-7);
        assert_digits(e.t, row[i].t, 5e-8);
        assert_close(1.0 / e.high_g_mol, row[i].z1, 2e-9 * row[i].z2);
        assert_digits(1.0 / e.low_g_mol, row[i].z2, 2e-9);
    }
    ce_estimate e = estimate(&fit, 388.0, 3, 0.0);
    assert_int_equal(e.bound, CE_LOWER_ONLY);
    assert_digits(e.nu, 17.913671, 2e-7);
    assert_close(e.low_g_mol, 233348.42, 0.005);
}

static void an_absurd_upper_limit_is_named(void **state)
{
    (void)state;
    ce_fit fit = ff8b_fit();
    ce_fit_point point[8];
    give_points(&fit, point, 8, ff8b_mn);
    ce_estimate e = estimate(&fit, 387.0, 1, 0.0);
    assert_true(e.high_g_mol > 1.5e7);
    assert_digits(e.cap_g_mol, 2.93e6, 1e-12);
    assert_true((e.flags & CE_EST_HIGH_ABSURD) != 0);
    assert_false(e.below_standards || e.above_standards);
    e = estimate(&fit, 387.0, 3, 0.0);
    assert_true((e.flags & CE_EST_HIGH_ABSURD) == 0);
    assert_true((e.flags & CE_EST_CURVE_EXTENDED) != 0);
    e = estimate(&fit, 280.0, 3, 0.0);
    assert_true(e.below_standards);
    e = estimate(&fit, 387.9, 3, 0.0);
    assert_true(e.above_standards);
}

static void slope_not_significant(void **state)
{
    (void)state;
    const double x[6] = {1e-5, 1.0 / 2e5, 1.0 / 3e5, 1e-5, 1.0 / 2e5, 1.0 / 3e5};
    const double y[6] = {386.1, 387.4, 386.9, 386.9, 386.6, 387.3};
    ce_fit fit = line_through(6, x, y);
    assert_digits(fit.parameter[0].value, 387.4307692, 1e-9);
    assert_digits(fit.parameter[1].value, 92307.69231, 1e-9);
    assert_digits(fit.run_sd_K, 0.4251696494, 1e-9);
    ce_estimate e = estimate(&fit, 387.0, 1, 0.0);
    assert_digits(e.g, 3.3966228, 1e-7);
    assert_int_equal(e.bound, CE_UNDETERMINED);
    assert_true(isnan(e.low_g_mol) && isnan(e.high_g_mol) && !e.disjoint);
    e = estimate(&fit, 380.0, 1, 0.0);
    assert_int_equal(e.bound, CE_UNDETERMINED);
    assert_true(isnan(e.low_g_mol) && !e.disjoint);
    assert_digits(e.high_g_mol, 31668.941, 1e-7);
    e = estimate(&fit, 388.0, 1, 0.0);
    assert_int_equal(e.bound, CE_UNDETERMINED);
    assert_true(e.disjoint);
    assert_digits(e.low_g_mol, 69825.405, 1e-7);
    assert_digits(e.high_g_mol, 122749.29, 1e-7);
    e = estimate(&fit, 394.0, 1, 0.0);
    assert_true(isnan(e.low_g_mol));
    assert_digits(e.high_g_mol, 10297.792, 1e-7);
    double tg, mn;
    assert_int_equal(ce_ceiling(&fit, 1, 0.0, &tg, &mn), CE_E_REFUSED);
}

/* Lines of other fields: x itself is the abscissa. */
static ce_set inverse(size_t n, const double *x, const double *y, double y0, double m, double level,
                      double *x0)
{
    ce_fit fit = line_through(n, x, y);
    ce_straight line = {.a = fit.parameter[0].value,
                        .b = -fit.parameter[1].value,
                        .var_a = fit.covariance[0],
                        .var_b = fit.covariance[3],
                        .cov_ab = -fit.covariance[1]};
    *x0 = (y0 - line.a) / line.b;
    return ce_fieller(&line, y0, fit.run_sd_K * fit.run_sd_K / m, ce_student(level, fit.run_nu));
}

/* Graybill and Iyer, Regression Analysis: Concepts and Applications, thermometer example: 103.995
 * [103.4, 104.6] and, 90 %, 100.1 [99.63, 100.59] (as quoted in published test values). */
static void thermometer(void **state)
{
    (void)state;
    const double x[8] = {96, 98, 100, 102, 104, 106, 108, 110};
    const double y[8] = {95.71, 98.16, 99.52, 102.09, 103.79, 106.18, 108.14, 110.21};
    double x0;
    ce_set set = inverse(8, x, y, 104.0, 1.0, 0.95, &x0);
    assert_digits(x0, 103.9949156, 1e-9);
    assert_digits(set.low[0], 103.4040511, 1e-9);
    assert_digits(set.high[0], 104.5894594, 1e-9);
    set = inverse(8, x, y, 100.0, 1.0, 0.90, &x0);
    assert_digits(x0, 100.112318, 1e-9);
    assert_digits(set.low[0], 99.6294029, 1e-9);
    assert_digits(set.high[0], 100.5885031, 1e-9);
}

/* Arsenic data of Graybill and Iyer as evaluated in a R Journal article on inverse estimation:
 * 2.9314 [2.6035, 3.2587] at 90 %. The last case pools three readings. */
static void arsenic(void **state)
{
    (void)state;
    const double y[32] = {.17,  .25,  .01,  .12,  1.25, .86,  1.25, 1.1,  2.01, 2.03, 2.14,
                          1.74, 3.18, 2.99, 3.23, 3.37, 3.91, 3.9,  3.61, 4.27, 4.88, 5.33,
                          4.96, 4.98, 6.09, 6.17, 6.07, 5.97, 6.67, 7.02, 7.14, 7.3};
    double x[32], x0;
    for (int i = 0; i < 32; i++) x[i] = i / 4;
    ce_set set = inverse(32, x, y, 3.0, 1.0, 0.90, &x0);
    assert_digits(x0, 2.931449061, 1e-9);
    assert_digits(set.low[0], 2.603537272, 1e-9);
    assert_digits(set.high[0], 3.258657942, 1e-9);

    ce_fit fit = line_through(32, x, y);
    const double reading[3] = {3.17, 3.09, 3.16};
    ce_unknown u = ce_unknown_default();
    u.n = 3;
    u.tg_K = reading;
    ce_estimate e;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_estimate_mn(&fit, &u, 0.90, &e, &err), CE_OK);
    assert_true(e.pooled);
    assert_digits(e.nu, 32.0, 1e-12);
    assert_digits(1.0 / e.mn_g_mol, 3.07319131, 1e-9);
    assert_digits(1.0 / e.high_g_mol, 2.884300252, 1e-9);
    assert_digits(1.0 / e.low_g_mol, 3.261587884, 1e-9);
}

/* ISO/TS 28037:2010 examples 1 and 2 (as quoted by a metrology library's documentation of the TS,
 * pages 13 to 59): x and u(x) of a reading; the Fieller set was computed for this project. */
static void iso_ts_28037(void **state)
{
    (void)state;
    ce_straight one = {.a = 28.0 / 15.0, .b = 1.757142857142857};
    /* Exact normal equations of x = 1..6 with weights 1/0.25: S = 17.5, mean 3.5. */
    one.var_b = 0.25 / 17.5;
    one.var_a = 0.25 * (1.0 / 6.0 + 3.5 * 3.5 / 17.5);
    one.cov_ab = -3.5 * 0.25 / 17.5;
    assert_close(sqrt(one.var_a), 0.465, 5e-4);
    assert_close(sqrt(one.var_b), 0.120, 5e-4);
    assert_close(one.cov_ab, -0.050, 5e-4);
    double x0 = (10.5 - one.a) / one.b;
    assert_digits(x0, 4.91327913279133, 1e-13);
    double u = sqrt(0.25 + one.var_a + x0 * x0 * one.var_b + 2.0 * x0 * one.cov_ab) / one.b;
    assert_digits(u, 0.32203556012891, 1e-12);
    ce_set set = ce_fieller(&one, 10.5, 0.25, ce_student(0.95, (double)INFINITY));
    assert_digits(set.low[0], 4.301476703, 1e-9);
    assert_digits(set.high[0], 5.576229779, 1e-9);
}

/* Norris, NIST StRD (certified line), and three more readings. */
static void norris_reading(void **state)
{
    (void)state;
    const double b0 = -0.262323073774029, b1 = 1.00211681802045, s = 0.884796396144373;
    const double u0 = 0.232818234301152, u1 = 0.429796848199937E-03;
    /* cov = -xbar u1^2; xbar from u0^2 = s^2/36 + xbar^2 u1^2. */
    double xbar = sqrt((u0 * u0 - s * s / 36.0)) / u1;
    ce_straight line = {
        .a = b0, .b = b1, .var_a = u0 * u0, .var_b = u1 * u1, .cov_ab = -xbar * u1 * u1};
    double t = ce_student(0.95, 34.0);
    assert_digits((500.0 - b0) / b1, 499.2055957, 1e-9);
    ce_set set = ce_fieller(&line, 500.0, s * s, t);
    assert_digits(set.low[0], 497.3852441, 1e-9);
    assert_digits(set.high[0], 501.0260688, 1e-9);
    set = ce_fieller(&line, 500.0, s * s / 3.0, t);
    assert_digits(set.low[0], 498.1251475, 1e-9);
    assert_digits(set.high[0], 500.2861654, 1e-9);
}

/* Published seven-point exercise: limits computed for this project with R. */
static void seven_point_exercise(void **state)
{
    (void)state;
    const double mn[7] = {500, 1000, 4000, 5000, 6000, 10000, 20000};
    const double tg[7] = {182, 278, 354, 361, 362, 369.5, 375.5};
    double x[7];
    for (int i = 0; i < 7; i++) x[i] = 1.0 / mn[i];
    ce_fit fit = line_through(7, x, tg);
    assert_close(fit.parameter[0].value, 379.39157, 5e-6);
    assert_close(fit.parameter[1].value, 99223.275, 5e-4);
    static const double want[4][4] = {{300, 1249.8, 1190.4, 1315.1},
                                      {360, 5116.8, 4248.3, 6444.1},
                                      {370, 10565, 7408, 18544},
                                      {375, 22594, 11788, 307029}};
    for (int i = 0; i < 4; i++) {
        ce_estimate e = estimate(&fit, want[i][0], 1, 0.0);
        double tol = i < 2 ? 0.05 : 0.5;
        assert_int_equal(e.bound, CE_TWO_SIDED);
        assert_close(e.mn_g_mol, want[i][1], tol);
        assert_close(e.low_g_mol, want[i][2], tol);
        assert_close(e.high_g_mol, want[i][3], tol);
    }
    ce_estimate e = estimate(&fit, 380.0, 1, 0.0);
    assert_int_equal(e.bound, CE_LOWER_ONLY);
    assert_true(isnan(e.mn_g_mol));
    assert_close(e.low_g_mol, 28822.0, 0.5);

    static const double predict[3][4] = {{2000, 329.7799, 1.3861, 3.9150},
                                         {10000, 369.4692, 1.6556, 4.0183},
                                         {50000, 377.4071, 1.7521, 4.0591}};
    for (int i = 0; i < 3; i++) {
        ce_molar molar = {.mn_g_mol = predict[i][0], .mw_g_mol = NAN, .chain_ends = 2.0};
        ce_tg_estimate p;
        ce_error err = CE_ERROR_INIT;
        assert_int_equal(ce_estimate_tg(&fit, &molar, 0.0, 1, 0.95, &p, &err), CE_OK);
        assert_close(p.tg_K, predict[i][1], 5.1e-5);
        assert_close(p.mean_high_K - p.tg_K, predict[i][2], 5.1e-5);
        assert_close(p.tg_K - p.low_K, predict[i][3], 5.1e-5);
    }
}

/* g = 1 exactly: a half line; and a specified mean response without any variance. */
static void degenerate_quadratics(void **state)
{
    (void)state;
    ce_straight flat = {.a = 0.0, .b = 2.0, .var_b = 4.0};
    ce_set set = ce_fieller(&flat, 3.0, 1.0, 1.0);
    assert_int_equal(set.n, 1);
    assert_digits(set.low[0], 2.0 / 3.0, 1e-15);
    assert_true(isinf(set.high[0]));
    ce_straight exact = {.a = 1.0, .b = -2.0};
    set = ce_fieller(&exact, 0.25, 0.0, 2.0);
    assert_digits(set.low[0], 0.375, 1e-15);
    assert_digits(set.high[0], 0.375, 1e-15);
    /* A reading exactly at the asymptote whose interval is symmetric about zero. */
    set = ce_fieller(&exact, 1.0, 1.0, 2.0);
    assert_digits(set.low[0], -1.0, 1e-15);
    assert_digits(set.high[0], 1.0, 1e-15);
}

static void ceiling_of_ff8a(void **state)
{
    (void)state;
    ce_fit fit = ff8a_fit();
    double tg, mn;
    assert_int_equal(ce_ceiling(&fit, 1, 0.0, &tg, &mn), CE_OK);
    assert_digits(tg, 386.5312111, 3e-10);
    assert_digits(mn, fit.parameter[1].value / (fit.parameter[0].value - tg), 1e-9);
    assert_int_equal(ce_ceiling(&fit, 3, 0.0, &tg, &mn), CE_OK);
    assert_digits(tg, 387.164603, 3e-9);
    /* The reading above which nothing fits lies as far on the other side. */
    double top = 2.0 * fit.parameter[0].value - tg;
    assert_digits(top, 389.1629065, 3e-10);
    assert_int_equal(estimate(&fit, top + 1e-6, 3, 0.0).bound, CE_ABOVE_PLATEAU);
    assert_int_equal(estimate(&fit, top - 1e-6, 3, 0.0).bound, CE_LOWER_ONLY);
}

/* With degrees of freedom that move the ceiling still separates two-sided from one-sided. */
static void ceiling_agrees_with_estimates(void **state)
{
    (void)state;
    ce_fit fit = ff8b_fit();
    for (size_t m = 1; m <= 3; m += 2) {
        double tg, mn;
        assert_int_equal(ce_ceiling(&fit, m, 0.0, &tg, &mn), CE_OK);
        assert_int_equal(estimate(&fit, tg - 1e-7, m, 0.0).bound, CE_TWO_SIDED);
        assert_int_equal(estimate(&fit, tg + 1e-7, m, 0.0).bound, CE_LOWER_ONLY);
    }
}

static void tg_from_mn(void **state)
{
    (void)state;
    ce_fit fit = ff8a_fit();
    ce_molar molar = {.mn_g_mol = 20000, .mw_g_mol = NAN, .chain_ends = 2.0};
    ce_tg_estimate e;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_estimate_tg(&fit, &molar, 0.0, 1, 0.0, &e, &err), CE_OK);
    assert_digits(e.tg_K, 379.17372999, 1e-10);
    assert_digits(e.u_mean_K, 0.17098473181, 1e-9);
    assert_digits(e.mean_low_K, 378.81912936, 1e-10);
    assert_digits(e.mean_high_K, 379.52833062, 1e-10);
    assert_digits(e.low_K, 377.55321046, 1e-10);
    assert_digits(e.high_K, 380.79424952, 1e-10);
    assert_int_equal(ce_estimate_tg(&fit, &molar, 0.0, 3, 0.0, &e, &err), CE_OK);
    assert_digits(e.low_K, 378.19434808, 1e-10);
    assert_digits(e.high_K, 380.1531119, 1e-10);

    fit = ff8b_fit();
    assert_int_equal(ce_estimate_tg(&fit, &molar, 0.0, 1, 0.0, &e, &err), CE_OK);
    assert_digits(e.tg_K, 379.0426958, 2e-10);
    assert_digits(e.u_mean_K, 0.22105229, 3e-8);
    assert_close(e.mean_low_K, 378.60724, 6e-6);
    assert_close(e.mean_high_K, 379.47815, 6e-6);
    assert_digits(e.u_K, 0.53213559, 3e-8);
    assert_close(e.low_K, 377.93619, 6e-6);
    assert_close(e.high_K, 380.1492, 6e-6);
    assert_int_equal(ce_estimate_tg(&fit, &molar, 0.05, 1, 0.0, &e, &err), CE_OK);
    assert_digits(e.u_K, 0.69866969, 3e-8);
    assert_int_equal(ce_estimate_tg(&fit, &molar, -0.05, 1, 0.0, &e, &err), CE_E_ARG);
    molar.mn_g_mol = 0.0;
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_estimate_tg(&fit, &molar, 0.05, 1, 0.0, &e, &err), CE_E_DOMAIN);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(ordinary_sets_of_ff8a),
        cmocka_unit_test(limits_beyond_the_asymptote),
        cmocka_unit_test(york_sets_of_ff8b),
        cmocka_unit_test(an_absurd_upper_limit_is_named),
        cmocka_unit_test(slope_not_significant),
        cmocka_unit_test(thermometer),
        cmocka_unit_test(arsenic),
        cmocka_unit_test(iso_ts_28037),
        cmocka_unit_test(norris_reading),
        cmocka_unit_test(seven_point_exercise),
        cmocka_unit_test(degenerate_quadratics),
        cmocka_unit_test(ceiling_of_ff8a),
        cmocka_unit_test(ceiling_agrees_with_estimates),
        cmocka_unit_test(tg_from_mn),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
