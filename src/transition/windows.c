/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/windows.h"

const double ce_area_part_K = 0.05;

static const double last_K = 1.5; /* of a segment, where the programme may already be turning   */

/* A grid of equidistant temperatures. */
static void lay_out(ce_tracing *t, double from, double to, double least)
{
    const double d = fmax((to - from) / (CE_TRACE - 1.0), least);
    t->trace = (ce_trace){0, t->T, t->y};
    for (size_t i = 0; i < CE_TRACE && from + d * (double)i <= to + 1e-9; i++) {
        t->T[i] = from + d * (double)i;
        t->low[i] = t->T[i] - 0.5 * d;
        t->high[i] = t->T[i] + 0.5 * d;
        t->trace.n = i + 1;
    }
}

/* Half-width of the smoothing that leaves a slope error of a thirtieth, within the step's shape. */
static double smoothing(const ce_curve *c, double step, double width)
{
    const double density = 1.0 / fmax(c->spacing, 1e-6), aim = 0.03 * step / width;
    const double w = c->w[c->n / 2],
                 h = cbrt(1.5 * c->noise * c->noise / (w * density * aim * aim));
    return ce_clamp(h, fmax(3.0 * c->spacing, 0.04 * width), fmax(0.3 * width, 3.0 * c->spacing));
}

static bool construct_on(ce_windowed *s)
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

static bool fit_windows(ce_windowed *s)
{
    return ce_fit_line(s->curve, s->glass, &s->g) && ce_fit_line(s->curve, s->liquid, &s->l) &&
           construct_on(s);
}

/* Windows beside the step: they begin off its tails, are at least 10 K long, and as long as 30 K where
 * the curve stays straight (no start-up, no other event). */
static void place_windows(ce_windowed *s, const ce_transition_options *o, double low, double high,
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

ce_status ce_settle_windows(ce_windowed *s, const ce_place *place, const ce_transition_options *o,
                            ce_error *err)
{
    const double gap = place->high_K - place->low_K, slack = fmax(0.6 * gap, 8.0);
    s->width = fmax(0.5 * gap, 1.0);
    place_windows(s, o, place->low_K, place->high_K, place->step);
    if (!ce_fit_line(s->curve, s->glass, &s->g) || !ce_fit_line(s->curve, s->liquid, &s->l))
        return ce_fail(err, CE_E_REFUSED, "too little curve beside the step for two baselines");
    if (!construct_on(s))
        return ce_fail(err, CE_E_REFUSED, "the curve does not cross between its baselines");
    for (int pass = 0; pass < 3; pass++) {
        const ce_windowed before = *s;
        /* nothing sharpens a step on cooling: it is twice as wide, but its tails are not longer */
        const double off = ce_clamp((s->curve->cooling ? 0.5 : 1.0) * s->width, 2.0, 20.0);
        const double low =
            ce_clamp(s->p.low_K - off, place->low_K - slack, place->low_K + 0.4 * gap);
        const double high = ce_clamp(fmax(s->p.high_K, s->p.at[CE_END]) + 0.5 * s->width + off,
                                     place->high_K - 0.4 * gap, place->high_K + slack);
        place_windows(s, o, low, high, s->p.step);
        if (fit_windows(s) && s->p.step > 0.6 * before.p.step && s->p.step < 1.7 * before.p.step)
            continue;
        *s = before;
        return CE_OK;
    }
    return CE_OK;
}

bool ce_windows_straight(ce_windowed *s)
{
    ce_windowed off = *s;
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

/* Variance of each construction from noise: of the two lines, and of the curve between them. */
static void window_noise(const ce_windowed *s, ce_finding *out)
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
static void window_ensemble(const ce_windowed *s, ce_finding *out)
{
    enum { TRIALS = 6 };
    double sum[CE_CONSTRUCTIONS] = {0}, step = 0.0, used = 0.0;
    for (int k = 0; k < TRIALS; k++) {
        ce_windowed trial = *s;
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

double ce_windows_sag(const ce_windowed *s)
{
    const double most =
        fmax(fabs(s->g.bend) - 2.0 * s->g.bend_u, fabs(s->l.bend) - 2.0 * s->l.bend_u);
    return fmax(most, 0.0) / s->p.step;
}

void ce_take_windows(const ce_windowed *s, const ce_transition_options *o, ce_finding *out)
{
    const double rest = sqrt(
        fmax(s->g.sd * s->g.sd + s->l.sd * s->l.sd - 2.0 * s->curve->noise * s->curve->noise, 0.0));
    out->points = s->p;
    out->lines = s->lines;
    out->model = false;
    out->rough = rest / s->p.step;
    window_noise(s, out);
    if (o->ensemble) window_ensemble(s, out);
    out->u_window[CE_FICTIVE] = hypot(out->u_window[CE_FICTIVE], ce_area_part_K);
    out->width_u = hypot(hypot(out->u_noise[CE_ONSET], out->u_window[CE_ONSET]),
                         hypot(out->u_noise[CE_END], out->u_window[CE_END]));
}
