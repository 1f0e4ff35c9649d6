/* SPDX-License-Identifier: GPL-3.0-or-later
 * Segments are told by the local rate of temperature, with hysteresis: a new kind of segment begins
 * only when it has moved the temperature, or lasted, by more than noise and control ripple can. */
#include "run/segments.h"

#include "base/order.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define SAMPLES         ((size_t)20001) /* enough for medians, bounds memory                     */
#define HOLD_K_MIN      0.3             /* a hold drifts less than this, K/min                   */
#define HOLD_SHARE      0.2             /* ... and less than this share of the ramps of the run  */
#define HOLD_SECONDS    20.0            /* a turning point is no hold                            */
#define RAMP_K          1.0             /* a ramp moves more than this                           */
#define WINDOW_POINTS   ((size_t)8)     /* the local rate is taken over about so many            */
#define MIN_INTERIOR    ((size_t)8)
#define RATE_CHANGE     1.25 /* two ramps of one direction differ by at least this factor        */
#define RATE_SPREAD_MAX 0.1

typedef struct {
    const double *t; /* NULL: the row number */
    const double *T;
    size_t first, end; /* of the stretch at hand                                            */
    double window;     /* over which the local rate is taken, in units of t                 */
    double step;       /* median of t                                                       */
    double noise_K;    /* sd of one temperature                                             */
    double hold;       /* |rate| below this is a hold, K per unit of t                      */
    double *scratch;   /* SAMPLES long                                                      */
} frame;

static double at(const frame *f, size_t i)
{
    return f->t == NULL ? (double)i : f->t[i];
}

/* First and last point of the window around i. */
static void window_around(const frame *f, size_t i, size_t *lo, size_t *hi)
{
    double half = 0.5 * f->window, mid = at(f, i);
    while (*lo < i && mid - at(f, *lo) > half) ++*lo;
    if (*hi < i) *hi = i;
    while (*hi + 1 < f->end && at(f, *hi) - mid < half) ++*hi;
}

static double slope(const frame *f, size_t lo, size_t hi)
{
    double dt = at(f, hi) - at(f, lo);
    return dt > 0.0 ? (f->T[hi] - f->T[lo]) / dt : 0.0;
}

static size_t stride_of(size_t n)
{
    return n / (SAMPLES - 1) + 1;
}

/* Quantile of |x[i + k] - x[i]| over a stretch. */
static double step_quantile(const frame *f, const double *x, size_t k, double p)
{
    size_t n = 0;
    if (f->end - f->first <= k) return 0.0;
    for (size_t i = f->first; i + k < f->end; i += stride_of(f->end - f->first))
        f->scratch[n++] = x == NULL ? (double)k : fabs(x[i + k] - x[i]);
    return ce_quantile(f->scratch, n, p);
}

/* Second differences of a ramp hold nothing but noise; a high quantile also sees the steps of a
 * coarse display (1.645: Phi^-1(0.95), from memory). */
static double noise_of(const frame *f)
{
    size_t n = 0;
    for (size_t i = f->first + 1; i + 1 < f->end; i += stride_of(f->end - f->first))
        f->scratch[n++] = fabs(f->T[i - 1] - 2.0 * f->T[i] + f->T[i + 1]);
    return n == 0 ? 0.0 : ce_quantile(f->scratch, n, 0.9) / (1.645 * sqrt(6.0));
}

static void set_scales(frame *f)
{
    size_t n = f->end - f->first, k = n / 50;
    k = k < 2 ? 2 : k > WINDOW_POINTS ? WINDOW_POINTS : k;
    if (k >= n) k = n - 1;
    f->step = step_quantile(f, f->t, 1, 0.5);
    double span = at(f, f->end - 1) - at(f, f->first), over_k = step_quantile(f, f->t, k, 0.5);
    double fast = over_k > 0.0 ? step_quantile(f, f->T, k, 0.9) / over_k : 0.0;
    f->noise_K = noise_of(f);
    f->window = (double)k * f->step;
    if (!(f->window > 0.0)) f->window = 0.02 * span;
    /* Long enough for noise to be a fiftieth of the ramp. */
    if (fast > 0.0 && f->window < 70.0 * f->noise_K / fast) f->window = 70.0 * f->noise_K / fast;
    if (f->window > 0.1 * span && n >= 20) f->window = 0.1 * span;
    double per_unit = HOLD_K_MIN / 60.0;
    f->hold = HOLD_SHARE * fast;
    if (f->t != NULL && f->hold > per_unit) f->hold = per_unit;
    double jitter = f->window > 0.0 ? 4.0 * f->noise_K / f->window : 0.0;
    if (f->hold < jitter && jitter < 0.5 * fast) f->hold = jitter;
}

static ce_segment_kind kind_of(double rate, double hold)
{
    return rate > hold ? CE_HEATING : rate < -hold ? CE_COOLING : CE_ISOTHERMAL;
}

static ce_status push(ce_run *run, ce_segment_kind kind, size_t first, size_t end, ce_error *err)
{
    if (run->n_segments == CE_MAX_SEGMENTS)
        return ce_fail_at(err, CE_E_LIMIT, run->name, 0, 0,
                          "more than %zu segments: the temperature is not that of a programme",
                          CE_MAX_SEGMENTS);
    ce_segment *s = run->segment;
    if ((run->n_segments & (run->n_segments - 1)) == 0) {
        size_t want = run->n_segments == 0 ? 1 : 2 * run->n_segments;
        s = reallocarray(run->segment, want, sizeof *s);
        if (s == NULL) return ce_fail_at(err, CE_E_NOMEM, run->name, 0, 0, "out of memory");
        run->segment = s;
    }
    s[run->n_segments++] = (ce_segment){.kind = kind, .first = first, .n = end - first};
    return CE_OK;
}

/* Between a heating and a cooling the border is where the temperature turns. */
static size_t turning_point(const frame *f, ce_segment_kind before, ce_segment_kind after, size_t i)
{
    if (before == CE_ISOTHERMAL || after == CE_ISOTHERMAL) return i;
    size_t lo = i, hi = i, best = i;
    while (lo > f->first && at(f, i) - at(f, lo) < 2.0 * f->window) lo--;
    while (hi + 1 < f->end && at(f, hi) - at(f, i) < 2.0 * f->window) hi++;
    for (size_t j = lo; j <= hi; j++)
        if (before == CE_HEATING ? f->T[j] > f->T[best] : f->T[j] < f->T[best]) best = j;
    return best;
}

/* Has a candidate that began at point c been going on for long enough at point i. */
static bool established(const frame *f, ce_segment_kind kind, size_t c, size_t i)
{
    if (kind != CE_ISOTHERMAL)
        return fabs(f->T[i] - f->T[c]) > fmax(RAMP_K, 6.0 * f->noise_K) && i - c >= 2;
    double least = fmax(1.5 * f->window, 10.0 * f->step);
    if (f->t != NULL) least = fmax(least, HOLD_SECONDS);
    return at(f, i) - at(f, c) >= least;
}

static ce_segment_kind overall(const frame *f)
{
    double d = f->T[f->end - 1] - f->T[f->first];
    return fabs(d) <= fmax(RAMP_K, 6.0 * f->noise_K) && f->end - f->first > 8 ? CE_ISOTHERMAL
           : d < 0.0                                                          ? CE_COOLING
                                                                              : CE_HEATING;
}

static ce_status cut_stretch(ce_run *run, frame *f, ce_error *err)
{
    ce_segment_kind now = CE_ISOTHERMAL, candidate = CE_ISOTHERMAL;
    bool begun = false, waiting = false;
    size_t from = f->first, c = f->first, lo = f->first, hi = f->first;
    for (size_t i = f->first; i < f->end; i++) {
        window_around(f, i, &lo, &hi);
        ce_segment_kind k = kind_of(slope(f, lo, hi), f->hold);
        if (begun && k == now) {
            waiting = false;
            continue;
        }
        if (!waiting || k != candidate) {
            waiting = true;
            candidate = k;
            c = i;
        }
        if (!established(f, k, c, i)) continue;
        if (begun) {
            size_t border = turning_point(f, now, k, c);
            if (border > from) {
                ce_status st = push(run, now, from, border, err);
                if (st != CE_OK) return st;
                from = border;
            }
        }
        begun = true;
        now = k;
        waiting = false;
    }
    return push(run, begun ? now : overall(f), from, f->end, err);
}

/* Median and robust spread of the local rate in a segment, its ends left out where there is
 * enough. Returns the number of rates. */
static size_t local_rates(frame *f, const ce_segment *s, double *x)
{
    size_t first = s->first, end = s->first + s->n, n = 0;
    while (end - first > MIN_INTERIOR && at(f, first) - at(f, s->first) < f->window) first++;
    while (end - first > MIN_INTERIOR && at(f, s->first + s->n - 1) - at(f, end - 1) < f->window)
        end--;
    size_t lo = s->first, hi = s->first, stride = stride_of(s->n);
    f->first = s->first;
    f->end = s->first + s->n;
    for (size_t i = first; i < end; i += stride) {
        window_around(f, i, &lo, &hi);
        if (at(f, hi) > at(f, lo)) x[n++] = slope(f, lo, hi);
    }
    return n;
}

/* Rate over long chords: the mean of the middle half of the slopes over a quarter of the segment.
 * Neither a coarse display of temperature nor ripple or lag at the ends biases it. */
static double chord_rate(const frame *f, const ce_segment *s, double *x)
{
    size_t lag = s->n / 4 > 0 ? s->n / 4 : 1, n = 0, kept = 0;
    for (size_t i = s->first; i + lag < s->first + s->n; i += stride_of(s->n))
        if (at(f, i + lag) > at(f, i)) x[n++] = slope(f, i, i + lag);
    if (n == 0) return (double)NAN;
    double low = ce_quantile(x, n, 0.25), high = ce_quantile(x, n, 0.75), sum = 0.0;
    /* Interpolated quantiles of equal slopes may miss them by a rounding. */
    double slack = 1e-12 * fmax(fabs(low), fabs(high));
    for (size_t i = 0; i < n; i++)
        if (x[i] >= low - slack && x[i] <= high + slack) {
            sum += x[i];
            kept++;
        }
    return sum / (double)kept;
}

static void describe(frame *f, ce_segment *s, double rate_K_min)
{
    s->low_K = s->high_K = f->T[s->first];
    for (size_t i = s->first; i < s->first + s->n; i++) {
        if (f->T[i] < s->low_K) s->low_K = f->T[i];
        if (f->T[i] > s->high_K) s->high_K = f->T[i];
    }
    s->rate_K_min = s->rate_sd_K_min = (double)NAN;
    if (f->t == NULL) {
        double r = fabs(rate_K_min);
        s->rate_K_min = s->kind == CE_COOLING ? -r : s->kind == CE_HEATING ? r : (double)NAN;
        return;
    }
    size_t n = local_rates(f, s, f->scratch);
    if (n == 0) return;
    s->rate_sd_K_min = 60.0 * CE_MAD_TO_SD * ce_mad(f->scratch, n);
    s->rate_K_min = 60.0 * chord_rate(f, s, f->scratch);
}

/* Two ramps of the same direction and different rates, one after the other without a hold: where
 * one ends; 0 when it is one ramp. */
static size_t change_of_rate(frame *f, const ce_segment *s)
{
    if (f->t == NULL || s->kind == CE_ISOTHERMAL || s->n < 60) return 0;
    ce_segment part[2] = {*s, *s};
    part[0].n = s->n / 3;
    part[1].first = s->first + s->n - s->n / 3;
    part[1].n = s->n / 3;
    double rate[2];
    for (int i = 0; i < 2; i++) {
        size_t n = local_rates(f, &part[i], f->scratch);
        rate[i] = n == 0 ? 0.0 : fabs(ce_median(f->scratch, n));
        if (n == 0 || CE_MAD_TO_SD * ce_mad(f->scratch, n) > RATE_SPREAD_MAX * rate[i]) return 0;
    }
    bool rises = rate[1] > rate[0];
    if (fmax(rate[0], rate[1]) < RATE_CHANGE * fmin(rate[0], rate[1])) return 0;
    double middle = sqrt(rate[0] * rate[1]);
    f->first = s->first;
    f->end = s->first + s->n;
    size_t lo = s->first + s->n / 6, hi = lo, begin = lo, end = f->end - s->n / 6;
    for (size_t i = begin; i < end; i++) {
        window_around(f, i, &lo, &hi);
        if ((fabs(slope(f, lo, hi)) > middle) == rises) return i;
    }
    return 0;
}

static ce_status split_rates(ce_run *run, frame *f, size_t from, ce_error *err)
{
    for (size_t i = from; i < run->n_segments; i++) {
        size_t border = change_of_rate(f, &run->segment[i]);
        if (border == 0) continue;
        ce_segment s = run->segment[i];
        ce_status st = push(run, s.kind, border, s.first + s.n, err);
        if (st != CE_OK) return st;
        ce_segment added = run->segment[run->n_segments - 1];
        memmove(&run->segment[i + 2], &run->segment[i + 1],
                (run->n_segments - i - 2) * sizeof *run->segment);
        run->segment[i].n = border - s.first;
        run->segment[i + 1] = added;
        /* One of the two may be a hold that was too short, or too coarsely measured, to be seen. */
        for (size_t k = i; k < i + 2; k++)
            if (fabs(chord_rate(f, &run->segment[k], f->scratch)) < f->hold)
                run->segment[k].kind = CE_ISOTHERMAL;
        i++;
    }
    return CE_OK;
}

static void number(ce_run *run)
{
    size_t seen[3] = {0, 0, 0};
    for (size_t i = 0; i < run->n_segments; i++) {
        run->segment[i].index = i + 1;
        run->segment[i].nth_of_kind = ++seen[run->segment[i].kind];
    }
}

ce_status ce_run_find_segments(ce_run *run, const size_t *start, size_t n_starts, double rate_K_min,
                               ce_error *err)
{
    frame f = {.t = run->time_s, .T = run->temperature_K};
    f.scratch = reallocarray(NULL, SAMPLES, sizeof *f.scratch);
    if (f.scratch == NULL) return ce_fail_at(err, CE_E_NOMEM, run->name, 0, 0, "out of memory");
    ce_status st = CE_OK;
    for (size_t i = 0; i <= n_starts && st == CE_OK; i++) {
        f.first = i == 0 ? 0 : start[i - 1];
        f.end = i == n_starts ? run->n : start[i];
        if (f.end <= f.first) continue;
        size_t from = run->n_segments;
        set_scales(&f);
        st = cut_stretch(run, &f, err);
        if (st == CE_OK) st = split_rates(run, &f, from, err);
        for (size_t k = from; st == CE_OK && k < run->n_segments; k++)
            describe(&f, &run->segment[k], rate_K_min);
    }
    number(run);
    free(f.scratch);
    return st;
}
