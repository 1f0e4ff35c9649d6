/* SPDX-License-Identifier: GPL-3.0-or-later
 * How long a simulated run takes, and how the time grows with the number of steps; prints
 * "scheme step_K steps seconds ratio": ratio to the run with steps twice as long, 2 = linear, 4 = quadratic. */
#include <chainend/simulate.h>

#include <stdio.h>
#include <stdlib.h>
#include <time.h>

static double now(void)
{
    struct timespec t;
    (void)clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

/* One ramp of 200 K at 10 K/min, with a point a step. */
static double time_run(ce_relax_scheme scheme, double step_K, int repeats)
{
    const ce_glass_set *set = ce_glass_set_find("ps");
    ce_simulation_config c = ce_simulation_config_default();
    ce_glass *g = &c.glass[0];
    g->ln_a = set->ln_a;
    g->h_K = set->h_K;
    g->x = set->x;
    g->beta = set->beta;
    g->ref_K = 373.15;
    const ce_programme_step ramp = {.to_K = 470.0, .rate_K_min = 10.0};
    c.programme.start_K = 270.0;
    c.programme.n = 1;
    c.programme.step = &ramp;
    c.instrument.interval_s = step_K * 6.0;
    c.instrument.noise_mW = 0.003;
    c.max_step_K = step_K;
    c.scheme = scheme;
    double best = 1e9;
    for (int round = 0; round < 3; round++) {
        double start = now();
        for (int i = 0; i < repeats; i++) {
            ce_simulation *sim = NULL;
            if (ce_simulate_run(&c, &sim, NULL) != CE_OK) exit(EXIT_FAILURE);
            ce_simulation_free(sim);
        }
        double each = (now() - start) / repeats;
        if (each < best) best = each;
    }
    return best;
}

int main(void)
{
    static const char *const name[] = {"recursive", "direct"};
    for (int scheme = CE_RELAX_RECURSIVE; scheme <= CE_RELAX_DIRECT; scheme++) {
        double before = 0.0;
        for (double step = 0.4; step > 0.04; step /= 2.0) {
            double s =
                time_run((ce_relax_scheme)scheme, step, scheme == CE_RELAX_RECURSIVE ? 10 : 2);
            printf("%-9s %.3f %5.0f %.5f", name[scheme], step, 200.0 / step, s);
            if (before > 0.0) printf(" %.2f", s / before);
            printf("\n");
            before = s;
        }
    }
    return EXIT_SUCCESS;
}
