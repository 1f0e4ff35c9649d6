/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/seed.h"
#include "simulate/check.h"
#include "simulate/landmarks.h"
#include "simulate/simulation.h"

#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Random streams of one run. */
enum { STREAM_SIGNAL, STREAM_TEMPERATURE };

ce_simulation_config ce_simulation_config_default(void)
{
    ce_simulation_config c = {.n_glasses = 1, .seed = 1, .max_step_K = 0.1};
    for (size_t g = 0; g < CE_MAX_GLASSES; g++) {
        c.glass[g] = (ce_glass){.ln_a = (double)NAN,
                                .h_K = (double)NAN,
                                .x = (double)NAN,
                                .beta = (double)NAN,
                                .ref_K = (double)NAN,
                                .cp_glass = 1.5,
                                .step = 0.3,
                                .share = 1.0};
    }
    c.programme.prior_rate_K_min = 10.0;
    c.instrument = (ce_instrument){.mass_g = 0.010, .interval_s = 0.6, .transient_s = 15.0};
    c.scheme = CE_RELAX_RECURSIVE;
    return c;
}

void ce_simulation_free(ce_simulation *simulation)
{
    if (simulation == NULL) return;
    free(simulation->step);
    free(simulation->t_s);
    free(simulation->t_K);
    free(simulation->signal_mW);
    for (size_t g = 0; g < CE_MAX_GLASSES; g++) free(simulation->tf_K[g]);
    free(simulation->truth);
    free(simulation);
}

/* Power of first-order events, W/g: only heating passes through them. */
static double peak_flow(const ce_simulation_config *config, double t_K, double rate_K_s)
{
    double sum = 0.0;
    for (size_t i = 0; i < config->n_peaks && rate_K_s > 0.0; i++) {
        const ce_peak *p = &config->peak[i];
        sum += p->enthalpy_J_g * gsl_ran_gaussian_pdf(t_K - p->centre_K, p->sd_K) * rate_K_s;
    }
    return sum;
}

/* Specific heat flow of everything at the nodes of a stretch, W/g. */
static void total_flow(const ce_simulation_config *config, const ce_trace *trace,
                       const ce_stretch *stretch, double *flow, double *part)
{
    size_t n = stretch->last - stretch->first + 1;
    for (size_t i = 0; i < n; i++)
        flow[i] = peak_flow(config, trace->t_K[stretch->first + i], stretch->rate_K_s);
    for (size_t g = 0; g < config->n_glasses; g++) {
        ce_trace_flow(trace, &config->glass[g], g, stretch, part);
        for (size_t i = 0; i < n; i++) flow[i] += config->glass[g].share * part[i];
    }
}

/* Signal at every node: lag, then what adds to it without noise. */
static ce_status node_signal(const ce_simulation_config *config, const ce_trace *trace,
                             double *signal, ce_error *err)
{
    const ce_instrument *m = &config->instrument;
    double *flow = calloc(2 * trace->n, sizeof *flow);
    if (flow == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    double y = 0.0, hook = 0.0, power = m->mass_g * 1000.0; /* W/g to mW */
    for (size_t s = 0; s < trace->n_stretches; s++) {
        const ce_stretch *stretch = &trace->stretch[s];
        total_flow(config, trace, stretch, flow, flow + trace->n);
        if (stretch->kind == CE_HEATING) hook += m->transient_mW;
        if (stretch->kind == CE_COOLING) hook -= m->transient_mW;
        double hook0 = hook;
        if (!(m->lag_s > 0.0)) y = flow[0];
        for (size_t i = stretch->first; i <= stretch->last; i++) {
            double t = trace->t_s[i] - trace->t_s[stretch->first];
            if (i > stretch->first)
                y = ce_lag_step(y, flow[i - 1 - stretch->first], flow[i - stretch->first],
                                trace->t_s[i] - trace->t_s[i - 1], m->lag_s);
            hook = hook0 * exp(-t / m->transient_s);
            signal[i] = power * y + hook + m->offset_mW + m->drift_mW_min * trace->t_s[i] / 60.0;
        }
    }
    free(flow);
    return CE_OK;
}

static gsl_rng *stream(const ce_simulation_config *config, uint64_t which)
{
    gsl_rng *r = gsl_rng_alloc(gsl_rng_mt19937);
    if (r != NULL) gsl_rng_set(r, (unsigned long)(ce_seed_mix(config->seed, which) >> 32));
    return r;
}

/* The points at the ticks, with noise: autoregressive of first order with the stated standard
 * deviation and correlation time, white when that is 0. */
static ce_status record_points(const ce_trace *trace, const double *signal, ce_simulation *sim,
                               ce_error *err)
{
    const ce_instrument *m = &sim->config.instrument;
    gsl_rng *for_signal = stream(&sim->config, STREAM_SIGNAL);
    gsl_rng *for_temperature = stream(&sim->config, STREAM_TEMPERATURE);
    ce_status st = CE_OK;
    if (for_signal == NULL || for_temperature == NULL)
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    double memory = m->noise_time_s > 0.0 ? exp(-m->interval_s / m->noise_time_s) : 0.0;
    double e = 0.0, origin = 0.0;
    size_t k = 0;
    for (size_t i = 0; i < trace->n && st == CE_OK; i++) {
        if (!trace->tick[i]) continue;
        if (k == 0) origin = trace->t_s[i];
        double fresh = gsl_ran_gaussian_ziggurat(for_signal, 1.0);
        e = k == 0 ? fresh : memory * e + sqrt(1.0 - memory * memory) * fresh;
        sim->t_s[k] = trace->t_s[i] - origin;
        sim->t_K[k] = trace->t_K[i] + m->temperature_offset_K +
                      m->temperature_noise_K * gsl_ran_gaussian_ziggurat(for_temperature, 1.0);
        sim->signal_mW[k] = signal[i] + m->noise_mW * e;
        for (size_t g = 0; g < sim->config.n_glasses; g++) sim->tf_K[g][k] = trace->tf_K[g][i];
        k++;
    }
    gsl_rng_free(for_signal);
    gsl_rng_free(for_temperature);
    return st;
}

/* Which rows are the last recorded heating. */
static void find_last_heating(const ce_trace *trace, ce_simulation *sim)
{
    const ce_stretch *last = NULL;
    for (size_t s = 0; s < trace->n_stretches; s++)
        if (trace->stretch[s].recorded && trace->stretch[s].kind == CE_HEATING)
            last = &trace->stretch[s];
    if (last == NULL) return;
    for (size_t i = 0; i <= last->last; i++) {
        if (!trace->tick[i]) continue;
        if (i < last->first)
            sim->last_heating++;
        else
            sim->last_heating_n++;
    }
}

static ce_status one_truth(const ce_trace *trace, const ce_stretch *stretch, size_t g,
                           ce_simulation *sim, ce_error *err)
{
    const ce_instrument *m = &sim->config.instrument;
    const ce_glass *glass = &sim->config.glass[g];
    /* The drift as a heat capacity: P/(m q), per kelvin. */
    double per_K = m->drift_mW_min / 60.0 / stretch->rate_K_s;
    ce_view bare = {0}, view = {m->lag_s, per_K / (1000.0 * m->mass_g * stretch->rate_K_s)};
    ce_ramp_truth sample, seen;
    bool spans = false;
    ce_status st = ce_landmarks(trace, glass, g, stretch, &bare, &sample, &spans, err);
    if (st == CE_OK && spans)
        st = ce_landmarks(trace, glass, g, stretch, &view, &seen, &spans, err);
    if (st != CE_OK || !spans) return st;
    for (int i = 0; i < CE_CONSTRUCTIONS; i++) seen.tg_K[i] += m->temperature_offset_K;
    seen.fictive_area_K += m->temperature_offset_K;
    seen.peak_K += m->temperature_offset_K;
    seen.half_step_sample_K = sample.tg_K[CE_HALF_STEP];
    sim->truth[sim->n_truth++] = seen;
    return CE_OK;
}

static ce_status record_truth(const ce_trace *trace, ce_simulation *sim, ce_error *err)
{
    ce_status st = CE_OK;
    for (size_t s = 0; s < trace->n_stretches; s++)
        for (size_t g = 0; g < sim->config.n_glasses && st == CE_OK; g++)
            if (trace->stretch[s].recorded && trace->stretch[s].rate_K_s != 0.0)
                st = one_truth(trace, &trace->stretch[s], g, sim, err);
    return st;
}

static ce_status allocate(const ce_simulation_config *config, const ce_trace *trace,
                          ce_simulation *sim)
{
    sim->config = *config;
    sim->step = calloc(config->programme.n, sizeof *sim->step);
    for (size_t i = 0; i < trace->n; i++) sim->n += trace->tick[i] ? 1 : 0;
    sim->t_s = calloc(sim->n, sizeof *sim->t_s);
    sim->t_K = calloc(sim->n, sizeof *sim->t_K);
    sim->signal_mW = calloc(sim->n, sizeof *sim->signal_mW);
    sim->truth = calloc(trace->n_stretches * config->n_glasses, sizeof *sim->truth);
    bool ok = sim->step != NULL && sim->t_s != NULL && sim->t_K != NULL && sim->signal_mW != NULL &&
              sim->truth != NULL;
    for (size_t g = 0; g < config->n_glasses; g++) {
        sim->tf_K[g] = calloc(sim->n, sizeof *sim->tf_K[g]);
        ok = ok && sim->tf_K[g] != NULL;
    }
    if (!ok) return CE_E_NOMEM;
    memcpy(sim->step, config->programme.step, config->programme.n * sizeof *sim->step);
    sim->config.programme.step = sim->step;
    return CE_OK;
}

ce_status ce_simulation_record(const ce_simulation_config *config, const ce_trace *trace,
                               ce_simulation **simulation, ce_error *err)
{
    *simulation = NULL;
    ce_simulation *sim = calloc(1, sizeof *sim);
    double *signal = calloc(trace->n, sizeof *signal);
    ce_status st = sim == NULL || signal == NULL ? CE_E_NOMEM : allocate(config, trace, sim);
    if (st != CE_OK) (void)ce_fail(err, st, "out of memory");
    if (st == CE_OK) st = node_signal(config, trace, signal, err);
    if (st == CE_OK) st = record_points(trace, signal, sim, err);
    if (st == CE_OK) find_last_heating(trace, sim);
    if (st == CE_OK) st = record_truth(trace, sim, err);
    free(signal);
    if (st == CE_OK) {
        *simulation = sim;
        sim = NULL;
    }
    ce_simulation_free(sim);
    return st;
}

ce_status ce_simulate_run(const ce_simulation_config *config, ce_simulation **simulation,
                          ce_error *err)
{
    *simulation = NULL;
    ce_status st = ce_simulation_check(config, err);
    ce_trace trace = {0};
    if (st == CE_OK) st = ce_trace_plan(config, &trace, err);
    for (size_t g = 0; g < config->n_glasses && st == CE_OK; g++) {
        ce_relax *relax = NULL;
        st = ce_trace_relax(config, g, &trace, &relax, err);
        ce_relax_free(relax);
    }
    if (st == CE_OK) st = ce_simulation_record(config, &trace, simulation, err);
    ce_trace_free(&trace);
    return st;
}

size_t ce_simulation_size(const ce_simulation *simulation)
{
    return simulation->n;
}
const double *ce_simulation_time_s(const ce_simulation *simulation)
{
    return simulation->t_s;
}
const double *ce_simulation_temperature_K(const ce_simulation *simulation)
{
    return simulation->t_K;
}
const double *ce_simulation_signal_mW(const ce_simulation *simulation)
{
    return simulation->signal_mW;
}
const double *ce_simulation_fictive_K(const ce_simulation *simulation, size_t glass)
{
    return glass < simulation->config.n_glasses ? simulation->tf_K[glass] : NULL;
}
const ce_ramp_truth *ce_simulation_truth(const ce_simulation *simulation, size_t *n)
{
    *n = simulation->n_truth;
    return simulation->truth;
}
const ce_simulation_config *ce_simulation_get_config(const ce_simulation *simulation)
{
    return &simulation->config;
}
