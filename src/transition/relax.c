/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/relax.h"

#include <math.h>

enum { ANGLES = 48, AGE_STEPS = 12 };
static const double pi = 3.14159265358979323846;

/* The distribution of rates is that of S with E exp(-t S) = exp(-t^beta), the one-sided stable law:
 * S = (a(U)/W)^((1-beta)/beta), U uniform on (0, pi), W exponential (Kanter, Ann. Probab. 3 (1975)
 * 697, from memory). With z = S^(-beta/(1-beta)) the density of ln S is c E[a z exp(-a z)]. */
static double density(const double a[ANGLES], const double w[ANGLES], double c, double z)
{
    double sum = 0.0;
    for (int i = 0; i < ANGLES; i++)
        if (a[i] * z < 45.0) sum += w[i] * a[i] * exp(-a[i] * z); /* the rest is below 1e-19      */
    return c * z * sum;
}

void ce_relax_modes(double beta, ce_modes *modes)
{
    double a[ANGLES], w[ANGLES]; /* dense towards pi, where a() runs off to infinity          */
    const double c = beta / (1.0 - beta);
    for (int i = 0; i < ANGLES; i++) {
        const double v = 1.0 - (i + 0.5) / ANGLES, u = pi * (1.0 - v * v * v * v);
        w[i] = 4.0 * v * v * v / (ANGLES - 0.5 / ANGLES); /* their sum is 1                    */
        a[i] = pow(sin(beta * u) / sin(u), c) * sin((1.0 - beta) * u) / sin(u);
    }
    /* The density has the width 1/c in ln S: the closer to a single exponential, the denser. Some
     * exp(-9) of it lies below the slowest mode; what lies above the last is given to the last. */
    modes->chains = beta < 0.5 ? 1 : beta < 0.68 ? 2 : beta < 0.78 ? 3 : 4;
    const double chains = (double)modes->chains, ratio = exp2(-c / chains);
    const double least = (1.0 - beta) * pow(beta, c), step = log(2.0) / chains;
    double z = 9.0 / least, s = pow(z, -1.0 / c), sum = 0.0;
    for (size_t j = 0; j < modes->chains; j++) modes->slowest[j] = s * exp2((double)j / chains);
    for (modes->n = 0; modes->n < CE_MODES && sum < 1.0 - 1e-4; modes->n++)
        for (size_t j = 0; j < modes->chains; j++, z *= ratio)
            sum += modes->weight[j][modes->n] = step * density(a, w, c, z);
    modes->weight[modes->chains - 1][modes->n - 1] += 1.0 - sum;
}

/* The modes lag by u[k] = T - Tf_k, their weighted sum is T - Tf; slope is the mean of dTf/dT over the
 * last step, bend the change of dTf/dT over temperature since the step before, w the length of the last
 * step; seen is what a lagging instrument shows of dTf/dT, area the integral of that over temperature. */
typedef struct {
    const ce_relax *relax;
    double u[CE_CHAINS][CE_MODES];
    double T, lag, slope, bend, w, seen, area;
} state;

/* (rate of the scan) * tau, K. */
static double theta(const ce_relax *r, double T, double tf)
{
    const double e = r->x * (1.0 / T - 1.0 / r->tr_K) + (1.0 - r->x) * (1.0 / tf - 1.0 / r->tr_K);
    return r->tr_K * r->tr_K / r->h_K * exp(fmin(r->h_K * e, 600.0));
}

/* What remains of (1 - exp(-G))(1 + 2/G) - 2, where that is not all cancellation. */
static double tilt(double gone, double over)
{
    return over < 2e3 ? gone - 2.0 + gone * over : -2.0 / (3.0 * over * over);
}

/* One chain of modes over a step of the reduced length G for the slowest: its share of the lag. The
 * relaxation time falls by exp(-2 half) over the step, in a straight line over the reduced time, in
 * which du/dG = tau dT/dt - u has a closed solution. What is gone after a step goes from mode to mode
 * by 1 - E_{k+1} = 1 - E_k^2; the fastest modes follow at once. */
static double decay(double *u, const double *weight, size_t n, double G, double dT, double half)
{
    double lag = 0.0, steady = dT / G, gone = -expm1(-G), over = 2.0 / G;
    const double turn = tanh(half);
    size_t k = 0;
    for (; k < n && gone < 1.0 - 1e-9; k++) {
        u[k] += (steady - u[k]) * gone + steady * turn * tilt(gone, over);
        lag += weight[k] * u[k];
        steady *= 0.5;
        over *= 0.5;
        gone *= 2.0 - gone;
    }
    for (; k < n; k++) {
        u[k] = steady * (1.0 - turn * (1.0 - over));
        lag += weight[k] * u[k];
        steady *= 0.5;
        over *= 0.5;
    }
    return lag;
}

/* Advance by dT in the scaled time dt (K of scan); dt > 0. Over the step the fictive temperature is
 * extrapolated and ln tau a straight line over temperature: third order. */
static void advance(state *s, double dT, double dt)
{
    const ce_relax *r = s->relax;
    const double w = fabs(dT), tf = s->T - s->lag, T = s->T + 0.5 * dT;
    const double mean = s->slope + 0.5 * s->bend * (s->w + w);
    const double mid = tf + 0.5 * dT * (mean - 0.25 * s->bend * w);
    const double half = 0.5 * dT * r->h_K * (r->x / (T * T) + (1.0 - r->x) * mean / (mid * mid));
    const double G = dt / theta(r, T, mid) * (fabs(half) < 1e-3 ? 1.0 : sinh(half) / half);
    double lag = 0.0;
    for (size_t j = 0; j < r->modes.chains; j++)
        lag += decay(s->u[j], r->modes.weight[j], r->modes.n, r->modes.slowest[j] * G, dT, half);
    if (dT == 0.0) {
        s->slope = s->bend = 0.0;
    } else if (w > 1e-5) { /* else rounding errors */
        const double slope = 1.0 - (lag - s->lag) / dT;
        s->bend = (slope - s->slope) / (0.5 * (w + s->w));
        s->slope = slope;
        s->w = w;
    }
    s->T += dT;
    s->lag = lag;
}

/* First-order lag over a step on which the slope went in a straight line about its mean. */
static void observe(state *s, double dT)
{
    const double lag = s->relax->lag_K, w = fabs(dT), rise = 0.5 * w * s->bend;
    const double left = exp(-w / fmax(lag, 0.01 * w)), behind = lag * s->bend;
    const double off = s->seen - (s->slope - rise - behind);
    s->area += (s->slope - behind + off * (1.0 - left) * lag / w) * dT;
    s->seen = s->slope + rise - behind + off * left;
}

/* Longest step at a temperature, K. */
static double longest(const ce_relax *r, double T)
{
    const double off = fabs(T - r->fine_at_K);
    return off < 14.0 ? r->fine_K : off < 25.0 ? 2.0 * r->fine_K : 5.0 * r->fine_K;
}

/* Ramp to a temperature, |dT| * per_K being the scaled time; per_K < 0 on cooling. */
static void ramp(state *s, double to, double per_K)
{
    while (s->T != to) {
        const double left = to - s->T, far = longest(s->relax, s->T);
        if (!(left * per_K > 1e-9)) { /* cells that touch, but for rounding                    */
            s->T = to;
            return;
        }
        const double parts = ceil(fabs(left) / far - 1e-9);
        const double dT = parts <= 1.0 ? left : left / parts;
        advance(s, dT, dT * per_K);
        observe(s, dT);
        if (parts <= 1.0) s->T = to;
    }
}

/* Cooling to a temperature that may depend on the parameters: the steps end on a fixed lattice, so
 * that only the length of the last one changes and the result is smooth. */
static void cool(state *s, double to, double per_K)
{
    const double base = s->relax->fine_at_K;
    while (s->T > to) {
        const double far = 2.0 * longest(s->relax, s->T - 1e-6);
        double next = base + far * (ceil((s->T - base) / far - 1e-6) - 1.0);
        if (next < to + 1e-6) next = to;
        const double dT = next - s->T;
        advance(s, dT, dT * per_K);
        s->T = next;
    }
}

static void anneal(state *s)
{
    const ce_relax *r = s->relax;
    double done = 0.0, span = r->age_K * exp2(-(AGE_STEPS - 1));
    for (int i = 0; i < AGE_STEPS; i++) {
        const double until = i == AGE_STEPS - 1 ? r->age_K : span;
        advance(s, 0.0, until - done);
        done = until;
        span *= 2.0;
    }
}

/* One cell, entered from either side. */
static void cross(state *s, double from, double to, double per_K, double *tf, double *step)
{
    ramp(s, from, per_K);
    const double before = s->T - s->lag, area = s->area;
    ramp(s, to, per_K);
    *tf = 0.5 * (before + s->T - s->lag);
    *step = (s->area - area) / (to - from);
}

void ce_relax_scan(const ce_relax *r, bool cooling_scan, size_t n, const double *low,
                   const double *high, double *tf, double *step)
{
    state s = {.relax = r, .T = r->fine_at_K + 40.0, .slope = 1.0, .seen = 1.0};
    if (cooling_scan) {
        s.T = fmax(s.T, high[n - 1]);
        for (size_t i = n; i-- > 0;) cross(&s, high[i], low[i], -1.0, &tf[i], &step[i]);
        return;
    }
    const double per_K = -1.0 / r->cooling;
    if (r->age_K > 0.0 && r->age_at_K > low[0] && r->age_at_K < s.T) {
        cool(&s, r->age_at_K, per_K);
        anneal(&s);
    }
    cool(&s, fmin(low[0], s.T), per_K);
    s.slope = s.seen = 0.0;
    for (size_t i = 0; i < n; i++) cross(&s, low[i], high[i], 1.0, &tf[i], &step[i]);
}
