/* SPDX-License-Identifier: GPL-3.0-or-later
 * What cannot be fitted, said in words; and what can, with its doubts. */
#include "check.h"

#include "fit/series.h"

static ce_status try(size_t n, const ce_standard *s, const ce_fit_options *o, ce_error *err)
{
    ce_fit fit;
    *err = (ce_error)CE_ERROR_INIT;
    ce_status status = ce_fit_relation(n, s, o, &fit, err);
    if (status != CE_OK) { /* emptied on failure */
        assert_null(fit.point);
        assert_null(fit.run);
        assert_int_equal(fit.warnings.n, 0);
        assert_true(err->message[0] != '\0');
    }
    ce_fit_free(&fit);
    return status;
}

static void ff8(ce_standard *s)
{
    ff8_standards(ff8a_mn, ff8a_tg, 0, s);
}

#define REFUSED(n, s, o, status, text)                                                             \
    do {                                                                                           \
        ce_error err;                                                                              \
        assert_int_equal(try((n), (s), (o), &err), (status));                                      \
        if (strstr(err.message, (text)) == NULL) print_error("%s\n", err.message);                 \
        assert_non_null(strstr(err.message, (text)));                                              \
    } while (0)

static void molar_masses(void **state)
{
    (void)state;
    static const double bad[] = {0, -2000, (double)NAN, (double)INFINITY};
    for (size_t i = 0; i < 4; i++) {
        ce_standard s[FF8_SAMPLES];
        ff8(s);
        s[2].molar.mn_g_mol = bad[i];
        REFUSED(8, s, NULL, CE_E_DOMAIN, "'S3': Mn must be a positive number");
    }
    ce_standard s[FF8_SAMPLES];
    ff8(s);
    s[1].mn_u_g_mol = -1;
    REFUSED(8, s, NULL, CE_E_DOMAIN, "must not be negative");
    s[1].mn_u_g_mol = 5000;
    REFUSED(8, s, NULL, CE_E_DOMAIN, "not smaller than Mn");
    ff8(s);
    s[1].molar.chain_ends = -1;
    REFUSED(8, s, NULL, CE_E_DOMAIN, "chain ends");
    ff8(s);
    s[1].molar.mw_g_mol = -5;
    REFUSED(8, s, NULL, CE_E_DOMAIN, "Mw");
}

static void readings(void **state)
{
    (void)state;
    static const double bad[][3] = {
        {300, (double)NAN, 300}, {300, -5, 300}, {300, (double)INFINITY, 1}};
    ce_standard s[FF8_SAMPLES];
    for (size_t i = 0; i < 3; i++) {
        ff8(s);
        s[0].tg_K = bad[i];
        REFUSED(8, s, NULL, CE_E_DOMAIN, "'S1', run 2: Tg must be a positive temperature");
    }
    static const double u[] = {0.5, 0, 0.5};
    ff8(s);
    s[0].tg_u_K = u;
    REFUSED(8, s, NULL, CE_E_DOMAIN, "'S1', run 2: a stated uncertainty");
    ff8(s);
    s[5].n = 0;
    REFUSED(8, s, NULL, CE_E_DOMAIN, "'S6' has no run");
}

static void too_few(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8(s);
    REFUSED(0, s, NULL, CE_E_NOFIT, "no standards");
    REFUSED(1, s, NULL, CE_E_NOFIT, "1 standard, but flory-fox has 2 parameters");
    REFUSED(2, s, NULL, CE_E_NOFIT,
            "2 standards, but flory-fox has 2 parameters and needs at least 3");
    for (size_t i = 0; i < 8; i++) s[i].molar.mn_g_mol = 5000;
    REFUSED(8, s, NULL, CE_E_NOFIT, "all 8 standards have the same molar mass");
    for (size_t i = 0; i < 4; i++) s[i].molar.mn_g_mol = 9000;
    REFUSED(8, s, NULL, CE_E_NOFIT, "only 2 different molar masses");
    ff8(s);
    ce_fit_options o = ce_fit_options_default();
    o.relation = CE_LOG_THREE;
    REFUSED(5, s, &o, CE_E_NOFIT, "log-three has 5 parameters and needs at least 6");
    o.relation = CE_OGAWA;
    REFUSED(8, s, &o, CE_E_DOMAIN, "'S1' has no Mw");
    /* Rings alone: no chain ends, nothing to fit. */
    for (size_t i = 0; i < 8; i++) s[i].molar.chain_ends = 0;
    REFUSED(8, s, NULL, CE_E_NOFIT, "no standard has a chain end");
}

static void scatter(void **state)
{
    (void)state;
    static const double equal[8][3] = {{298, 298, 298}, {343, 343, 343}, {365, 365, 365},
                                       {377, 377, 377}, {383, 383, 383}, {386, 386, 386},
                                       {386, 386, 386}, {387, 387, 387}};
    ce_standard s[FF8_SAMPLES];
    ce_fit_options o = ce_fit_options_default();
    ff8_standards(ff8a_mn, equal, 0, s);
    REFUSED(8, s, NULL, CE_E_REFUSED, "agree to the last digit");
    ff8(s);
    for (size_t i = 0; i < 8; i++) s[i].n = 1;
    o.scatter = CE_SCATTER_REPEATS;
    REFUSED(8, s, &o, CE_E_REFUSED, "no standard has a repeat");
    o.scatter = CE_SCATTER_STATED;
    REFUSED(8, s, &o, CE_E_REFUSED, "'S1', run 1 has no stated uncertainty");
    /* One run each, no stated uncertainty, and Mn uncertain: section 0 says refuse. */
    for (size_t i = 0; i < 8; i++) s[i].mn_u_g_mol = 0.05 * s[i].molar.mn_g_mol;
    o.scatter = CE_SCATTER_AUTO;
    REFUSED(8, s, &o, CE_E_REFUSED, "residuals cannot tell the two apart");
}

static void options(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8(s);
    ce_fit_options o = ce_fit_options_default();
    o.level = 1;
    REFUSED(8, s, &o, CE_E_ARG, "level");
    o = ce_fit_options_default();
    o.mn_common_u_rel = -0.1;
    REFUSED(8, s, &o, CE_E_ARG, "common");
    o = ce_fit_options_default();
    o.relation = CE_RELATIONS;
    REFUSED(8, s, &o, CE_E_ARG, "no such relation");
    o = ce_fit_options_default();
    o.resamples = 3;
    REFUSED(8, s, &o, CE_E_ARG, "resamples");
}

/* ---- doubts --------------------------------------------------------------------------------- */

static bool says(const ce_fit *fit, const char *text)
{
    for (size_t i = 0; i < fit->warnings.n; i++)
        if (strstr(fit->warnings.item[i].at.message, text) != NULL) return true;
    return false;
}

static ce_fit fitted(size_t n, const ce_standard *s, const ce_fit_options *o)
{
    ce_fit fit;
    ce_error err = CE_ERROR_INIT;
    ce_status status = ce_fit_relation(n, s, o, &fit, &err);
    if (status != CE_OK) print_error("%s\n", err.message);
    assert_int_equal(status, CE_OK);
    return fit;
}

/* Chain-extended poly(L-lactide), Int. J. Polym. Sci. (2013) 315917, table 2: prepolymer and seven
 * products, Mw taken for Mn; columns of the stored table were inferred. Tg falls as the chains grow:
 * the chemistry changed, and no chain-end effect does that. */
static void tg_falls(void **state)
{
    (void)state;
    static const double m[] = {2.0e4, 16.3e4, 12.1e4, 20.3e4, 9.6e4, 10.7e4, 12.5e4, 12.6e4};
    static const double tg[] = {332.15, 330.35, 330.35, 329.75, 328.65, 329.35, 328.95, 329.35};
    ce_standard s[8];
    for (size_t i = 0; i < 8; i++)
        s[i] = (ce_standard){
            .name = ff8_name[i], .molar = {m[i], (double)NAN, 2}, .n = 1, .tg_K = &tg[i]};
    ce_fit f = fitted(8, s, NULL);
    assert_true(f.parameter[1].value < 0);
    assert_true(says(&f, "K is not positive: Tg falls as the molar mass grows"));
    ce_fit_free(&f);
}

/* High molar masses only: the slope drowns in the scatter. */
static void slope_not_significant(void **state)
{
    (void)state;
    static const double m[] = {1e5, 2e5, 3e5, 1e5, 2e5, 3e5};
    static const double tg[] = {386.1, 387.4, 386.9, 386.9, 386.6, 387.3};
    ce_standard s[6];
    for (size_t i = 0; i < 6; i++)
        s[i] = (ce_standard){
            .name = ff8_name[i], .molar = {m[i], (double)NAN, 2}, .n = 1, .tg_K = &tg[i]};
    ce_fit f = fitted(6, s, NULL);
    /* Values from NumPy. */
    assert_digits(f.parameter[0].value, 387.4307692, 1e-9);
    assert_digits(f.parameter[1].value, 92307.69231, 1e-9);
    assert_digits(f.residual_sd_K, 0.4251696494, 1e-9);
    assert_digits(f.slope_significance, 3.3966228, 1e-7);
    assert_true(says(&f, "K is not significant"));
    assert_true(says(&f, "span 1e+05 to 3e+05"));
    ce_fit_free(&f);
}

static void one_standard_decides(void **state)
{
    (void)state;
    /* Seven high molar masses close together, one low: it alone fixes K. */
    static const double m[] = {2000, 2e5, 2.2e5, 2.5e5, 2.6e5, 2.8e5, 3e5, 3.2e5};
    double tg[8][3];
    ce_standard s[8];
    for (size_t i = 0; i < 8; i++)
        for (size_t k = 0; k < 3; k++)
            tg[i][k] = 388 - 1.8e5 / m[i] + 0.5 * ((double)((i * 3 + k) % 4) - 1.5);
    tg[0][0] += 30, tg[0][1] += 30, tg[0][2] += 30;
    for (size_t i = 0; i < 8; i++)
        s[i] = (ce_standard){
            .name = ff8_name[i], .molar = {m[i], (double)NAN, 2}, .n = 3, .tg_K = tg[i]};
    ce_fit f = fitted(8, s, NULL);
    assert_true(f.point[0].leverage > 0.99);
    assert_true(f.point[0].flags & CE_POINT_DOMINATES);
    assert_true(f.point[0].flags & CE_POINT_LEVERAGE);
    assert_false(f.point[3].flags & CE_POINT_DOMINATES);
    assert_true(says(&f, "standard 'S1' dominates"));
    ce_fit_free(&f);
}

/* Two samples with an error common to their runs: excess found, added, told. */
static void excess_is_found(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8_standards(ff8b_mn, ff8b_tg, 0, s);
    ce_fit f = fitted(8, s, NULL);
    assert_int_equal(f.options.excess, CE_EXCESS_ADDITIVE);
    assert_true(f.excess_tau_K > 0.5 && f.excess_nu == 6);
    assert_true(says(&f, "more than their uncertainties explain"));
    assert_non_null(strstr(ce_fit_lack_of_fit_meaning(&f), "shape of the relation"));
    ce_fit_free(&f);
    ff8_standards(ff8b_mn, ff8b_tg, 0.01, s); /* certificates too optimistic */
    f = fitted(8, s, NULL);
    assert_int_equal(f.options.excess, CE_EXCESS_MULTIPLICATIVE);
    assert_digits(f.excess_r, 0.05827751445, 1e-8);
    assert_true(says(&f, "relative uncertainty of Mn was raised"));
    assert_non_null(strstr(ce_fit_lack_of_fit_meaning(&f), "not curvature"));
    assert_digits(f.point[0].mn_u_g_mol, 0.05827751445 * 1930, 1e-8);
    assert_digits(f.point[0].mn_u_stated, 19.3, 1e-12);
    ce_fit_free(&f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(molar_masses),
        cmocka_unit_test(readings),
        cmocka_unit_test(too_few),
        cmocka_unit_test(scatter),
        cmocka_unit_test(options),
        cmocka_unit_test(tg_falls),
        cmocka_unit_test(slope_not_significant),
        cmocka_unit_test(one_standard_decides),
        cmocka_unit_test(excess_is_found),
    };
    return cmocka_run_group_tests_name("fit/refuse", tests, NULL, NULL);
}
