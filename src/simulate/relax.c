/* SPDX-License-Identifier: GPL-3.0-or-later
 *
 * Tool, J. Am. Ceram. Soc. 29 (1946) 240; Narayanaswamy, ibid. 54 (1971) 491; Moynihan et al.,
 * Ann. N. Y. Acad. Sci. 279 (1976) 15; DeBolt et al., J. Am. Ceram. Soc. 59 (1976) 16 (all from
 * memory):
 *   Tf(t) = T(t) - integral of dT/dt' exp(-(xi(t) - xi(t'))^beta) dt',  xi = integral of dt/tau.
 *
 * Recursive scheme: with exp(-xi^beta) = sum w exp(-r xi) each term obeys dm/dt = dT/dt - r m/tau,
 * Tf = T - sum w m, which a step with constant dT/dt and tau solves exactly; tau is taken halfway,
 * so the scheme is of second order. The idea of carrying exponential terms forward is that of
 * Markovsky and Soules, J. Am. Ceram. Soc. 67 (1984) C-56 (from memory); step rule and weights are
 * our own. Reduced times are never differenced: dt/tau spans forty decades. */
#include "simulate/relax.h"

#include "simulate/kernel.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* A step is halved while ln tau changes by more than this over it. */
#define MAX_LN_TAU_CHANGE 0.3
#define MAX_HALVINGS      12
/* The fictive temperature halfway is corrected until ln tau is known to this. */
#define LN_TAU_TOLERANCE 1.0e-3
#define KERNEL_TOLERANCE 1.0e-7

struct ce_relax {
    ce_glass glass;
    double t_K, tf_K;
    double slope; /* dTf/dt over the last step, K/s; NaN after a kink */
    /* recursive */
    ce_kernel kernel;
    double *m, *trial; /* its terms, and those of the step under trial, K */
    /* direct: temperature steps and reduced-time increments so far */
    bool direct;
    size_t n, room;
    double *dt_K, *dxi;
};

double ce_relax_ln_tau(const ce_glass *glass, double t_K, double tf_K)
{
    return glass->ln_a + glass->x * glass->h_K / t_K + (1.0 - glass->x) * glass->h_K / tf_K;
}

double ce_glass_temperature(const ce_glass *glass, double tau_s)
{
    return glass->h_K / (log(tau_s) - glass->ln_a);
}

void ce_glass_move(ce_glass *glass, double from_K, double to_K)
{
    glass->ln_a += glass->h_K * (1.0 / from_K - 1.0 / to_K);
    glass->ref_K += to_K - from_K;
}

double ce_relax_equilibrium(const ce_glass *glass, double rate_K_min)
{
    /* all terms with xi^beta < 42 must have gone within a thousandth of a kelvin */
    double ln_tau = log(0.001 * 60.0 / rate_K_min) - log(42.0) / glass->beta;
    double t = glass->h_K / (ln_tau - glass->ln_a);
    return t > 0.0 ? t : (double)INFINITY;
}

void ce_relax_free(ce_relax *relax)
{
    if (relax == NULL) return;
    ce_kernel_free(&relax->kernel);
    free(relax->m);
    free(relax->trial);
    free(relax->dt_K);
    free(relax->dxi);
    free(relax);
}

ce_status ce_relax_start(const ce_glass *glass, ce_relax_scheme scheme, double t_K, ce_relax **out,
                         ce_error *err)
{
    *out = NULL;
    ce_relax *r = calloc(1, sizeof *r);
    if (r == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    r->direct = scheme == CE_RELAX_DIRECT || glass->beta < CE_KERNEL_MIN_BETA ||
                (glass->beta > CE_KERNEL_MAX_BETA && glass->beta < 1.0);
    ce_status st = CE_OK;
    if (!r->direct) {
        st = ce_kernel_build(glass->beta, KERNEL_TOLERANCE, &r->kernel, err);
        size_t n = r->kernel.n + 1;
        if (st == CE_OK) {
            r->m = calloc(n, sizeof *r->m);
            r->trial = calloc(n, sizeof *r->trial);
            if (r->m == NULL || r->trial == NULL) st = ce_fail(err, CE_E_NOMEM, "out of memory");
        }
    }
    if (st == CE_OK) {
        ce_relax_restart(r, glass, t_K);
        *out = r;
        r = NULL;
    }
    ce_relax_free(r);
    return st;
}

void ce_relax_restart(ce_relax *relax, const ce_glass *glass, double t_K)
{
    relax->glass = *glass;
    relax->t_K = relax->tf_K = t_K;
    relax->slope = (double)NAN;
    relax->n = 0;
    for (size_t k = 0; k < relax->kernel.n; k++) relax->m[k] = 0.0;
}

void ce_relax_kink(ce_relax *relax)
{
    relax->slope = (double)NAN;
}

double ce_relax_fictive(const ce_relax *relax)
{
    return relax->tf_K;
}

/* Terms after a step of reduced time exp(ln_xi), into trial; returns sum w m. */
static double advance_terms(ce_relax *r, double ln_xi, double dt_K)
{
    const ce_kernel *k = &r->kernel;
    double xi = exp(ln_xi), sum = 0.0;
    for (size_t i = 0; i < k->n; i++) {
        double a = k->rate[i] * xi, m;
        if (a < 1.0e-5) {
            m = r->m[i] * (1.0 - a + 0.5 * a * a) + dt_K * (1.0 - 0.5 * a + a * a / 6.0);
        } else if (a > 40.0) {
            m = dt_K / a;
        } else {
            double e = exp(-a);
            m = r->m[i] * e + dt_K * (1.0 - e) / a;
        }
        r->trial[i] = m;
        sum += k->weight[i] * m;
    }
    return sum;
}

/* One recursive step into trial; returns the new fictive temperature. */
static double try_step(ce_relax *r, double dt_s, double dt_K)
{
    double middle = r->t_K + 0.5 * dt_K;
    double tf_mid = isnan(r->slope) ? r->tf_K : r->tf_K + 0.5 * dt_s * r->slope;
    double tf = r->tf_K;
    for (int i = 0; i < 8; i++) {
        double ln_xi = log(dt_s) - ce_relax_ln_tau(&r->glass, middle, tf_mid);
        if (ln_xi > 600.0) ln_xi = 600.0; /* relaxed at once either way */
        tf = r->t_K + dt_K - advance_terms(r, ln_xi, dt_K);
        double better = 0.5 * (r->tf_K + tf);
        double off = (1.0 - r->glass.x) * r->glass.h_K * (better - tf_mid) / (better * better);
        if (fabs(off) < LN_TAU_TOLERANCE) break;
        tf_mid = better;
    }
    return tf;
}

static void recursive_step(ce_relax *r, double dt_s, double dt_K, int depth)
{
    double tf = try_step(r, dt_s, dt_K);
    double change =
        ce_relax_ln_tau(&r->glass, r->t_K + dt_K, tf) - ce_relax_ln_tau(&r->glass, r->t_K, r->tf_K);
    if (depth < MAX_HALVINGS && !(fabs(change) < MAX_LN_TAU_CHANGE)) {
        recursive_step(r, 0.5 * dt_s, 0.5 * dt_K, depth + 1);
        recursive_step(r, 0.5 * dt_s, 0.5 * dt_K, depth + 1);
        return;
    }
    r->slope = (tf - r->tf_K) / dt_s;
    r->tf_K = tf;
    r->t_K += dt_K;
    double *swap = r->m;
    r->m = r->trial;
    r->trial = swap;
}

/* The superposition sum as published, summed backwards and cut off where nothing is left:
 * Tf = T0 + sum over j of dT_j (1 - exp(-(sum over k >= j of dt_k/tau_k)^beta)), tau_k at
 * (T_k, Tf_k-1). */
static ce_status direct_step(ce_relax *r, double dt_s, double dt_K)
{
    if (r->n == r->room) {
        size_t room = r->room == 0 ? 1024 : 2 * r->room;
        double *p = reallocarray(r->dt_K, room, sizeof *p);
        if (p == NULL) return CE_E_NOMEM;
        r->dt_K = p;
        p = reallocarray(r->dxi, room, sizeof *p);
        if (p == NULL) return CE_E_NOMEM;
        r->dxi = p;
        r->room = room;
    }
    r->t_K += dt_K;
    r->dt_K[r->n] = dt_K;
    r->dxi[r->n++] = exp(log(dt_s) - ce_relax_ln_tau(&r->glass, r->t_K, r->tf_K));
    double xi = 0.0, sum = 0.0, last = pow(42.0, 1.0 / r->glass.beta);
    for (size_t j = r->n; j-- > 0 && xi < last;) {
        xi += r->dxi[j];
        if (r->dt_K[j] != 0.0) sum += r->dt_K[j] * exp(-pow(xi, r->glass.beta));
    }
    r->tf_K = r->t_K - sum;
    return CE_OK;
}

ce_status ce_relax_step(ce_relax *relax, double dt_s, double dt_K)
{
    if (relax->direct) return direct_step(relax, dt_s, dt_K);
    recursive_step(relax, dt_s, dt_K, 0);
    return CE_OK;
}
