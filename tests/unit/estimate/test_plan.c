/* SPDX-License-Identifier: GPL-3.0-or-later
 * Designs against closed forms and against numbers computed independently (numpy, for this project):
 * eight standards of three runs, K = 180000 K g/mol, run s.d. 0.5 K. Criteria: Atkinson, Donev and Tobias
 * (2007), ch 10 and 11, from memory. */
#include "check.h"

#include "base/counter_rng.h"
#include "estimate/design.h"
#include "estimate/fits.h"

#include <gsl/gsl_errno.h>
#include <stdlib.h>

enum { N = 8 };
static ce_fit_point points[N];

/* A fit known exactly; certificates of relative standard uncertainty r. */
static ce_fit known(double r)
{
    ce_fit fit = ordinary_fit(388.0, 180000.0, 1.0, 1.0, 0.0, 0.5, 16.0);
    memset(points, 0, sizeof points);
    for (size_t i = 0; i < N; i++) {
        points[i].name = (char *)"S";
        points[i].molar = (ce_molar){ff8_exact_mn[i], ff8_exact_mn[i], 2.0};
        points[i].mn_u_g_mol = r * ff8_exact_mn[i];
        points[i].n = 3;
    }
    fit.n_points = N;
    fit.point = points;
    return fit;
}

static ce_design of(const ce_fit *fit, ce_design_point *room)
{
    ce_design d = {.fit = fit, .o = ce_plan_options_default(), .level = 0.95, .point = room};
    for (size_t i = 0; i < N; i++)
        assert_int_equal(ce_design_make_point(fit, &points[i].molar, points[i].mn_u_g_mol,
                                              (double)points[i].n, i, &room[d.n++]),
                         CE_OK);
    return d;
}

/* Variance of Tg at z by a covariance of (a, K). */
static double variance_at(const double *C, double z)
{
    return C[0] - 2.0 * z * C[1] + z * z * C[3];
}

/* Relative drop of the variance of a, K and Tg(1e4), Tg(3000) by a new standard. */
static void a_further_standard(void **state)
{
    (void)state;
    static const double drop[4][N] = {
        {.044699, .031486, .011596, .000715, .061250, .158117, .222919, .248371},
        {.221139, .205949, .172466, .105392, .016642, .002402, .026961, .045884},
        {.203747, .199159, .185187, .145089, .060713, .010745, .000005, .001961},
        {.221775, .209231, .180334, .118524, .026599, .000055, .014454, .028863}};
    const ce_fit fit = known(0.05);
    ce_design_point room[N + 1];
    ce_design d = of(&fit, room);
    double C[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
    assert_true(ce_design_covariance(&d, C));
    assert_digits(sqrt(C[0]), .17541539, 1e-7);
    assert_digits(sqrt(C[3]), 4985.0211, 1e-7);
    for (size_t k = 0; k < N; k++) {
        double D[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
        const ce_molar molar = {ff8_exact_mn[k], ff8_exact_mn[k], 2.0};
        assert_int_equal(
            ce_design_make_point(&fit, &molar, 0.05 * ff8_exact_mn[k], 3.0, SIZE_MAX, &room[N]),
            CE_OK);
        d.n = N + 1;
        assert_true(ce_design_covariance(&d, D));
        d.n = N;
        assert_close(1.0 - D[0] / C[0], drop[0][k], 6e-7);
        assert_close(1.0 - D[3] / C[3], drop[1][k], 6e-7);
        assert_close(1.0 - variance_at(D, 1e-4) / variance_at(C, 1e-4), drop[2][k], 6e-7);
        assert_close(1.0 - variance_at(D, 1.0 / 3000) / variance_at(C, 1.0 / 3000), drop[3][k],
                     6e-7);
    }
}

/* Exact Mn: a further run of each standard, relative drop of var(a) and gain of the determinant. */
static void a_further_run(void **state)
{
    (void)state;
    static const double drop[N] = {.01233090, .00407319, .02499197, .04172041,
                                   .05227904, .05699482, .05956979, .06070887};
    static const double gain[N] = {1.26577788, 1.06688807, 1.04166897, 1.04761587,
                                   1.05602484, 1.06065613, 1.06339042, 1.06464449};
    const ce_fit fit = known(0.0);
    ce_design_point room[N + 1];
    ce_design d = of(&fit, room);
    double C[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS], D[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
    assert_true(ce_design_covariance(&d, C));
    for (size_t k = 0; k < N; k++) {
        room[k].runs = 4.0;
        assert_true(ce_design_covariance(&d, D));
        room[k].runs = 3.0;
        assert_close(1.0 - D[0] / C[0], drop[k], 6e-9);
        assert_close((C[0] * C[3] - C[1] * C[1]) / (D[0] * D[3] - D[1] * D[1]), gain[k], 2e-8);
    }
}

/* Half the runs at each end: var(K)/s^2 N = 4/(z2 - z1)^2. */
static void two_points_at_the_ends(void **state)
{
    (void)state;
    const ce_fit fit = known(0.0);
    ce_design_point room[N + 1];
    ce_design d = of(&fit, room);
    room[1] = room[N - 1];
    room[0].runs = room[1].runs = 50.0;
    d.n = 2;
    double C[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
    assert_true(ce_design_covariance(&d, C));
    assert_digits(100.0 * C[3] / 0.25, 16215485.79, 1e-9);
}

static void options_and_limits(void **state)
{
    (void)state;
    const ce_fit fit = known(0.05);
    ce_plan plan;
    ce_plan_options o = ce_plan_options_default();
    const double at[] = {10000.0, 60000.0}, far = 300000.0, none = -1.0;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_plan_make(&fit, 2, at, &o, &plan, &err), CE_E_ARG); /* no wish */
    o.want = 0.12;
    o.standard_cost = 1.0;
    assert_int_equal(ce_plan_make(&fit, 0, at, &o, &plan, NULL), CE_E_ARG);
    assert_int_equal(ce_plan_make(&fit, 1, &none, &o, &plan, NULL), CE_E_DOMAIN);
    assert_int_equal(ce_plan_make(&fit, 1, at, &o, &plan, NULL), CE_OK);
    assert_true(plan.met && plan.target[0].then <= 0.12 &&
                plan.target[0].then <= plan.target[0].now);
    for (size_t i = 1; i < plan.n_steps; i++) /* each step gains */
        assert_true(plan.step[i].mean_square < plan.step[i - 1].mean_square);
    ce_plan_free(&plan);
    o.want = 0.01;
    assert_int_equal(ce_plan_make(&fit, 1, &far, &o, &plan, NULL), CE_OK);
    assert_true(!plan.met && !plan.reachable && plan.target[0].floor > 0.01);
    /* a perfect calibration, most runs of the unknown: z 0.5/sqrt(12) Mn/K */
    assert_true(plan.target[0].floor > 1.95 * 0.5 / sqrt(12.0) * far / 180000.0 &&
                plan.target[0].floor < 2.2 * 0.5 / sqrt(12.0) * far / 180000.0);
    ce_plan_free(&plan);
}

/* The plan carried out 400 times: the mean half-width the fits give is what was promised, within 10 %. */
static void promises_are_kept(void **state)
{
    (void)state;
    const ce_fit fit = known(0.05);
    const double at = 20000.0;
    ce_plan plan;
    ce_plan_options o = ce_plan_options_default();
    o.want = 0.08;
    o.standard_cost = 2.0;
    assert_int_equal(ce_plan_make(&fit, 1, &at, &o, &plan, NULL), CE_OK);
    assert_true(plan.met && plan.n_steps > 0);
    enum { MOST = N + 64, RUNS = 64 };
    static double mn[MOST], tg[MOST][RUNS];
    static size_t runs[MOST];
    size_t n = N;
    for (size_t i = 0; i < N; i++) mn[i] = ff8_exact_mn[i], runs[i] = 3;
    for (size_t i = 0; i < plan.n_steps; i++) {
        const ce_plan_step *t = &plan.step[i];
        if (t->kind == CE_PLAN_STANDARD_RUN) runs[t->point]++;
        if (t->kind == CE_PLAN_NEW_STANDARD) mn[n] = t->mn_g_mol, runs[n++] = o.runs_per_standard;
    }
    double sum = 0.0;
    const int series = 400;
    for (int k = 0; k < series; k++) {
        ce_counter_rng rng = ce_counter_rng_start(7, (uint64_t)k);
        ce_standard s[MOST];
        for (size_t i = 0; i < n; i++) {
            const double stated = mn[i] * (1.0 + 0.05 * ce_counter_rng_normal(&rng));
            for (size_t j = 0; j < runs[i]; j++)
                tg[i][j] = 388.0 - 180000.0 / mn[i] + 0.5 * ce_counter_rng_normal(&rng);
            s[i] = (ce_standard){
                "S", {stated, (double)NAN, 2.0}, 0.05 * stated, runs[i], tg[i], NULL, 0.0};
        }
        ce_fit_options options = ce_fit_options_default();
        options.compare = options.diagnose = false;
        options.excess = CE_EXCESS_NONE;
        ce_fit one;
        assert_int_equal(ce_fit_relation(n, s, &options, &one, NULL), CE_OK);
        double mean = 388.0 - 180000.0 / at;
        for (size_t j = 0; j < plan.unknown_runs; j++)
            mean += 0.5 * ce_counter_rng_normal(&rng) / (double)plan.unknown_runs;
        const ce_unknown u = mean_reading(&mean, plan.unknown_runs);
        ce_estimate e;
        assert_int_equal(ce_estimate_mn(&one, &u, 0.0, &e, NULL), CE_OK);
        sum += 0.5 * (e.high_g_mol - e.low_g_mol) / at / series;
        ce_fit_free(&one);
    }
    assert_digits(sum, plan.target[0].then, 0.1);
    ce_plan_free(&plan);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_further_standard),     cmocka_unit_test(a_further_run),
        cmocka_unit_test(two_points_at_the_ends), cmocka_unit_test(options_and_limits),
        cmocka_unit_test(promises_are_kept),
    };
    (void)gsl_set_error_handler_off();
    return cmocka_run_group_tests_name("estimate/plan", tests, NULL, NULL);
}
