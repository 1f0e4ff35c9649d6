/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/evaluate.h"

#include "transition/lines.h"

#include <math.h>
#include <stdlib.h>
#include <stdio.h>
#include <string.h>

enum { TRACE = 700, TRIALS = 5 };
static const double inexact_start = 0.02; /* and of a start-up, relative */
static const double inexact_steps = 3e-4; /* what the model may miss of a step, any cell        */

/* Room for one trace. */
typedef struct {
    double T[TRACE], y[TRACE], low[TRACE], high[TRACE];
    ce_trace trace;
} tracing;

static double clamp(double v, double low, double high)
{
    return fmin(fmax(v, low), high);
}

/* A grid of equidistant temperatures. */
static void lay_out(tracing *t, double from, double to, double least)
{
    const double d = fmax((to - from) / (TRACE - 1.0), least);
    t->trace = (ce_trace){0, t->T, t->y};
    for (size_t i = 0; i < TRACE && from + d * (double)i <= to + 1e-9; i++) {
        t->T[i] = from + d * (double)i;
        t->low[i] = t->T[i] - 0.5 * d;
        t->high[i] = t->T[i] + 0.5 * d;
        t->trace.n = i + 1;
    }
}

/* ---- windows ------------------------------------------------------------------------------ */

/* State of an evaluation by windows. */
typedef struct {
    const ce_curve *curve;
    ce_window edge;
    ce_window glass, liquid;
    ce_fitted_line g, l;
    ce_lines lines;
    ce_points p;
    double width, smooth_K;
    tracing *t;
} by_windows;

/* Half-width of the smoothing that leaves a slope error of a thirtieth, within the step's shape. */
static double smoothing(const ce_curve *c, double step, double width)
{
    const double density = 1.0 / fmax(c->spacing, 1e-6), aim = 0.03 * step / width;
    const double w = c->w[c->n / 2], h = cbrt(1.5 * c->noise * c->noise / (w * density * aim * aim));
    return clamp(h, fmax(3.0 * c->spacing, 0.04 * width), fmax(0.3 * width, 3.0 * c->spacing));
}

static bool construct_on(by_windows *s)
{
    s->lines = (ce_lines){s->g.line, s->l.line};
    const double from = s->glass.high_K - 8.0, to = s->liquid.low_K + 8.0;
    s->smooth_K = smoothing(s->curve, fabs(ce_line_at(&s->l.line, 0.5 * (from + to)) -
                                           ce_line_at(&s->g.line, 0.5 * (from + to))),
                            fmax(s->width, 1.0));
    lay_out(s->t, fmax(from, s->curve->T[0]), fmin(to, s->curve->T[s->curve->n - 1]),
            fmax(0.1 * s->smooth_K, 0.02));
    for (size_t i = 0; i < s->t->trace.n; i++)
        s->t->y[i] = ce_smooth(s->curve, s->t->T[i], s->smooth_K);
    if (!ce_construct(&s->t->trace, &s->lines, s->liquid.low_K, &s->p)) return false;
    s->width = fmax(s->p.high_K - s->p.low_K, s->curve->spacing);
    return true;
}

static bool fit_windows(by_windows *s)
{
    return ce_fit_line(s->curve, s->glass, &s->g) && ce_fit_line(s->curve, s->liquid, &s->l) &&
           construct_on(s);
}

/* Windows beside the step: they begin off its tails, are at least 10 K long, and as long as 30 K where
 * the curve stays straight (no start-up, no other event). */
static void place_windows(by_windows *s, const ce_transition_options *o, double low, double high,
                          double off, double step)
{
    const ce_curve *c = s->curve;
    const double first = fmax(c->T[0] + 3.0, s->edge.low_K);
    const double last = fmin(c->T[c->n - 1], s->edge.high_K);
    const double tolerance = fmax(0.03 * step, 2.0 * c->noise / sqrt(fmax(2.0 / c->spacing, 1.0)));
    s->glass.high_K = fmax(low - off, first + 6.0);
    s->glass.low_K = fmax(s->glass.high_K - 10.0, first);
    s->glass.low_K = ce_reach(c, s->glass.high_K, s->glass.low_K,
                              fmax(s->glass.high_K - 30.0, first), tolerance);
    s->liquid.low_K = fmin(high + off, last - 5.0);
    s->liquid.high_K = fmin(s->liquid.low_K + 10.0, last);
    s->liquid.high_K = ce_reach(c, s->liquid.low_K, s->liquid.high_K,
                                fmin(s->liquid.low_K + 30.0, last), tolerance);
    if (!isnan(o->glass.low_K)) s->glass = o->glass;
    if (!isnan(o->liquid.low_K)) s->liquid = o->liquid;
}

static ce_status settle_windows(by_windows *s, const ce_place *place,
                                const ce_transition_options *o, ce_error *err)
{
    s->width = fmax(0.5 * (place->high_K - place->low_K), 1.0);
    place_windows(s, o, place->low_K, place->high_K, 0.0, place->step);
    for (int pass = 0; pass < 4; pass++) {
        if (!ce_fit_line(s->curve, s->glass, &s->g) || !ce_fit_line(s->curve, s->liquid, &s->l))
            return ce_fail(err, CE_E_REFUSED, "too little curve beside the step for two baselines");
        if (!construct_on(s))
            return ce_fail(err, CE_E_REFUSED, "the curve does not cross between its baselines");
        if (pass == 3) break;
        const double off = clamp(1.0 * s->width, 2.0, 20.0);
        place_windows(s, o, s->p.low_K, fmax(s->p.high_K, s->p.at[CE_END]) + 0.5 * s->width, off,
                      s->p.step);
    }
    return CE_OK;
}

/* ---- the model ---------------------------------------------------------------------------- */

static bool construct_model(const ce_model *m, tracing *t, ce_lines *lines, ce_points *p)
{
    *lines = ce_model_lines(m);
    ce_model_curve(m, t->trace.n, t->low, t->high, t->y);
    if (!ce_construct(&t->trace, lines, t->T[t->trace.n - 1], p)) return false;
    p->at[CE_FICTIVE] = ce_model_fictive(m);
    return true;
}

typedef struct {
    ce_model model;
    ce_cells cells;
    ce_lines lines;
    ce_points p;
} by_model;

static ce_status fit_model(const by_windows *s, ce_window range, by_model *f)
{
    const double centre = s->p.at[CE_HALF_STEP];
    const double fine = clamp(s->width / 16.0, fmax(0.1, s->curve->spacing), 0.4);
    f->model = ce_model_start(s->curve->cooling, centre, s->width, fmax(s->curve->noise, 1e-9 * s->p.step),
                              s->curve->cooling ? s->curve->T[s->curve->n - 1] : s->curve->T[0]);
    f->model.fine_K = clamp(s->width / 30.0, 0.1, 0.25);
    ce_status st = ce_cells_make(s->curve, range.low_K, range.high_K, centre, fine, &f->cells);
    if (st != CE_OK) return st;
    /* below the glass window the start-up need not be the exponential of the model */
    for (size_t i = 0; i < f->cells.n; i++) {
        const double T = f->cells.T[i];
        const double off = T < s->glass.low_K ? f->cells.y[i] - ce_line_at(&s->g.line, T) : 0.0;
        f->cells.sd[i] = hypot(inexact_steps * s->p.step, inexact_start * off);
    }
    const ce_model start = f->model;
    st = ce_model_fit(&f->cells, s->p.step, &f->model);
    if (s->curve->cooling || st == CE_E_NOMEM) return st;
    /* annealing and lag where the simple history does not do: from there, then from the start */
    for (int k = 0; k < 2 && (st != CE_OK || f->model.misfit > (k == 0 ? 1.3 : 3.0)); k++) {
        ce_model aged = k == 0 && st == CE_OK ? f->model : start;
        aged.aged = true;
        const ce_status then = ce_model_fit(&f->cells, s->p.step, &aged);
        if (then == CE_E_NOMEM) return then;
        if (then == CE_OK && (st != CE_OK || aged.misfit < 0.9 * f->model.misfit)) {
            f->model = aged;
            st = CE_OK;
        }
    }
    return st;
}

ce_status ce_read_step(const ce_curve *curve, const ce_place *place, ce_window edge,
                      const ce_transition_options *o, ce_finding *out, ce_error *err)
{
    tracing *t = malloc(sizeof *t);
    if (t == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    by_windows s = {.curve = curve, .edge = edge, .t = t};
    memset(out, 0, sizeof *out);
    ce_status st = settle_windows(&s, place, o, err);
    if (st == CE_OK) {
        const double tolerance = fmax(0.08 * s.p.step, 4.0 * curve->noise);
        out->range.low_K = fmax(edge.low_K, curve->T[0] + 1.0);
        out->range.high_K = ce_reach(curve, s.liquid.low_K, s.liquid.high_K,
                                     fmin(edge.high_K, curve->T[curve->n - 1]), tolerance);
        out->glass = s.glass;
        out->liquid = s.liquid;
        out->lines = s.lines;
        out->points = s.p;
        out->noise = curve->noise;
        by_model f = {0};
        if (fit_model(&s, out->range, &f) == CE_OK) {
            lay_out(t, s.p.at[CE_HALF_STEP] - 40.0, s.p.at[CE_HALF_STEP] + 30.0, 0.1);
            if (getenv("CE_DEBUG"))
                fprintf(stderr, "%d age %.2f at %.2f lag %.2f cells %zu it %zu misfit %.3g range %.1f..%.1f w %.2f noise/step %.2g | TR %.2f unit %.2f x %.2f beta %.2f cool %.2f hook %.2f\n", f.model.aged, f.model.shape[5],f.model.shape[6],f.model.shape[7],f.cells.n,
                        f.model.iterations, f.model.misfit, out->range.low_K, out->range.high_K,
                        s.width, curve->noise / s.p.step, f.model.shape[0], f.model.shape[1],
                        f.model.shape[2], f.model.shape[3], f.model.shape[4], f.model.shape[8]);
            ce_points p;
            ce_lines lines;
            if (construct_model(&f.model, t, &lines, &p)) {
                out->points = p;
                out->lines = lines;
                out->model = true;
            }
        }
        ce_cells_free(&f.cells);
        for (int k = 0; k < CE_CONSTRUCTIONS; k++) out->u_noise[k] = out->u_window[k] = 0.1;
    }
    free(t);
    return st;
}
