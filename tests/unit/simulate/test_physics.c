/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <chainend/simulate.h>

static ce_simulation_config flat(const char *material)
{
    const ce_glass_set *set = ce_glass_set_find(material);
    ce_simulation_config c = ce_simulation_config_default();
    ce_glass *g = &c.glass[0];
    g->ln_a = set->ln_a;
    g->h_K = set->h_K;
    g->x = set->x;
    g->beta = set->beta;
    g->ref_K = ce_glass_temperature(g, 100.0);
    return c;
}

static ce_simulation *simulate(const ce_simulation_config *c)
{
    ce_simulation *sim = NULL;
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_simulate_run(c, &sim, &err);
    if (st != CE_OK) fail_msg("%s", err.message);
    return sim;
}

static ce_ramp_truth last_ramp(const ce_simulation_config *c)
{
    ce_simulation *sim = simulate(c);
    size_t n;
    const ce_ramp_truth *t = ce_simulation_truth(sim, &n);
    assert_true(n > 0);
    ce_ramp_truth last = t[n - 1];
    ce_simulation_free(sim);
    return last;
}

/* Far above its transition a glass follows in equilibrium: the fictive temperature is the temperature. */
static void in_equilibrium_fictive_is_temperature(void **state)
{
    (void)state;
    ce_simulation_config c = flat("pvac");
    double tg = c.glass[0].ref_K;
    const ce_programme_step steps[] = {{.to_K = tg + 35.0, .rate_K_min = 10.0}};
    c.programme.start_K = tg + 60.0;
    c.programme.n = 1;
    c.programme.step = steps;
    ce_simulation *sim = simulate(&c);
    const double *t = ce_simulation_temperature_K(sim), *tf = ce_simulation_fictive_K(sim, 0);
    for (size_t i = 0; i < ce_simulation_size(sim); i++) assert_close(tf[i], t[i], 1.0e-4);
    ce_simulation_free(sim);
}

/* ---- memory: Kovacs, Fortschr. Hochpolym. Forsch. 3 (1963) 394 (from memory) ---------------- */

#define LOW_K 303.0

/* From equilibrium at 323 K to LOW_K, there for hold_s; then, with up_K above zero, to up_K for an hour. */
static ce_simulation *two_steps(double beta, double hold_s, double up_K, double interval_s)
{
    ce_simulation_config c = flat("pvac");
    c.glass[0].beta = beta;
    const ce_programme_step steps[] = {
        {.to_K = LOW_K, .rate_K_min = 600.0, .unrecorded = up_K > 0.0},
        {.hold = true, .hold_s = hold_s, .unrecorded = up_K > 0.0},
        {.to_K = up_K, .rate_K_min = 600.0, .unrecorded = true},
        {.hold = true, .hold_s = 3600.0},
    };
    c.programme.start_K = 323.0;
    c.programme.n = up_K > 0.0 ? 4 : 2;
    c.programme.step = steps;
    c.instrument.interval_s = interval_s;
    return simulate(&c);
}

/* Largest excess of the fictive temperature over up_K after a step to the temperature at which the glass, by its
 * fictive temperature, is already in equilibrium. */
static double hump(double beta)
{
    ce_simulation *ageing = two_steps(beta, 36000.0, 0.0, 30.0);
    size_t n = ce_simulation_size(ageing), i = n / 4;
    double up_K = ce_simulation_fictive_K(ageing, 0)[i];
    double cooling_s = (323.0 - LOW_K) / 10.0;
    double hold_s = ce_simulation_time_s(ageing)[i] - cooling_s;
    ce_simulation_free(ageing);
    assert_true(up_K > LOW_K + 0.5);
    ce_simulation *after = two_steps(beta, hold_s, up_K, 5.0);
    const double *tf = ce_simulation_fictive_K(after, 0);
    double most = -1.0;
    for (size_t k = 0; k < ce_simulation_size(after); k++) most = fmax(most, tf[k] - up_K);
    assert_close(tf[0], up_K, 0.05); /* it starts where equilibrium would be */
    ce_simulation_free(after);
    return most;
}

static void two_step_ageing_crosses_over(void **state)
{
    (void)state;
    /* A distribution of relaxation times remembers: the fast part returns before the slow one has. */
    assert_true(hump(0.57) > 0.2);
    /* A single relaxation time (Tool) cannot: no hump. */
    assert_true(hump(1.0) < 0.02);
}

/* ---- instrument ------------------------------------------------------------------------------ */

/* Equal-area temperature from the recorded points from low_K on. */
static double recorded_area_K(const ce_simulation *sim, double low_K)
{
    const ce_simulation_config *c = ce_simulation_get_config(sim);
    const double *t = ce_simulation_temperature_K(sim), *time = ce_simulation_time_s(sim),
                 *p = ce_simulation_signal_mW(sim);
    double mg = 1000.0 * c->instrument.mass_g, area = 0.0, q = 10.0 / 60.0;
    size_t n = ce_simulation_size(sim), first = n - 1;
    while (first > 0 && t[first - 1] < t[first] && t[first - 1] >= low_K) first--;
    for (size_t i = first; i + 1 < n; i++)
        area += (0.5 * (p[i] + p[i + 1]) / mg - c->glass[0].cp_glass * q) * (time[i + 1] - time[i]);
    return t[n - 1] - area / c->glass[0].step;
}

/* A first-order lag moves the equal-area temperature by q times its time constant, exactly (moments of a
 * convolution), whatever the shape of the step. */
static void lag_moves_equal_areas_by_q_tau(void **state)
{
    (void)state;
    ce_simulation_config c = flat("ps");
    double tg = c.glass[0].ref_K;
    const ce_programme_step steps[] = {{.to_K = tg - 90.0, .rate_K_min = 10.0},
                                       {.to_K = tg + 60.0, .rate_K_min = 10.0}};
    c.programme.start_K = tg + 60.0;
    c.programme.n = 2;
    c.programme.step = steps;
    ce_simulation *sharp = simulate(&c);
    c.instrument.lag_s = 6.0;
    ce_simulation *late = simulate(&c);
    double low = tg - 60.0;
    assert_close(recorded_area_K(late, low) - recorded_area_K(sharp, low), 10.0 / 60.0 * 6.0,
                 0.005);
    ce_simulation_free(sharp);
    ce_simulation_free(late);
}

/* 10 mg with a step of 0.3 J/(g K) at 10 K/min: 0.5 mW. */
static void step_height_in_power(void **state)
{
    (void)state;
    ce_simulation_config c = flat("ps");
    double tg = c.glass[0].ref_K;
    const ce_programme_step steps[] = {{.to_K = tg - 90.0, .rate_K_min = 10.0},
                                       {.to_K = tg + 60.0, .rate_K_min = 10.0}};
    c.programme.start_K = tg + 60.0;
    c.programme.n = 2;
    c.programme.step = steps;
    ce_simulation *sim = simulate(&c);
    const double *p = ce_simulation_signal_mW(sim), *t = ce_simulation_temperature_K(sim);
    size_t n = ce_simulation_size(sim), cold = n - 1;
    while (t[cold] > tg - 60.0) cold--;
    assert_close(p[n - 1] - p[cold], 0.5, 0.001);
    ce_simulation_free(sim);
}

/* A broad glass cooled eight times faster than it is heated relaxes as soon as the heating begins, and
 * what it gives off is steeper there than the step: the inflection is that of the step all the same. */
static void inflection_lies_in_the_step(void **state)
{
    (void)state;
    ce_simulation_config c = flat("pvc");
    c.glass[0].h_K = 235000.0;
    c.glass[0].x = 0.09;
    c.glass[0].beta = 0.23;
    ce_glass_move(&c.glass[0], ce_glass_temperature(&c.glass[0], 100.0), 400.0);
    c.instrument.lag_s = 2.7;
    const ce_programme_step heat = {.to_K = 450.0, .rate_K_min = 5.0};
    c.programme = (ce_programme){.start_K = 340.0, .n = 1, .step = &heat, .prior_rate_K_min = 40.0};
    const ce_ramp_truth t = last_ramp(&c);
    assert_true(t.tg_K[CE_INFLECTION] > t.tg_K[CE_HALF_STEP] - 5.0);
    assert_true(t.tg_K[CE_INFLECTION] < t.tg_K[CE_HALF_STEP] + 10.0);
    assert_true(t.tg_K[CE_ONSET] < t.tg_K[CE_INFLECTION]);
    assert_true(t.tg_K[CE_INFLECTION] < t.tg_K[CE_END]);
}

static void temperature_offset_moves_the_truth_as_recorded(void **state)
{
    (void)state;
    ce_simulation_config c = flat("ps");
    double tg = c.glass[0].ref_K;
    const ce_programme_step steps[] = {{.to_K = tg + 60.0, .rate_K_min = 10.0}};
    c.programme.start_K = tg - 90.0;
    c.programme.n = 1;
    c.programme.step = steps;
    ce_ramp_truth plain = last_ramp(&c);
    c.instrument.temperature_offset_K = 1.25;
    ce_ramp_truth moved = last_ramp(&c);
    for (int i = 0; i < CE_CONSTRUCTIONS; i++)
        assert_close(moved.tg_K[i] - plain.tg_K[i], 1.25, 1.0e-9);
    assert_close(moved.half_step_sample_K, plain.half_step_sample_K, 1.0e-9);
}

static ce_ramp_truth by_scheme(const char *material, ce_relax_scheme scheme, double step_K)
{
    ce_simulation_config c = flat(material);
    double tg = c.glass[0].ref_K;
    const ce_programme_step steps[] = {{.to_K = tg - 90.0, .rate_K_min = 10.0},
                                       {.to_K = tg + 50.0, .rate_K_min = 10.0}};
    c.programme.start_K = tg + 50.0;
    c.programme.n = 2;
    c.programme.step = steps;
    c.max_step_K = step_K;
    c.instrument.interval_s = 6.0 * step_K;
    c.scheme = scheme;
    return last_ramp(&c);
}

/* The superposition sum as published takes the relaxation time at the fictive temperature of the step before: its
 * error is of first order in the step. Halved steps must halve it, and what it converges to must be what the sum of
 * exponentials gives. */
static void published_sum_converges_to_the_sum_of_exponentials(void **state)
{
    (void)state;
    static const char *const materials[] = {"ps", "pvac", "b2o3"};
    for (size_t i = 0; i < sizeof materials / sizeof *materials; i++) {
        const double want = by_scheme(materials[i], CE_RELAX_RECURSIVE, 0.05).tg_K[CE_HALF_STEP];
        double wide = by_scheme(materials[i], CE_RELAX_DIRECT, 0.2).tg_K[CE_HALF_STEP];
        double narrow = by_scheme(materials[i], CE_RELAX_DIRECT, 0.1).tg_K[CE_HALF_STEP];
        assert_close((narrow - want) / (wide - want), 0.5, 0.05);
        assert_close(2.0 * narrow - wide, want, 0.005);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(in_equilibrium_fictive_is_temperature),
        cmocka_unit_test(two_step_ageing_crosses_over),
        cmocka_unit_test(lag_moves_equal_areas_by_q_tau),
        cmocka_unit_test(step_height_in_power),
        cmocka_unit_test(inflection_lies_in_the_step),
        cmocka_unit_test(temperature_offset_moves_the_truth_as_recorded),
        cmocka_unit_test(published_sum_converges_to_the_sum_of_exponentials),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
