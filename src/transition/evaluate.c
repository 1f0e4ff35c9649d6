/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/evaluate.h"

#include "transition/lines.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { TRACE = 600 };
static const double roughly = 0.03;   /* of a step, when starts are compared by their gross shape */
enum { MOST_TRIED = 5 };              /* histories fitted from, of those listed              */
static const size_t most_work = 100;  /* iterations after which no other is                  */
static const double most_prior = 9.0; /* chi-square of the priors: as many as there are      */
static const double most_rough = 0.03;       /* what a model may leave over of a step           */
static const double straight_glass_K = 60.0; /* a glass line is no line over much more            */
static const double last_K = 1.5; /* of a segment, where the programme may already be turning   */
static const double least_baseline_K = 10.0; /* beside the step, else the run cuts it off       */
static const double inexact_start = 0.02;    /* and of a start-up, relative */
static const double inexact_steps = 1e-3; /* what the model may miss of a step, any cell        */
/* Near the overshoot no model of relaxation is exact: neither the measured glass, whose response is no
 * stretched exponential to the last per cent, nor another integration of the same equations, where
 * a first-order scheme in steps of 0.05 K is off by 0.8 % of a step. There the curve itself is read,
 * and the lines must not bend to it. */
static const double inexact_peak = 0.01; /* of the overshoot's height over the glass line */

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
    const double w = c->w[c->n / 2],
                 h = cbrt(1.5 * c->noise * c->noise / (w * density * aim * aim));
    return clamp(h, fmax(3.0 * c->spacing, 0.04 * width), fmax(0.3 * width, 3.0 * c->spacing));
}

static bool construct_on(by_windows *s)
{
    s->lines = (ce_lines){s->g.line, s->l.line};
    const double from = s->glass.high_K - 8.0, to = s->liquid.low_K + 8.0;
    s->smooth_K = smoothing(
        s->curve,
        fabs(ce_line_at(&s->l.line, 0.5 * (from + to)) - ce_line_at(&s->g.line, 0.5 * (from + to))),
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
                          double step)
{
    const ce_curve *c = s->curve;
    const double off_low = c->cooling ? last_K : CE_START_UP_K;
    const double off_high = c->cooling ? CE_START_UP_K : last_K;
    const double first = fmax(c->T[0] + off_low, s->edge.low_K);
    const double last = fmin(c->T[c->n - 1] - off_high, s->edge.high_K);
    const double tolerance = fmax(0.03 * step, 2.0 * c->noise / sqrt(fmax(2.0 / c->spacing, 1.0)));
    s->glass.high_K = fmax(low, first + 6.0);
    s->glass.low_K = fmax(s->glass.high_K - 10.0, first);
    s->glass.low_K = ce_reach(c, s->glass.high_K, s->glass.low_K,
                              fmax(s->glass.high_K - 30.0, first), tolerance);
    s->liquid.low_K = fmin(high, last - 6.0);
    s->liquid.high_K = fmin(s->liquid.low_K + 10.0, last);
    s->liquid.high_K = ce_reach(c, s->liquid.low_K, s->liquid.high_K,
                                fmin(s->liquid.low_K + 30.0, last), tolerance);
    if (!isnan(o->glass.low_K)) s->glass = o->glass;
    if (!isnan(o->liquid.low_K)) s->liquid = o->liquid;
}

/* Windows from the place, moved off the tails of the step as it is seen between them; not farther
 * than where the place was found straight, and not when the step falls apart over it. */
static ce_status settle_windows(by_windows *s, const ce_place *place,
                                const ce_transition_options *o, ce_error *err)
{
    const double gap = place->high_K - place->low_K, slack = fmax(0.6 * gap, 8.0);
    s->width = fmax(0.5 * gap, 1.0);
    place_windows(s, o, place->low_K, place->high_K, place->step);
    if (!ce_fit_line(s->curve, s->glass, &s->g) || !ce_fit_line(s->curve, s->liquid, &s->l))
        return ce_fail(err, CE_E_REFUSED, "too little curve beside the step for two baselines");
    if (!construct_on(s))
        return ce_fail(err, CE_E_REFUSED, "the curve does not cross between its baselines");
    for (int pass = 0; pass < 3; pass++) {
        const by_windows before = *s;
        /* nothing sharpens a step on cooling: it is twice as wide, but its tails are not longer */
        const double off = clamp((s->curve->cooling ? 0.5 : 1.0) * s->width, 2.0, 20.0);
        const double low = clamp(s->p.low_K - off, place->low_K - slack, place->low_K + 0.4 * gap);
        const double high = clamp(fmax(s->p.high_K, s->p.at[CE_END]) + 0.5 * s->width + off,
                                  place->high_K - 0.4 * gap, place->high_K + slack);
        place_windows(s, o, low, high, s->p.step);
        if (fit_windows(s) && s->p.step > 0.6 * before.p.step && s->p.step < 1.7 * before.p.step)
            continue;
        *s = before;
        return CE_OK;
    }
    return CE_OK;
}

/* ---- the model ---------------------------------------------------------------------------- */

/* Coarse cells far below, where the fictive temperature comes from, then the cells of the trace. */
enum { FAR = 6, MODEL = FAR + TRACE };
typedef struct {
    size_t n; /* of all cells                                                                   */
    double low[MODEL], high[MODEL], tf[MODEL], step[MODEL], phi[MODEL * CE_LINEAR];
    double T[TRACE], y[TRACE], correction[TRACE];
} modelling;

typedef struct {
    ce_model model;
    size_t work; /* iterations spent                                                            */
    ce_cells cells;
    ce_design design;
    ce_lines lines;
    ce_points p;
    double gradient[CE_FREE][CE_CONSTRUCTIONS + 2]; /* of constructions, step height, width    */
} by_model;

static void model_cells(modelling *m, double centre, double width)
{
    const double d = clamp(width / 50.0, 0.06, 0.3), from = centre - clamp(3.0 * width, 15.0, 40.0);
    const double to = centre + clamp(2.5 * width, 15.0, 35.0);
    for (int i = 0; i < FAR; i++) {
        m->low[i] = from - 12.0 * (FAR - i);
        m->high[i] = m->low[i] + 12.0;
    }
    m->n = FAR;
    for (size_t i = 0; i < TRACE && from + d * (double)i < to; i++, m->n++) {
        m->low[FAR + i] = from + d * (double)i;
        m->high[FAR + i] = m->low[FAR + i] + d;
        m->T[i] = m->low[FAR + i] + 0.5 * d;
        m->correction[i] = 0.0;
    }
    m->high[FAR - 1] = from;
}

/* Constructions under a model whose columns are in m. */
static bool construct_model(const ce_model *model, modelling *m, ce_lines *lines, ce_points *p)
{
    const size_t n = m->n - FAR;
    ce_model_combine(model, n, m->phi + FAR * CE_LINEAR, m->y);
    for (size_t i = 0; i < n; i++) m->y[i] += m->correction[i];
    *lines = ce_model_lines(model);
    const ce_trace trace = {n, m->T, m->y};
    if (!ce_construct(&trace, lines, m->T[n - 1], p)) return false;
    p->at[CE_FICTIVE] = m->tf[0] + ce_model_lag(model);
    return true;
}

static void model_columns(const ce_model *model, modelling *m)
{
    ce_model_columns(model, m->n, m->low, m->high, m->phi, m->tf, m->step);
}

/* Derivatives of everything by every parameter, by differences. */
static bool gradients(by_model *f, modelling *m)
{
    for (size_t a = CE_FREE; a-- > 0;) { /* linear ones first: they leave the columns alone     */
        const double h = ce_model_increment(&f->model, a);
        memset(f->gradient[a], 0, sizeof f->gradient[a]);
        if (h == 0.0) continue;
        ce_model moved = f->model;
        ce_lines lines;
        ce_points p;
        ce_model_move(&moved, a, h);
        if (a < CE_SHAPES) model_columns(&moved, m);
        if (!construct_model(&moved, m, &lines, &p)) return false;
        double *g = f->gradient[a];
        for (int k = 0; k < CE_CONSTRUCTIONS; k++) g[k] = (p.at[k] - f->p.at[k]) / h;
        g[CE_CONSTRUCTIONS] = (p.step - f->p.step) / h;
        g[CE_CONSTRUCTIONS + 1] = g[CE_END] - g[CE_ONSET];
    }
    model_columns(&f->model, m);
    return true;
}

static void weigh_cells(const by_windows *s, ce_cells *cells)
{
    /* below the glass window (on cooling: above the liquid one) the start-up need not be what the
     * model makes of it; where it crosses the line it is no better known than beside it */
    double off = 0.0;
    const bool down = s->curve->cooling;
    for (size_t k = cells->n; k-- > 0;) {
        const size_t i = down ? cells->n - 1 - k : k;
        const double T = cells->T[i];
        if (!down && T < s->glass.low_K)
            off = fmax(off, fabs(cells->y[i] - ce_line_at(&s->g.line, T)));
        if (down && T > s->liquid.high_K)
            off = fmax(off, fabs(cells->y[i] - ce_line_at(&s->l.line, T)));
        /* centred and as wide as overshoots are, between half-step and the liquid line */
        const double peak = (T - s->p.at[CE_HALF_STEP] - 0.8 * s->width) / (0.7 * s->width);
        cells->sd[i] = hypot(
            hypot(inexact_steps, inexact_peak * (1.0 + s->p.overshoot) * exp(-0.5 * peak * peak)) *
                s->p.step,
            inexact_start * off);
    }
}

/* Mean share of the noise in what the cells may be off by: the misfit of a perfect model. */
static double expected_misfit(const ce_cells *cells, double sigma)
{
    double sum = 0.0;
    for (size_t i = 0; i < cells->n; i++) {
        const double v = sigma * sigma / cells->w[i];
        sum += v / (v + cells->sd[i] * cells->sd[i]);
    }
    return sum / (double)cells->n;
}

/* Fit from a start and keep the better; so_far is CE_OK when there is a fit already. */
static ce_status try_model(by_model *f, double step, ce_model next, ce_status so_far)
{
    ce_design design = {0};
    if (next.least_sd >
        0.0) { /* from the gross shape to the fine one                              */
        const ce_status rough = ce_model_fit(&f->cells, step, &next, NULL);
        f->work += next.iterations;
        if (rough != CE_OK) return rough == CE_E_NOMEM ? rough : so_far;
        next.least_sd = 0.0;
    }
    const ce_status st = ce_model_fit(&f->cells, step, &next, &design);
    f->work += next.iterations;
    if (st == CE_OK && (so_far != CE_OK || next.total < 0.9 * f->model.total)) {
        ce_design_free(&f->design);
        f->design = design;
        f->model = next;
        return CE_OK;
    }
    ce_design_free(&design);
    return st == CE_E_NOMEM ? st : so_far;
}

/* Histories to begin from where the plain one (cooled at the rate of the scan) does not do: glasses
 * from poly(vinyl chloride) to polystyrene, cooled seven times slower to faster, or annealed near and
 * far below the step. */
#define OF_GLASS(unit, x)                                                                          \
    {unit, x, -2.0, 0.0, 0.0}, {unit, x, -0.7, 0.0, 0.0}, {unit, x, 0.7, 0.0, 0.0},                \
        {unit, x, 2.0, 0.0, 0.0}, {unit, x, 0.5, 3.0, 8.0}, {unit, x, 0.5, 5.5, 10.0},             \
        {unit, x, 0.5, 8.0, 14.0},                                                                 \
    {                                                                                              \
        unit, x, 0.5, 5.5, 20.0                                                                    \
    }
static const ce_history histories[] = {OF_GLASS(-0.55, -1.6), OF_GLASS(0.0, -1.2),
                                       OF_GLASS(0.55, -0.85)};
enum { HISTORIES = sizeof histories / sizeof *histories };

static int by_total(const void *a, const void *b)
{
    const double x = ((const ce_model *)a)->total, y = ((const ce_model *)b)->total;
    return (x > y) - (x < y);
}

/* Neither the curve nor what is known of glasses asks for another history. */
static bool fits_well(const by_model *f)
{
    const double expected = expected_misfit(&f->cells, f->model.sigma);
    const double priors = f->model.total - f->model.misfit * (double)f->cells.n;
    const double luck =
        3.0 * sqrt(2.0 / (double)f->cells.n); /* of a mean of squares              */
    return f->model.misfit < (1.0 + luck) * expected + 0.05 && priors < most_prior;
}

/* From the plain history; where that does not do, from those of the list that come nearest. */
static ce_status try_histories(by_model *f, double step, const ce_model *start)
{
    ce_status st = try_model(f, step, *start, CE_E_NOFIT);
    if (st == CE_E_NOMEM || start->cooling || (st == CE_OK && fits_well(f))) return st;
    ce_model *from = malloc(HISTORIES * sizeof *from);
    if (from == NULL) return CE_E_NOMEM;
    for (size_t k = 0; k < HISTORIES; k++) {
        from[k] = *start;
        from[k].least_sd = roughly * step;
        ce_model_history(&from[k], &histories[k]);
        if (ce_model_try(&f->cells, step, &from[k]) != CE_OK) {
            free(from);
            return CE_E_NOMEM;
        }
    }
    qsort(from, HISTORIES, sizeof *from, by_total);
    /* the plain fit has been where the others without annealing lead: those with it come first */
    static const bool annealed[] = {true, false, true, true, false};
    size_t next[2] = {0};
    for (size_t k = 0; k < sizeof annealed / sizeof *annealed && f->work < most_work; k++) {
        size_t *i = &next[annealed[k]];
        while (from[*i].aged != annealed[k]) ++*i;
        st = try_model(f, step, from[(*i)++], st);
        if (st == CE_E_NOMEM || (st == CE_OK && fits_well(f))) break;
    }
    free(from);
    return st;
}

static ce_status fit_model(const by_windows *s, ce_window range, by_model *f)
{
    const ce_curve *c = s->curve;
    const double centre = s->p.at[CE_HALF_STEP];
    const double fine = clamp(s->width / 16.0, fmax(0.1, c->spacing), 0.4);
    ce_model start =
        ce_model_start(c->cooling, centre, s->width, fmax(c->slow_noise, 1e-9 * s->p.step),
                       c->cooling ? c->T[c->n - 1] : c->T[0]);
    start.fine_K = clamp(s->width / 16.0, 0.15, 0.5);
    ce_status st = ce_cells_make(c, range.low_K, range.high_K, centre, fine, &f->cells);
    if (st != CE_OK) return st;
    weigh_cells(s, &f->cells);
    return try_histories(f, s->p.step, &start);
}

static double variance(const by_model *f, size_t quantity)
{
    double v = 0.0;
    for (size_t a = 0; a < CE_FREE; a++)
        for (size_t b = 0; b < CE_FREE; b++)
            v += f->gradient[a][quantity] * f->model.cov[a][b] * f->gradient[b][quantity];
    return fmax(v, 0.0) * fmax(f->model.misfit, 1.0);
}

/* Add the squared effect of reweighting the cells to sum. */
static ce_status add_effect(const by_model *f, const double *share, double factor,
                            double sum[CE_CONSTRUCTIONS + 2])
{
    double shift[CE_FREE];
    const ce_status st = ce_model_reweigh(&f->design, share, shift);
    if (st != CE_OK) return st;
    for (int k = 0; k < CE_CONSTRUCTIONS + 2; k++) {
        double effect = 0.0;
        for (size_t a = 0; a < CE_FREE; a++) effect += f->gradient[a][k] * shift[a];
        if (isfinite(effect)) sum[k] += factor * effect * effect;
    }
    return CE_OK;
}

enum { BLOCKS = 10 };
/* Window part: what leaving out one stretch of curve after the other does to the result, to first
 * order (a delete-a-block jackknife over temperature). */
static ce_status window_part(const by_model *f, double sum[CE_CONSTRUCTIONS + 2])
{
    const size_t n = f->cells.n;
    double *share = malloc(n * sizeof *share);
    ce_status st = share == NULL ? CE_E_NOMEM : CE_OK;
    for (size_t b = 0; b < BLOCKS && st == CE_OK; b++) {
        for (size_t i = 0; i < n; i++) share[i] = i * BLOCKS / n == b ? 0.1 : 1.0;
        st = add_effect(f, share, (BLOCKS - 1.0) / BLOCKS, sum);
    }
    free(share);
    return st;
}

/* What an area over the whole step is off by, K, when the lines beside it look perfect; from the same
 * tuning. */
static const double area_part = 0.05;

/* What histories that fit equally well leave open, K for a step 10 K wide, growing with a power of the
 * width; from the tuning half of tests/bench/transition_accuracy. */
static const double model_part[CE_CONSTRUCTIONS] = {
    [CE_ONSET] = 0.014,      [CE_MIDPOINT] = 0.011, [CE_HALF_STEP] = 0.012,
    [CE_INFLECTION] = 0.012, [CE_END] = 0.005,      [CE_FICTIVE] = 0.08};
static const double power = 4.0;

/* A step that changes with temperature counts at the fictive temperature (Moynihan et al. 1976), but
 * often is taken at the temperature of the sample: either reading is half of the doubt, so that the
 * standard uncertainty is that of a uniform distribution between them, K. */
static double reading_of_step(const by_model *f, const modelling *m)
{
    double apart = 0.0;
    for (size_t i = FAR; i < m->n; i++)
        apart +=
            (0.5 * (m->low[i] + m->high[i]) - m->tf[i]) * m->step[i] * (m->high[i] - m->low[i]);
    return fabs(apart * (f->lines.liquid.slope - f->lines.glass.slope) / f->p.step) / sqrt(3.0);
}

static ce_status model_uncertainty(const by_windows *s, by_model *f, modelling *m,
                                   const ce_transition_options *o, ce_finding *out)
{
    double sum[CE_CONSTRUCTIONS + 2] = {0};
    if (!gradients(f, m)) return CE_E_NOFIT;
    if (o->ensemble && window_part(f, sum) == CE_E_NOMEM) return CE_E_NOMEM;
    const double least = 0.01 * s->curve->spacing + 1e-3;
    const double broad = pow(s->width / 10.0, power);
    for (int k = 0; k < CE_CONSTRUCTIONS; k++) {
        const double noise = variance(f, (size_t)k);
        out->u_noise[k] = hypot(sqrt(noise), least);
        /* the stretches differ by their noise too: that is counted already */
        out->u_window[k] = hypot(sqrt(fmax(sum[k] - noise, 0.0)), model_part[k] * broad);
    }
    out->u_window[CE_FICTIVE] =
        hypot(out->u_window[CE_FICTIVE], hypot(area_part, reading_of_step(f, m)));
    out->step_u = sqrt(variance(f, CE_CONSTRUCTIONS) + sum[CE_CONSTRUCTIONS]);
    out->width_u = sqrt(variance(f, CE_CONSTRUCTIONS + 1) + sum[CE_CONSTRUCTIONS + 1]);
    return CE_OK;
}

/* What the curve says beyond the model: its residuals, smoothed over a small part of the step, as far
 * as they stand out of the noise (shrunk after James and Stein). */
static void correct(const by_windows *s, const by_model *f, modelling *m)
{
    const ce_cells *c = &f->cells;
    const double half = fmax(0.08 * s->width, 1.5 * s->curve->spacing);
    size_t a = 0;
    for (size_t i = 0; i < m->n - FAR; i++) {
        double w = 0.0, r = 0.0, v = 0.0;
        while (a < c->n && c->T[a] < m->T[i] - half) a++;
        for (size_t k = a; k < c->n && c->T[k] < m->T[i] + half; k++) {
            const double near = 1.0 - fabs(c->T[k] - m->T[i]) / half;
            const double noise = f->model.sigma * f->model.sigma / c->w[k];
            w += near;
            r += near * f->design.r[k] * hypot(sqrt(noise), c->sd[k]);
            v += near * near * noise;
        }
        m->correction[i] = w > 0.0 && r != 0.0 ? r / w * fmax(0.0, 1.0 - 4.0 * v / (r * r)) : 0.0;
    }
}

/* What the model leaves over around the step beyond the noise, r.m.s. in steps. */
static double roughness(const by_windows *s, const by_model *f)
{
    const double low = s->p.at[CE_HALF_STEP] - 2.0 * s->width - 5.0;
    const double high = s->p.at[CE_HALF_STEP] + 2.0 * s->width + 5.0;
    double sum = 0.0;
    size_t n = 0;
    for (size_t i = 0; i < f->cells.n; i++) {
        if (f->cells.T[i] < low || f->cells.T[i] > high) continue;
        const double noise = f->model.sigma * f->model.sigma / f->cells.w[i];
        const double r = f->design.r[i] * hypot(sqrt(noise), f->cells.sd[i]);
        sum += r * r - noise;
        n++;
    }
    return n > 0 ? sqrt(fmax(sum / (double)n, 0.0)) / f->p.step : HUGE_VAL;
}

/* Where the windows alone speak against the model. */
static bool follows(const by_windows *s, const by_model *f, double rough)
{
    const double apart = fabs(f->p.at[CE_HALF_STEP] - s->p.at[CE_HALF_STEP]);
    return rough < most_rough && apart < fmax(0.2 * s->width, 1.0) && f->p.step > 0.5 * s->p.step &&
           f->p.step < 2.0 * s->p.step;
}

/* Windows, a step width farther off, that are straight to some hundred-thousandths of the step where
 * the noise lets that be seen: no tail of the step is in them, and nothing has to be extrapolated by
 * a model. They are taken then. */
static bool straight(by_windows *s)
{
    by_windows off = *s;
    const double limit = 5e-5 * s->p.step;
    off.glass.high_K -= s->width;
    off.liquid.low_K += s->width;
    if (s->curve->noise > limit || off.glass.high_K - off.glass.low_K < 8.0 ||
        off.liquid.high_K - off.liquid.low_K < 8.0 || !fit_windows(&off))
        return false;
    if (fabs(off.g.bend) > limit || fabs(off.l.bend) > limit || off.g.sd > limit ||
        off.l.sd > limit)
        return false;
    *s = off;
    return true;
}

/* What the curve's correction of the model moves may be noise as well: it is doubted as a whole. */
static void doubt_correction(const by_model *f, modelling *m, ce_finding *out)
{
    ce_lines lines;
    ce_points bare;
    memset(m->correction, 0, sizeof m->correction);
    if (!construct_model(&f->model, m, &lines, &bare)) return;
    for (int k = 0; k < CE_CONSTRUCTIONS; k++)
        if (isfinite(bare.at[k]))
            out->u_window[k] = hypot(out->u_window[k], bare.at[k] - f->p.at[k]);
}

/* The model's lines and constructions, where it follows the curve; CE_E_NOFIT where it does not. */
static ce_status take_model(const by_windows *s, const ce_transition_options *o, ce_finding *out)
{
    by_model f = {0};
    modelling *m = malloc(sizeof *m);
    ce_status st = m == NULL ? CE_E_NOMEM : fit_model(s, out->range, &f);
    if (st == CE_OK) {
        model_cells(m, s->p.at[CE_HALF_STEP], s->width);
        model_columns(&f.model, m);
        correct(s, &f, m);
        if (!construct_model(&f.model, m, &f.lines, &f.p)) st = CE_E_NOFIT;
    }
    if (st == CE_OK) {
        const double rough = roughness(s, &f);
        if (!follows(s, &f, rough)) {
            for (int k = 0; k < CE_CONSTRUCTIONS; k++) {
                const double off = fabs(f.p.at[k] - s->p.at[k]);
                out->u_window[k] = isfinite(off) ? 0.3 * fmin(off, 2.0 * s->width) : 0.0;
            }
            st = CE_E_NOFIT;
        } else
            st = model_uncertainty(s, &f, m, o, out);
        if (st == CE_OK) {
            /* where it follows loosely, the windows' word counts too */
            const double doubt = clamp(rough / most_rough, 0.0, 1.0);
            for (int k = 0; k < CE_CONSTRUCTIONS && rough > 0.2 * most_rough; k++)
                if (isfinite(s->p.at[k]))
                    out->u_window[k] = hypot(out->u_window[k], doubt * (f.p.at[k] - s->p.at[k]));
            doubt_correction(&f, m, out);
            out->points = f.p;
            out->lines = f.lines;
            out->rough = rough;
            out->hook = fabs(ce_model_hook(&f.model, s->glass.low_K)) / f.p.step;
            out->model = true;
        }
    }
    ce_cells_free(&f.cells);
    ce_design_free(&f.design);
    free(m);
    return st;
}

/* ---- windows alone ------------------------------------------------------------------------ */

/* Variance of each construction from noise: of the two lines, and of the curve between them. */
static void window_noise(const by_windows *s, ce_finding *out)
{
    const ce_curve *c = s->curve;
    const double T = s->p.at[CE_HALF_STEP],
                 slope = fmax(s->p.tangent.slope - s->g.line.slope, 1e-300);
    const double dg = T - s->g.line.ref_K, dl = T - s->l.line.ref_K;
    const double vg = s->g.var_at + dg * dg * s->g.var_slope;
    const double vl = s->l.var_at + dl * dl * s->l.var_slope;
    const double points = fmax(c->w[c->n / 2] * 2.0 * s->smooth_K / fmax(c->spacing, 1e-9), 2.0);
    const double local = 3.0 * c->noise * c->noise / points, least = 0.02 * c->spacing + 1e-3;
    const double weight[CE_CONSTRUCTIONS][2] = {
        [CE_ONSET] = {1.0, 0.0},      [CE_MIDPOINT] = {0.25, 0.25}, [CE_HALF_STEP] = {0.25, 0.25},
        [CE_INFLECTION] = {0.0, 0.0}, [CE_END] = {0.0, 1.0},        [CE_FICTIVE] = {0.0, 0.0}};
    for (int k = 0; k < CE_CONSTRUCTIONS; k++)
        out->u_noise[k] = hypot(sqrt(weight[k][0] * vg + weight[k][1] * vl + local) / slope, least);
    /* the steepest place wanders over a good part of the step where noise bends it */
    out->u_noise[CE_INFLECTION] =
        hypot(least + 0.25 * s->smooth_K, sqrt(local) / s->p.step * s->width);
    /* an area lives on the glassy line over the whole step */
    out->u_noise[CE_FICTIVE] = hypot(least, sqrt(vg) * 2.0 * s->width / s->p.step);
    out->step_u = sqrt(vg + vl);
}

/* What other windows as good as these would say, r.m.s. */
static void window_ensemble(const by_windows *s, ce_finding *out)
{
    enum { TRIALS = 6 };
    double sum[CE_CONSTRUCTIONS] = {0}, step = 0.0, used = 0.0;
    for (int k = 0; k < TRIALS; k++) {
        by_windows trial = *s;
        const double g = s->glass.high_K - s->glass.low_K, l = s->liquid.high_K - s->liquid.low_K;
        if (k == 0) trial.glass.low_K += 0.35 * g;
        if (k == 1) trial.glass.high_K -= 0.35 * g;
        if (k == 2) trial.liquid.low_K += 0.35 * l;
        if (k == 3) trial.liquid.high_K -= 0.35 * l;
        if (k == 4) trial.glass.high_K += fmin(0.3 * s->width, 0.2 * g);
        if (k == 5) trial.liquid.low_K -= fmin(0.3 * s->width, 0.2 * l);
        if (!fit_windows(&trial)) continue;
        for (int i = 0; i < CE_CONSTRUCTIONS; i++) {
            const double d = trial.p.at[i] - s->p.at[i];
            if (isfinite(d)) sum[i] += d * d;
        }
        step += (trial.p.step - s->p.step) * (trial.p.step - s->p.step);
        used += 1.0;
    }
    for (int i = 0; i < CE_CONSTRUCTIONS; i++)
        out->u_window[i] = hypot(out->u_window[i], used > 0.0 ? sqrt(2.0 * sum[i] / used) : 0.0);
    out->step_u = hypot(out->step_u, used > 0.0 ? sqrt(2.0 * step / used) : 0.0);
}

/* Curvature of the curve over the windows as far as it stands out of the noise, in steps. */
static double sag(const by_windows *s)
{
    const double most =
        fmax(fabs(s->g.bend) - 2.0 * s->g.bend_u, fabs(s->l.bend) - 2.0 * s->l.bend_u);
    return fmax(most, 0.0) / s->p.step;
}

static void take_windows(const by_windows *s, const ce_transition_options *o, ce_finding *out)
{
    const double rest = sqrt(
        fmax(s->g.sd * s->g.sd + s->l.sd * s->l.sd - 2.0 * s->curve->noise * s->curve->noise, 0.0));
    out->points = s->p;
    out->lines = s->lines;
    out->model = false;
    out->rough = rest / s->p.step;
    window_noise(s, out);
    if (o->ensemble) window_ensemble(s, out);
    out->u_window[CE_FICTIVE] = hypot(out->u_window[CE_FICTIVE], area_part);
    out->width_u = hypot(hypot(out->u_noise[CE_ONSET], out->u_window[CE_ONSET]),
                         hypot(out->u_noise[CE_END], out->u_window[CE_END]));
}

/* What lies around the step: points in it, baseline that is missing, the next event. */
static void survey(const by_windows *s, ce_finding *out)
{
    const ce_curve *c = s->curve;
    double on = out->points.at[CE_ONSET], end = out->points.at[CE_END];
    if (!isfinite(on)) on = out->points.low_K;
    if (!isfinite(end)) end = out->points.high_K;
    const double first = c->T[0], last = c->T[c->n - 1];
    const size_t b = ce_curve_index(c, fmax(end, out->points.high_K));
    for (size_t i = ce_curve_index(c, fmin(on, out->points.low_K)); i < b; i++)
        out->points_within += c->w[i];
    out->missing_K =
        fmax(fmax(least_baseline_K - (last - end), least_baseline_K - (on - first)), 0.0);
    out->event_K = out->range.high_K < last - 4.0 ? out->range.high_K - end : (double)NAN;
}

ce_status ce_read_step(const ce_curve *curve, const ce_place *place, ce_window edge,
                       const ce_transition_options *o, ce_finding *out, ce_error *err)
{
    tracing *t = malloc(sizeof *t);
    memset(out, 0, sizeof *out);
    if (t == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    by_windows s = {.curve = curve, .edge = edge, .t = t};
    ce_status st = settle_windows(&s, place, o, err);
    if (st == CE_OK) {
        const double tolerance = fmax(0.08 * s.p.step, 4.0 * curve->noise);
        out->range.low_K = fmax(fmax(edge.low_K, curve->T[0] + 1.0),
                                s.glass.high_K - fmax(straight_glass_K, 5.0 * s.width));
        out->range.high_K = ce_reach(curve, s.liquid.low_K, s.liquid.high_K,
                                     fmin(edge.high_K, curve->T[curve->n - 1] - 1.5), tolerance);
        out->noise = curve->noise;
        const bool given = !isnan(o->glass.low_K) || !isnan(o->liquid.low_K);
        st = given || straight(&s) ? CE_E_NOFIT : take_model(&s, o, out);
        if (st == CE_E_NOMEM)
            (void)ce_fail(err, st, "out of memory");
        else {
            if (st != CE_OK) take_windows(&s, o, out);
            st = CE_OK;
            out->glass = s.glass;
            out->liquid = s.liquid;
            out->bend = sag(&s);
            survey(&s, out);
            out->strength = place->score / fmax(1.0, out->rough / 0.01);
        }
    }
    free(t);
    return st;
}
