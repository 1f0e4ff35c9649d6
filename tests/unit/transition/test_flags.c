/* SPDX-License-Identifier: GPL-3.0-or-later
 * Each doubt is raised where there is reason for it, with its number, and not on a clean run; what
 * follows or precedes a step does not move it; several steps, coolings and refusals. Runs are
 * simulated, their truth is the simulator's. */
#include "check.h"

#include <chainend/simulate.h>
#include <chainend/transition.h>

#include <stdlib.h>
#include <string.h>

enum { TG = 370 };
static const ce_programme_step heat = {.to_K = 430.0, .rate_K_min = 10.0};

/* A sharp step at 370 K, heated from 300 K at 10 K/min, 0.1 K a point; the step is 0.5 mW high. */
static ce_simulation_config clean(const char *set_name)
{
    const ce_glass_set *set = ce_glass_set_find(set_name);
    ce_simulation_config c = ce_simulation_config_default();
    c.n_glasses = 1;
    c.glass[0] = (ce_glass){.ln_a = set->ln_a,
                            .h_K = set->h_K,
                            .x = set->x,
                            .beta = set->beta,
                            .ref_K = TG,
                            .cp_glass = 1.3,
                            .slope_glass = 0.003,
                            .step = 0.3,
                            .slope_step = -0.0005,
                            .share = 1.0};
    ce_glass_move(&c.glass[0], ce_glass_temperature(&c.glass[0], 100.0), TG);
    c.glass[0].ref_K = TG;
    c.programme = (ce_programme){.start_K = 300.0, .n = 1, .step = &heat, .prior_rate_K_min = 10.0};
    c.instrument.interval_s = 0.6;
    c.instrument.noise_mW = 0.0005;
    return c;
}

static ce_simulation *simulate(const ce_simulation_config *c)
{
    ce_simulation *s = NULL;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_simulate_run(c, &s, &err), CE_OK);
    return s;
}

/* The run, each point changed by a function of temperature when there is one. */
static ce_run *run_of(const ce_simulation *s, double (*more_mW)(double T_K))
{
    const size_t n = ce_simulation_size(s);
    const double *T = ce_simulation_temperature_K(s);
    double *y = calloc(n, sizeof *y);
    assert_non_null(y);
    for (size_t i = 0; i < n; i++)
        y[i] = ce_simulation_signal_mW(s)[i] + (more_mW == NULL ? 0.0 : more_mW(T[i]));
    ce_run *run = NULL;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_run_from_arrays(n, ce_simulation_time_s(s), T, y, CE_SIGNAL_POWER, 0.010,
                                        (double)NAN, &run, &err),
                     CE_OK);
    free(y);
    return run;
}

static ce_transition strongest(const ce_run *run, const ce_transition_options *o)
{
    ce_transitions found;
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_transition_find(run, o, &found, &err);
    if (st != CE_OK) print_error("%s\n", err.message);
    assert_int_equal(st, CE_OK);
    const ce_transition t = found.item[0];
    ce_transitions_free(&found);
    return t;
}

static ce_transition read_step(const ce_simulation_config *c, double (*more_mW)(double T_K))
{
    ce_simulation *s = simulate(c);
    ce_run *run = run_of(s, more_mW);
    const ce_transition t = strongest(run, NULL);
    ce_run_free(run);
    ce_simulation_free(s);
    return t;
}

static const ce_flag *flag_of(const ce_transition *t, ce_flag_code code)
{
    for (size_t i = 0; i < t->n_flags; i++)
        if (t->flags[i].code == code) return &t->flags[i];
    return NULL;
}

/* The flag is there, its number between two limits. */
static void expect_flag(const ce_transition *t, ce_flag_code code, double low, double high)
{
    const ce_flag *f = flag_of(t, code);
    if (f == NULL || !(f->number >= low && f->number <= high)) {
        print_error("flag '%s' is %s; there are:\n", ce_flag_name(code),
                    f == NULL ? "missing" : "off");
        for (size_t i = 0; i < t->n_flags; i++)
            print_error("  %s %g\n", ce_flag_name(t->flags[i].code), t->flags[i].number);
    }
    assert_non_null(f);
    assert_true(f->number >= low && f->number <= high);
    char text[256];
    ce_flag_text(f, text, sizeof text);
    assert_int_equal(strncmp(text, ce_flag_name(code), strlen(ce_flag_name(code))), 0);
}

static void a_clean_run_is_flagged_for_its_history_only(void **state)
{
    (void)state;
    const ce_simulation_config c = clean("ps");
    const ce_transition t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_FIRST_HEATING, 1.0, 1.0);
    assert_int_equal(t.n_flags, 1);
    for (int k = 0; k < CE_CONSTRUCTIONS; k++)
        assert_true(t.tg[k].u_K > 0.0 && t.tg[k].u_noise_K > 0.0);
}

static void ageing_and_noise(void **state)
{
    (void)state;
    ce_simulation_config c = clean("ps");
    c.programme.prior_age_K = TG - 15.0;
    c.programme.prior_age_s = 2.0e4;
    ce_transition t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_OVERSHOOT, 1.5, 100.0);
    c = clean("ps");
    c.instrument.noise_mW = 0.06;
    t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_SMALL_STEP, 6.5, 10.0); /* 0.5 mW over 0.06 mW */
}

static double parabola(double T)
{
    const double t = (T - TG - 10.0) / 50.0;
    return t > 0.0 ? 0.3 * t * t : 0.0;
}

static void baselines(void **state)
{
    (void)state;
    ce_simulation_config c = clean("ps");
    c.programme.start_K = TG - 19.0;
    ce_transition t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_SHORT_WINDOW, 3.0, 8.0);
    c = clean("ps");
    c.instrument.noise_mW = 0.02; /* wandering: 15 s are 2.5 K */
    c.instrument.noise_time_s = 15.0;
    t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_ROUGH, 0.03, 0.3);
    c = clean("ps");
    c.instrument.transient_mW = 5.0;
    c.instrument.transient_s = 60.0;
    t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_TRANSIENT, 0.02, 3.0);
}

static void neighbours_and_ends(void **state)
{
    (void)state;
    ce_simulation_config c = clean("ps");
    c.n_peaks = 1;
    c.peak[0] = (ce_peak){.centre_K = TG + 38.0, .sd_K = 3.0, .enthalpy_J_g = -8.0};
    ce_transition t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_PEAK_ADJACENT, 3.0, 25.0);
    c = clean("ps");
    const ce_programme_step short_heat = {.to_K = TG + 14.6, .rate_K_min = 10.0};
    c.programme.step = &short_heat;
    t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_CUT_OFF, 0.2, 10.0);
}

/* A broad glass annealed far below: the half line is met on a shoulder, or two kelvins on, and the
 * uncertainty of the half-step says so; that of the midpoint need not. */
static void a_shoulder_near_half_the_height(void **state)
{
    (void)state;
    ce_simulation_config c = clean("pvc");
    c.glass[0].h_K = 250000.0;
    c.glass[0].x = 0.0818;
    c.glass[0].beta = 0.237;
    c.glass[0].ln_a = -858.97;
    c.glass[0].ref_K = 289.487;
    const ce_programme_step warm = {.to_K = 343.0, .rate_K_min = 10.0};
    c.programme.step = &warm;
    c.programme.start_K = 212.0;
    c.programme.prior_age_K = 274.5;
    c.programme.prior_age_s = 6902.0;
    c.instrument.interval_s = 3.0;
    c.instrument.noise_mW = 0.0;
    ce_transition t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_SHOULDER, 2.0, 6.0);
    assert_true(t.tg[CE_HALF_STEP].u_K > 0.4);
    assert_true(t.tg[CE_MIDPOINT].u_K < 0.4);
    c = clean("pvc");
    t = read_step(&c, NULL);
    assert_null(flag_of(&t, CE_FLAG_SHOULDER));
}

/* Two glasses of a blend, from overlapping to clear of each other: both are reported, each within the
 * fourfold uncertainty of the half-step that it has alone. */
static void both_glasses_of_a_blend(void **state)
{
    (void)state;
    static const double apart_K[] = {25.0, 30.0, 40.0, 60.0};
    for (size_t k = 0; k < sizeof apart_K / sizeof *apart_K; k++) {
        ce_simulation_config c = clean("ps");
        c.n_glasses = 2;
        c.glass[1] = c.glass[0];
        c.glass[0].share = 0.6;
        c.glass[1].share = 0.4;
        ce_glass_move(&c.glass[1], TG, TG + apart_K[k]);
        const ce_programme_step far = {.to_K = TG + 110.0, .rate_K_min = 10.0};
        c.programme.step = &far;
        c.programme.start_K = TG - 80.0;
        ce_simulation *s = simulate(&c);
        ce_run *run = run_of(s, NULL);
        ce_transitions found;
        ce_error err = CE_ERROR_INIT;
        assert_int_equal(ce_transition_find(run, NULL, &found, &err), CE_OK);
        assert_int_equal(found.n, 2);
        size_t n;
        const ce_ramp_truth *truth = ce_simulation_truth(s, &n);
        assert_int_equal(n, 2);
        for (size_t i = 0; i < 2; i++) {
            const ce_reading *r = &found.item[i].tg[CE_HALF_STEP];
            assert_close(r->value_K, truth[i].tg_K[CE_HALF_STEP], 4.0 * r->u_K);
            assert_true(r->u_K < 1.5);
        }
        ce_transitions_free(&found);
        ce_run_free(run);
        ce_simulation_free(s);
    }
}

static void widths(void **state)
{
    (void)state;
    ce_simulation_config c = clean("pvc");
    c.glass[0].h_K = 60000.0; /* a quarter of the enthalpy: some four times the width */
    c.glass[0].ln_a = log(100.0) - c.glass[0].h_K / TG;
    c.programme.start_K = 180.0;
    const ce_programme_step far = {.to_K = 540.0, .rate_K_min = 10.0};
    c.programme.step = &far;
    ce_transition t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_WIDE, 25.0, 60.0);
    c = clean("ps");
    c.instrument.interval_s = 15.0; /* 2.5 K a point */
    t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_SPARSE, 1.0, 8.0);
    c = clean("ps");
    c.instrument.temperature_noise_K = 0.2;
    t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_NOT_MONOTONE, 100.0, 700.0);
    c = clean("ps");
    c.glass[0].step = 1.1;
    t = read_step(&c, NULL);
    expect_flag(&t, CE_FLAG_STEP_IMPLAUSIBLE, 1.0, 1.2);
}

/* Aged first heating, then erased: the second is taken and the difference named. */
static void heatings(void **state)
{
    (void)state;
    static const ce_programme_step steps[] = {{.to_K = 430.0, .rate_K_min = 10.0},
                                              {.to_K = 300.0, .rate_K_min = 10.0},
                                              {.to_K = 430.0, .rate_K_min = 10.0}};
    ce_simulation_config c = clean("ps");
    c.programme.n = 3;
    c.programme.step = steps;
    c.programme.prior_age_K = TG - 15.0;
    c.programme.prior_age_s = 2.0e4;
    ce_simulation *s = simulate(&c);
    ce_run *run = run_of(s, NULL);
    ce_transition t = strongest(run, NULL);
    size_t n;
    const ce_ramp_truth *truth = ce_simulation_truth(s, &n);
    assert_int_equal(n, 3);
    const double off = truth[0].tg_K[CE_HALF_STEP] - truth[2].tg_K[CE_HALF_STEP];
    expect_flag(&t, CE_FLAG_HEATINGS_DIFFER, off - 0.5, off + 0.5);
    assert_null(flag_of(&t, CE_FLAG_FIRST_HEATING));
    assert_close(t.tg[CE_HALF_STEP].value_K, truth[2].tg_K[CE_HALF_STEP], 0.1);
    /* the cooling between them, mirrored: its onset is the hot end */
    const ce_transition_options cooling = {.segment = 2,
                                           .glass = {(double)NAN, (double)NAN},
                                           .liquid = {(double)NAN, (double)NAN},
                                           .ensemble = true};
    t = strongest(run, &cooling);
    assert_close(t.tg[CE_HALF_STEP].value_K, truth[1].tg_K[CE_HALF_STEP], 0.2);
    assert_close(t.step_height, truth[1].step_J_gK, 0.01);
    ce_run_free(run);
    ce_simulation_free(s);
}

static void sign_and_windows(void **state)
{
    (void)state;
    const ce_simulation_config c = clean("ps");
    ce_simulation *s = simulate(&c);
    ce_layout layout = ce_layout_default();
    layout.state_sign = false;
    layout.exo_up = true;
    char *bytes = NULL;
    size_t n = 0;
    ce_run *run = NULL;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_simulation_write(s, &layout, NULL, &bytes, &n, &err), CE_OK);
    assert_int_equal(ce_run_read_memory(bytes, n, "memory", NULL, &run, &err), CE_OK);
    assert_int_equal(ce_run_settle_sign(run, &err), CE_OK);
    ce_transition t = strongest(run, NULL);
    expect_flag(&t, CE_FLAG_SIGN_GUESSED, 0.0, 0.0);
    assert_true(t.step_height > 0.25);
    ce_run_free(run);
    free(bytes);

    run = run_of(s, NULL);
    ce_transition_options o = ce_transition_options_default();
    o.glass = (ce_window){310.0, 345.0};
    o.liquid = (ce_window){395.0, 425.0};
    t = strongest(run, &o);
    assert_true(t.windows_given && t.glass.low_K == 310.0 && t.liquid.high_K == 425.0);
    assert_null(flag_of(&t, CE_FLAG_NO_OVERLAP));
    o.liquid = (ce_window){350.0, 360.0};
    ce_transitions found;
    if (ce_transition_find(run, &o, &found, &err) == CE_OK) {
        expect_flag(&found.item[0], CE_FLAG_NO_OVERLAP, 300.0, 430.0);
        ce_transitions_free(&found);
    } else {
        assert_int_equal(err.code, CE_E_REFUSED);
    }
    ce_run_free(run);
    ce_simulation_free(s);
}

static void windows_over_a_bend(void **state)
{
    (void)state;
    const ce_simulation_config c = clean("ps");
    ce_simulation *s = simulate(&c);
    ce_run *run = run_of(s, parabola);
    ce_transition_options o = ce_transition_options_default();
    o.liquid = (ce_window){TG + 14.0, TG + 55.0};
    const ce_transition t = strongest(run, &o);
    expect_flag(&t, CE_FLAG_CURVED_BASELINE, 0.03, 2.0);
    ce_run_free(run);
    ce_simulation_free(s);
}

/* A blend: two steps 45 K apart, both read. */
static void two_steps(void **state)
{
    (void)state;
    ce_simulation_config c = clean("ps");
    c.n_glasses = 2;
    c.glass[1] = c.glass[0];
    ce_glass_move(&c.glass[1], TG, TG + 45.0);
    c.glass[0].share = 0.35;
    c.glass[1].share = 0.65;
    const ce_programme_step far = {.to_K = 470.0, .rate_K_min = 10.0};
    c.programme.step = &far;
    ce_simulation *s = simulate(&c);
    ce_run *run = run_of(s, NULL);
    ce_transitions found;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_transition_find(run, NULL, &found, &err), CE_OK);
    assert_int_equal(found.n, 2);
    assert_true(fabs(found.item[0].tg[CE_HALF_STEP].value_K -
                     found.item[1].tg[CE_HALF_STEP].value_K) > 40.0);
    for (size_t i = 0; i < 2; i++) {
        const bool hot = found.item[i].tg[CE_HALF_STEP].value_K > TG + 20.0;
        assert_close(found.item[i].step_height, hot ? 0.65 * 0.3 : 0.35 * 0.3, 0.02);
    }
    ce_transitions_free(&found);
    ce_run_free(run);
    ce_simulation_free(s);
}

/* Cold crystallisation and melting may follow (common practice): they must not move the step. */
static void later_events(void **state)
{
    (void)state;
    ce_simulation_config c = clean("pvac");
    const ce_programme_step far = {.to_K = 540.0, .rate_K_min = 10.0};
    c.programme.step = &far;
    c.n_peaks = 2;
    c.peak[0] = (ce_peak){.centre_K = TG + 60.0, .sd_K = 4.0, .enthalpy_J_g = -30.0};
    c.peak[1] = (ce_peak){.centre_K = TG + 130.0, .sd_K = 5.0, .enthalpy_J_g = 40.0};
    ce_simulation *s = simulate(&c);
    ce_run *run = run_of(s, NULL);
    const ce_transition t = strongest(run, NULL);
    size_t n;
    assert_close(t.tg[CE_HALF_STEP].value_K, ce_simulation_truth(s, &n)[0].tg_K[CE_HALF_STEP], 0.3);
    ce_run_free(run);
    ce_simulation_free(s);
}

static void no_step_is_refused_with_what_would_have_been_seen(void **state)
{
    (void)state;
    ce_simulation_config c = clean("ps");
    c.glass[0].step = 0.004;
    c.glass[0].slope_step = 0.0;
    c.instrument.noise_mW = 0.01;
    ce_simulation *s = simulate(&c);
    ce_run *run = run_of(s, NULL);
    ce_transitions found;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_transition_find(run, NULL, &found, &err), CE_E_REFUSED);
    assert_non_null(strstr(err.message, "would have been seen"));
    assert_non_null(strstr(err.message, "J/(g K)"));
    assert_int_equal(found.n, 0);
    ce_run_free(run);
    ce_simulation_free(s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_clean_run_is_flagged_for_its_history_only),
        cmocka_unit_test(ageing_and_noise),
        cmocka_unit_test(baselines),
        cmocka_unit_test(neighbours_and_ends),
        cmocka_unit_test(a_shoulder_near_half_the_height),
        cmocka_unit_test(both_glasses_of_a_blend),
        cmocka_unit_test(widths),
        cmocka_unit_test(heatings),
        cmocka_unit_test(sign_and_windows),
        cmocka_unit_test(windows_over_a_bend),
        cmocka_unit_test(two_steps),
        cmocka_unit_test(later_events),
        cmocka_unit_test(no_step_is_refused_with_what_would_have_been_seen),
    };
    return cmocka_run_group_tests_name("transition/flags", tests, NULL, NULL);
}
