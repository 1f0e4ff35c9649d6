/* SPDX-License-Identifier: GPL-3.0-or-later
 * Robust fits against rlm of R package MASS 7.3-58.2 (least-squares start, accuracy 1e-13). */
#include "check.h"

#include "fit/curves.h"
#include "fit/robust.h"
#include "fit/series.h"
#include "fit/stats.h"

static void robust(const curve *c, ce_psi psi, double *b, double *w, double *scale)
{
    ce_nls *fit = fit_curve(c, b);
    curve copy = *c;
    assert_int_equal(ce_robust_solve(fit, curve_residuals, &copy, psi, b, w, scale), CE_OK);
    ce_nls_free(fit);
}

static double stack(const double *b, const double *x, double *g)
{
    g[0] = 1, g[1] = x[0], g[2] = x[1], g[3] = x[2];
    return b[0] + b[1] * x[0] + b[2] * x[1] + b[3] * x[2];
}

/* K. A. Brownlee (1960), R package datasets: air flow, water temperature, acid; stack loss. */
static const double stack_x[] = {80, 27, 89, 80, 27, 88, 75, 25, 90, 62, 24, 87, 62, 22, 87, 62,
                                 23, 87, 62, 24, 93, 62, 24, 93, 58, 23, 87, 58, 18, 80, 58, 18,
                                 89, 58, 17, 88, 58, 18, 82, 58, 19, 93, 50, 18, 89, 50, 18, 86,
                                 50, 19, 72, 50, 19, 79, 50, 20, 80, 56, 20, 82, 70, 20, 91};
static const double stack_y[] = {42, 37, 37, 28, 18, 18, 19, 20, 15, 14, 14,
                                 13, 11, 12, 8,  7,  8,  8,  9,  15, 15};

static void stackloss(void **state)
{
    (void)state;
    curve c = {.n = 21, .p = 4, .columns = 3, .x = stack_x, .y = stack_y, .f = stack};
    double b[4] = {-40, 1, 1, 0}, w[21], s;
    ce_nls *fit = fit_curve(&c, b);
    double sd = sqrt(fit->sum / 17);
    ce_residual_diagnostics d = ce_diagnose_residual(fit->r[20], fit->leverage[20], sd, 21, 4);
    assert_digits(d.deleted, -3.330493319, 1e-9);
    assert_digits(fit->leverage[20], 0.2845334627, 1e-9);
    assert_digits(d.cook, 0.6919999163, 1e-9);
    assert_digits(ce_bonferroni(ce_student_two_sided(d.deleted, 16), 21), 0.088999, 1e-5);
    ce_nls_free(fit);
    robust(&c, CE_HUBER, b, w, &s);
    static const double huber[] = {-41.02648537, .8293857703, .9260594155, -.127846318};
    static const double bisquare[] = {-42.28532154, .9275589928, .6507111984, -.112333123};
    for (size_t i = 0; i < 4; i++) assert_digits(b[i], huber[i], 1e-8);
    assert_digits(s, 2.440489046, 1e-8);
    robust(&c, CE_BISQUARE, b, w, &s);
    for (size_t i = 0; i < 4; i++) assert_digits(b[i], bisquare[i], 1e-8);
    assert_digits(s, 2.281853315, 1e-8);
}

/* Belgian telephone calls, R package MASS (data from memory, confirmed by the published fits). */
static void phones(void **state)
{
    (void)state;
    static const double y[] = {4.4,  4.7,  4.7, 5.9, 6.6, 7.3, 8.1, 8.8, 10.6, 12, 13.5, 14.9,
                               16.1, 21.2, 119, 124, 142, 159, 182, 212, 43,   24, 27,   29};
    double x[24], b[2] = {-260, 5}, w[24], s;
    for (size_t i = 0; i < 24; i++) x[i] = 50 + (double)i;
    curve c = {.n = 24, .p = 2, .x = x, .y = y, .f = line};
    robust(&c, CE_HUBER, b, w, &s);
    assert_digits(b[0], -102.5296381, 1e-8);
    assert_digits(b[1], 2.039600466, 1e-8);
    assert_digits(s, 9.009028306, 1e-8);
    b[0] = -260, b[1] = 5;
    robust(&c, CE_BISQUARE, b, w, &s);
    assert_digits(b[0], -52.30251068, 1e-8);
    assert_digits(b[1], 1.098046485, 1e-8);
    assert_digits(s, 1.655455714, 1e-8);
}

static ce_fit fit_ff8a(double run12)
{
    ce_standard s[FF8_SAMPLES];
    double changed[FF8_RUNS] = {376.51, 376.87, run12};
    ff8_standards(ff8a_mn, ff8a_tg, 0, s);
    s[3].tg_K = changed;
    ce_fit_options o = ce_fit_options_default();
    o.scatter = CE_SCATTER_RESIDUALS;
    ce_fit fit;
    assert_int_equal(ce_fit_relation(FF8_SAMPLES, s, &o, &fit, NULL), CE_OK);
    return fit;
}

static void flory_fox(void **state)
{
    (void)state;
    ce_fit f = fit_ff8a(379.01);
    assert_digits(f.huber[0], 388.1237754, 1e-9);
    assert_digits(f.huber[1], 179592.5386, 1e-9);
    assert_digits(f.huber_scale, 0.5938280455, 1e-9);
    assert_digits(f.bisquare[0], 388.0933221, 1e-9);
    assert_digits(f.bisquare[1], 179576.2176, 1e-9);
    assert_digits(f.bisquare_scale, 0.5944113699, 1e-9);
    ce_fit_free(&f);
}

/* One run 10 K too high is found, and pulls the robust fits little. */
static void one_bad_run(void **state)
{
    (void)state;
    ce_fit f = fit_ff8a(389.01);
    assert_digits(f.parameter[0].value, 388.7005753, 1e-9);
    assert_digits(f.parameter[1].value, 180771.0859, 1e-9);
    assert_digits(f.residual_sd_K, 2.608583386, 1e-9);
    assert_digits(f.run[11].deleted_t, 18.999228137, 1e-9);
    assert_digits(f.run[11].deleted_p, 2.5064e-13, 1e-4);
    assert_true(f.run[11].flags & CE_POINT_OUTLYING);
    assert_digits(f.huber[0], 388.1237754, 1e-9);
    assert_digits(f.huber[1], 179592.5386, 1e-9);
    assert_digits(f.huber_scale, 0.5938280455, 1e-9);
    assert_digits(f.bisquare[0], 388.0662457, 1e-9);
    assert_digits(f.bisquare[1], 179539.034, 1e-8);
    assert_digits(f.bisquare_scale, 0.6147359972, 1e-8);
    bool said = false;
    for (size_t i = 0; i < f.warnings.n; i++)
        said |= strstr(f.warnings.item[i].at.message, "'S4', run 3 lies") != NULL;
    assert_true(said);
    ce_fit_free(&f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(stackloss),
        cmocka_unit_test(phones),
        cmocka_unit_test(flory_fox),
        cmocka_unit_test(one_bad_run),
    };
    return cmocka_run_group_tests_name("fit/robust", tests, NULL, NULL);
}
