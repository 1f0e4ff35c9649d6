/* SPDX-License-Identifier: GPL-3.0-or-later
 * The relaxation model against identities it must obey and against published kinds of results. */
#include "check.h"

#include "transition/relax.h"

enum { N = 1600 };
static double low[N], high[N], tf[N], step[N];

static void lay_out(double from, double each)
{
    for (int i = 0; i < N; i++) {
        low[i] = from + each * i;
        high[i] = from + each * (i + 1);
    }
}

/* Polystyrene's parameters of Hodge's tables (J. Non-Cryst. Solids 169 (1994) 211, from memory). */
static ce_relax polystyrene(double tr_K)
{
    ce_relax r = {.tr_K = tr_K,
                  .h_K = 80000.0,
                  .beta = 0.74,
                  .x = 0.43,
                  .cooling = 1.0,
                  .fine_at_K = 373.0,
                  .fine_K = 0.05};
    ce_relax_modes(r.beta, &r.modes);
    return r;
}

/* tau = A exp(h/T) in equilibrium with ln A = -211.2 s: the reference temperature of a scan rate. */
static double reference(double q_K_min)
{
    double T = 373.0;
    for (int i = 0; i < 60; i++) T = 80000.0 / (log(T * T / 80000.0 / (q_K_min / 60.0)) + 211.2);
    return T;
}

static void the_modes_make_the_stretched_exponential(void **state)
{
    (void)state;
    static const double betas[] = {0.23, 0.34, 0.57, 0.74, 0.85};
    for (size_t b = 0; b < 5; b++) {
        ce_modes m;
        ce_relax_modes(betas[b], &m);
        for (double t = 0.03; t < 10.0; t *= 1.7) {
            double sum = 0.0;
            for (size_t c = 0; c < m.chains; c++)
                for (size_t k = 0; k < m.n; k++)
                    sum += m.weight[c][k] * exp(-t * m.slowest[c] * exp2((double)k));
            assert_close(sum, exp(-pow(t, betas[b])), 0.002);
        }
    }
}

/* Whatever the history, the area under the heating curve gives back the fictive temperature the
 * glass had before it (Moynihan et al., J. Am. Ceram. Soc. 59 (1976) 12, from memory). */
static void areas_on_heating_give_the_fictive_temperature(void **state)
{
    (void)state;
    lay_out(320.0, 0.05);
    static const struct {
        double cooling, age_K, lag_K;
    } history[] = {
        {1.0, 0.0, 0.0}, {0.1, 0.0, 0.0}, {4.0, 0.0, 0.0}, {1.0, 600.0, 0.0}, {1.0, 0.0, 0.5}};
    for (size_t k = 0; k < 5; k++) {
        ce_relax r = polystyrene(reference(10.0));
        r.cooling = history[k].cooling;
        r.age_K = history[k].age_K;
        r.age_at_K = 353.0;
        r.lag_K = history[k].lag_K;
        ce_relax_scan(&r, false, N, low, high, tf, step);
        double area = 0.0;
        for (int i = 0; i < N; i++) area += step[i] * (high[i] - low[i]);
        assert_close(high[N - 1] - area, tf[0] + history[k].lag_K, 0.01);
    }
}

/* 370.623 K after 10 K/min, 366.745 K after 1 K/min: the discrete superposition sum with 0.1 K steps
 * (computed for this project from the published equations; that sum has a step error of some
 * hundredths of a kelvin). The half-step of the heating curve lies at 373.16 K, its peak is 1.79. */
static void polystyrene_as_computed_elsewhere(void **state)
{
    (void)state;
    lay_out(320.0, 0.05);
    ce_relax r = polystyrene(reference(10.0));
    ce_relax_scan(&r, false, N, low, high, tf, step);
    assert_close(tf[0], 370.623, 0.06);
    double half = 0.0, peak = 0.0;
    for (int i = 0; i < N; i++) {
        if (half == 0.0 && step[i] >= 0.5) half = low[i];
        peak = fmax(peak, step[i]);
    }
    assert_close(half, 373.16, 0.1);
    assert_digits(peak, 1.79, 0.02);
    r.cooling = 0.1;
    ce_relax_scan(&r, false, N, low, high, tf, step);
    assert_close(tf[0], 366.745, 0.06);
}

/* d ln q / d(1/Tf') = -(h + 2 Tf'): -h after Moynihan et al. 1976 (abstract read), the second term
 * from q |d ln tau/dT| tau = constant, worked out here. */
static void the_cooling_rate_moves_it_by_the_activation_enthalpy(void **state)
{
    (void)state;
    lay_out(330.0, 0.05);
    double before = 0.0;
    for (double q = 10.0; q > 0.05; q /= 10.0) {
        const ce_relax r = polystyrene(reference(q));
        ce_relax_scan(&r, true, N, low, high, tf, step);
        const double now = tf[0];
        if (before > 0.0) {
            const double slope = log(10.0) / (1.0 / before - 1.0 / now);
            assert_digits(slope, -(80000.0 + before + now), 0.003);
        }
        before = now;
    }
}

/* Steps of 0.4 K draw the curve that steps of 0.02 K draw, to some thousandths of the step (0.01 K where it
 * is steepest), and cells with gaps between them that of cells without: the model is fitted on the ones
 * and read on the others. */
static void coarse_steps_draw_the_fine_curve(void **state)
{
    (void)state;
    ce_relax r = polystyrene(reference(10.0));
    for (int lagging = 0; lagging < 2; lagging++) {
        r.lag_K = lagging ? 0.2 : 0.0;
        r.fine_K = 0.02;
        lay_out(340.0, 0.1);
        ce_relax_scan(&r, false, 600, low, high, tf, step);
        double fine[600], fine_tf[600];
        memcpy(fine, step, sizeof fine);
        memcpy(fine_tf, tf, sizeof fine_tf);
        r.fine_K = 0.4;
        for (int i = 0; i < 120; i++) {
            low[i] = low[5 * i];
            high[i] = low[i] + 0.1;
        }
        ce_relax_scan(&r, false, 120, low, high, tf, step);
        double off = 0.0;
        for (int i = 0; i < 120; i++) {
            off = fmax(off, fabs(step[i] - fine[5 * i]));
            assert_close(tf[i], fine_tf[5 * i], 0.002);
        }
        assert_true(off < (lagging ? 0.007 : 0.004));
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_modes_make_the_stretched_exponential),
        cmocka_unit_test(areas_on_heating_give_the_fictive_temperature),
        cmocka_unit_test(polystyrene_as_computed_elsewhere),
        cmocka_unit_test(coarse_steps_draw_the_fine_curve),
        cmocka_unit_test(the_cooling_rate_moves_it_by_the_activation_enthalpy),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
