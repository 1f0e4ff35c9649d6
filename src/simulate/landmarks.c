/* SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Definitions: ISO 11357-2 (half step, onset, end, inflection, equal areas), ASTM E1356 (midpoint);
 * all from memory, written out in chainend-methods(7). */
#include "simulate/landmarks.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_spline.h>
#include <math.h>
#include <stdlib.h>

double ce_lag_step(double y, double in0, double in1, double dt_s, double lag_s)
{
    if (!(lag_s > 0.0)) return in1;
    double a = dt_s / lag_s, e = exp(-a);
    double ramp = a < 1.0e-4 ? 0.5 * a - a * a / 6.0 : 1.0 - (1.0 - e) / a;
    return y * e + in0 * (1.0 - e) + (in1 - in0) * ramp;
}

double ce_equal_areas(const ce_glass *glass, double high_K, double area_J_g)
{
    double d0 = glass->step, d1 = glass->slope_step, top = high_K - glass->ref_K;
    double c = area_J_g - d0 * top - 0.5 * d1 * top * top;
    return glass->ref_K + 2.0 * c / (-d0 - sqrt(d0 * d0 - 2.0 * d1 * c));
}

/* A ramp as heat capacity over rising temperature, with what its lines need. */
typedef struct {
    size_t n;
    double *t_K, *y; /* K, J/(g K)                       */
    const ce_glass *glass;
    double shift_K, drift; /* of the lines: q lag; J/(g K^2)   */
    gsl_spline *spline;
    gsl_interp_accel *accel;
} curve;

static double glass_line(const curve *c, double t)
{
    return ce_glass_cp(c->glass, t - c->shift_K);
}
static double step_line(const curve *c, double t)
{
    return ce_glass_step(c->glass, t - c->shift_K);
}
static double value(const curve *c, double t)
{
    double y = (double)NAN;
    return gsl_spline_eval_e(c->spline, t, c->accel, &y) == GSL_SUCCESS ? y : (double)NAN;
}
static double slope(const curve *c, double t)
{
    double d = (double)NAN;
    return gsl_spline_eval_deriv_e(c->spline, t, c->accel, &d) == GSL_SUCCESS ? d : (double)NAN;
}

/* Normalised step: 0 on the glass line, 1 on the liquid line. */
static double half_step_function(const curve *c, double t, const double *unused)
{
    (void)unused;
    return (value(c, t) - glass_line(c, t)) / step_line(c, t) - 0.5;
}

/* Curve minus the level halfway in heat flow between onset and end; at[0] onset, at[1] end. */
static double midpoint_function(const curve *c, double t, const double *at)
{
    double level = 0.5 * (glass_line(c, at[0]) + glass_line(c, at[1]) + step_line(c, at[1]));
    return value(c, t) - level + c->drift * (t - 0.5 * (at[0] + at[1]));
}

/* First upward zero of f from the cold end; NaN when there is none. */
static double first_crossing(const curve *c,
                             double (*f)(const curve *c, double t, const double *at),
                             const double *at)
{
    double before = f(c, c->t_K[0], at);
    for (size_t i = 1; i < c->n; i++) {
        double after = f(c, c->t_K[i], at);
        if (before < 0.0 && after >= 0.0) {
            double low = c->t_K[i - 1], high = c->t_K[i];
            for (int k = 0; k < 60; k++) {
                double mid = 0.5 * (low + high);
                if (f(c, mid, at) < 0.0)
                    low = mid;
                else
                    high = mid;
            }
            return 0.5 * (low + high);
        }
        before = after;
    }
    return (double)NAN;
}

/* The nodes of the step: from a tenth of its height to its top. What a fast-cooled glass gives off as
 * soon as it is heated can be steeper, but is none of it. */
static void step_nodes(const curve *c, double half_K, size_t *from, size_t *to)
{
    double top = -(double)INFINITY;
    *from = 3;
    *to = c->n > 3 ? c->n - 3 : 0;
    if (!isfinite(half_K)) return;
    size_t last = *to;
    for (size_t i = 3; i < last; i++) {
        double height = half_step_function(c, c->t_K[i], NULL) + 0.5;
        if (c->t_K[i] < half_K && height < 0.1) *from = i;
        if (c->t_K[i] > half_K && height > top) {
            top = height;
            *to = i + 1;
        }
    }
}

/* Where the step is steepest: the steepest node, then golden section between its neighbours. */
static double steepest(const curve *c, double half_K)
{
    size_t best = 0, from, to;
    double most = -(double)INFINITY;
    step_nodes(c, half_K, &from, &to);
    for (size_t i = from; i < to; i++) {
        double d = slope(c, c->t_K[i]);
        if (d > most) {
            most = d;
            best = i;
        }
    }
    if (best == 0) return (double)NAN;
    const double golden = 0.5 * (sqrt(5.0) - 1.0);
    double a = c->t_K[best - 1], b = c->t_K[best + 1];
    while (b - a > 1.0e-7) {
        double u = b - golden * (b - a), v = a + golden * (b - a);
        if (slope(c, u) > slope(c, v))
            b = v;
        else
            a = u;
    }
    return 0.5 * (a + b);
}

static void read_curve(const curve *c, ce_ramp_truth *truth)
{
    double half = first_crossing(c, half_step_function, NULL);
    double ti = steepest(c, half), k = slope(c, ti), y = value(c, ti);
    double bg = c->glass->slope_glass, bl = bg + c->glass->slope_step;
    double at[2];
    at[0] = ti - (y - glass_line(c, ti)) / (k - bg);
    at[1] = ti + (glass_line(c, ti) + step_line(c, ti) - y) / (k - bl);
    truth->tg_K[CE_INFLECTION] = ti;
    truth->tg_K[CE_ONSET] = at[0];
    truth->tg_K[CE_END] = at[1];
    truth->tg_K[CE_HALF_STEP] = half;
    truth->tg_K[CE_MIDPOINT] =
        isfinite(at[0] + at[1]) ? first_crossing(c, midpoint_function, at) : (double)NAN;
    truth->step_J_gK = c->glass->share * step_line(c, truth->tg_K[CE_HALF_STEP]);
    truth->peak = -(double)INFINITY;
    for (size_t i = 0; i < c->n; i++) {
        double s = half_step_function(c, c->t_K[i], NULL) + 0.5;
        if (s > truth->peak) {
            truth->peak = s;
            truth->peak_K = c->t_K[i];
        }
    }
}

/* Heat capacity after the lag, over rising temperature. The lag starts in its steady state, so that
 * nothing of its own start-up is left in the curve. */
static void fill_curve(const ce_trace *trace, const ce_stretch *stretch, double lag_s,
                       const double *flow, curve *c)
{
    double q = stretch->rate_K_s, y = flow[0];
    if (lag_s > 0.0) {
        double dt = trace->t_s[stretch->first + 1] - trace->t_s[stretch->first];
        y -= lag_s * (flow[1] - flow[0]) / dt;
    }
    for (size_t i = 0; i < c->n; i++) {
        size_t node = stretch->first + i;
        if (i > 0)
            y = ce_lag_step(y, flow[i - 1], flow[i], trace->t_s[node] - trace->t_s[node - 1],
                            lag_s);
        size_t to = q > 0.0 ? i : c->n - 1 - i;
        c->t_K[to] = trace->t_K[node];
        c->y[to] = (lag_s > 0.0 ? y : flow[i]) / q;
    }
}

static double area_fictive(const ce_trace *trace, const ce_glass *glass, const ce_stretch *stretch,
                           const double *flow)
{
    double area = 0.0;
    for (size_t i = stretch->first; i < stretch->last; i++) {
        double a = flow[i - stretch->first] - ce_glass_cp(glass, trace->t_K[i]) * stretch->rate_K_s;
        double b = flow[i + 1 - stretch->first] -
                   ce_glass_cp(glass, trace->t_K[i + 1]) * stretch->rate_K_s;
        area += 0.5 * (a + b) * (trace->t_s[i + 1] - trace->t_s[i]);
    }
    size_t hot = stretch->rate_K_s > 0.0 ? stretch->last : stretch->first;
    return ce_equal_areas(glass, trace->t_K[hot], fabs(area));
}

static bool runs_through(const ce_trace *trace, size_t which, const ce_stretch *stretch)
{
    size_t cold = stretch->rate_K_s > 0.0 ? stretch->first : stretch->last;
    size_t hot = stretch->rate_K_s > 0.0 ? stretch->last : stretch->first;
    const double *tf = trace->tf_K[which];
    return stretch->rate_K_s != 0.0 && stretch->last - stretch->first >= 20 &&
           tf[cold] - trace->t_K[cold] > 2.0 && fabs(tf[hot] - trace->t_K[hot]) < 0.5;
}

ce_status ce_landmarks(const ce_trace *trace, const ce_glass *glass, size_t which,
                       const ce_stretch *stretch, const ce_view *view, ce_ramp_truth *truth,
                       bool *spans, ce_error *err)
{
    *spans = runs_through(trace, which, stretch);
    if (!*spans) return CE_OK;
    size_t n = stretch->last - stretch->first + 1;
    curve c = {.n = n, .glass = glass, .shift_K = stretch->rate_K_s * view->lag_s};
    c.drift = view->drift_J_gK2 / glass->share;
    double *flow = calloc(n, sizeof *flow);
    c.t_K = calloc(n, sizeof *c.t_K);
    c.y = calloc(n, sizeof *c.y);
    c.spline = gsl_spline_alloc(gsl_interp_cspline, n);
    c.accel = gsl_interp_accel_alloc();
    ce_status st = CE_OK;
    if (flow == NULL || c.t_K == NULL || c.y == NULL || c.spline == NULL || c.accel == NULL) {
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    } else {
        *truth = (ce_ramp_truth){.kind = stretch->kind,
                                 .segment = stretch->index,
                                 .nth_of_kind = stretch->nth_of_kind,
                                 .glass = which,
                                 .rate_K_min = stretch->rate_K_s * 60.0};
        ce_trace_flow(trace, glass, which, stretch, flow);
        fill_curve(trace, stretch, view->lag_s, flow, &c);
        if (gsl_spline_init(c.spline, c.t_K, c.y, n) != GSL_SUCCESS)
            st = ce_fail(err, CE_E_NOMEM, "out of memory");
        else
            read_curve(&c, truth);
        size_t cold_end = stretch->rate_K_s > 0.0 ? stretch->first : stretch->last;
        truth->tg_K[CE_FICTIVE] = trace->tf_K[which][cold_end];
        truth->fictive_area_K = area_fictive(trace, glass, stretch, flow);
    }
    free(flow);
    free(c.t_K);
    free(c.y);
    gsl_spline_free(c.spline);
    gsl_interp_accel_free(c.accel);
    return st;
}
