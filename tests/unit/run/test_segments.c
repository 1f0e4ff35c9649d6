/* SPDX-License-Identifier: GPL-3.0-or-later
 * Programmes with known borders and rates, measured well and badly. */
#include "check.h"

#include <chainend/run.h>

#include <stdbool.h>
#include <stdlib.h>

#define MOST 20000

typedef struct {
    double to_K, rate_K_min, hold_s; /* a ramp to to_K, or (rate 0) a hold */
} leg;

typedef struct {
    const char *name;
    double dt, display_K, noise_K;
    double rate_tolerance; /* relative */
} measurement;

static double t[MOST], T[MOST], y[MOST];
static size_t border[20];

static double uniform(uint64_t *s)
{
    *s = *s * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
    return (double)(*s >> 11) * 0x1p-53;
}

/* Noise that is near enough to normal: twelve uniforms. */
static double normal(uint64_t *s)
{
    double sum = -6.0;
    for (int i = 0; i < 12; i++) sum += uniform(s);
    return sum;
}

static size_t measure(const leg *l, size_t legs, const measurement *m)
{
    uint64_t seed = 7;
    size_t n = 0;
    double now = 0.0, K = 300.0;
    for (size_t i = 0; i < legs; i++) {
        border[i] = n;
        double rate = l[i].rate_K_min / 60.0;
        double seconds = rate == 0.0 ? l[i].hold_s : (l[i].to_K - K) / rate;
        for (double s = 0.0; s < seconds && n < MOST; s += m->dt, n++) {
            t[n] = now + s;
            T[n] = K + rate * s + m->noise_K * normal(&seed);
            if (m->display_K > 0.0) T[n] = floor(T[n] / m->display_K + 0.5) * m->display_K;
            y[n] = 0.0;
        }
        now += seconds;
        if (rate != 0.0) K = l[i].to_K;
    }
    border[legs] = n;
    return n;
}

static void check(const leg *l, size_t legs, const measurement *m)
{
    size_t n = measure(l, legs, m), n_segments;
    ce_run *run;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(
        ce_run_from_arrays(n, t, T, y, CE_SIGNAL_POWER, (double)NAN, (double)NAN, &run, &err),
        CE_OK);
    const ce_segment *s = ce_run_segments(run, &n_segments);
    print_message("%s: %zu segments\n", m->name, n_segments);
    assert_int_equal(n_segments, legs);
    size_t count[3] = {0, 0, 0};
    for (size_t i = 0; i < legs; i++) {
        ce_segment_kind want = l[i].rate_K_min > 0.0   ? CE_HEATING
                               : l[i].rate_K_min < 0.0 ? CE_COOLING
                                                       : CE_ISOTHERMAL;
        assert_int_equal(s[i].kind, want);
        assert_int_equal(s[i].nth_of_kind, ++count[want]);
        assert_int_equal(s[i].index, i + 1);
        if (want == CE_ISOTHERMAL)
            assert_close(s[i].rate_K_min, 0.0, 0.3);
        else
            assert_close(s[i].rate_K_min, l[i].rate_K_min,
                         m->rate_tolerance * fabs(l[i].rate_K_min));
        /* Borders within 30 s or a fiftieth of the run, whichever is more. */
        double off = fmax(30.0 / m->dt, 0.02 * (double)n);
        assert_close((double)s[i].first, (double)border[i], off);
    }
    ce_run_free(run);
}

static const leg holds[] = {{430, 20, 0}, {0, 0, 120}, {300, -20, 0}, {0, 0, 120}, {430, 10, 0}};
static const leg turns[] = {{430, 20, 0}, {300, -20, 0}, {430, 10, 0}};
static const leg slow[] = {{330, 0.5, 0}, {0, 0, 900}, {310, -1, 0}};
static const leg mixed[] = {{430, 2, 0}, {300, -50, 0}, {430, 10, 0}};
static const leg steps[] = {{360, 10, 0}, {430, 20, 0}};

static void programmes_are_found_however_they_are_measured(void **state)
{
    (void)state;
    static const measurement with_holds[] = {{"clean", 1.0, 0, 0, 1e-9},
                                             {"display of 0.1 K", 0.1, 0.1, 0, 0.003},
                                             {"display of 1 K", 0.5, 1.0, 0, 0.02},
                                             {"noise of 0.05 K", 1.0, 0, 0.05, 0.005},
                                             {"sampled at 5 s", 5.0, 0, 0.01, 0.005}};
    static const measurement noisy = {"noise of 0.2 K", 1.0, 0, 0.2, 0.01};
    static const measurement coarse = {"sampled at 30 s", 30.0, 0, 0, 0.01};
    static const measurement fine = {"slow", 2.0, 0, 0.005, 0.005};
    static const measurement plain = {"clean", 1.0, 0, 0, 0.005};
    for (size_t i = 0; i < sizeof with_holds / sizeof *with_holds; i++)
        check(holds, 5, &with_holds[i]);
    check(turns, 3, &noisy);
    check(turns, 3, &coarse);
    check(slow, 3, &fine);
    check(mixed, 3, &plain);
    check(steps, 2, &plain);
}

static void a_run_without_time_has_the_rate_it_is_given(void **state)
{
    (void)state;
    ce_run *run;
    ce_error err = CE_ERROR_INIT;
    size_t n;
    for (size_t i = 0; i < 400; i++) {
        T[i] = i < 200 ? 300.0 + (double)i : 500.0 - (double)(i - 199);
        y[i] = 1.0;
    }
    assert_int_equal(ce_run_from_arrays(400, NULL, T, y, CE_SIGNAL_SPECIFIC_POWER, (double)NAN,
                                        10.0, &run, &err),
                     CE_OK);
    const ce_segment *s = ce_run_segments(run, &n);
    assert_int_equal(n, 2);
    assert_true(s[0].rate_K_min == 10.0 && s[1].rate_K_min == -10.0);
    assert_true(isnan(s[0].rate_sd_K_min));
    assert_null(ce_run_time_s(run));
    ce_run_free(run);
}

static void impossible_arrays_are_refused(void **state)
{
    (void)state;
    static const double time[] = {0, 1, 2}, back[] = {0, 2, 1}, K[] = {300, 301, 302},
                        cold[] = {300, -1, 302}, v[] = {1, 1, 1};
    const double hole[] = {1, (double)NAN, 1};
    ce_run *run;
    ce_error err = CE_ERROR_INIT;
    const double nan = (double)NAN;
    assert_int_equal(ce_run_from_arrays(3, back, K, v, CE_SIGNAL_POWER, nan, nan, &run, &err),
                     CE_E_DOMAIN);
    assert_int_equal(ce_run_from_arrays(3, time, cold, v, CE_SIGNAL_POWER, nan, nan, &run, NULL),
                     CE_E_DOMAIN);
    assert_int_equal(ce_run_from_arrays(3, time, K, hole, CE_SIGNAL_POWER, nan, nan, &run, NULL),
                     CE_E_DOMAIN);
    assert_int_equal(ce_run_from_arrays(3, time, K, v, CE_SIGNAL_POWER, -1.0, nan, &run, NULL),
                     CE_E_DOMAIN);
    assert_int_equal(ce_run_from_arrays(3, NULL, K, v, CE_SIGNAL_POWER, nan, nan, &run, NULL),
                     CE_E_ARG);
    assert_int_equal(ce_run_from_arrays(1, time, K, v, CE_SIGNAL_POWER, nan, nan, &run, NULL),
                     CE_E_ARG);
    assert_null(run);
    assert_int_equal(ce_run_from_arrays(3, time, K, v, CE_SIGNAL_POWER, 0.002, nan, &run, NULL),
                     CE_OK);
    assert_int_equal(ce_run_signal_kind(run), CE_SIGNAL_SPECIFIC_POWER);
    assert_digits(ce_run_signal(run)[0], 0.5, 1e-15);
    ce_run_free(run);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(programmes_are_found_however_they_are_measured),
        cmocka_unit_test(a_run_without_time_has_the_rate_it_is_given),
        cmocka_unit_test(impossible_arrays_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
