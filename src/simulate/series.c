/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/seed.h"
#include "simulate/check.h"
#include "simulate/landmarks.h"
#include "simulate/simulation.h"

#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <pthread.h>
#include <stdatomic.h>
#include <stdlib.h>
#include <string.h>

/* Where the streams of random numbers start. Series: one a sample, and the shared certificate
 * error. Sample: certificate, sample scatter, then one a run. Run: noise (0, 1), error and mass. */
enum { STREAM_CERTIFICATE, STREAM_SAMPLE, STREAM_RUNS = 16, STREAM_RUN_ERROR = 8 };
#define STREAM_COMMON (UINT64_C(1) << 40)

#define ANCHOR_TOLERANCE_K 1.0e-5
#define PROGRAMME_ROUND_K  5.0
#define MAX_THREADS        64

ce_series_plan ce_series_plan_default(void)
{
    return (ce_series_plan){
        .anchor = CE_HALF_STEP, .run = ce_simulation_config_default(), .seed = 1, .threads = 1};
}

void ce_simulated_series_free(ce_simulated_series *series)
{
    if (series == NULL) return;
    for (size_t i = 0; series->sample != NULL && i < series->n; i++) {
        ce_simulated_sample *s = &series->sample[i];
        for (size_t k = 0; s->reading != NULL && k < s->n; k++)
            ce_simulation_free(s->reading[k].simulation);
        free(s->reading);
        free((void *)(uintptr_t)s->name);
    }
    free(series->sample);
    *series = (ce_simulated_series){0};
}

/* Two numbers of one stream: standard normal and uniform in (0, 1). */
static ce_status draw(uint64_t seed, double *normal, double *uniform)
{
    gsl_rng *r = gsl_rng_alloc(gsl_rng_mt19937);
    if (r == NULL) return CE_E_NOMEM;
    gsl_rng_set(r, (unsigned long)(seed >> 32));
    *normal = gsl_ran_gaussian_ziggurat(r, 1.0);
    *uniform = gsl_rng_uniform_pos(r);
    gsl_rng_free(r);
    return CE_OK;
}

/* Certificates state four digits. */
static double four_digits(double x)
{
    double scale = pow(10.0, 3.0 - floor(log10(x)));
    return scale >= 1.0 ? round(x * scale) / scale : round(x * scale) * (1.0 / scale);
}

/* The anchor on the last recorded heating, as the instrument sees it without noise and offset. */
static ce_status anchor_of(const ce_series_plan *plan, const ce_simulation_config *config,
                           ce_trace *trace, ce_relax **relax, double *anchor_K, ce_error *err)
{
    *anchor_K = (double)NAN;
    ce_status st = ce_trace_relax(config, 0, trace, relax, err);
    const ce_stretch *last = NULL;
    for (size_t s = 0; s < trace->n_stretches; s++)
        if (trace->stretch[s].recorded && trace->stretch[s].kind == CE_HEATING)
            last = &trace->stretch[s];
    ce_view view = {.lag_s = config->instrument.lag_s};
    ce_ramp_truth truth;
    bool spans = false;
    if (st == CE_OK && last != NULL)
        st = ce_landmarks(trace, &config->glass[0], 0, last, &view, &truth, &spans, err);
    if (st == CE_OK && spans) *anchor_K = truth.tg_K[plan->anchor];
    return st;
}

/* ln A such that the anchor is at tg_K: Newton's steps with d anchor/d ln A = T^2/h at first, then
 * secants. trace is left filled for the glass found. */
static ce_status place_glass(const ce_series_plan *plan, ce_simulation_config *config, double tg_K,
                             ce_trace *trace, ce_relax **relax, ce_error *err)
{
    ce_glass *g = &config->glass[0];
    double ref = g->ref_K;
    ce_glass_move(g, ce_glass_temperature(g, 100.0), tg_K);
    g->ref_K = ref; /* heat capacities belong to the temperature, not to the sample */
    double slope = tg_K * tg_K / g->h_K, last_ln_a = 0.0, last = (double)NAN;
    for (int i = 0; i < 40; i++) {
        double at = 0.0;
        ce_status st = anchor_of(plan, config, trace, relax, &at, err);
        if (st != CE_OK) return st;
        if (!isfinite(at))
            return ce_fail(err, CE_E_NOFIT,
                           "--start, --ramp: no recorded heating of the programme "
                           "runs from glass to liquid of a sample with a Tg of "
                           "%.2f K",
                           tg_K);
        if (fabs(at - tg_K) < ANCHOR_TOLERANCE_K) return CE_OK;
        if (i > 0 && fabs(g->ln_a - last_ln_a) > 0.0) {
            double secant = (at - last) / (g->ln_a - last_ln_a);
            if (secant > 0.2 * slope && secant < 5.0 * slope) slope = secant;
        }
        last_ln_a = g->ln_a;
        last = at;
        g->ln_a += (tg_K - at) / slope;
    }
    return ce_fail(err, CE_E_NOFIT, "no position of the glass found for a Tg of %.3f K", tg_K);
}

/* The programme and the peaks of this sample: moved along with its Tg by whole steps. */
static ce_status shift_programme(const ce_series_plan *plan, double tg_K,
                                 ce_simulation_config *config, ce_programme_step **steps,
                                 ce_error *err)
{
    const ce_programme *p = &plan->run.programme;
    double by = plan->programme_tg_K > 0.0
                    ? PROGRAMME_ROUND_K * round((tg_K - plan->programme_tg_K) / PROGRAMME_ROUND_K)
                    : 0.0;
    *steps = calloc(p->n + 1, sizeof **steps);
    if (*steps == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    for (size_t i = 0; i < p->n; i++) {
        (*steps)[i] = p->step[i];
        (*steps)[i].to_K += by;
    }
    config->programme.step = *steps;
    config->programme.start_K += by;
    config->programme.prior_age_K += by;
    for (size_t i = 0; i < config->n_peaks && i < CE_MAX_PEAKS; i++) config->peak[i].centre_K += by;
    return CE_OK;
}

static ce_status record_runs(const ce_series_plan *plan, ce_simulation_config *config,
                             const ce_trace *trace, uint64_t seed, ce_simulated_sample *sample,
                             ce_error *err)
{
    ce_status st = CE_OK;
    for (size_t k = 0; k < sample->n && st == CE_OK; k++) {
        ce_simulated_reading *r = &sample->reading[k];
        uint64_t run_seed = ce_seed_mix(seed, STREAM_RUNS + k);
        double normal = 0.0, uniform = 0.0;
        if (draw(ce_seed_mix(run_seed, STREAM_RUN_ERROR), &normal, &uniform) != CE_OK)
            return ce_fail(err, CE_E_NOMEM, "out of memory");
        r->error_K = plan->run_sd_K * normal;
        r->tg_K = sample->tg_K + r->error_K;
        if (!plan->whole_runs) continue;
        const ce_instrument *m = &plan->run.instrument;
        config->seed = run_seed;
        config->instrument.temperature_offset_K = m->temperature_offset_K + r->error_K;
        config->instrument.mass_g =
            round(1.0e6 * m->mass_g * (1.0 + plan->mass_spread * (2.0 * uniform - 1.0))) / 1.0e6;
        r->tg_K += m->temperature_offset_K;
        st = ce_simulation_record(config, trace, &r->simulation, err);
    }
    return st;
}

static ce_status one_sample(const ce_series_plan *plan, size_t i, double common,
                            ce_simulated_sample *s, ce_error *err)
{
    const ce_sample_plan *p = &plan->sample[i];
    uint64_t seed = ce_seed_mix(plan->seed, i);
    double certificate = 0.0, scatter = 0.0, unused = 0.0;
    *s = (ce_simulated_sample){.role = p->role, .mn_g_mol = p->mn_g_mol, .ln_a = (double)NAN};
    s->n = p->runs;
    s->name = strdup(p->name);
    s->reading = calloc(s->n, sizeof *s->reading);
    if (s->name == NULL || s->reading == NULL ||
        draw(ce_seed_mix(seed, STREAM_CERTIFICATE), &certificate, &unused) != CE_OK ||
        draw(ce_seed_mix(seed, STREAM_SAMPLE), &scatter, &unused) != CE_OK)
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    s->mn_certified_g_mol = p->role == CE_UNKNOWN
                                ? (double)NAN
                                : four_digits(p->mn_g_mol * (1.0 + plan->mn_common_u_rel * common) *
                                              (1.0 + plan->mn_u_rel * certificate));
    s->tg_relation_K = plan->relation(p->mn_g_mol, plan->relation_context);
    if (!(s->tg_relation_K > 0.0 && s->tg_relation_K < 3000.0))
        return ce_fail(err, CE_E_DOMAIN, "sample '%s': the relation gives a Tg of %g K at %g g/mol",
                       p->name, s->tg_relation_K, p->mn_g_mol);
    s->tg_K = s->tg_relation_K + plan->sample_sd_K * scatter;
    ce_simulation_config config = plan->run;
    if (!plan->whole_runs) return record_runs(plan, &config, NULL, seed, s, err);

    ce_programme_step *steps = NULL;
    ce_trace trace = {0};
    ce_relax *relax = NULL;
    ce_status st = shift_programme(plan, s->tg_K, &config, &steps, err);
    if (st == CE_OK) st = ce_simulation_check(&config, err);
    if (st == CE_OK) st = ce_trace_plan(&config, &trace, err);
    if (st == CE_OK) st = place_glass(plan, &config, s->tg_K, &trace, &relax, err);
    ce_relax_free(relax);
    relax = NULL;
    if (st == CE_OK && config.n_glasses > 1) st = ce_trace_relax(&config, 1, &trace, &relax, err);
    ce_relax_free(relax);
    s->ln_a = config.glass[0].ln_a;
    if (st == CE_OK) st = record_runs(plan, &config, &trace, seed, s, err);
    ce_trace_free(&trace);
    free(steps);
    return st;
}

/* Samples are independent: threads take the next one until none is left. */
typedef struct {
    const ce_series_plan *plan;
    double common;
    ce_simulated_series *series;
    ce_error *error; /* one a sample */
    atomic_size_t next;
} work;

static void *worker(void *context)
{
    work *w = context;
    for (size_t i; (i = atomic_fetch_add(&w->next, 1)) < w->series->n;)
        (void)one_sample(w->plan, i, w->common, &w->series->sample[i], &w->error[i]);
    return NULL;
}

static ce_status check_plan(const ce_series_plan *plan, ce_error *err)
{
    if (plan->n == 0 || plan->sample == NULL || plan->relation == NULL)
        return ce_fail(err, CE_E_DOMAIN, "a series needs a relation and at least one sample");
    if (plan->anchor != CE_HALF_STEP && plan->anchor != CE_FICTIVE)
        return ce_fail(err, CE_E_DOMAIN, "--anchor: must be half_step or fictive");
    const struct {
        const char *option;
        double value, high;
    } rules[] = {
        {"--mn-u", plan->mn_u_rel, 0.25},          {"--mn-common-u", plan->mn_common_u_rel, 0.25},
        {"--run-sd", plan->run_sd_K, 100.0},       {"--sample-sd", plan->sample_sd_K, 100.0},
        {"--mass-spread", plan->mass_spread, 0.9}, {"--programme-tg", plan->programme_tg_K, 3000.0},
    };
    for (size_t i = 0; i < sizeof rules / sizeof *rules; i++)
        if (!(rules[i].value >= 0.0 && rules[i].value <= rules[i].high))
            return ce_fail(err, CE_E_DOMAIN, "%s: %.9g is not in [0, %.9g]", rules[i].option,
                           rules[i].value, rules[i].high);
    for (size_t i = 0; i < plan->n; i++) {
        const ce_sample_plan *s = &plan->sample[i];
        if (s->name == NULL || s->name[0] == '\0')
            return ce_fail(err, CE_E_DOMAIN, "sample %zu of the series has no name", i + 1);
        for (size_t k = 0; k < i; k++)
            if (strcmp(plan->sample[k].name, s->name) == 0)
                return ce_fail(err, CE_E_DOMAIN, "two samples are named '%s'", s->name);
        if (!(s->mn_g_mol > 0.0 && isfinite(s->mn_g_mol)))
            return ce_fail(err, CE_E_DOMAIN, "sample '%s': Mn %g g/mol is not positive", s->name,
                           s->mn_g_mol);
        if (s->runs == 0 || s->runs > 10000)
            return ce_fail(err, CE_E_DOMAIN, "--runs: sample '%s' needs 1 to 10000 runs", s->name);
    }
    return CE_OK;
}

static ce_status run_workers(work *w, size_t threads)
{
    pthread_t id[MAX_THREADS];
    size_t started = 0;
    while (started + 1 < threads && started < MAX_THREADS &&
           pthread_create(&id[started], NULL, worker, w) == 0)
        started++;
    (void)worker(w);
    for (size_t i = 0; i < started; i++) (void)pthread_join(id[i], NULL);
    for (size_t i = 0; i < w->series->n; i++)
        if (w->error[i].code != CE_OK) return w->error[i].code;
    return CE_OK;
}

ce_status ce_simulate_series(const ce_series_plan *plan, ce_simulated_series *series, ce_error *err)
{
    *series = (ce_simulated_series){0};
    ce_status st = check_plan(plan, err);
    if (st == CE_OK && plan->whole_runs) st = ce_simulation_check(&plan->run, err);
    if (st != CE_OK) return st;
    double unused = 0.0;
    work w = {.plan = plan, .series = series};
    atomic_init(&w.next, 0);
    series->sample = calloc(plan->n, sizeof *series->sample);
    w.error = calloc(plan->n, sizeof *w.error);
    if (series->sample == NULL || w.error == NULL ||
        draw(ce_seed_mix(plan->seed, STREAM_COMMON), &w.common, &unused) != CE_OK) {
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    } else {
        series->n = plan->n;
        st = run_workers(&w, plan->threads);
        for (size_t i = 0; i < plan->n && err != NULL && err->code == CE_OK; i++) *err = w.error[i];
    }
    free(w.error);
    if (st != CE_OK) ce_simulated_series_free(series);
    return st;
}
