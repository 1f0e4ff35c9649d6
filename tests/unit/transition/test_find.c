/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <chainend/transition.h>

#define N 1201

/* 300 to 420 K at 10 K/min, heat flow in W/g: glassy line plus step times S(T). */
static ce_run *make(double (*S)(double), double sign, double slope)
{
    static double t[N], T[N], y[N];
    for (int i = 0; i < N; i++) {
        T[i] = 300.0 + 0.1 * i;
        t[i] = 0.6 * i;
        y[i] = sign * (0.2 + slope * (T[i] - 300.0) + 0.05 * S(T[i]));
    }
    ce_run *run = NULL;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(
        ce_run_from_arrays(N, t, T, y, CE_SIGNAL_SPECIFIC_POWER, 0.010, (double)NAN, &run, &err),
        CE_OK);
    return run;
}

static double logistic(double T)
{
    return 1.0 / (1.0 + exp(-(T - 370.0) / 1.5));
}

static double asymmetric(double T)
{
    return 1.0 - exp(-exp((T - 370.0) / 3.0));
}

static double flat(double T)
{
    (void)T;
    return 0.0;
}

static ce_transition only(const ce_run *run)
{
    ce_transitions found;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_transition_find(run, NULL, &found, &err), CE_OK);
    ce_transition t = found.item[0];
    ce_transitions_free(&found);
    return t;
}

/* Logistic step of width s: onset T0 - 2s, half-step = inflection = equal areas = T0, end T0 + 2s (from the
 * definitions of ISO 11357-2, worked out by hand). The lines come off windows, so a few hundredths remain. */
static void a_symmetric_step(void **state)
{
    (void)state;
    ce_run *run = make(logistic, 1.0, 0.0005);
    ce_transition t = only(run);
    assert_close(t.tg[CE_HALF_STEP].value_K, 370.0, 0.03);
    assert_close(t.tg[CE_MIDPOINT].value_K, 370.0, 0.05);
    assert_close(t.tg[CE_INFLECTION].value_K, 370.0, 0.15);
    assert_close(t.tg[CE_ONSET].value_K, 367.0, 0.05);
    assert_close(t.tg[CE_END].value_K, 373.0, 0.05);
    assert_close(t.tg[CE_FICTIVE].value_K, 370.0, 0.05);
    /* 0.05 W/g at 10 K/min is 0.30 J/(g K) (common practice: dCp = step/(mass rate)) */
    assert_close(t.step_height, 0.30, 0.003);
    assert_string_equal(t.step_unit, "J/(g K)");
    for (int c = 0; c < CE_CONSTRUCTIONS; c++) assert_true(t.tg[c].u_K > 0.0);
    ce_run_free(run);
}

/* All five constructions differ here, so that none can stand in for another: 364.8452, 368.9005, 370, 373 and
 * 368.2684 K (computed from the definitions). */
static void an_asymmetric_step_tells_the_constructions_apart(void **state)
{
    (void)state;
    ce_run *run = make(asymmetric, 1.0, 0.0);
    ce_transition t = only(run);
    assert_close(t.tg[CE_ONSET].value_K, 364.8452, 0.15);
    assert_close(t.tg[CE_HALF_STEP].value_K, 368.9005, 0.15);
    assert_close(t.tg[CE_INFLECTION].value_K, 370.0, 0.3);
    assert_close(t.tg[CE_END].value_K, 373.0, 0.15);
    assert_close(t.tg[CE_FICTIVE].value_K, 368.2684, 0.3);
    ce_run_free(run);
}

static void nothing_is_found_where_nothing_is(void **state)
{
    (void)state;
    ce_run *run = make(flat, 1.0, 0.0005);
    ce_transitions found;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_transition_find(run, NULL, &found, &err), CE_E_REFUSED);
    assert_int_equal(found.n, 0);
    assert_non_null(strstr(err.message, "no step"));
    ce_transition_options o = ce_transition_options_default();
    o.segment = 7;
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_transition_find(run, &o, &found, &err), CE_E_ARG);
    ce_run_free(run);
}

static void names_go_both_ways(void **state)
{
    (void)state;
    for (ce_construction c = 0; c < CE_CONSTRUCTIONS; c++)
        assert_int_equal(ce_construction_find(ce_construction_name(c)), c);
    assert_int_equal(ce_construction_find("middle"), CE_CONSTRUCTIONS);
    for (ce_flag_code f = 0; f < CE_FLAGS; f++) {
        char text[300];
        ce_flag flag = {f, 1.5};
        ce_flag_text(&flag, text, sizeof text);
        assert_memory_equal(text, ce_flag_name(f), strlen(ce_flag_name(f)));
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_symmetric_step),
        cmocka_unit_test(an_asymmetric_step_tells_the_constructions_apart),
        cmocka_unit_test(nothing_is_found_where_nothing_is),
        cmocka_unit_test(names_go_both_ways),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
