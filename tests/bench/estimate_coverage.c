/* SPDX-License-Identifier: GPL-3.0-or-later
 * Do the 95 % intervals of Mn hold? Simulated series of known truth: eight standards from 2 to 300 kg/mol,
 * three runs of 0.5 K each, K = 1.8e5 K g/mol, certified Mn = true Mn (1 + r normal).
 *
 *     estimate_coverage [SERIES [SEED]]       bare Tg values: a table over Mn of the unknown
 *     estimate_coverage runs [SERIES [SEED]]  end to end: run files simulated and read
 *
 * A set that is open upwards counts as a set: it holds the truth when its lower limit does. */
#include "base/counter_rng.h"

#include <chainend/estimate.h>
#include <chainend/simulate.h>

#include <gsl/gsl_errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { K = 8, RUNS = 3, UNKNOWNS = 5 };
static const double run_sd = 0.5, theta[2] = {388.0, 1.8e5};
static const double standard[K] = {2000, 4000, 8000, 16000, 35000, 70000, 150000, 300000};
static const double unknown[UNKNOWNS] = {2500, 10000, 30000, 100000, 300000};

static double tg_at(double mn)
{
    return theta[0] - theta[1] / mn;
}

static bool holds(const ce_estimate *e, double mn)
{
    if (e->disjoint) return !(mn > e->low_g_mol && mn < e->high_g_mol);
    if (e->bound == CE_ABOVE_PLATEAU) return false;
    return !(e->low_g_mol > mn) && !(e->high_g_mol < mn);
}

/* ---- bare Tg values ----------------------------------------------------------------------- */

static bool fit_one(double r, ce_counter_rng *rng, ce_fit *fit)
{
    ce_standard s[K];
    double tg[K][RUNS];
    for (size_t i = 0; i < K; i++) {
        const double stated = standard[i] * (1.0 + r * ce_counter_rng_normal(rng));
        for (size_t j = 0; j < RUNS; j++)
            tg[i][j] = tg_at(standard[i]) + run_sd * ce_counter_rng_normal(rng);
        s[i] = (ce_standard){"S", {stated, (double)NAN, 2.0}, r * stated, RUNS, tg[i], NULL, 0.0};
    }
    ce_fit_options o = ce_fit_options_default();
    o.compare = o.diagnose = false;
    return ce_fit_relation(K, s, &o, fit, NULL) == CE_OK;
}

static void bare(long series, uint64_t seed)
{
    printf("%ld series each; coverage of the 95 %% set of Mn\n%-14s runs", series, "certificates");
    for (size_t u = 0; u < UNKNOWNS; u++) printf("  %9.0f", unknown[u]);
    printf("\n");
    for (int k = 0; k < 4; k++) {
        const double r = k < 2 ? 0.0 : 0.05;
        const size_t m = k % 2 == 0 ? 1 : 3;
        long hits[UNKNOWNS] = {0}, open[UNKNOWNS] = {0}, fitted = 0;
        for (long i = 0; i < series; i++) {
            ce_counter_rng rng = ce_counter_rng_start(seed + (uint64_t)k, (uint64_t)i);
            ce_fit fit;
            if (!fit_one(r, &rng, &fit)) continue;
            fitted++;
            for (size_t u = 0; u < UNKNOWNS; u++) {
                double tg[RUNS];
                for (size_t j = 0; j < m; j++)
                    tg[j] = tg_at(unknown[u]) + run_sd * ce_counter_rng_normal(&rng);
                ce_unknown x = ce_unknown_default();
                ce_estimate e;
                x.n = m;
                x.tg_K = tg;
                if (ce_estimate_mn(&fit, &x, 0.0, &e, NULL) != CE_OK) continue;
                hits[u] += holds(&e, unknown[u]);
                open[u] += e.bound != CE_TWO_SIDED;
            }
            ce_fit_free(&fit);
        }
        printf("%-14s %4zu", k < 2 ? "exact" : "5 %", m);
        for (size_t u = 0; u < UNKNOWNS; u++)
            printf("  %.4f%3.0f", (double)hits[u] / (double)fitted,
                   100.0 * (double)open[u] / (double)fitted);
        printf("\n");
        (void)fflush(stdout);
    }
    printf("behind each share: sets without an upper limit, %%\n");
}

/* ---- end to end --------------------------------------------------------------------------- */

static double law(double mn_g_mol, const void *context)
{
    (void)context;
    return tg_at(mn_g_mol);
}

/* The half-step of a simulated run, as the file reader's arrays would give it; NaN = refused. */
static double read_run(const ce_simulation *s)
{
    ce_run *run = NULL;
    ce_transitions found = {0};
    double tg = (double)NAN;
    if (ce_run_from_arrays(ce_simulation_size(s), ce_simulation_time_s(s),
                           ce_simulation_temperature_K(s), ce_simulation_signal_mW(s),
                           CE_SIGNAL_POWER, 0.010, (double)NAN, &run, NULL) == CE_OK &&
        ce_transition_find(run, NULL, &found, NULL) == CE_OK)
        tg = found.item[0].tg[CE_HALF_STEP].value_K;
    ce_transitions_free(&found);
    ce_run_free(run);
    return tg;
}

static ce_series_plan plan_of(uint64_t seed, const ce_sample_plan *sample, size_t n)
{
    static const ce_programme_step heat = {.to_K = 440.0, .rate_K_min = 10.0};
    const ce_glass_set *set = ce_glass_set_find("ps");
    ce_series_plan p = ce_series_plan_default();
    p.n = n;
    p.sample = sample;
    p.relation = law;
    p.mn_u_rel = 0.05;
    p.run_sd_K = 0.4;
    p.whole_runs = true;
    p.programme_tg_K = 370.0;
    p.seed = seed;
    p.threads = 2;
    p.run.glass[0] = (ce_glass){.ln_a = set->ln_a,
                                .h_K = set->h_K,
                                .x = set->x,
                                .beta = set->beta,
                                .ref_K = 370.0,
                                .cp_glass = 1.5,
                                .slope_glass = 0.003,
                                .step = 0.3,
                                .slope_step = -0.001,
                                .share = 1.0};
    p.run.programme =
        (ce_programme){.start_K = 300.0, .n = 1, .step = &heat, .prior_rate_K_min = 10.0};
    p.run.instrument.interval_s = 1.2;
    p.run.instrument.noise_mW = 0.005;
    p.run.instrument.transient_mW = 0.5;
    return p;
}

/* One series from runs; 1 the interval holds, 0 it does not, -1 no answer. */
static int from_runs(uint64_t seed, double mn)
{
    ce_sample_plan sample[K + 1];
    static const char *const name[K + 1] = {"A", "B", "C", "D", "E", "F", "G", "H", "X"};
    for (size_t i = 0; i < K; i++)
        sample[i] = (ce_sample_plan){name[i], CE_STANDARD, standard[i], RUNS};
    sample[K] = (ce_sample_plan){name[K], CE_UNKNOWN, mn, RUNS};
    const ce_series_plan p = plan_of(seed, sample, K + 1);
    ce_simulated_series s;
    if (ce_simulate_series(&p, &s, NULL) != CE_OK) return -1;
    double tg[K + 1][RUNS];
    bool all = true;
    ce_standard used[K];
    for (size_t i = 0; i <= K; i++)
        for (size_t j = 0; j < RUNS; j++) {
            tg[i][j] = read_run(s.sample[i].reading[j].simulation);
            all = all && isfinite(tg[i][j]);
        }
    for (size_t i = 0; i < K; i++) {
        const double stated = s.sample[i].mn_certified_g_mol;
        used[i] =
            (ce_standard){"S", {stated, (double)NAN, 2.0}, 0.05 * stated, RUNS, tg[i], NULL, 0.0};
    }
    ce_simulated_series_free(&s);
    ce_fit_options o = ce_fit_options_default();
    o.compare = o.diagnose = false;
    ce_fit fit;
    ce_estimate e;
    ce_unknown x = ce_unknown_default();
    x.n = RUNS;
    x.tg_K = tg[K];
    if (!all || ce_fit_relation(K, used, &o, &fit, NULL) != CE_OK) return -1;
    const bool good = ce_estimate_mn(&fit, &x, 0.0, &e, NULL) == CE_OK;
    ce_fit_free(&fit);
    return good ? holds(&e, mn) : -1;
}

static void end_to_end(long series, uint64_t seed)
{
    long hits = 0, answered = 0;
    for (long i = 0; i < series; i++) {
        ce_counter_rng rng = ce_counter_rng_start(seed, (uint64_t)i);
        const double mn = 2500.0 * pow(60.0, ce_counter_rng_uniform(&rng));
        const int held = from_runs(seed + (uint64_t)i, mn);
        if (held < 0) continue;
        answered++;
        hits += held;
    }
    printf("%ld series of %d simulated runs each, unknowns from 2.5 to 150 kg/mol: %.3f of %ld "
           "sets hold\n",
           series, (K + 1) * RUNS, (double)hits / (double)answered, answered);
}

int main(int argc, char **argv)
{
    const bool runs = argc > 1 && strcmp(argv[1], "runs") == 0;
    const int at = runs ? 2 : 1;
    const long series = argc > at ? strtol(argv[at], NULL, 10) : runs ? 500 : 20000;
    const uint64_t seed = argc > at + 1 ? strtoull(argv[at + 1], NULL, 10) : 20261201;
    (void)gsl_set_error_handler_off();
    if (runs)
        end_to_end(series, seed);
    else
        bare(series, seed);
    return 0;
}
