/* SPDX-License-Identifier: GPL-3.0-or-later
 * One glass written in different ways must give one answer. The glass is simulated: what must agree
 * are two readings of it, not a reading and a number of ours. */
#include "check.h"

#include <chainend/simulate.h>
#include <chainend/transition.h>

#include <stdlib.h>

static ce_simulation *glass(double noise_mW)
{
    static const ce_programme_step heat = {.to_K = 420.0, .rate_K_min = 10.0};
    const ce_glass_set *set = ce_glass_set_find("pvac");
    ce_simulation_config c = ce_simulation_config_default();
    c.n_glasses = 1;
    c.glass[0] = (ce_glass){.ln_a = set->ln_a,
                            .h_K = set->h_K,
                            .x = set->x,
                            .beta = set->beta,
                            .ref_K = 370.0,
                            .cp_glass = 1.3,
                            .slope_glass = 0.003,
                            .step = 0.3,
                            .slope_step = -0.001,
                            .share = 1.0};
    ce_glass_move(&c.glass[0], ce_glass_temperature(&c.glass[0], 100.0), 370.0);
    c.programme = (ce_programme){.start_K = 300.0, .n = 1, .step = &heat, .prior_rate_K_min = 10.0};
    c.instrument.mass_g = 0.010;
    c.instrument.interval_s = 0.6;
    c.instrument.noise_mW = noise_mW;
    c.instrument.transient_mW = 1.0;
    ce_simulation *s = NULL;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_simulate_run(&c, &s, &err), CE_OK);
    return s;
}

static ce_transition first_of(ce_run *run)
{
    ce_transitions found;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_run_settle_sign(run, &err), CE_OK);
    assert_int_equal(ce_transition_find(run, NULL, &found, &err), CE_OK);
    const ce_transition t = found.item[0];
    ce_transitions_free(&found);
    return t;
}

/* Every stride-th point from first to last-th from the end. */
static ce_transition part(const ce_simulation *s, size_t first, size_t last, size_t stride)
{
    const size_t n = ce_simulation_size(s);
    double *a = calloc(3 * n, sizeof *a), *t = a, *T = a + n, *y = a + 2 * n;
    size_t k = 0;
    assert_non_null(a);
    for (size_t i = first; i + last < n; i += stride, k++) {
        t[k] = ce_simulation_time_s(s)[i];
        T[k] = ce_simulation_temperature_K(s)[i];
        y[k] = ce_simulation_signal_mW(s)[i];
    }
    ce_run *run = NULL;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(
        ce_run_from_arrays(k, t, T, y, CE_SIGNAL_POWER, 0.010, (double)NAN, &run, &err), CE_OK);
    const ce_transition out = first_of(run);
    ce_run_free(run);
    free(a);
    return out;
}

static ce_transition written(const ce_simulation *s, const ce_layout *layout)
{
    char *bytes = NULL;
    size_t n = 0;
    ce_error err = CE_ERROR_INIT;
    ce_run *run = NULL;
    assert_int_equal(ce_simulation_write(s, layout, NULL, &bytes, &n, &err), CE_OK);
    assert_int_equal(ce_run_read_memory(bytes, n, "memory", NULL, &run, &err), CE_OK);
    const ce_transition t = first_of(run);
    ce_run_free(run);
    free(bytes);
    return t;
}

/* Exothermic or endothermic up, mW or W/g, Celsius or kelvin, comma or point. */
static void units_and_signs(void **state)
{
    (void)state;
    ce_simulation *s = glass(0.0);
    ce_layout layout = ce_layout_default();
    layout.preamble = true;
    const ce_transition a = written(s, &layout);
    static const struct {
        bool exo_up;
        const char *signal, *temperature;
        char delimiter, decimal;
    } ways[] = {{true, "W/g", "°C", ',', '.'},
                {false, "mW", "°C", ';', ','},
                {true, "mW", "K", '\t', ','},
                {false, "W/g", "K", ';', '.'}};
    for (size_t i = 0; i < 4; i++) {
        layout.exo_up = ways[i].exo_up;
        layout.signal_unit = ways[i].signal;
        layout.temperature_unit = ways[i].temperature;
        layout.delimiter = ways[i].delimiter;
        layout.decimal = ways[i].decimal;
        const ce_transition b = written(s, &layout);
        /* the digits of the file differ with the unit, nothing else */
        for (int k = 0; k < CE_CONSTRUCTIONS; k++)
            assert_close(b.tg[k].value_K, a.tg[k].value_K, k == CE_FICTIVE ? 0.02 : 0.005);
        assert_digits(b.step_height, a.step_height, 1e-3);
        assert_string_equal(b.step_unit, "J/(g K)");
    }
    ce_simulation_free(s);
}

static void less_of_the_curve(void **state)
{
    (void)state;
    for (double noise = 0.0; noise < 0.011; noise += 0.005) {
        ce_simulation *s = glass(noise);
        const ce_transition a = part(s, 0, 0, 1);
        const ce_reading *want = &a.tg[CE_HALF_STEP];
        assert_close(part(s, 50, 0, 1).tg[CE_HALF_STEP].value_K, want->value_K, want->u_K);
        assert_close(part(s, 0, 50, 1).tg[CE_HALF_STEP].value_K, want->value_K, want->u_K);
        assert_close(part(s, 0, 0, 2).tg[CE_HALF_STEP].value_K, want->value_K, want->u_K);
        ce_simulation_free(s);
    }
}

/* Against the simulator's own truth, which uses the exact lines. */
static void close_to_the_truth(void **state)
{
    (void)state;
    ce_simulation *s = glass(0.0);
    size_t n;
    const ce_ramp_truth *truth = ce_simulation_truth(s, &n);
    const ce_transition t = part(s, 0, 0, 1);
    assert_true(t.model_lines);
    assert_close(t.tg[CE_HALF_STEP].value_K, truth->tg_K[CE_HALF_STEP], 0.1);
    assert_close(t.tg[CE_FICTIVE].value_K, truth->tg_K[CE_FICTIVE], 0.4);
    assert_close(t.step_height, truth->step_J_gK, 0.01);
    for (int k = 0; k < CE_CONSTRUCTIONS; k++) {
        assert_true(t.tg[k].u_noise_K > 0.0 && t.tg[k].u_window_K > 0.0);
        assert_digits(t.tg[k].u_K, hypot(t.tg[k].u_noise_K, t.tg[k].u_window_K), 1e-12);
    }
    ce_simulation_free(s);
}

/* A cooling segment is the mirror image: the liquid comes first, the step is as high. */
static void cooling(void **state)
{
    (void)state;
    enum { N = 1201 };
    static double t[N], T[N], y[N];
    for (int i = 0; i < N; i++) {
        t[i] = 0.6 * i;
        T[i] = 420.0 - 0.1 * i;
        y[i] = -0.2 - 0.0005 * (T[i] - 300.0) - 0.05 / (1.0 + exp(-(T[i] - 360.0) / 1.5));
    }
    ce_run *run = NULL;
    ce_error err = CE_ERROR_INIT;
    ce_transitions found;
    ce_transition_options o = ce_transition_options_default();
    o.segment = 1;
    assert_int_equal(
        ce_run_from_arrays(N, t, T, y, CE_SIGNAL_SPECIFIC_POWER, 0.010, (double)NAN, &run, &err),
        CE_OK);
    assert_int_equal(ce_transition_find(run, &o, &found, &err), CE_OK);
    assert_int_equal(found.segment.kind, CE_COOLING);
    assert_close(found.item[0].tg[CE_HALF_STEP].value_K, 360.0, 0.05);
    assert_close(found.item[0].tg[CE_ONSET].value_K, 357.0, 0.1);
    assert_close(found.item[0].step_height, 0.30, 0.005);
    /* lines in the signal's own sign: the liquid lies below the glass on cooling, endo up */
    const ce_transition *c = &found.item[0];
    assert_true(c->liquid_line.at_ref + c->liquid_line.slope * (360.0 - c->liquid_line.ref_K) <
                c->glass_line.at_ref + c->glass_line.slope * (360.0 - c->glass_line.ref_K));
    ce_transitions_free(&found);
    ce_run_free(run);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(units_and_signs),
        cmocka_unit_test(less_of_the_curve),
        cmocka_unit_test(close_to_the_truth),
        cmocka_unit_test(cooling),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
