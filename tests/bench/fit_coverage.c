/* SPDX-License-Identifier: GPL-3.0-or-later
 * Do the 95 % intervals of Tg_inf and the second parameter hold? Simulated series of known truth: standards evenly spaced
 * in log Mn from 2 to 300 kg/mol, three runs each of 0.5 K, K = 1.8e5 K g/mol, certified Mn = true Mn
 * (1 + r normal), common to the runs. usage: fit_coverage [SERIES] [SEED]; prints a table. */
#include "base/counter_rng.h"

#include <chainend/fit.h>

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { MAX_K = 8, RUNS = 3 };
static const double run_sd = 0.5;
static const double truth[CE_RELATIONS][CE_MAX_PARAMETERS] = {
    [CE_FLORY_FOX] = {388, 1.8e5},         [CE_UEBERREITER_KANIG] = {388, 500},
    [CE_ODRISCOLL_SANAYEI] = {388, 1.4e4}, [CE_OGAWA] = {388, 1.8e5},
    [CE_LOG_PLATEAU] = {388, 70, 30000},   [CE_LOG_THREE] = {388, 120, 45, 6000, 60000}};

typedef struct {
    const char *name;
    ce_relation relation;
    size_t k, runs;
    double r_true, r_stated; /* NaN: not stated */
    ce_scatter scatter;
} scenario;

static const double eight[MAX_K] = {2000, 4000, 8000, 16000, 35000, 70000, 150000, 300000};

static double standard_mn(size_t k, size_t i)
{
    return k == 8 ? eight[i] : 2000 * pow(150, (double)i / (double)(k - 1));
}

/* One series; whether the intervals hold the truth, and how wide they are. */
static bool one(const scenario *c, ce_counter_rng *rng, int hit[2], double width[2], int *excess)
{
    ce_standard s[MAX_K];
    double tg[MAX_K][RUNS];
    for (size_t i = 0; i < c->k; i++) {
        double mn = standard_mn(c->k, i),
               stated = mn * (1 + c->r_true * ce_counter_rng_normal(rng));
        for (size_t j = 0; j < c->runs; j++)
            tg[i][j] =
                ce_relation_tg(c->relation, truth[c->relation], &(ce_molar){mn, 1.2 * mn, 2}) +
                run_sd * ce_counter_rng_normal(rng);
        s[i] = (ce_standard){.name = "S",
                             .molar = {stated, (double)NAN, 2},
                             .mn_u_g_mol = c->r_stated * stated,
                             .n = c->runs,
                             .tg_K = tg[i]};
    }
    ce_fit_options o = ce_fit_options_default();
    o.compare = o.diagnose = false;
    o.relation = c->relation;
    o.scatter = c->scatter;
    ce_fit fit;
    if (ce_fit_relation(c->k, s, &o, &fit, NULL) != CE_OK) return false;
    for (int p = 0; p < 2; p++) {
        double want = truth[c->relation][p];
        hit[p] = fit.parameter[p].low <= want && want <= fit.parameter[p].high;
        width[p] = fit.parameter[p].high - fit.parameter[p].low;
    }
    *excess = fit.excess_r > 0 || fit.excess_tau_K > 0;
    ce_fit_free(&fit);
    return true;
}

static void run(const scenario *c, size_t number, long series, uint64_t seed)
{
    long hits[2] = {0, 0}, excesses = 0, failed = 0;
    double widths[2] = {0, 0};
    for (long i = 0; i < series; i++) {
        ce_counter_rng rng = ce_counter_rng_start(seed + number, (uint64_t)i);
        int hit[2], excess;
        double width[2];
        if (!one(c, &rng, hit, width, &excess)) {
            failed++;
            continue;
        }
        for (int p = 0; p < 2; p++) hits[p] += hit[p], widths[p] += width[p] / (double)series;
        excesses += excess;
    }
    double n = (double)(series - failed);
    printf("%-46s %zu x %zu  %.4f  %.4f  %8.3f %9.4g  %.3f %ld\n", c->name, c->k, c->runs,
           (double)hits[0] / n, (double)hits[1] / n, widths[0], widths[1], (double)excesses / n,
           failed);
}

int main(int argc, char **argv)
{
    long series = argc > 1 ? strtol(argv[1], NULL, 10) : 20000;
    uint64_t seed = argc > 2 ? strtoull(argv[2], NULL, 10) : 20240607;
    const double none = (double)NAN;
    const scenario all[] = {
        {"Mn exact", CE_FLORY_FOX, 8, 3, 0, 0, CE_SCATTER_AUTO},
        {"Mn exact", CE_FLORY_FOX, 5, 3, 0, 0, CE_SCATTER_AUTO},
        {"Mn exact", CE_FLORY_FOX, 4, 3, 0, 0, CE_SCATTER_AUTO},
        {"Mn 5 %, stated", CE_FLORY_FOX, 8, 3, .05, .05, CE_SCATTER_AUTO},
        {"Mn 5 %, stated", CE_FLORY_FOX, 5, 3, .05, .05, CE_SCATTER_AUTO},
        {"Mn 5 %, stated", CE_FLORY_FOX, 4, 3, .05, .05, CE_SCATTER_AUTO},
        {"Mn 5 %, stated; two runs", CE_FLORY_FOX, 4, 2, .05, .05, CE_SCATTER_AUTO},
        {"Mn 10 %, 5 % stated", CE_FLORY_FOX, 8, 3, .10, .05, CE_SCATTER_AUTO},
        {"Mn 5 %, not stated", CE_FLORY_FOX, 8, 3, .05, none, CE_SCATTER_AUTO},
        {"Mn 5 %, ordinary least squares on the runs", CE_FLORY_FOX, 8, 3, .05, .05,
         CE_SCATTER_RESIDUALS},
        {"ueberreiter-kanig, Mn exact", CE_UEBERREITER_KANIG, 8, 3, 0, 0, CE_SCATTER_AUTO},
        {"ueberreiter-kanig, Mn 5 %, stated", CE_UEBERREITER_KANIG, 8, 3, .05, .05,
         CE_SCATTER_AUTO},
        {"odriscoll-sanayei, Mn 5 %, stated", CE_ODRISCOLL_SANAYEI, 8, 3, .05, .05,
         CE_SCATTER_AUTO},
        {"log-plateau, Mn 5 %, stated", CE_LOG_PLATEAU, 8, 3, .05, .05, CE_SCATTER_AUTO},
    };
    printf("%ld series each, seed %llu; coverage of the 95 %% intervals\n", series,
           (unsigned long long)seed);
    printf("%-46s samples Tg_inf  second     width     width  excess failed\n", "scenario");
    for (size_t i = 0; i < sizeof all / sizeof *all; i++) run(&all[i], i, series, seed);
    return EXIT_SUCCESS;
}
