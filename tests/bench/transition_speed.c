/* SPDX-License-Identifier: GPL-3.0-or-later
 * What reading one segment costs against its number of points: the same glass, simulated at closer
 * and closer points, evaluated without reading a file. Prints milliseconds and the ratio to 5000
 * points: the work on points is linear and small beside the fit of the model, which sees a few
 * hundred cells whatever the number of points. */
#include <chainend/simulate.h>
#include <chainend/transition.h>

#include <math.h>
#include <stdio.h>
#include <time.h>

static ce_run *run_with(double interval_s)
{
    static const ce_programme_step heat = {.to_K = 440.0, .rate_K_min = 10.0};
    const ce_glass_set *set = ce_glass_set_find("ps");
    ce_simulation_config c = ce_simulation_config_default();
    c.glass[0] = (ce_glass){.ln_a = set->ln_a,
                            .h_K = set->h_K,
                            .x = set->x,
                            .beta = set->beta,
                            .ref_K = 370.0,
                            .cp_glass = 1.5,
                            .slope_glass = 0.003,
                            .step = 0.3,
                            .share = 1.0};
    c.programme = (ce_programme){.start_K = 290.0, .n = 1, .step = &heat, .prior_rate_K_min = 10.0};
    c.instrument.interval_s = interval_s;
    c.instrument.noise_mW = 0.002;
    c.instrument.transient_mW = 0.5;
    ce_simulation *s = NULL;
    ce_run *run = NULL;
    if (ce_simulate_run(&c, &s, NULL) != CE_OK ||
        ce_run_from_arrays(ce_simulation_size(s), ce_simulation_time_s(s),
                           ce_simulation_temperature_K(s), ce_simulation_signal_mW(s),
                           CE_SIGNAL_POWER, 0.010, (double)NAN, &run, NULL) != CE_OK)
        run = NULL;
    ce_simulation_free(s);
    return run;
}

/* Best of several, processor milliseconds. */
static double cost_ms(const ce_run *run)
{
    double best = HUGE_VAL;
    for (int i = 0; i < 15; i++) {
        ce_transitions found;
        const clock_t begin = clock();
        if (ce_transition_find(run, NULL, &found, NULL) != CE_OK) return (double)NAN;
        best = fmin(best, 1000.0 * (double)(clock() - begin) / CLOCKS_PER_SEC);
        ce_transitions_free(&found);
    }
    return best;
}

int main(void)
{
    double first = 0.0;
    for (double points = 5000.0; points <= 80000.0; points *= 2.0) {
        ce_run *run = run_with(900.0 / points);
        if (run == NULL) return 3;
        const double ms = cost_ms(run);
        if (first == 0.0) first = ms;
        printf("%6zu points %7.2f ms %6.2f times 5000 points\n", ce_run_size(run), ms, ms / first);
        ce_run_free(run);
    }
    return 0;
}
