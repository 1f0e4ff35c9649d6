/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/modelled.h"

#include <stdlib.h>
#include <string.h>

static const double most_rough = 0.03; /* what a model may leave over of a step           */

/* Coarse cells far below, where the fictive temperature comes from, then the cells of the trace. */
enum { FAR = 6, MODEL = FAR + CE_TRACE };
typedef struct {
    size_t n; /* of all cells                                                                   */
    double low[MODEL], high[MODEL], tf[MODEL], step[MODEL], phi[MODEL * CE_LINEAR];
    double T[CE_TRACE], y[CE_TRACE], correction[CE_TRACE];
} modelling;

typedef struct {
    ce_modelled fit;
    ce_lines lines;
    ce_points p;
    double gradient[CE_FREE][CE_CONSTRUCTIONS + 2]; /* of constructions, step height, width    */
} by_model;

static void model_cells(modelling *m, double centre, double width)
{
    const double d = ce_clamp(width / 50.0, 0.06, 0.3),
                 from = centre - ce_clamp(3.0 * width, 15.0, 40.0);
    const double to = centre + ce_clamp(2.5 * width, 15.0, 35.0);
    for (int i = 0; i < FAR; i++) {
        m->low[i] = from - 12.0 * (FAR - i);
        m->high[i] = m->low[i] + 12.0;
    }
    m->n = FAR;
    for (size_t i = 0; i < CE_TRACE && from + d * (double)i < to; i++, m->n++) {
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
    const bool on_shoulder = ce_shoulder_doubt(&f->p) > 0.0;
    for (size_t a = CE_FREE; a-- > 0;) { /* linear ones first: they leave the columns alone     */
        const double h = ce_model_increment(&f->fit.model, a);
        memset(f->gradient[a], 0, sizeof f->gradient[a]);
        if (h == 0.0) continue;
        ce_model moved = f->fit.model;
        ce_lines lines;
        ce_points p;
        ce_model_move(&moved, a, h);
        if (a < CE_SHAPES) model_columns(&moved, m);
        if (!construct_model(&moved, m, &lines, &p)) return false;
        double *g = f->gradient[a];
        for (int k = 0; k < CE_CONSTRUCTIONS; k++) g[k] = (p.at[k] - f->p.at[k]) / h;
        /* on a shoulder the half-step jumps: that is doubted apart */
        if (on_shoulder) g[CE_HALF_STEP] = g[CE_MIDPOINT];
        const double T = f->p.at[CE_HALF_STEP];
        g[CE_CONSTRUCTIONS] =
            (ce_line_at(&lines.liquid, T) - ce_line_at(&lines.glass, T) - f->p.step) / h;
        g[CE_CONSTRUCTIONS + 1] = g[CE_END] - g[CE_ONSET];
    }
    model_columns(&f->fit.model, m);
    return true;
}

/* Of the variance that an inexact model is allowed, what is believed where the curve shows nothing of
 * it: histories that the priors of the model chose leave no trace. From the tuning half as well. */
static const double unseen = 0.1;

static double variance(const by_model *f, size_t quantity)
{
    const double least = unseen + (1.0 - unseen) * ce_expected_misfit(&f->fit);
    double v = 0.0;
    for (size_t a = 0; a < CE_FREE; a++)
        for (size_t b = 0; b < CE_FREE; b++)
            v += f->gradient[a][quantity] * f->fit.model.cov[a][b] * f->gradient[b][quantity];
    return fmax(v, 0.0) * fmax(f->fit.model.misfit, least);
}

/* Add the squared effect of reweighting the cells to sum. */
static ce_status add_effect(const by_model *f, const double *share, double factor,
                            double sum[CE_CONSTRUCTIONS + 2])
{
    double shift[CE_FREE];
    const ce_status st = ce_model_reweigh(&f->fit.design, share, shift);
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
    const size_t n = f->fit.cells.n;
    double *share = malloc(n * sizeof *share);
    ce_status st = share == NULL ? CE_E_NOMEM : CE_OK;
    for (size_t b = 0; b < BLOCKS && st == CE_OK; b++) {
        for (size_t i = 0; i < n; i++) share[i] = i * BLOCKS / n == b ? 0.1 : 1.0;
        st = add_effect(f, share, (BLOCKS - 1.0) / BLOCKS, sum);
    }
    free(share);
    return st;
}

/* What histories that fit equally well leave open, K for a step 10 K wide, growing with a power of the
 * width; from the tuning half of tests/bench/transition_accuracy. */
static const double model_part[CE_CONSTRUCTIONS] = {
    [CE_ONSET] = 0.014,      [CE_MIDPOINT] = 0.012, [CE_HALF_STEP] = 0.012,
    [CE_INFLECTION] = 0.010, [CE_END] = 0.002,      [CE_FICTIVE] = 0.08};
static const double power = 4.0;
/* The steepest place is where the slope hardly changes: what the cells of the fit leave of it and of the
 * onset by its tangent, in widths of the step; as above. */
static const double steepest_part = 0.003;

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

static ce_status model_uncertainty(const ce_windowed *s, by_model *f, modelling *m,
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
    const double steepest = steepest_part * s->width;
    out->u_window[CE_INFLECTION] = hypot(out->u_window[CE_INFLECTION], steepest);
    out->u_window[CE_ONSET] = hypot(out->u_window[CE_ONSET], steepest);
    out->u_window[CE_FICTIVE] =
        hypot(out->u_window[CE_FICTIVE], hypot(ce_area_part_K, reading_of_step(f, m)));
    out->step_u = sqrt(variance(f, CE_CONSTRUCTIONS) + sum[CE_CONSTRUCTIONS]);
    out->width_u = sqrt(variance(f, CE_CONSTRUCTIONS + 1) + sum[CE_CONSTRUCTIONS + 1]);
    return CE_OK;
}

/* What the curve says beyond the model: its residuals, smoothed over a small part of the step, as far
 * as they stand out of the noise (shrunk after James and Stein). */
static void correct(const ce_windowed *s, const by_model *f, modelling *m)
{
    const ce_cells *c = &f->fit.cells;
    const double half = fmax(0.08 * s->width, 1.5 * s->curve->spacing);
    size_t a = 0;
    for (size_t i = 0; i < m->n - FAR; i++) {
        double w = 0.0, r = 0.0, v = 0.0;
        while (a < c->n && c->T[a] < m->T[i] - half) a++;
        for (size_t k = a; k < c->n && c->T[k] < m->T[i] + half; k++) {
            const double near = 1.0 - fabs(c->T[k] - m->T[i]) / half;
            const double noise = f->fit.model.sigma * f->fit.model.sigma / c->w[k];
            w += near;
            r += near * f->fit.design.r[k] * hypot(sqrt(noise), c->sd[k]);
            v += near * near * noise;
        }
        m->correction[i] = w > 0.0 && r != 0.0 ? r / w * fmax(0.0, 1.0 - 4.0 * v / (r * r)) : 0.0;
    }
}

/* What the model leaves over around the step beyond the noise, r.m.s. in steps. */
static double roughness(const ce_windowed *s, const by_model *f)
{
    const double low = s->p.at[CE_HALF_STEP] - 2.0 * s->width - 5.0;
    const double high = s->p.at[CE_HALF_STEP] + 2.0 * s->width + 5.0;
    double sum = 0.0;
    size_t n = 0;
    for (size_t i = 0; i < f->fit.cells.n; i++) {
        if (f->fit.cells.T[i] < low || f->fit.cells.T[i] > high) continue;
        const double noise = f->fit.model.sigma * f->fit.model.sigma / f->fit.cells.w[i];
        const double r = f->fit.design.r[i] * hypot(sqrt(noise), f->fit.cells.sd[i]);
        sum += r * r - noise;
        n++;
    }
    return n > 0 ? sqrt(fmax(sum / (double)n, 0.0)) / f->p.step : HUGE_VAL;
}

/* Where the windows alone speak against the model. */
static bool follows(const ce_windowed *s, const by_model *f, double rough)
{
    const double apart = fabs(f->p.at[CE_HALF_STEP] - s->p.at[CE_HALF_STEP]);
    return rough < most_rough && apart < fmax(0.2 * s->width, 1.0) && f->p.step > 0.5 * s->p.step &&
           f->p.step < 2.0 * s->p.step;
}

/* What the curve's correction of the model moves may be noise as well: it is doubted as a whole. */
static void doubt_correction(const by_model *f, modelling *m, ce_finding *out)
{
    ce_lines lines;
    ce_points bare;
    memset(m->correction, 0, sizeof m->correction);
    if (!construct_model(&f->fit.model, m, &lines, &bare)) return;
    for (int k = 0; k < CE_CONSTRUCTIONS; k++)
        if (isfinite(bare.at[k]))
            out->u_window[k] = hypot(out->u_window[k], bare.at[k] - f->p.at[k]);
}

ce_status ce_take_model(const ce_windowed *s, const ce_transition_options *o, ce_finding *out)
{
    by_model f = {0};
    modelling *m = malloc(sizeof *m);
    ce_status st = m == NULL ? CE_E_NOMEM : ce_fit_histories(s, out->range, &f.fit);
    if (st == CE_OK) {
        model_cells(m, s->p.at[CE_HALF_STEP], s->width);
        model_columns(&f.fit.model, m);
        correct(s, &f, m);
        if (!construct_model(&f.fit.model, m, &f.lines, &f.p)) st = CE_E_NOFIT;
    }
    if (st == CE_OK) {
        const double rough = roughness(s, &f);
        if (!follows(s, &f, rough)) {
            out->unlike = rough;
            for (int k = 0; k < CE_CONSTRUCTIONS; k++) {
                const double off = fabs(f.p.at[k] - s->p.at[k]);
                out->u_window[k] = isfinite(off) ? 0.3 * fmin(off, 2.0 * s->width) : 0.0;
            }
            st = CE_E_NOFIT;
        } else
            st = model_uncertainty(s, &f, m, o, out);
        if (st == CE_OK) {
            /* where it follows loosely, the windows' word counts too */
            const double doubt = ce_clamp(rough / most_rough, 0.0, 1.0);
            for (int k = 0; k < CE_CONSTRUCTIONS && rough > 0.2 * most_rough; k++)
                if (isfinite(s->p.at[k]))
                    out->u_window[k] = hypot(out->u_window[k], doubt * (f.p.at[k] - s->p.at[k]));
            doubt_correction(&f, m, out);
            out->points = f.p;
            out->lines = f.lines;
            out->rough = rough;
            out->hook = fabs(ce_model_hook(&f.fit.model, s->glass.low_K)) / f.p.step;
            out->model = true;
        }
    }
    ce_modelled_free(&f.fit);
    free(m);
    return st;
}
