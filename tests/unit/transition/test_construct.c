/* SPDX-License-Identifier: GPL-3.0-or-later
 * The constructions on exact curves with exact lines: nothing here is estimated, so the values must
 * come out to the accuracy of the grid. */
#include "check.h"

#include "transition/construct.h"

enum { N = 6001 };
static const double low_K = 320.0, apart_K = 0.02;
static double T[N], y[N];
static const ce_lines flat = {{370.0, 0.0, 0.0}, {370.0, 1.0, 0.0}};

typedef double curve(double);

static double logistic(double t)
{
    return 1.0 / (1.0 + exp(-(t - 370.0) / 1.5));
}

static double normal(double t)
{
    return 0.5 * erfc(-(t - 370.0) / 2.0 / sqrt(2.0));
}

static double asymmetric(double t)
{
    return 1.0 - exp(-exp((t - 370.0) / 3.0));
}

static ce_points on(curve *S, const ce_lines *lines)
{
    for (size_t i = 0; i < N; i++) {
        T[i] = low_K + apart_K * (double)i;
        const double g = ce_line_at(&lines->glass, T[i]), l = ce_line_at(&lines->liquid, T[i]);
        y[i] = g + (l - g) * S(T[i]);
    }
    ce_points p;
    const ce_trace trace = {N, T, y};
    assert_true(ce_construct(&trace, lines, T[N - 1], &p));
    return p;
}

/* Definitions of ISO 11357-2 and ASTM E1356 worked out by hand: the tangent of a logistic step of
 * width s at its middle has the slope 1/(4 s), so onset and end lie 2 s off. */
static void a_logistic_step(void **state)
{
    (void)state;
    const ce_points p = on(logistic, &flat);
    assert_close(p.at[CE_ONSET], 367.0, 2e-4);
    assert_close(p.at[CE_MIDPOINT], 370.0, 1e-4);
    assert_close(p.at[CE_HALF_STEP], 370.0, 1e-4);
    assert_close(p.at[CE_INFLECTION], 370.0, 1e-3);
    assert_close(p.at[CE_END], 373.0, 2e-4);
    assert_close(p.at[CE_FICTIVE], 370.0, 1e-4);
    assert_close(p.step, 1.0, 1e-12);
    assert_close(p.overshoot, 0.0, 1e-9);
}

/* A normal distribution function of standard deviation 2 K: tangent slope 1/(sd sqrt(2 pi)), so
 * onset and end lie sd sqrt(pi/2) = 2.506628 K off (worked out by hand). */
static void an_error_function_step(void **state)
{
    (void)state;
    const ce_points p = on(normal, &flat);
    assert_close(p.at[CE_ONSET], 370.0 - 2.506628, 3e-4);
    assert_close(p.at[CE_END], 370.0 + 2.506628, 3e-4);
    assert_close(p.at[CE_HALF_STEP], 370.0, 1e-4);
    assert_close(p.at[CE_FICTIVE], 370.0, 1e-4);
}

/* S = 1 - exp(-exp(u)), u = (T - T0)/s: steepest at u = 0 with slope 1/(e s); half at u = ln ln 2;
 * onset u = -(e - 1), end u = 1; the mean of dS/dT at u = -Euler's constant. All five differ. */
static void an_asymmetric_step(void **state)
{
    (void)state;
    const ce_points p = on(asymmetric, &flat);
    assert_close(p.at[CE_ONSET], 370.0 - 3.0 * (exp(1.0) - 1.0), 5e-4);
    assert_close(p.at[CE_FICTIVE], 370.0 - 3.0 * 0.5772156649, 2e-4);
    assert_close(p.at[CE_HALF_STEP], 370.0 + 3.0 * log(log(2.0)), 1e-4);
    assert_close(p.at[CE_INFLECTION], 370.0, 1e-3);
    assert_close(p.at[CE_END], 373.0, 5e-4);
    /* level halfway between the heights at onset and end, 0 and 1: with flat lines the half-step */
    assert_close(p.at[CE_MIDPOINT], p.at[CE_HALF_STEP], 1e-4);
}

/* Both lines tilted alike: only the horizontal level of the E1356 midpoint notices. */
static void tilted_lines(void **state)
{
    (void)state;
    const ce_lines tilted = {{370.0, 0.0, 0.004}, {370.0, 1.0, 0.004}};
    const ce_points a = on(asymmetric, &flat), b = on(asymmetric, &tilted);
    static const ce_construction same[] = {CE_ONSET, CE_HALF_STEP, CE_INFLECTION, CE_END,
                                           CE_FICTIVE};
    for (size_t i = 0; i < 5; i++) assert_close(b.at[same[i]], a.at[same[i]], 1e-4);
    /* level 0.5 + 0.004 ((on + end)/2 - 370) meets y = S + 0.004 (T - 370): solved by hand with the
     * slope of S at the half-step, ln 2/(2 s) */
    const double mean = 0.5 * (a.at[CE_ONSET] + a.at[CE_END]), half = a.at[CE_HALF_STEP];
    const double shift = 0.004 * (mean - half) / (log(2.0) / 6.0 + 0.004);
    assert_close(b.at[CE_MIDPOINT], half + shift, 1e-4);
}

static double overshooting(double t)
{
    const double u = (t - 380.0) / 2.0;
    return logistic(t - 3.0) +
           1.2 / 0.30 * exp(-0.5 * u * u) / (2.0 * sqrt(2.0 * 3.14159265358979323846));
}

/* A peak of 1.2 J/g on a step of 0.30 J/(g K) takes 4 K off the equal-area temperature, 373 - 4; the
 * half-step on the rising flank hardly moves, 372.99 (worked out from the definitions). */
static void an_overshoot_moves_the_areas(void **state)
{
    (void)state;
    const ce_points p = on(overshooting, &flat);
    assert_close(p.at[CE_FICTIVE], 369.0, 1e-3);
    assert_close(p.at[CE_HALF_STEP], 372.99, 0.005);
    assert_true(p.overshoot > 0.7 &&
                p.overshoot < 0.8); /* 4/(2 sqrt(2 pi)) = 0.798 less the tail */
}

static double step_at_372(double t)
{
    return t < 372.0 ? 0.0 : 1.0;
}

/* dCp = 0.35 - 0.002 (T - 370): an area of 15.704 J/g above the glass line up to 420 K belongs to
 * Tf = 368.000 (root of the quadratic). A sharp step at 372 K leaves 15.004 of it; the rest, an
 * enthalpy of 0.7 J/g, is added as a peak. */
static double with_enthalpy(double t)
{
    const double u = (t - 385.0) / 1.5, d = 0.35 - 0.002 * (t - 370.0);
    const double wanted = 15.704, sharp = 0.35 * 48.0 - 0.001 * (50.0 * 50.0 - 2.0 * 2.0);
    return step_at_372(t) +
           (wanted - sharp) / d * exp(-0.5 * u * u) / (1.5 * sqrt(2.0 * 3.14159265358979323846));
}

static void lines_that_are_not_parallel(void **state)
{
    (void)state;
    const ce_lines l = {{370.0, 1.2, 0.004}, {370.0, 1.55, 0.002}};
    ce_points p = on(with_enthalpy, &l);
    const ce_trace upto = {(size_t)((420.0 - low_K) / apart_K) + 2, T, y};
    assert_true(ce_construct(&upto, &l, 420.0, &p));
    assert_close(p.at[CE_FICTIVE], 368.0,
                 0.012); /* the sharp step on a grid of 0.02 K            */
}

/* An instrument that lags by tau delays the areas by exactly rate times tau, the onset by less. */
static void a_lag_shifts_the_areas(void **state)
{
    (void)state;
    const double lag = 0.8333333333; /* K: 5 s at 10 K/min */
    const ce_points before = on(asymmetric, &flat);
    double seen = 0.0, last = 0.0;
    for (size_t i = 0; i < N;
         i++) { /* exact for a signal that is straight between the points     */
        const double now = asymmetric(T[i]), r = (now - last) / apart_K, e = exp(-apart_K / lag);
        if (i > 0) seen = now - r * lag + (seen - last + r * lag) * e;
        y[i] = seen;
        last = now;
    }
    ce_points after;
    const ce_trace trace = {N, T, y};
    assert_true(ce_construct(&trace, &flat, T[N - 1], &after));
    assert_close(after.at[CE_FICTIVE] - before.at[CE_FICTIVE], lag, 1e-3);
    const double onset = after.at[CE_ONSET] - before.at[CE_ONSET];
    assert_true(onset > 0.0 && onset < lag);
}

static double none(double t)
{
    (void)t;
    return 0.0;
}

static void no_crossing_is_said(void **state)
{
    (void)state;
    for (size_t i = 0; i < N; i++) y[i] = none(T[i]);
    ce_points p;
    const ce_trace trace = {N, T, y}, short_one = {5, T, y};
    assert_false(ce_construct(&trace, &flat, T[N - 1], &p));
    assert_true(isnan(p.at[CE_HALF_STEP]) && isnan(p.at[CE_FICTIVE]));
    assert_false(ce_construct(&short_one, &flat, T[4], &p));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_logistic_step),
        cmocka_unit_test(an_error_function_step),
        cmocka_unit_test(an_asymmetric_step),
        cmocka_unit_test(tilted_lines),
        cmocka_unit_test(an_overshoot_moves_the_areas),
        cmocka_unit_test(lines_that_are_not_parallel),
        cmocka_unit_test(a_lag_shifts_the_areas),
        cmocka_unit_test(no_crossing_is_said),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
