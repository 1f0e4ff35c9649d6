/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/transition.h>

#include "base/order.h"
#include "run/run_internal.h"

#include <gsl/gsl_fit.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define MOST_CELLS  1500
#define LEAST_CELLS 40

/* A segment on rising temperature, turned so that the liquid lies above the glass. */
typedef struct {
    size_t n;
    double *T, *y, *scratch;
    double noise, spacing;
} curve;

static void curve_free(curve *c)
{
    free(c->T);
    free(c->y);
    free(c->scratch);
}

/* Means over equal cells of temperature: sorts, averages and bounds the cost in one pass. */
static ce_status make_curve(const ce_run *run, const ce_segment *s, double turn, curve *c,
                            ce_error *err)
{
    const double *T = ce_run_temperature_K(run), *y = ce_run_signal(run);
    size_t cells = s->n < MOST_CELLS ? s->n : MOST_CELLS;
    *c = (curve){0};
    if (s->n < LEAST_CELLS || !(s->high_K - s->low_K > 20.0))
        return ce_fail(err, CE_E_REFUSED,
                       "segment %zu has %zu points over %.0f K: too little curve for a step",
                       s->index, s->n, s->high_K - s->low_K);
    c->T = calloc(cells, sizeof(double));
    c->y = calloc(cells, sizeof(double));
    c->scratch = calloc(2 * cells, sizeof(double));
    size_t *count = calloc(cells, sizeof *count);
    if (c->T == NULL || c->y == NULL || c->scratch == NULL || count == NULL) {
        free(count);
        curve_free(c);
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    }
    double width = (s->high_K - s->low_K) / (double)cells;
    for (size_t i = s->first; i < s->first + s->n; i++) {
        size_t k = (size_t)((T[i] - s->low_K) / width);
        if (k >= cells) k = cells - 1;
        c->T[k] += T[i];
        c->y[k] += turn * y[i];
        count[k]++;
    }
    for (size_t k = 0; k < cells; k++)
        if (count[k] > 0) {
            c->T[c->n] = c->T[k] / (double)count[k];
            c->y[c->n++] = c->y[k] / (double)count[k];
        }
    free(count);
    c->spacing = (c->T[c->n - 1] - c->T[0]) / (double)(c->n - 1);
    /* second differences of white noise have variance 6 */
    for (size_t k = 1; k + 1 < c->n; k++)
        c->scratch[k - 1] = (c->y[k + 1] - 2.0 * c->y[k] + c->y[k - 1]) / sqrt(6.0);
    c->noise = CE_MAD_TO_SD * ce_mad(c->scratch, c->n - 2);
    return CE_OK;
}

static size_t index_of(const curve *c, double T)
{
    size_t lo = 0, hi = c->n;
    while (lo < hi) {
        size_t mid = lo + (hi - lo) / 2;
        if (c->T[mid] < T)
            lo = mid + 1;
        else
            hi = mid;
    }
    return lo;
}

/* Least-squares line over [a, b); residual s.d. into *sd. */
static ce_line line_over(const curve *c, size_t a, size_t b, double *sd)
{
    double c0, c1, v00, v01, v11, ss;
    size_t n = b - a;
    for (size_t i = 0; i < n; i++) c->scratch[i] = c->T[a + i] - c->T[a];
    (void)gsl_fit_linear(c->scratch, 1, c->y + a, 1, n, &c0, &c1, &v00, &v01, &v11, &ss);
    *sd = n > 2 ? sqrt(ss / (double)(n - 2)) : 0.0;
    return (ce_line){c->T[a], c0, c1};
}

static double at(const ce_line *l, double T)
{
    return l->at_ref + l->slope * (T - l->ref_K);
}

/* ---- location ----------------------------------------------------------------------------- */

typedef struct {
    double centre, gap, step, score;
} place;

/* Step between two lines of length len on both sides of a gap, measured against what the lines leave over. */
static place best_place(const curve *c)
{
    static const double gaps[] = {4, 7, 12, 20, 30};
    place best = {0};
    double span = c->T[c->n - 1] - c->T[0];
    for (size_t g = 0; g < sizeof gaps / sizeof *gaps; g++) {
        double len = fmax(10.0, gaps[g]);
        if (2.0 * len + gaps[g] + 6.0 > span) break;
        double stride = fmax(c->spacing, 0.5);
        for (double T = c->T[0] + 6.0 + len + gaps[g] / 2.0;
             T < c->T[c->n - 1] - len - gaps[g] / 2.0; T += stride) {
            size_t a = index_of(c, T - gaps[g] / 2.0 - len), b = index_of(c, T - gaps[g] / 2.0),
                   d = index_of(c, T + gaps[g] / 2.0), e = index_of(c, T + gaps[g] / 2.0 + len);
            if (b - a < 4 || e - d < 4) continue;
            double s1, s2;
            ce_line l1 = line_over(c, a, b, &s1), l2 = line_over(c, d, e, &s2);
            double step = at(&l2, T) - at(&l1, T);
            double bend = fabs(l2.slope - l1.slope) * (len + gaps[g]);
            double score = step / (c->noise + s1 + s2 + 0.25 * bend + 0.002 * fabs(step));
            if (score > best.score) best = (place){T, gaps[g], step, score};
        }
    }
    return best;
}

/* ---- constructions ------------------------------------------------------------------------ */

typedef struct {
    size_t ga, gb, la, lb; /* windows [ga, gb), [la, lb) */
    ce_line g, l;
    double sd;
} baselines;

static bool fit_baselines(const curve *c, baselines *b)
{
    double s1, s2;
    if (b->gb < b->ga + 5 || b->lb < b->la + 5) return false;
    b->g = line_over(c, b->ga, b->gb, &s1);
    b->l = line_over(c, b->la, b->lb, &s2);
    b->sd = fmax(s1, s2);
    return true;
}

/* Crossing of the line a fraction f between the baselines, first from the glass side, interpolated by a local
 * straight line over half a kelvin. */
static double crossing(const curve *c, const baselines *b, double f, double from, double to)
{
    for (size_t i = index_of(c, from) + 1; i < c->n && c->T[i] < to; i++) {
        double d = at(&b->l, c->T[i]) - at(&b->g, c->T[i]);
        double s = (c->y[i] - at(&b->g, c->T[i])) / d;
        if (s < f || i + 1 >= c->n) continue;
        /* a line through the neighbourhood smooths the noise */
        size_t half = 1 + (size_t)(0.75 / c->spacing), a = i > half ? i - half : 0,
               e = i + half < c->n ? i + half : c->n - 1;
        double sd;
        ce_line t = line_over(c, a, e + 1, &sd);
        double m0 = at(&b->g, t.ref_K) * (1 - f) + at(&b->l, t.ref_K) * f;
        double ms = b->g.slope * (1 - f) + b->l.slope * f;
        if (t.slope <= ms) return c->T[i];
        double T = t.ref_K + (m0 - t.at_ref) / (t.slope - ms);
        return T > c->T[a] - 1.0 && T < c->T[e] + 1.0 ? T : c->T[i];
    }
    return (double)NAN;
}

static ce_line steepest(const curve *c, double from, double to, double width)
{
    ce_line best = {(double)NAN, 0, -1e300};
    double half = fmax(2.5 * c->spacing, fmin(0.12 * width, 1.5));
    for (size_t i = index_of(c, from); i < c->n && c->T[i] <= to; i++) {
        size_t a = index_of(c, c->T[i] - half), b = index_of(c, c->T[i] + half);
        if (b < a + 3) continue;
        double sd;
        ce_line l = line_over(c, a, b, &sd);
        if (l.slope > best.slope) best = (ce_line){c->T[i], at(&l, c->T[i]), l.slope};
    }
    return best;
}

static double meets(const ce_line *a, const ce_line *b)
{
    return a->slope == b->slope ? (double)NAN
                                : a->ref_K + (at(b, a->ref_K) - a->at_ref) / (a->slope - b->slope);
}

/* Equal areas: integral of (y - g) up to T2 equals that of (l - g) from Tf to T2 (Moynihan et al., J. Am. Ceram. Soc.
 * 59 (1976) 12, from memory), d(T) = l - g linear. */
static double equal_areas(const curve *c, const baselines *b)
{
    double A = 0.0, T2 = c->T[b->lb - 1], Tr = c->T[b->ga];
    for (size_t i = b->gb; i < b->lb; i++) {
        double y0 = c->y[i - 1] - at(&b->g, c->T[i - 1]), y1 = c->y[i] - at(&b->g, c->T[i]);
        A += 0.5 * (y0 + y1) * (c->T[i] - c->T[i - 1]);
    }
    double d0 = at(&b->l, Tr) - at(&b->g, Tr), d1 = b->l.slope - b->g.slope, u2 = T2 - Tr;
    double k = A - d0 * u2 - 0.5 * d1 * u2 * u2;
    double root = d0 * d0 - 2.0 * d1 * k;
    return root < 0.0 ? (double)NAN : Tr + 2.0 * k / (-d0 - sqrt(root));
}

static void construct(const curve *c, const baselines *b, double lo, double hi,
                      double value[CE_CONSTRUCTIONS], ce_line *tangent)
{
    double half = crossing(c, b, 0.5, lo, hi), t1 = crossing(c, b, 0.2, lo, hi),
           t2 = crossing(c, b, 0.8, lo, hi);
    double width = fmax(t2 - t1, 2.0 * c->spacing);
    *tangent = steepest(c, t1 - width, t2 + 2.0 * width, width);
    value[CE_HALF_STEP] = half;
    value[CE_INFLECTION] = tangent->ref_K;
    value[CE_ONSET] = meets(tangent, &b->g);
    value[CE_END] = meets(tangent, &b->l);
    value[CE_FICTIVE] = equal_areas(c, b);
    value[CE_MIDPOINT] = (double)NAN;
    double level = 0.5 * (at(&b->g, value[CE_ONSET]) + at(&b->l, value[CE_END]));
    for (size_t i = index_of(c, lo) + 1; i < c->n && c->T[i] < hi; i++)
        if (c->y[i] >= level && c->T[i] > t1 - width) {
            double f = (level - c->y[i - 1]) / (c->y[i] - c->y[i - 1]);
            value[CE_MIDPOINT] = c->T[i - 1] + (f >= 0 && f <= 1 ? f : 1) * (c->T[i] - c->T[i - 1]);
            break;
        }
}

/* Windows: 25 K (or what there is) of curve, ending or beginning one and a half widths off the step. */
static baselines windows_for(const curve *c, double low, double high, double margin, double length)
{
    baselines b = {0};
    b.gb = index_of(c, low - margin);
    b.ga = index_of(c, low - margin - length);
    size_t transient = index_of(c, c->T[0] + 6.0);
    if (b.ga < transient && transient + 10 < b.gb) b.ga = transient;
    b.la = index_of(c, high + margin);
    b.lb = index_of(c, high + margin + length);
    return b;
}

static void add_flag(ce_transition *t, ce_flag_code code, double number)
{
    if (t->n_flags < CE_MAX_FLAGS) t->flags[t->n_flags++] = (ce_flag){code, number};
}

static ce_status evaluate(const curve *c, const place *p, const ce_transition_options *o,
                          ce_transition *t, ce_error *err)
{
    double low = p->centre - p->gap / 2.0, high = p->centre + p->gap / 2.0, margin = 2.0;
    baselines b = windows_for(c, low, high, margin, 20.0);
    double v[CE_CONSTRUCTIONS];
    ce_line tangent = {0};
    for (int pass = 0; pass < 3; pass++) {
        if (!isnan(o->glass.low_K))
            b.ga = index_of(c, o->glass.low_K), b.gb = index_of(c, o->glass.high_K);
        if (!isnan(o->liquid.low_K))
            b.la = index_of(c, o->liquid.low_K), b.lb = index_of(c, o->liquid.high_K);
        if (!fit_baselines(c, &b))
            return ce_fail(err, CE_E_REFUSED, "too little curve beside the step for two baselines");
        construct(c, &b, c->T[b.gb], c->T[b.la], v, &tangent);
        if (isnan(v[CE_HALF_STEP]) || isnan(v[CE_ONSET])) break;
        double width = fmax(v[CE_END] - v[CE_ONSET], 1.0);
        double last = fmin(c->T[c->n - 1], v[CE_END] + 1.5 * width + 30.0);
        b = windows_for(c, v[CE_ONSET] - 0.4 * width,
                        fmax(v[CE_END], v[CE_HALF_STEP]) + 1.0 * width, 2.0, 25.0);
        b.lb = index_of(c, last);
    }
    if (!isnan(o->glass.low_K))
        b.ga = index_of(c, o->glass.low_K), b.gb = index_of(c, o->glass.high_K);
    if (!isnan(o->liquid.low_K))
        b.la = index_of(c, o->liquid.low_K), b.lb = index_of(c, o->liquid.high_K);
    if (!fit_baselines(c, &b))
        return ce_fail(err, CE_E_REFUSED, "too little curve beside the step for two baselines");
    construct(c, &b, c->T[b.gb], c->T[b.la], v, &tangent);
    if (isnan(v[CE_HALF_STEP]))
        return ce_fail(err, CE_E_REFUSED, "the curve does not cross between its baselines");
    double first = c->T[b.ga];
    *t = (ce_transition){.glass_line = b.g,
                         .liquid_line = b.l,
                         .tangent = tangent,
                         .noise_sd = c->noise,
                         .glass = {first, c->T[b.gb - 1]},
                         .liquid = {c->T[b.la], c->T[b.lb - 1]},
                         .windows_given = !isnan(o->glass.low_K) || !isnan(o->liquid.low_K)};
    t->step_height = at(&b.l, v[CE_HALF_STEP]) - at(&b.g, v[CE_HALF_STEP]);
    /* ensemble of windows: shorter, farther, nearer */
    double spread[CE_CONSTRUCTIONS] = {0};
    double dev_step = 0.0;
    int used = 0;
    for (int k = 0; k < 4; k++) {
        baselines e = b;
        size_t ng = b.gb - b.ga, nl = b.lb - b.la;
        if (k == 0) e.ga += ng / 3;
        if (k == 1) e.gb -= ng / 3;
        if (k == 2) e.la += nl / 3;
        if (k == 3) e.lb -= nl / 3;
        double w[CE_CONSTRUCTIONS];
        ce_line tl;
        if (!fit_baselines(c, &e)) continue;
        construct(c, &e, c->T[b.gb], c->T[b.la], w, &tl);
        for (size_t i = 0; i < CE_CONSTRUCTIONS; i++)
            if (isfinite(w[i])) spread[i] += (w[i] - v[i]) * (w[i] - v[i]);
        double h = at(&e.l, v[CE_HALF_STEP]) - at(&e.g, v[CE_HALF_STEP]) - t->step_height;
        dev_step += h * h;
        used++;
    }
    double slope = fmax(tangent.slope - b.g.slope, 1e-12);
    double noise = c->noise / slope * sqrt(c->spacing / 1.5) + 0.02 * c->spacing;
    for (size_t i = 0; i < CE_CONSTRUCTIONS; i++) {
        double window = used > 0 ? sqrt(spread[i] / used) : 0.0;
        double n = i == CE_INFLECTION ? noise + 2.0 * c->spacing
                   : i == CE_FICTIVE  ? 2.0 * noise
                                      : noise;
        t->tg[i] = (ce_reading){v[i], hypot(n, window), n, window};
    }
    t->step_height_u =
        hypot(sqrt(dev_step / (used > 0 ? used : 1)), c->noise * sqrt(2.0 / (double)(b.gb - b.ga)));
    t->width_K = v[CE_END] - v[CE_ONSET];
    t->width_u_K = hypot(t->tg[CE_ONSET].u_K, t->tg[CE_END].u_K);
    double top = 0.0;
    for (size_t i = b.gb; i < b.lb; i++)
        top = fmax(top, (c->y[i] - at(&b.l, c->T[i])) / t->step_height);
    t->overshoot = fmax(0.0, top - 3.0 * c->noise / t->step_height);
    if (t->overshoot > 1.0) add_flag(t, CE_FLAG_OVERSHOOT, t->overshoot);
    if (t->step_height < 10.0 * c->noise)
        add_flag(t, CE_FLAG_SMALL_STEP, t->step_height / c->noise);
    double shorter = fmin(t->glass.high_K - t->glass.low_K, t->liquid.high_K - t->liquid.low_K);
    if (shorter < 8.0) add_flag(t, CE_FLAG_SHORT_WINDOW, shorter);
    if (t->width_K > 25.0) add_flag(t, CE_FLAG_WIDE, t->width_K);
    double points = t->width_K / c->spacing;
    if (points < 8.0) add_flag(t, CE_FLAG_SPARSE, points);
    return CE_OK;
}

static void scale_to_heat_capacity(const ce_run *run, const ce_segment *s, ce_transition *t)
{
    ce_signal kind = ce_run_signal_kind(run);
    t->step_unit = ce_signal_unit(kind);
    double per_s = fabs(s->rate_K_min) / 60.0;
    if (kind == CE_SIGNAL_SPECIFIC_POWER && per_s > 0.0) {
        t->step_height /= per_s;
        t->step_height_u /= per_s;
        t->step_unit = "J/(g K)";
    }
    if (strcmp(t->step_unit, "J/(g K)") == 0 && (t->step_height < 0.1 || t->step_height > 0.8))
        add_flag(t, CE_FLAG_STEP_IMPLAUSIBLE, t->step_height);
}

static ce_status find_in(const ce_run *run, const ce_segment *s, const ce_transition_options *o,
                         double turn, ce_transition *t, double *score, ce_error *err)
{
    curve c;
    ce_status st = make_curve(run, s, turn, &c, err);
    if (st != CE_OK) return st;
    place p = best_place(&c);
    *score = p.score;
    if (!(p.score > 3.0))
        st = ce_fail(err, CE_E_REFUSED,
                     "no step in segment %zu: one of %.3g %s would have been seen", s->index,
                     4.0 * c.noise, ce_signal_unit(ce_run_signal_kind(run)));
    if (st == CE_OK) st = evaluate(&c, &p, o, t, err);
    curve_free(&c);
    if (st != CE_OK) return st;
    if (turn < 0.0) {
        ce_line *lines[] = {&t->glass_line, &t->liquid_line, &t->tangent};
        for (size_t i = 0; i < 3; i++)
            lines[i]->at_ref = -lines[i]->at_ref, lines[i]->slope = -lines[i]->slope;
    }
    scale_to_heat_capacity(run, s, t);
    return CE_OK;
}

static bool wanted(const ce_segment *s, const ce_transition_options *o)
{
    if (o->segment > 0) return s->index == o->segment;
    if (s->kind != CE_HEATING) return false;
    return o->heating == 0 || s->nth_of_kind == o->heating;
}

/* A cooling from the liquid earlier in the file has erased the history as well as a heating would. */
static bool cooled_before(const ce_segment *s, size_t i, const ce_transition *t)
{
    for (size_t k = 0; k < i; k++)
        if (s[k].kind == CE_COOLING && s[k].high_K > t->tg[CE_END].value_K) return true;
    return false;
}

ce_status ce_transition_find(const ce_run *run, const ce_transition_options *options,
                             ce_transitions *found, ce_error *err)
{
    ce_transition_options o = options != NULL ? *options : ce_transition_options_default();
    *found = (ce_transitions){0};
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    ce_error last = CE_ERROR_INIT;
    for (size_t i = n; i-- > 0;) {
        if (!wanted(&s[i], &o)) continue;
        ce_transition t;
        double score;
        ce_error e = CE_ERROR_INIT;
        ce_status st =
            find_in(run, &s[i], &o, s[i].kind == CE_COOLING ? -1.0 : 1.0, &t, &score, &e);
        if (st == CE_OK) {
            if (s[i].kind == CE_HEATING && s[i].nth_of_kind == 1 && !cooled_before(s, i, &t))
                add_flag(&t, CE_FLAG_FIRST_HEATING, 1.0);
            if (ce_run_sign_origin(run) == CE_ORIGIN_GUESSED)
                add_flag(&t, CE_FLAG_SIGN_GUESSED, 0.0);
            found->item = malloc(sizeof t);
            if (found->item == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
            found->item[0] = t;
            found->n = 1;
            found->segment = s[i];
            return CE_OK;
        }
        if (last.code == CE_OK) last = e;
    }
    if (last.code != CE_OK) {
        if (err != NULL && err->code == CE_OK) *err = last;
        return last.code;
    }
    return ce_fail(err, CE_E_ARG,
                   o.segment > 0 ? "there is no segment %zu (the run has %zu)"
                                 : "no heating segment to evaluate (asked %zu of %zu segments)",
                   o.segment, n);
}

ce_status ce_run_settle_sign(ce_run *run, ce_error *err)
{
    ce_origin origin = ce_run_sign_origin(run);
    if (origin == CE_ORIGIN_STATED || origin == CE_ORIGIN_OPTION) return CE_OK;
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    ce_transition_options o = ce_transition_options_default();
    for (size_t i = n; i-- > 0;) {
        if (s[i].kind != CE_HEATING) continue;
        ce_transition t;
        double up = 0.0, down = 0.0;
        ce_status a = find_in(run, &s[i], &o, 1.0, &t, &up, NULL),
                  b = find_in(run, &s[i], &o, -1.0, &t, &down, NULL);
        if (a != CE_OK && b != CE_OK) continue;
        return ce_run_flip(run, a != CE_OK || (b == CE_OK && down > up),
                           "step of the glass transition", err);
    }
    return CE_OK;
}

void ce_transitions_free(ce_transitions *found)
{
    if (found == NULL) return;
    free(found->item);
    *found = (ce_transitions){0};
}
