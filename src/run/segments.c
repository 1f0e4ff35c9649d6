/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "run/segments.h"

#include "base/order.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* A reversal of the temperature by so much ends a ramp: more than any oscillation of control. */
#define REVERSAL_K 3.0
/* What changes by less is a hold. */
#define LEAST_RAMP_K 5.0
/* Below this part of its ramp's rate the temperature is not yet, or no longer, ramping. */
#define LAGGING 0.3
/* Fewer points are no segment of their own but belong to their neighbour. */
#define LEAST_POINTS 8

typedef struct {
    ce_run *run;
    ce_error *err;
    size_t room;
} finder;

static double time_at(const ce_run *run, size_t i)
{
    return run->time_s != NULL ? run->time_s[i] : (double)i;
}

/* Robust rate and spread over [first, first + n): a quantile (0.5 = median) and the MAD of chord slopes, per unit of
 * time. */
static ce_status rate_of(const ce_run *run, size_t first, size_t n, double quantile, double *rate,
                         double *spread)
{
    size_t chord = n / 20 > 0 ? n / 20 : 1, m = 0;
    double *slope = malloc(n * sizeof *slope);
    if (slope == NULL) return CE_E_NOMEM;
    for (size_t i = first; i + chord < first + n; i += (chord + 3) / 4) {
        double dt = time_at(run, i + chord) - time_at(run, i);
        if (dt > 0.0) slope[m++] = (run->temperature_K[i + chord] - run->temperature_K[i]) / dt;
    }
    *rate = ce_quantile(slope, m, quantile);
    *spread = CE_MAD_TO_SD * ce_mad(slope, m);
    free(slope);
    return CE_OK;
}

static ce_status add(finder *f, size_t first, size_t n, ce_segment_kind kind)
{
    ce_run *run = f->run;
    if (run->n_segments == CE_MAX_SEGMENTS)
        return ce_fail_at(f->err, CE_E_LIMIT, run->name, 0, 0, "more than %zu programme segments",
                          CE_MAX_SEGMENTS);
    if (run->n_segments == f->room) {
        size_t want = f->room == 0 ? 16 : 2 * f->room;
        ce_segment *p = reallocarray(run->segment, want, sizeof *p);
        if (p == NULL) return ce_fail(f->err, CE_E_NOMEM, "out of memory");
        run->segment = p;
        f->room = want;
    }
    ce_segment s = {
        .kind = kind, .index = run->n_segments + 1, .nth_of_kind = 1, .first = first, .n = n};
    for (size_t i = 0; i < run->n_segments; i++) s.nth_of_kind += run->segment[i].kind == kind;
    double rate, spread;
    if (rate_of(run, first, n, 0.5, &rate, &spread) != CE_OK)
        return ce_fail(f->err, CE_E_NOMEM, "out of memory");
    s.rate_K_min = run->time_s != NULL ? 60.0 * rate : (double)NAN;
    s.rate_sd_K_min = run->time_s != NULL ? 60.0 * spread : (double)NAN;
    s.low_K = s.high_K = run->temperature_K[first];
    for (size_t i = first; i < first + n; i++) {
        s.low_K = fmin(s.low_K, run->temperature_K[i]);
        s.high_K = fmax(s.high_K, run->temperature_K[i]);
    }
    run->segment[run->n_segments++] = s;
    return CE_OK;
}

/* Where within [a, b) the ramping proper begins, seen from a (step 1) or from the end (step -1). */
static size_t trim(const ce_run *run, size_t a, size_t b, double rate, bool from_end)
{
    size_t n = b - a, chord = n / 50 > 0 ? n / 50 : 1;
    for (size_t k = 0; k + chord < n; k++) {
        size_t i = from_end ? b - 1 - k - chord : a + k, j = i + chord;
        double dt = time_at(run, j) - time_at(run, i);
        if (dt > 0.0 && (run->temperature_K[j] - run->temperature_K[i]) / dt / rate > LAGGING)
            return k;
    }
    return 0;
}

/* One monotone leg: a hold, or a ramp with the holds at its ends. */
static ce_status add_leg(finder *f, size_t a, size_t b)
{
    const ce_run *run = f->run;
    if (b - a < 2) return CE_OK;
    double change = run->temperature_K[b - 1] - run->temperature_K[a];
    if (fabs(change) < LEAST_RAMP_K) return add(f, a, b - a, CE_ISOTHERMAL);
    double rate, spread;
    /* holds at the ends may outlast the ramp: its rate is among the fastest */
    if (rate_of(run, a, b - a, change > 0.0 ? 0.9 : 0.1, &rate, &spread) != CE_OK)
        return ce_fail(f->err, CE_E_NOMEM, "out of memory");
    size_t head = 0, tail = 0;
    if (rate * change > 0.0) { /* else mostly a hold: what follows cannot tell */
        head = trim(run, a, b, rate, false);
        tail = trim(run, a, b, rate, true);
    }
    if (head < LEAST_POINTS) head = 0;
    if (tail < LEAST_POINTS) tail = 0;
    ce_status st = head > 0 ? add(f, a, head, CE_ISOTHERMAL) : CE_OK;
    if (st == CE_OK)
        st = add(f, a + head, b - a - head - tail, change > 0.0 ? CE_HEATING : CE_COOLING);
    if (st == CE_OK && tail > 0) st = add(f, b - tail, tail, CE_ISOTHERMAL);
    return st;
}

/* Split [a, b) where the temperature turns round by more than REVERSAL_K. */
static ce_status add_stretch(finder *f, size_t a, size_t b)
{
    const double *T = f->run->temperature_K;
    size_t begin = a, extreme = a;
    int direction = 0;
    ce_status st = CE_OK;
    for (size_t i = a + 1; i < b && st == CE_OK; i++) {
        double back = T[i] - T[extreme];
        if (direction == 0) {
            if (fabs(back) >= REVERSAL_K) direction = back > 0.0 ? 1 : -1, extreme = i;
        } else if (back * direction >= 0.0)
            extreme = i;
        else if (-back * direction >= REVERSAL_K) {
            if (extreme > begin) st = add_leg(f, begin, extreme + 1);
            begin = extreme + 1;
            extreme = i;
            direction = -direction;
        }
    }
    return st == CE_OK ? add_leg(f, begin, b) : st;
}

ce_status ce_run_find_segments(ce_run *run, const size_t *start, size_t n_starts, double rate_K_min,
                               ce_error *err)
{
    finder f = {.run = run, .err = err};
    ce_status st = CE_OK;
    size_t from = 0;
    for (size_t i = 0; i <= n_starts && st == CE_OK; i++) {
        size_t to = i < n_starts ? start[i] : run->n;
        if (to > from) st = add_stretch(&f, from, to);
        from = to > from ? to : from;
    }
    for (size_t i = 0; i < run->n_segments && run->time_s == NULL; i++) {
        ce_segment *s = &run->segment[i];
        s->rate_K_min = s->kind == CE_ISOTHERMAL
                            ? 0.0
                            : copysign(rate_K_min, s->kind == CE_HEATING ? 1.0 : -1.0);
    }
    return st;
}
