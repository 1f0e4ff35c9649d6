/* SPDX-License-Identifier: GPL-3.0-or-later
 * Controls against a calibration whose fit is known in closed form. */
#include "check.h"

#include "estimate/fits.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_errno.h>
#include <stdlib.h>

/* A calibration without uncertainty of its own: differences are the runs' alone. */
static ce_fit sharp(void)
{
    return ordinary_fit(388.0, 180000.0, 1e-12, 1e-6, 0.0, 0.5, (double)INFINITY);
}

static ce_check checked(const ce_fit *fit, size_t n, const ce_control *c)
{
    ce_check k;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_check_calibration(fit, n, c, 0.0, &k, &err), CE_OK);
    return k;
}

/* Expected 388 - 18 = 370 K; certificate 2 %: 0.36 K; three runs: 0.5/sqrt(3) K. E_n by hand. */
static void normalised_error(void **state)
{
    (void)state;
    const double tg[] = {370.4, 370.9, 370.8};
    const ce_control c = {"C", {10000.0, 10000.0, 2.0}, 200.0, 3, tg, NULL};
    const ce_fit fit = sharp();
    ce_check k = checked(&fit, 1, &c);
    const double u = sqrt(0.25 / 3.0 + 0.36 * 0.36);
    assert_digits(k.item[0].difference_K, 0.7, 1e-12);
    assert_digits(k.item[0].u_K, u, 1e-9);
    assert_digits(k.item[0].normalised, 0.7 / (1.959963984540054 * u), 1e-9);
    assert_digits(k.item[0].p, 2.0 * gsl_cdf_ugaussian_Q(0.7 / u), 1e-9);
    assert_true(k.holds);
    assert_digits(k.limit_p, 0.05, 1e-12);
    assert_digits(k.item[0].own_sd_K, sqrt(0.07), 1e-9);
    assert_true(isnan(k.drift_p) && k.n_chart == 0);
    ce_check_free(&k);
}

static void what_speaks_against_it(void **state)
{
    (void)state;
    const ce_fit fit = sharp();
    const double off[] = {373.0}, fine[] = {370.1};
    const ce_molar m = {10000.0, 10000.0, 2.0};
    ce_control c[2] = {{"C", m, 0.0, 1, off, NULL}, {"D", m, 0.0, 1, fine, NULL}};
    ce_check k = checked(&fit, 2, c); /* one control six s.d. off */
    assert_false(k.holds);
    assert_digits(k.limit_p, 0.05 / 3.0, 1e-12);
    assert_true(k.item[0].normalised > 1.0 && k.item[1].normalised < 1.0);
    ce_check_free(&k);
    /* five controls each 1.3 s.d. off, none alone enough: together they are */
    const double low[] = {370.65};
    ce_control five[5];
    for (size_t i = 0; i < 5; i++) five[i] = (ce_control){"C", m, 0.0, 1, low, NULL};
    k = checked(&fit, 5, five);
    for (size_t i = 0; i < 5; i++) assert_true(k.item[i].p > k.limit_p);
    assert_digits(k.shift_K, 0.65, 1e-9);
    assert_digits(k.shift_u_K, 0.5 / sqrt(5.0), 1e-5);
    assert_false(k.holds);
    ce_check_free(&k);
}

/* Warning beyond 2, action beyond 3, or the second of three beyond 2 on one side. */
static void chart_rules(void **state)
{
    (void)state;
    const ce_fit fit = sharp();
    const ce_molar m = {10000.0, 10000.0, 2.0};
    const double tg[] = {371.1, 370.0, 371.1, 368.9, 370.2}, day[] = {1, 2, 3, 4, 5};
    const ce_control c = {"C", m, 0.0, 5, tg, day};
    ce_check k = checked(&fit, 1, &c);
    assert_int_equal(k.n_chart, 5);
    assert_true(k.chart[0].warning && !k.chart[0].action);
    assert_true(!k.chart[1].warning);
    assert_true(k.chart[2].warning && k.chart[2].action);  /* second of three, same side */
    assert_true(k.chart[3].warning && !k.chart[3].action); /* other side */
    assert_int_equal(k.n_warnings, 3);
    assert_int_equal(k.n_actions, 1);
    assert_false(k.holds);
    ce_check_free(&k);
}

/* Dates in any order; slope 1 K a year by construction, its s.d. in closed form. */
static void drift(void **state)
{
    (void)state;
    const ce_fit fit = sharp();
    const ce_molar m = {10000.0, 10000.0, 2.0};
    double day[8], tg[8], xx = 0.0;
    for (size_t i = 0; i < 8; i++) {
        day[i] = 365.25 * (double)((i * 3) % 8);
        tg[i] = 369.5 + day[i] / 365.25;
        xx += pow((double)i - 3.5, 2.0);
    }
    const ce_control c = {"C", m, 4000.0, 8, tg, day}; /* certificate too loose to tell a shift */
    ce_check k = checked(&fit, 1, &c);
    assert_digits(k.drift_K_year, 1.0, 1e-9);
    assert_digits(k.drift_u_K_year, 0.5 / sqrt(xx), 1e-9);
    assert_true(k.item[0].p > k.limit_p);
    assert_false(k.holds);
    for (size_t i = 1; i < k.n_chart; i++) assert_true(k.chart[i].day >= k.chart[i - 1].day);
    ce_check_free(&k);
}

static void refusals(void **state)
{
    (void)state;
    const ce_fit fit = sharp();
    ce_check k;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_check_calibration(&fit, 0, NULL, 0.0, &k, &err), CE_E_ARG);
    const ce_control empty = {"C", {10000.0, 10000.0, 2.0}, 0.0, 0, NULL, NULL};
    assert_int_equal(ce_check_calibration(&fit, 1, &empty, 0.0, &k, NULL), CE_E_ARG);
    assert_null(k.item);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(normalised_error), cmocka_unit_test(what_speaks_against_it),
        cmocka_unit_test(chart_rules),      cmocka_unit_test(drift),
        cmocka_unit_test(refusals),
    };
    (void)gsl_set_error_handler_off();
    return cmocka_run_group_tests_name("estimate/check", tests, NULL, NULL);
}
