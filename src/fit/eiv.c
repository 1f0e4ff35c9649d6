/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "fit/eiv.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static void eval(const ce_eiv *eiv, const double *theta, double z, const ce_eiv_point *p,
                 ce_jet *jet)
{
    eiv->model->eval(eiv->model, theta, z, &p->chain, jet);
}

/* Squared distance of a point from the curve at zeta, in units of its uncertainties. */
static double distance(const ce_eiv_point *p, double zeta, double value)
{
    double e = p->y - value, d = (p->z - zeta) / p->sd_z;
    return e * e / p->var_y + d * d;
}

/* Most likely true z on one smooth piece [lo, hi] of the curve: Newton on the distance, with the
 * Gauss-Newton curvature where the true one is not positive, halved until the distance falls. */
static double nearest(const ce_eiv *eiv, const double *theta, const ce_eiv_point *p, double lo,
                      double hi, ce_jet *jet)
{
    double zeta = fmin(fmax(p->z, lo), hi), precision = 1 / (p->sd_z * p->sd_z);
    eval(eiv, theta, zeta, p, jet);
    double here = distance(p, zeta, jet->value);
    for (int i = 0; i < 50; i++) {
        double e = p->y - jet->value;
        double g = -e * jet->slope / p->var_y - (p->z - zeta) * precision;
        double h = (jet->slope * jet->slope - e * jet->curvature) / p->var_y + precision;
        if (!(h > 0.1 * precision)) h = jet->slope * jet->slope / p->var_y + precision;
        double next = fmin(fmax(zeta - g / h, lo), hi), there = here;
        if (eiv->model->positive) next = fmax(next, zeta / 8);
        /* Close to the minimum the distance is flat to rounding and cannot judge a step. */
        bool close = fabs(next - zeta) < 1e-4 * p->sd_z;
        ce_jet trial;
        for (int k = 0; k < 30; k++, next = 0.5 * (next + zeta)) {
            eval(eiv, theta, next, p, &trial);
            there = distance(p, next, trial.value);
            if (close || there <= here) break;
        }
        if (!(close || there <= here)) break;
        double moved = fabs(next - zeta);
        zeta = next;
        *jet = trial;
        here = there;
        /* Newton converges quadratically: after this step only rounding is left. */
        if (!(moved > 1e-10 * fabs(zeta))) break;
    }
    return zeta;
}

/* One residual and its row of the Jacobian for a true z inside a smooth piece. With
 * (z - zeta)/sd_z^2 = -(e/var_y) slope at the minimum, the distance is e^2 V/var_y^2 with
 * V = var_y + slope^2 sd_z^2; its derivative by the parameters at fixed zeta is that of the
 * minimum, so r = e sqrt(V)/var_y has the row -gradient/sqrt(V). */
static void smooth_row(const ce_eiv *eiv, const ce_eiv_point *p, const ce_jet *jet, double *r,
                       double *row, double *weight)
{
    double e = p->y - jet->value, s = p->sd_z == 0 ? 0 : jet->slope * p->sd_z;
    double v = p->var_y + s * s, root = sqrt(v), c = sqrt(p->count);
    *r = c * e * root / p->var_y;
    *weight = 1 / v;
    for (size_t j = 0; j < eiv->model->p; j++) row[j] = -c * jet->gradient[j] / root;
}

/* The same for a true z held at a kink, which moves with the parameters. */
static void kink_row(const ce_eiv *eiv, const ce_eiv_point *p, const ce_jet *jet, double zeta,
                     const double *kink_gradient, double *r, double *row, double *weight)
{
    double e = p->y - jet->value, d = (p->z - zeta) / p->sd_z, c = sqrt(p->count);
    double size = copysign(sqrt(e * e / p->var_y + d * d), e);
    *r = c * size;
    *weight = 1 / p->var_y;
    for (size_t j = 0; j < eiv->model->p; j++) {
        double by_value = jet->gradient[j] + jet->slope * kink_gradient[j];
        row[j] = size != 0 ? -c * (e / p->var_y * by_value + d / p->sd_z * kink_gradient[j]) / size
                           : -c * by_value / sqrt(p->var_y);
    }
}

static void kinked_point(ce_eiv *eiv, const double *theta, size_t i, double *r, double *row)
{
    const ce_eiv_point *p = &eiv->point[i];
    double at[CE_MAX_KINKS], gradient[CE_MAX_KINKS * CE_MAX_PARAMETERS];
    size_t n = eiv->model->kinks(theta, at, gradient);
    double best = (double)INFINITY;
    for (size_t piece = 0; piece <= n; piece++) {
        double lo = piece == 0 ? 0 : at[piece - 1] * (1 + 1e-14);
        double hi = piece == n ? (double)INFINITY : at[piece] * (1 - 1e-14);
        if (!(lo < hi)) continue;
        ce_jet jet;
        double zeta = nearest(eiv, theta, p, lo, hi, &jet), there = distance(p, zeta, jet.value);
        if (!(there < best)) continue;
        best = there;
        eiv->zeta[i] = zeta;
        if (zeta > lo && zeta < hi)
            smooth_row(eiv, p, &jet, r, row, &eiv->weight[i]);
        else
            kink_row(eiv, p, &jet, zeta,
                     gradient + (zeta <= lo ? piece - 1 : piece) * eiv->model->p, r, row,
                     &eiv->weight[i]);
    }
    if (!isfinite(best)) *r = (double)NAN;
}

void ce_eiv_residuals(const double *theta, double *r, double *J, void *context)
{
    ce_eiv *eiv = context;
    for (size_t i = 0; i < eiv->n; i++) {
        const ce_eiv_point *p = &eiv->point[i];
        double *row = J + i * eiv->model->p;
        ce_jet jet;
        if (p->sd_z == 0) {
            eiv->zeta[i] = p->z;
            eval(eiv, theta, p->z, p, &jet);
        } else if (eiv->model->kinks != NULL) {
            kinked_point(eiv, theta, i, &r[i], row);
            continue;
        } else {
            eiv->zeta[i] = nearest(eiv, theta, p, -(double)INFINITY, (double)INFINITY, &jet);
        }
        smooth_row(eiv, p, &jet, &r[i], row, &eiv->weight[i]);
    }
}

ce_status ce_eiv_new(ce_eiv *eiv, const ce_model *model, size_t n, const ce_eiv_point *point,
                     const ce_nls_options *options)
{
    *eiv = (ce_eiv){.model = model, .n = n, .point = point, .options = *options};
    eiv->options.kinked = model->kinks != NULL;
    ce_status status = ce_nls_new(&eiv->nls, n, model->p);
    if (status != CE_OK) return status;
    eiv->zeta = calloc(2 * n, sizeof *eiv->zeta);
    if (eiv->zeta == NULL) {
        ce_eiv_free(eiv);
        return CE_E_NOMEM;
    }
    eiv->weight = eiv->zeta + n;
    return CE_OK;
}

void ce_eiv_free(ce_eiv *eiv)
{
    ce_nls_free(eiv->nls);
    free(eiv->zeta);
    eiv->nls = NULL;
    eiv->zeta = eiv->weight = NULL;
}

ce_status ce_eiv_refit(ce_eiv *eiv, ce_error *err)
{
    ce_status status =
        ce_nls_solve(eiv->nls, ce_eiv_residuals, eiv, eiv->theta, &eiv->options, err);
    if (status != CE_OK) return status;
    /* The adjusted points of the solution, not of the last trial. */
    ce_eiv_residuals(eiv->theta, eiv->nls->r, eiv->nls->J, eiv);
    return CE_OK;
}

ce_status ce_eiv_fit(ce_eiv *eiv, ce_error *err)
{
    double start[CE_MAX_STARTS][CE_MAX_PARAMETERS] = {{0}}, best[CE_MAX_PARAMETERS] = {0};
    size_t n = eiv->model->starts(eiv->model, eiv->n, eiv->point, start);
    if (n == 0)
        return ce_fail(err, CE_E_NOFIT, "the samples do not fix start values for this relation");
    double sum = (double)INFINITY;
    ce_error first = CE_ERROR_INIT;
    for (size_t i = 0; i < n; i++) {
        memcpy(eiv->theta, start[i], sizeof eiv->theta);
        if (ce_eiv_refit(eiv, &first) != CE_OK || !(eiv->nls->sum < sum)) continue;
        sum = eiv->nls->sum;
        memcpy(best, eiv->theta, sizeof best);
    }
    if (!isfinite(sum)) {
        if (err != NULL && err->code == CE_OK) *err = first;
        return CE_E_NOFIT;
    }
    memcpy(eiv->theta, best, sizeof best);
    return n == 1 ? CE_OK : ce_eiv_refit(eiv, err);
}

double ce_eiv_variance(const ce_eiv *eiv, size_t i, ce_jet *jet)
{
    const ce_eiv_point *p = &eiv->point[i];
    eval(eiv, eiv->theta, p->z, p, jet);
    double s = p->sd_z == 0 ? 0 : jet->slope * p->sd_z;
    return p->var_y + s * s;
}
