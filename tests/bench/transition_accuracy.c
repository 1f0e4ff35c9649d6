/* SPDX-License-Identifier: GPL-3.0-or-later
 * How well the transition is read: simulated runs of known truth, two halves that share no draw.
 *
 *     transition_accuracy [tune|judge] [RUNS] [WORST] [FIRST]
 *
 * FIRST is the number of the first run: from a number nobody has looked at, nobody has tuned on it.
 * Constants are chosen on "tune" only; "judge" has other seeds, other base glasses mixed in and wider
 * spreads. Prints, for each construction and class, the median, 95th percentile and largest absolute
 * error in kelvin and the r.m.s. of error over stated uncertainty, then the time a run takes. */
#include <chainend/simulate.h>
#include <chainend/transition.h>

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

enum { CLASSES = 6, TG = 370 };
static const char *const class_name[CLASSES] = {"sharp", "sharp noisy", "sharp aged",
                                                "broad", "broad noisy", "broad aged"};

typedef struct {
    uint64_t state;
} draws;

static double uniform(draws *d, double low, double high)
{
    d->state += 0x9e3779b97f4a7c15u; /* splitmix64 (Steele et al. 2014, from memory) */
    uint64_t z = d->state;
    z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
    z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
    z ^= z >> 31;
    return low + (high - low) * (double)(z >> 11) * 0x1p-53;
}

static double pick(draws *d, size_t n, const double *from)
{
    return from[(size_t)uniform(d, 0.0, (double)n)];
}

typedef struct {
    int class;
    double error[CE_CONSTRUCTIONS], u[CE_CONSTRUCTIONS];
    bool refused;
    double ms;
    char what[200];
} outcome;

static void draw_glass(draws *d, bool judge, ce_glass *g, bool *broad)
{
    static const char *const names[] = {"ps", "pvac", "pmma", "pvc", "pc"};
    const ce_glass_set *set = ce_glass_set_find(names[(size_t)uniform(d, 0.0, judge ? 5.0 : 4.0)]);
    const double wide = judge ? 1.5 : 1.0;
    g->h_K = set->h_K * exp(wide * uniform(d, -0.1, 0.1));
    g->ln_a = set->ln_a;
    g->x = set->x * exp(wide * uniform(d, -0.15, 0.15));
    g->beta = fmin(set->beta * exp(wide * uniform(d, -0.12, 0.12)), 0.9);
    g->ref_K = ce_glass_temperature(g, 100.0);
    g->cp_glass = uniform(d, 1.1, 1.6);
    g->slope_glass = uniform(d, 0.001, 0.004);
    g->step = uniform(d, 0.2, 0.5);
    g->slope_step = uniform(d, -0.0015, 0.0);
    g->share = 1.0;
    ce_glass_move(g, g->ref_K, uniform(d, 280.0, 430.0));
    *broad = g->beta < 0.42;
}

static outcome one(uint64_t seed, bool judge)
{
    draws d = {seed * 7919u + (judge ? 1000003u : 17u)};
    ce_simulation_config c = ce_simulation_config_default();
    outcome out = {0};
    bool broad, aged, noisy;
    c.n_glasses = 1;
    draw_glass(&d, judge, &c.glass[0], &broad);
    const double tg = ce_glass_temperature(&c.glass[0], 100.0);
    const double q = pick(&d, 3, (const double[]){5.0, 10.0, 20.0});
    const double cool = pick(&d, 5, (const double[]){2.0, 5.0, 10.0, 20.0, 40.0});
    aged = uniform(&d, 0.0, 1.0) < 0.33;
    noisy = uniform(&d, 0.0, 1.0) < 0.55;
    out.class = (broad ? 3 : 0) + (aged ? 2 : noisy ? 1 : 0);
    const ce_programme_step heat = {.to_K = tg + uniform(&d, 35.0, 60.0), .rate_K_min = q};
    c.programme = (ce_programme){.start_K = tg - uniform(&d, 55.0, 85.0),
                                 .n = 1,
                                 .step = &heat,
                                 .prior_rate_K_min = cool,
                                 .prior_age_K = tg - uniform(&d, 8.0, 22.0),
                                 .prior_age_s = aged ? 60.0 * exp(uniform(&d, 1.5, 6.0)) : 0.0};
    ce_instrument *i = &c.instrument;
    i->mass_g = uniform(&d, 0.004, 0.012);
    const double step_mW = 1000.0 * i->mass_g * c.glass[0].step * q / 60.0;
    const double spacing = pick(&d, 4, (const double[]){0.05, 0.1, 0.2, 0.5});
    i->interval_s = spacing / q * 60.0;
    i->noise_mW = noisy ? step_mW * exp(uniform(&d, log(0.003), log(0.03))) : 0.0;
    i->noise_time_s = noisy && uniform(&d, 0.0, 1.0) < 0.3 ? uniform(&d, 0.5, 3.0) : 0.0;
    i->transient_mW = step_mW * uniform(&d, 0.2, 3.0);
    i->transient_s = uniform(&d, 5.0, 20.0);
    i->lag_s = uniform(&d, 0.0, 1.0) < 0.5 ? uniform(&d, 1.0, 4.0) : 0.0;
    c.seed = seed;
    (void)snprintf(
        out.what, sizeof out.what,
        "seed %llu h %.0f x %.2f beta %.2f q %.0f cool %.0f age %.0f noise %.4f lag %.1f "
        "spacing %.2f",
        (unsigned long long)seed, c.glass[0].h_K, c.glass[0].x, c.glass[0].beta, q, cool,
        c.programme.prior_age_s, i->noise_mW / step_mW, i->lag_s, spacing);
    ce_simulation *s = NULL;
    ce_run *run = NULL;
    ce_transitions found = {0};
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_simulate_run(&c, &s, &err);
    if (st == CE_OK)
        st = ce_run_from_arrays(ce_simulation_size(s), ce_simulation_time_s(s),
                                ce_simulation_temperature_K(s), ce_simulation_signal_mW(s),
                                CE_SIGNAL_POWER, i->mass_g, (double)NAN, &run, &err);
    const clock_t start = clock();
    if (st == CE_OK) st = ce_transition_find(run, NULL, &found, &err);
    out.ms = 1000.0 * (double)(clock() - start) / CLOCKS_PER_SEC;
    if (st != CE_OK) {
        out.refused = true;
        (void)fprintf(stderr, "%s: %s\n", out.what, err.message);
    } else {
        size_t n;
        const ce_ramp_truth *truth = ce_simulation_truth(s, &n);
        for (int k = 0; k < CE_CONSTRUCTIONS; k++) {
            /* areas move by the lag times the rate: a property of the curve, not an error */
            const double shift = k == CE_FICTIVE ? q / 60.0 * i->lag_s : 0.0;
            out.error[k] = found.item[0].tg[k].value_K - truth[0].tg_K[k] - shift;
            out.u[k] = found.item[0].tg[k].u_K;
        }
    }
    ce_transitions_free(&found);
    ce_run_free(run);
    ce_simulation_free(s);
    return out;
}

static int rising(const void *a, const void *b)
{
    const double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

static void put_row(const outcome *o, size_t n, int k, int class)
{
    double *v = calloc(n, sizeof *v), *z = calloc(n, sizeof *z), z2 = 0.0, bias = 0.0;
    size_t m = 0;
    for (size_t i = 0; v != NULL && z != NULL && i < n; i++) {
        if (o[i].class != class || o[i].refused || !isfinite(o[i].error[k])) continue;
        z[m] = fabs(o[i].error[k] / o[i].u[k]);
        v[m++] = fabs(o[i].error[k]);
        bias += o[i].error[k];
        z2 += o[i].error[k] * o[i].error[k] / (o[i].u[k] * o[i].u[k]);
    }
    if (m > 0) {
        qsort(v, m, sizeof *v, rising);
        qsort(z, m, sizeof *z, rising);
        printf("%-12s%-14s%5zu%9.3f%9.3f%9.3f%9.3f%11.2f%8.2f\n",
               ce_construction_name((ce_construction)k), class_name[class], m, bias / (double)m,
               v[m / 2], v[(size_t)(0.95 * (double)m)], v[m - 1], sqrt(z2 / (double)m), z[m / 2]);
    }
    free(z);
    free(v);
}

static double quantile_of_ms(const outcome *o, size_t n, double p)
{
    double *v = calloc(n, sizeof *v);
    if (v == NULL) return (double)NAN;
    for (size_t i = 0; i < n; i++) v[i] = o[i].ms;
    qsort(v, n, sizeof *v, rising);
    const double q = v[(size_t)(p * (double)(n - 1))];
    free(v);
    return q;
}

static int worse(const void *a, const void *b)
{
    const double x = fabs(((const outcome *)a)->error[CE_HALF_STEP]),
                 y = fabs(((const outcome *)b)->error[CE_HALF_STEP]);
    return (x < y) - (x > y);
}

int main(int argc, char **argv)
{
    const bool judge = argc > 1 && strcmp(argv[1], "judge") == 0;
    const size_t n = argc > 2 ? strtoul(argv[2], NULL, 10) : 500;
    const size_t worst = argc > 3 ? strtoul(argv[3], NULL, 10) : 0;
    const uint64_t first = argc > 4 ? strtoul(argv[4], NULL, 10) : 1;
    outcome *o = calloc(n, sizeof *o);
    if (o == NULL || n == 0) return 3;
    size_t refused = 0;
    for (size_t i = 0; i < n; i++) {
        o[i] = one(first + i, judge);
        refused += o[i].refused;
    }
    printf("%s half: %zu runs, %zu refused, median %.1f ms, 95 %% %.1f ms a "
           "run\n%-12s%-14s%5s%9s%9s%9s%9s%11s%8s\n",
           judge ? "judging" : "tuning", n, refused, quantile_of_ms(o, n, 0.5),
           quantile_of_ms(o, n, 0.95), "construction", "class", "n", "bias", "median", "95 %",
           "largest", "rms err/u", "median");
    for (int k = 0; k < CE_CONSTRUCTIONS; k++)
        for (int c = 0; c < CLASSES; c++) put_row(o, n, k, c);
    qsort(o, n, sizeof *o, worse);
    for (size_t i = 0; i < worst && i < n; i++)
        printf("%+.3f (u %.3f) %s: %s\n", o[i].error[CE_HALF_STEP], o[i].u[CE_HALF_STEP],
               class_name[o[i].class], o[i].what);
    free(o);
    return 0;
}
