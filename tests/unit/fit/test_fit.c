/* SPDX-License-Identifier: GPL-3.0-or-later
 * The other relations, uncertainties common to all standards, resampling, heating rates, and what
 * must not depend on units, order or luck. */
#include "check.h"

#include "base/counter_rng.h"
#include "fit/series.h"

enum { MANY = 10 };
static const double many_mn[MANY] = {1500,  2200,  3400,  5000,   9000,
                                     16000, 35000, 70000, 150000, 300000};
static const double truth[CE_RELATIONS][CE_MAX_PARAMETERS] = {
    [CE_FLORY_FOX] = {388, 1.8e5},         [CE_UEBERREITER_KANIG] = {388, 500},
    [CE_ODRISCOLL_SANAYEI] = {388, 1.4e4}, [CE_OGAWA] = {388, 1.8e5},
    [CE_LOG_PLATEAU] = {388, 70, 30000},   [CE_LOG_THREE] = {388, 120, 45, 6000, 60000}};

/* Ten standards, two runs each; r: error of Mn and its stated uncertainty; s: of a run. */
static void simulate(ce_relation relation, double r, double s, uint64_t seed, double (*tg)[2],
                     ce_standard *standard)
{
    static const char *const name[MANY] = {"A", "B", "C", "D", "E", "F", "G", "H", "I", "J"};
    ce_counter_rng rng = ce_counter_rng_start(seed, (uint64_t)relation);
    for (size_t i = 0; i < MANY; i++) {
        ce_molar m = {many_mn[i], 1.3 * many_mn[i], 2};
        double f = 1 + r * ce_counter_rng_normal(&rng);
        for (size_t k = 0; k < 2; k++)
            tg[i][k] =
                ce_relation_tg(relation, truth[relation], &m) + s * ce_counter_rng_normal(&rng);
        standard[i] = (ce_standard){.name = name[i],
                                    .molar = {m.mn_g_mol * f, m.mw_g_mol * f, 2},
                                    .mn_u_g_mol = r * m.mn_g_mol * f,
                                    .n = 2,
                                    .tg_K = tg[i]};
    }
}

static ce_fit fitted(size_t n, const ce_standard *s, ce_fit_options o)
{
    ce_fit fit;
    ce_error err = CE_ERROR_INIT;
    ce_status status = ce_fit_relation(n, s, &o, &fit, &err);
    if (status != CE_OK) print_error("%s: %s\n", ce_relation_name(o.relation), err.message);
    assert_int_equal(status, CE_OK);
    return fit;
}

static void every_relation_finds_its_truth(void **state)
{
    (void)state;
    for (unsigned rel = 0; rel < CE_RELATIONS; rel++)
        for (int uncertain = 0; uncertain < 2; uncertain++) {
            double tg[MANY][2], r = uncertain ? 0.03 : 0;
            ce_standard s[MANY];
            size_t inside = 0, all = 0;
            for (uint64_t seed = 1; seed <= 20; seed++) {
                simulate((ce_relation)rel, r, 0.2, seed, tg, s);
                ce_fit_options o = ce_fit_options_default();
                o.relation = (ce_relation)rel;
                o.level = 0.99;
                o.compare = false;
                ce_fit f = fitted(MANY, s, o);
                for (size_t j = 0; j < f.p; j++, all++) {
                    const ce_parameter *q = &f.parameter[j];
                    assert_true(q->low < q->value && q->value < q->high);
                    inside += q->low <= truth[rel][j] && truth[rel][j] <= q->high;
                }
                ce_fit_free(&f);
            }
            /* 99 % intervals: at most 5 % of them may miss. */
            if ((double)inside < 0.95 * (double)all)
                print_error("%s, r %g: %zu of %zu\n", ce_relation_name((ce_relation)rel), r, inside,
                            all);
            assert_true((double)inside >= 0.95 * (double)all);
        }
}

/* Noise-free series are returned to rounding. */
static void exact_data(void **state)
{
    (void)state;
    for (unsigned rel = 0; rel < CE_RELATIONS; rel++) {
        double tg[MANY][2], u[2] = {0.1, 0.1};
        ce_standard s[MANY];
        simulate((ce_relation)rel, 0, 0, 1, tg, s);
        ce_fit_options o = ce_fit_options_default();
        o.relation = (ce_relation)rel;
        o.scatter = CE_SCATTER_STATED;
        for (size_t i = 0; i < MANY; i++) s[i].tg_u_K = u;
        ce_fit f = fitted(MANY, s, o);
        for (size_t j = 0; j < f.p; j++) assert_digits(f.parameter[j].value, truth[rel][j], 1e-9);
        assert_true(isinf(f.parameter[0].nu) && isinf(f.run_nu));
        ce_fit_free(&f);
    }
}

/* The order of the standards is nothing to the fit, nor is the unit of temperature difference. */
static void order_and_scale(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES], reversed[FF8_SAMPLES];
    ff8_standards(ff8b_mn, ff8b_tg, 0.05, s);
    for (size_t i = 0; i < 8; i++) reversed[i] = s[7 - i];
    ce_fit a = fitted(8, s, ce_fit_options_default()),
           b = fitted(8, reversed, ce_fit_options_default());
    for (size_t j = 0; j < 2; j++) {
        assert_digits(a.parameter[j].value, b.parameter[j].value, 1e-13);
        assert_digits(a.parameter[j].u, b.parameter[j].u, 1e-11);
        assert_digits(a.parameter[j].high, b.parameter[j].high, 1e-12);
    }
    for (size_t i = 0; i < 8; i++) {
        assert_string_equal(a.point[i].name, b.point[7 - i].name);
        assert_digits(a.point[i].influence, b.point[7 - i].influence, 1e-8);
        assert_digits(a.point[i].shift_k, b.point[7 - i].shift_k, 1e-7);
    }
    ce_fit_free(&a);
    ce_fit_free(&b);
}

static void diagnostics_add_up(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8_standards(ff8b_mn, ff8b_tg, 0.05, s);
    ce_fit f = fitted(8, s, ce_fit_options_default());
    double h = 0;
    for (size_t i = 0; i < 8; i++) {
        h += f.point[i].leverage;
        assert_close(f.point[i].residual_K, f.point[i].tg_K - f.point[i].fitted_K, 1e-12);
        /* Leaving one out must give what a fit without it gives. */
        ce_standard rest[FF8_SAMPLES];
        for (size_t k = 0, n = 0; k < 8; k++)
            if (k != i) rest[n++] = s[k];
        ce_fit_options o = ce_fit_options_default();
        o.compare = o.diagnose = false;
        o.excess = CE_EXCESS_NONE;
        o.scatter = CE_SCATTER_STATED;
        double u[3] = {f.run_sd_K, f.run_sd_K, f.run_sd_K};
        for (size_t k = 0; k < 7; k++) rest[k].tg_u_K = u;
        ce_fit g = fitted(7, rest, o);
        assert_close(g.parameter[0].value - f.parameter[0].value, f.point[i].shift_tg_inf_K, 1e-9);
        assert_close(g.parameter[1].value - f.parameter[1].value, f.point[i].shift_k, 1e-4);
        ce_fit_free(&g);
    }
    assert_close(h, 2, 1e-10);
    assert_true(f.n_runs == 24 && f.run[23].point == 7 && f.point[7].first_run == 21);
    assert_true(f.rcond > 1e-3 && f.rcond < 1);
    ce_fit_free(&f);
}

/* ---- common to all standards ---------------------------------------------------------------- */

/* One calibration of molar masses wrong by u: K and every Mn scale with it. A temperature offset:
 * Tg_inf moves with it, K does not. */
static void common_uncertainties(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8_standards(ff8b_mn, ff8b_tg, 0.05, s);
    ce_fit_options o = ce_fit_options_default();
    ce_fit without = fitted(8, s, o);
    o.mn_common_u_rel = 0.08;
    o.tg_common_u_K = 0.7;
    ce_fit with = fitted(8, s, o);
    const ce_parameter *a = with.parameter, *a0 = without.parameter;
    assert_true(a[0].value == a0[0].value && a[1].value == a0[1].value);
    assert_digits(a[0].u_common, 0.7, 1e-9);
    assert_digits(a[0].u, hypot(a0[0].u, 0.7), 1e-9);
    assert_digits(a[1].u_common, 0.08 * a[1].value, 1e-9);
    assert_digits(a[1].u, hypot(a0[1].u, 0.08 * a[1].value), 1e-9);
    assert_true(a[1].low < a0[1].low && a[1].high > a0[1].high && a[0].nu > a0[0].nu);
    /* Tg at a stated Mn of the same scale does not care; a Tg of the same scale neither. */
    ce_molar m = {20000, (double)NAN, 2};
    ce_prediction p;
    assert_int_equal(ce_fit_predict(&with, &m, &p), CE_OK);
    assert_digits(p.common_tg_K, 0.7, 1e-9);
    assert_close(p.common_mn_K, p.dtg_dz / 20000 * 0.08, 1e-9);
    ce_prediction q;
    assert_int_equal(ce_fit_predict(&without, &m, &q), CE_OK);
    assert_true(p.var_fit == q.var_fit && q.common_mn_K == 0 && q.common_tg_K == 0);
    ce_fit_free(&with);
    ce_fit_free(&without);
}

/* ---- resampling ----------------------------------------------------------------------------- */

static void resampling(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8_standards(ff8b_mn, ff8b_tg, 0.05, s);
    ce_fit_options o = ce_fit_options_default();
    o.resamples = 2000;
    ce_fit a = fitted(8, s, o), b = fitted(8, s, o);
    o.seed = 2;
    ce_fit c = fitted(8, s, o);
    assert_true(a.n_resampled > 1990);
    assert_memory_equal(a.resampled, b.resampled, sizeof a.resampled);
    assert_true(a.resampled[0].bca_low != c.resampled[0].bca_low);
    for (size_t j = 0; j < 2; j++) {
        const ce_resampled *r = &a.resampled[j];
        assert_true(r->bca_low < a.parameter[j].value && a.parameter[j].value < r->bca_high);
        assert_true(r->percentile_low < r->percentile_high && r->sd > 0);
        /* Two seeds agree to the noise of 2000 draws. */
        assert_close(r->sd, c.resampled[j].sd, 0.15 * r->sd);
    }
    /* Neither comparison nor diagnostics change it. */
    o = ce_fit_options_default();
    o.resamples = 2000;
    o.compare = o.diagnose = false;
    ce_fit d = fitted(8, s, o);
    for (size_t j = 0; j < 2; j++)
        assert_digits(d.resampled[j].bca_high, a.resampled[j].bca_high, 1e-9);
    ce_fit_free(&a);
    ce_fit_free(&b);
    ce_fit_free(&c);
    ce_fit_free(&d);
}

/* ---- comparison ----------------------------------------------------------------------------- */

static void comparison(void **state)
{
    (void)state;
    double tg[MANY][2];
    ce_standard s[MANY];
    for (unsigned rel = 0; rel < CE_RELATIONS; rel++) {
        if (rel == CE_OGAWA) continue; /* constant dispersity: Flory-Fox with another K */
        simulate((ce_relation)rel, 0, 0.2, 7, tg, s);
        ce_fit_options o = ce_fit_options_default();
        o.relation = (ce_relation)rel;
        ce_fit f = fitted(MANY, s, o);
        double sum = 0;
        const ce_comparison *own = &f.comparison[rel];
        for (size_t i = 0; i < f.n_comparison; i++) {
            sum += f.comparison[i].weight;
            if (i != CE_OGAWA && f.comparison[i].fitted)
                assert_true(own->aicc <= f.comparison[i].aicc + 2);
        }
        assert_close(sum, 1, 1e-12);
        assert_true(own->plausible && own->fitted);
        assert_digits(own->mid_mn_g_mol, sqrt(1500 * 3e5), 0.05);
        assert_true(f.spread_tg_inf_low_K <= f.parameter[0].value);
        assert_true(f.spread_tg_inf_high_K >= f.parameter[0].value - 1e-9);
        ce_fit_free(&f);
    }
    for (size_t i = 0; i < MANY; i++) s[i].molar.mw_g_mol = (double)NAN;
    ce_fit f = fitted(MANY, s, ce_fit_options_default());
    assert_false(f.comparison[CE_OGAWA].fitted);
    assert_true(isnan(f.comparison[CE_OGAWA].aicc) && f.comparison[CE_OGAWA].weight == 0);
    ce_fit_free(&f);
}

/* Over a narrow range relations cannot be told apart, and the fit says how far they spread. */
static void narrow_range(void **state)
{
    (void)state;
    ce_standard s[EXERCISE_SAMPLES];
    exercise_standards(s);
    ce_fit f = fitted(5, s + 2, ce_fit_options_default());
    /* Exercise 3-1 with M >= 4000: 1.09, 1.08, 1.15 K about the curve; Tg_inf 380.3 and up. */
    assert_close(f.comparison[CE_FLORY_FOX].residual_sd_K, 1.09, 0.005);
    assert_close(f.comparison[CE_UEBERREITER_KANIG].residual_sd_K, 1.08, 0.005);
    assert_close(f.comparison[CE_ODRISCOLL_SANAYEI].residual_sd_K, 1.15, 0.005);
    assert_close(f.parameter[0].value, 380.3, 0.1);
    assert_true(f.spread_tg_inf_high_K - f.spread_tg_inf_low_K > 3);
    bool said = false;
    for (size_t i = 0; i < f.warnings.n; i++)
        said |= strstr(f.warnings.item[i].at.message,
                       "relations describe these standards about as well") != NULL;
    assert_true(said);
    ce_fit_free(&f);
}

/* ---- heating rate --------------------------------------------------------------------------- */

static void heating_rate(void **state)
{
    (void)state;
    /* Parallel lines by hand: samples at (1, 10) and (10, 100) K/min, slopes 4 and 4.4 K a decade. */
    static const size_t sample[] = {0, 0, 1, 1};
    static const double tg[] = {370, 374, 350, 354.4}, rate[] = {1, 10, 10, 100};
    ce_rate_slope r;
    assert_int_equal(ce_rate_slope_fit(4, sample, tg, rate, 10, &r, NULL), CE_OK);
    assert_close(r.slope_K_decade, 4.2, 1e-12);
    assert_true(r.nu == 1 && r.n_samples == 2 && r.n_runs == 4);
    /* Residuals +-0.1: RSS 0.04, sum of squares of the decades 1. */
    assert_close(r.run_sd_K, 0.2, 1e-12);
    assert_close(r.u_K_decade, 0.2, 1e-12);
    double decades;
    assert_close(ce_rate_reduce(&r, 370, 1, &decades), 374.2, 1e-12);
    assert_true(decades == -1);
    assert_true(isnan(r.parallel_F));
}

static void heating_rate_refusals(void **state)
{
    (void)state;
    static const size_t sample[] = {0, 0, 1, 1};
    static const double tg[] = {370, 374, 350, 354}, same[] = {10, 10, 10, 10},
                        bad[] = {10, 0, 10, 10};
    static const double two[] = {10, 20, 10, 20};
    ce_rate_slope r;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_rate_slope_fit(4, sample, tg, same, 10, &r, &err), CE_E_NOFIT);
    assert_non_null(strstr(err.message, "no sample was measured at two heating rates"));
    assert_int_equal(ce_rate_slope_fit(4, sample, tg, bad, 10, &r, NULL), CE_E_DOMAIN);
    assert_int_equal(ce_rate_slope_fit(4, sample, tg, two, -1, &r, NULL), CE_E_DOMAIN);
    assert_int_equal(ce_rate_slope_fit(2, sample, tg, two, 10, &r, NULL), CE_E_NOFIT);
    assert_int_equal(ce_rate_slope_fit(0, sample, tg, two, 10, &r, NULL), CE_E_NOFIT);
}

/* A slope that shifts all standards alike moves Tg_inf and leaves K; one that shifts the low molar
 * masses moves K too. */
static void rate_uncertainty_is_carried(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8_standards(ff8b_mn, ff8b_tg, 0.05, s);
    ce_fit_options o = ce_fit_options_default();
    o.rate_slope_u_K = 0.3;
    for (size_t i = 0; i < 8; i++) s[i].rate_decades = 1;
    ce_fit all = fitted(8, s, o);
    assert_digits(all.parameter[0].u_common, 0.3, 1e-9);
    assert_close(all.parameter[1].u_common, 0, 1e-6);
    assert_true(all.run_nu == 15); /* the slope used up one */
    for (size_t i = 1; i < 8; i++) s[i].rate_decades = 0;
    ce_fit low = fitted(8, s, o);
    assert_true(low.parameter[1].u_common > 10);
    ce_fit_free(&all);
    ce_fit_free(&low);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_relation_finds_its_truth),
        cmocka_unit_test(exact_data),
        cmocka_unit_test(order_and_scale),
        cmocka_unit_test(diagnostics_add_up),
        cmocka_unit_test(common_uncertainties),
        cmocka_unit_test(resampling),
        cmocka_unit_test(comparison),
        cmocka_unit_test(narrow_range),
        cmocka_unit_test(heating_rate),
        cmocka_unit_test(heating_rate_refusals),
        cmocka_unit_test(rate_uncertainty_is_carried),
    };
    return cmocka_run_group_tests_name("fit/fit", tests, NULL, NULL);
}
