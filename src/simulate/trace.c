/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "simulate/trace.h"

#include <math.h>
#include <stdlib.h>

/* Unrecorded holds: steps even in the logarithm of time, from a first one of a second. */
#define STEPS_A_DECADE 24.0

void ce_trace_free(ce_trace *trace)
{
    free(trace->t_s);
    free(trace->t_K);
    free(trace->tick);
    for (size_t g = 0; g < CE_MAX_GLASSES; g++) free(trace->tf_K[g]);
    free(trace->stretch);
    *trace = (ce_trace){0};
}

static ce_status grow(ce_trace *trace, size_t room)
{
    double *p = reallocarray(trace->t_s, room, sizeof *p);
    if (p == NULL) return CE_E_NOMEM;
    trace->t_s = p;
    p = reallocarray(trace->t_K, room, sizeof *p);
    if (p == NULL) return CE_E_NOMEM;
    trace->t_K = p;
    bool *b = reallocarray(trace->tick, room, sizeof *b);
    if (b == NULL) return CE_E_NOMEM;
    trace->tick = b;
    trace->room = room;
    return CE_OK;
}

static ce_status add_node(ce_trace *trace, double t_s, double t_K, bool tick, ce_error *err)
{
    if (trace->n == CE_MAX_POINTS)
        return ce_fail(err, CE_E_LIMIT,
                       "the programme needs more than %zu points; raise the "
                       "interval or the step",
                       CE_MAX_POINTS);
    if (trace->n == trace->room && grow(trace, trace->room < 512 ? 1024 : 2 * trace->room) != CE_OK)
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    trace->t_s[trace->n] = t_s;
    trace->t_K[trace->n] = t_K;
    trace->tick[trace->n++] = tick;
    return CE_OK;
}

/* Where a stretch runs: from (t0, T0) for duration at rate. */
typedef struct {
    double t0_s, from_K, to_K, duration_s, rate_K_s;
} span;

static ce_status add_between(ce_trace *trace, const span *s, double from_s, double to_s, bool tick,
                             double max_step_K, ce_error *err)
{
    double steps = ceil(fabs(s->rate_K_s) * (to_s - from_s) / max_step_K - 1e-9);
    if (!(steps < (double)CE_MAX_POINTS))
        return ce_fail(err, CE_E_LIMIT,
                       "the programme needs more than %zu points; raise the "
                       "interval or the step",
                       CE_MAX_POINTS);
    size_t m = steps < 1.0 ? 1 : (size_t)steps;
    ce_status st = CE_OK;
    for (size_t i = 1; i <= m && st == CE_OK; i++) {
        double t = i == m ? to_s : from_s + (to_s - from_s) * (double)i / (double)m;
        bool end = i == m && to_s >= s->duration_s;
        double t_K = end ? s->to_K : s->from_K + s->rate_K_s * t;
        st = add_node(trace, s->t0_s + t, t_K, i == m && tick, err);
    }
    return st;
}

/* Nodes of a recorded stretch: the instrument ticks every interval_s since origin_s. */
static ce_status add_recorded(ce_trace *trace, const span *s, double origin_s, double interval_s,
                              double max_step_K, ce_error *err)
{
    ce_status st = CE_OK;
    double done = 0.0;
    double k = floor((s->t0_s - origin_s) / interval_s + 1e-6);
    while (st == CE_OK && done < s->duration_s) {
        k += 1.0;
        double next = origin_s + k * interval_s - s->t0_s;
        bool tick = next <= s->duration_s + 1e-6 * interval_s;
        if (!(next < s->duration_s - 1e-6 * interval_s)) next = s->duration_s;
        st = add_between(trace, s, done, next, tick, max_step_K, err);
        done = next;
    }
    return st;
}

static ce_status add_unrecorded(ce_trace *trace, const span *s, double max_step_K, ce_error *err)
{
    if (s->rate_K_s != 0.0)
        return add_between(trace, s, 0.0, s->duration_s, false, max_step_K, err);
    ce_status st = CE_OK;
    double done = 0.0, next = s->duration_s < 1.0 ? s->duration_s : 1.0;
    while (st == CE_OK && done < s->duration_s) {
        st = add_between(trace, s, done, next, false, max_step_K, err);
        done = next;
        next *= pow(10.0, 1.0 / STEPS_A_DECADE);
        if (!(next < s->duration_s)) next = s->duration_s;
    }
    return st;
}

/* What the recorded stretches are called: counted as a reader of the file counts them. */
static void number_stretches(ce_trace *trace)
{
    size_t index = 0, count[3] = {0, 0, 0};
    for (size_t i = 0; i < trace->n_stretches; i++) {
        ce_stretch *s = &trace->stretch[i];
        if (!s->recorded) continue;
        s->index = ++index;
        s->nth_of_kind = ++count[s->kind];
    }
}

static span span_of(const ce_programme_step *step, double t_s, double from_K)
{
    span s = {.t0_s = t_s, .from_K = from_K, .to_K = step->hold ? from_K : step->to_K};
    if (step->hold) {
        s.duration_s = step->hold_s;
    } else {
        double rate = step->rate_K_min / 60.0;
        s.duration_s = fabs(step->to_K - from_K) / rate;
        s.rate_K_s = step->to_K > from_K ? rate : -rate;
    }
    return s;
}

ce_status ce_trace_plan(const ce_simulation_config *config, ce_trace *trace, ce_error *err)
{
    const ce_programme *p = &config->programme;
    *trace = (ce_trace){0};
    trace->stretch = calloc(p->n + 1, sizeof *trace->stretch);
    if (trace->stretch == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    bool recording = p->n > 0 && !p->step[0].unrecorded;
    double t = 0.0, t_K = p->start_K, origin = 0.0;
    ce_status st = add_node(trace, t, t_K, recording, err);
    for (size_t i = 0; i < p->n && st == CE_OK; i++) {
        span s = span_of(&p->step[i], t, t_K);
        bool now = !p->step[i].unrecorded;
        if (now && !recording) {
            origin = t;
            trace->tick[trace->n - 1] = true;
        }
        recording = now;
        ce_stretch *stretch = &trace->stretch[trace->n_stretches++];
        *stretch = (ce_stretch){.first = trace->n - 1, .rate_K_s = s.rate_K_s, .recorded = now};
        stretch->kind = s.rate_K_s > 0.0   ? CE_HEATING
                        : s.rate_K_s < 0.0 ? CE_COOLING
                                           : CE_ISOTHERMAL;
        st = now ? add_recorded(trace, &s, origin, config->instrument.interval_s,
                                config->max_step_K, err)
                 : add_unrecorded(trace, &s, config->max_step_K, err);
        stretch->last = trace->n - 1;
        t += s.duration_s;
        t_K = s.to_K;
    }
    number_stretches(trace);
    for (size_t g = 0; g < config->n_glasses && st == CE_OK; g++) {
        trace->tf_K[g] = calloc(trace->n, sizeof *trace->tf_K[g]);
        if (trace->tf_K[g] == NULL) st = ce_fail(err, CE_E_NOMEM, "out of memory");
    }
    if (st != CE_OK) ce_trace_free(trace);
    return st;
}

static ce_status ramp(ce_relax *relax, double from_K, double to_K, double rate_K_min, double step_K)
{
    double n = ceil(fabs(to_K - from_K) / step_K);
    ce_status st = CE_OK;
    ce_relax_kink(relax);
    for (double i = 0.0; i < n && st == CE_OK; i += 1.0)
        st = ce_relax_step(relax, fabs(to_K - from_K) / n * 60.0 / rate_K_min, (to_K - from_K) / n);
    return st;
}

static ce_status hold(ce_relax *relax, double duration_s)
{
    ce_status st = CE_OK;
    ce_relax_kink(relax);
    double done = 0.0, next = duration_s < 1.0 ? duration_s : 1.0;
    while (st == CE_OK && done < duration_s) {
        st = ce_relax_step(relax, next - done, 0.0);
        done = next;
        next *= pow(10.0, 1.0 / STEPS_A_DECADE);
        if (!(next < duration_s)) next = duration_s;
    }
    return st;
}

/* From equilibrium to the start of the programme. */
static ce_status prior(const ce_programme *p, ce_relax *relax, double equilibrium_K, double step_K)
{
    ce_status st = CE_OK;
    double at = equilibrium_K;
    if (at <= p->start_K) return CE_OK;
    if (p->prior_age_s > 0.0 && p->prior_age_K < at) {
        st = ramp(relax, at, p->prior_age_K, p->prior_rate_K_min, step_K);
        if (st == CE_OK) st = hold(relax, p->prior_age_s);
        at = p->prior_age_K;
    }
    if (st == CE_OK && at != p->start_K)
        st = ramp(relax, at, p->start_K, p->prior_rate_K_min, step_K);
    return st;
}

ce_status ce_trace_relax(const ce_simulation_config *config, size_t glass, ce_trace *trace,
                         ce_relax **relax, ce_error *err)
{
    const ce_glass *g = &config->glass[glass];
    const ce_programme *p = &config->programme;
    double equilibrium = ce_relax_equilibrium(g, p->prior_rate_K_min);
    double start = equilibrium > p->start_K ? equilibrium : p->start_K;
    if (!(start <= 3000.0))
        return ce_fail(err, CE_E_DOMAIN,
                       "ln-a %g and h %g K: this glass does not melt below 3000 K", g->ln_a,
                       g->h_K);
    ce_status st = CE_OK;
    if (*relax == NULL)
        st = ce_relax_start(g, config->scheme, start, relax, err);
    else
        ce_relax_restart(*relax, g, start);
    if (st == CE_OK) st = prior(p, *relax, equilibrium, config->max_step_K);
    double *tf = trace->tf_K[glass];
    if (st == CE_OK) tf[0] = ce_relax_fictive(*relax);
    for (size_t s = 0; s < trace->n_stretches && st == CE_OK; s++) {
        ce_relax_kink(*relax);
        for (size_t i = trace->stretch[s].first; i < trace->stretch[s].last && st == CE_OK; i++) {
            st = ce_relax_step(*relax, trace->t_s[i + 1] - trace->t_s[i],
                               trace->t_K[i + 1] - trace->t_K[i]);
            tf[i + 1] = ce_relax_fictive(*relax);
        }
    }
    return st == CE_OK ? st : ce_fail(err, st, "out of memory");
}

/* dTf/dt at node i of a stretch from the slopes of its two intervals; at the ends extrapolated. */
static double tf_slope(const double *t, const double *tf, size_t i, size_t first, size_t last)
{
    if (last - first < 2) return (tf[last] - tf[first]) / (t[last] - t[first]);
    size_t m = i == first ? first + 1 : i == last ? last - 1 : i;
    double h1 = t[m] - t[m - 1], h2 = t[m + 1] - t[m];
    double s1 = (tf[m] - tf[m - 1]) / h1, s2 = (tf[m + 1] - tf[m]) / h2;
    double curve = (s2 - s1) / (h1 + h2); /* of the parabola through the three nodes */
    if (i < m) return s1 - curve * h1;
    if (i > m) return s2 + curve * h2;
    return s1 + curve * h1;
}

void ce_trace_flow(const ce_trace *trace, const ce_glass *glass, size_t which,
                   const ce_stretch *stretch, double *flow)
{
    const double *tf = trace->tf_K[which];
    for (size_t i = stretch->first; i <= stretch->last; i++) {
        double slope = tf_slope(trace->t_s, tf, i, stretch->first, stretch->last);
        flow[i - stretch->first] = ce_glass_cp(glass, trace->t_K[i]) * stretch->rate_K_s +
                                   ce_glass_step(glass, tf[i]) * slope;
    }
}
