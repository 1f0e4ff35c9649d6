/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <chainend/simulate.h>

#include <stddef.h>
#include <string.h>

/* Every number of a configuration, the option that sets it, and values it must not have. */
typedef struct {
    size_t at; /* offset in ce_simulation_config */
    const char *option;
    double bad[3]; /* NaN is tried besides */
    size_t n;
} field;

#define GLASS(member)     offsetof(ce_simulation_config, glass) + offsetof(ce_glass, member)
#define PROGRAMME(member) offsetof(ce_simulation_config, programme) + offsetof(ce_programme, member)
#define INSTRUMENT(member)                                                                         \
    offsetof(ce_simulation_config, instrument) + offsetof(ce_instrument, member)

static const field fields[] = {
    {GLASS(x), "--x:", {0.0, -0.1, 1.01}, 3},
    {GLASS(beta), "--beta:", {0.0, -0.1, 1.01}, 3},
    {GLASS(h_K), "--h:", {0.0, -1.0, 1e9}, 3},
    {GLASS(ln_a), "--ln-a:", {-1e6, 1e6}, 2},
    {GLASS(ref_K), "--reference:", {0.0, -5.0}, 2},
    {GLASS(cp_glass), "--cp-glass:", {-0.1}, 1},
    {GLASS(slope_glass), "--slope-glass:", {2.0, -2.0}, 2},
    {GLASS(step), "--step:", {0.0, -0.3}, 2},
    {GLASS(slope_step), "--slope-step:", {2.0, -2.0, -0.05}, 3}, /* the last: lines cross */
    {GLASS(share), "--second SHARE:", {0.0, 1.5}, 2},
    {PROGRAMME(start_K), "--start:", {0.0, -1.0}, 2},
    {PROGRAMME(prior_rate_K_min), "--prior-rate:", {0.0, -10.0}, 2},
    {PROGRAMME(prior_age_s), "--prior-age:", {-1.0}, 1},
    {INSTRUMENT(mass_g), "--mass:", {0.0, -0.01}, 2},
    {INSTRUMENT(interval_s), "--interval:", {0.0, -1.0}, 2},
    {INSTRUMENT(noise_mW), "--noise:", {-0.001}, 1},
    {INSTRUMENT(noise_time_s), "--noise-time:", {-1.0}, 1},
    {INSTRUMENT(temperature_noise_K), "--temperature-noise:", {-0.1}, 1},
    {INSTRUMENT(temperature_offset_K), "--temperature-offset:", {1e3}, 1},
    {INSTRUMENT(offset_mW), "--offset:", {1e9}, 1},
    {INSTRUMENT(drift_mW_min), "--drift:", {1e9}, 1},
    {INSTRUMENT(transient_mW), "--transient:", {1e9}, 1},
    {INSTRUMENT(transient_s), "--transient", {0.0, -1.0}, 2},
    {INSTRUMENT(lag_s), "--lag:", {-1.0}, 1},
    {offsetof(ce_simulation_config, max_step_K), "--max-step:", {0.0, -0.1, 100.0}, 3},
};

static ce_programme_step steps[2];

static ce_simulation_config sound(void)
{
    const ce_glass_set *set = ce_glass_set_find("ps");
    ce_simulation_config c = ce_simulation_config_default();
    ce_glass *g = &c.glass[0];
    g->ln_a = set->ln_a;
    g->h_K = set->h_K;
    g->x = set->x;
    g->beta = set->beta;
    g->ref_K = 373.15;
    steps[0] = (ce_programme_step){.hold = true, .hold_s = 60.0};
    steps[1] = (ce_programme_step){.to_K = 420.0, .rate_K_min = 10.0};
    c.programme.start_K = 320.0;
    c.programme.n = 2;
    c.programme.step = steps;
    return c;
}

static void expect_refused(const ce_simulation_config *c, const char *option)
{
    ce_simulation *sim = (ce_simulation *)(uintptr_t)c; /* must become NULL */
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_simulate_run(c, &sim, &err);
    if (st != CE_E_DOMAIN || strncmp(err.message, option, strlen(option)) != 0)
        fail_msg("%s: status %d, '%s'", option, (int)st, err.message);
    assert_null(sim);
}

static void every_impossible_number_is_refused_by_its_option(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof fields / sizeof *fields; i++)
        for (size_t k = 0; k <= fields[i].n; k++) {
            ce_simulation_config c = sound();
            double bad = k < fields[i].n ? fields[i].bad[k] : (double)NAN;
            memcpy((char *)&c + fields[i].at, &bad, sizeof bad);
            expect_refused(&c, fields[i].option);
        }
}

static void impossible_programmes_are_refused(void **state)
{
    (void)state;
    ce_simulation_config c = sound();
    const double bad_holds[] = {0.0, -1.0, (double)NAN}, bad_rates[] = {0.0, -10.0, (double)NAN},
                 bad_ends[] = {0.0, -3.0, (double)NAN, 320.0}; /* the last goes nowhere */
    for (size_t i = 0; i < 3; i++) {
        steps[0].hold_s = bad_holds[i];
        expect_refused(&c, "--hold:");
    }
    c = sound();
    for (size_t i = 0; i < 3; i++) {
        steps[1].rate_K_min = bad_rates[i];
        expect_refused(&c, "--ramp");
    }
    c = sound();
    for (size_t i = 0; i < 4; i++) {
        steps[1].to_K = bad_ends[i];
        expect_refused(&c, "--ramp:");
    }
    c = sound();
    c.programme.n = 0;
    expect_refused(&c, "--ramp:");
    c = sound();
    steps[0].unrecorded = steps[1].unrecorded = true;
    expect_refused(&c, "--ramp:");
}

static void impossible_peaks_and_blends_are_refused(void **state)
{
    (void)state;
    ce_simulation_config c = sound();
    c.n_peaks = 1;
    c.peak[0] = (ce_peak){.centre_K = 400.0, .sd_K = 0.0, .enthalpy_J_g = 10.0};
    expect_refused(&c, "--peak");
    c.peak[0] = (ce_peak){.centre_K = -1.0, .sd_K = 2.0, .enthalpy_J_g = 10.0};
    expect_refused(&c, "--peak");
    c.peak[0] = (ce_peak){.centre_K = 400.0, .sd_K = 2.0, .enthalpy_J_g = (double)NAN};
    expect_refused(&c, "--peak");
    c = sound();
    c.n_glasses = 2;
    c.glass[1] = c.glass[0];
    expect_refused(&c, "--second:"); /* two whole glasses */
    c.n_glasses = 3;
    expect_refused(&c, "");
}

static double flat(double mn_g_mol, const void *context)
{
    (void)context;
    return 380.0 - 1.0e5 / mn_g_mol;
}

static void expect_series_refused(const ce_series_plan *plan, const char *named)
{
    ce_error err = CE_ERROR_INIT;
    ce_simulated_series series;
    assert_int_equal(ce_simulate_series(plan, &series, &err), CE_E_DOMAIN);
    assert_non_null(strstr(err.message, named));
    assert_int_equal(series.n, 0);
    assert_null(series.sample);
}

static void impossible_series_are_refused(void **state)
{
    (void)state;
    ce_sample_plan samples[2] = {{"A", CE_STANDARD, 5.0e3, 2}, {"B", CE_STANDARD, 5.0e4, 2}};
    ce_series_plan plan = ce_series_plan_default();
    plan.n = 2;
    plan.sample = samples;
    plan.relation = flat;
    ce_simulated_series series;
    assert_int_equal(ce_simulate_series(&plan, &series, NULL), CE_OK); /* sound as it stands */
    assert_int_equal(series.n, 2);
    ce_simulated_series_free(&series);

    const struct {
        size_t at;
        const char *option;
        double bad[2];
    } numbers[] = {
        {offsetof(ce_series_plan, mn_u_rel), "--mn-u", {-0.01, 0.3}},
        {offsetof(ce_series_plan, mn_common_u_rel), "--mn-common-u", {-0.01, 0.3}},
        {offsetof(ce_series_plan, run_sd_K), "--run-sd", {-1.0, 101.0}},
        {offsetof(ce_series_plan, sample_sd_K), "--sample-sd", {-1.0, (double)NAN}},
        {offsetof(ce_series_plan, mass_spread), "--mass-spread", {-0.1, 0.95}},
        {offsetof(ce_series_plan, programme_tg_K), "--programme-tg", {-5.0, 4000.0}},
    };
    for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++)
        for (size_t k = 0; k < 2; k++) {
            ce_series_plan bad = plan;
            memcpy((char *)&bad + numbers[i].at, &numbers[i].bad[k], sizeof(double));
            expect_series_refused(&bad, numbers[i].option);
        }
    plan.anchor = CE_ONSET;
    expect_series_refused(&plan, "--anchor");
    plan.anchor = CE_HALF_STEP;
    samples[1].runs = 0;
    expect_series_refused(&plan, "--runs");
    samples[1].runs = 2;
    samples[1].mn_g_mol = -1.0;
    expect_series_refused(&plan, "'B'");
    samples[1].mn_g_mol = 10.0; /* a Tg below absolute zero */
    expect_series_refused(&plan, "'B'");
    samples[1].mn_g_mol = 5.0e4;
    samples[1].name = "A";
    expect_series_refused(&plan, "two samples are named 'A'");
    samples[1].name = "";
    expect_series_refused(&plan, "no name");
    plan.n = 0;
    expect_series_refused(&plan, "at least one sample");
}

static void what_is_refused_above_works_unchanged(void **state)
{
    (void)state;
    ce_simulation_config c = sound();
    ce_simulation *sim = NULL;
    assert_int_equal(ce_simulate_run(&c, &sim, NULL), CE_OK);
    ce_simulation_free(sim);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_impossible_number_is_refused_by_its_option),
        cmocka_unit_test(impossible_programmes_are_refused),
        cmocka_unit_test(impossible_peaks_and_blends_are_refused),
        cmocka_unit_test(impossible_series_are_refused),
        cmocka_unit_test(what_is_refused_above_works_unchanged),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
