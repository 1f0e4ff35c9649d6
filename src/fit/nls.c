/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "fit/nls.h"

#include <gsl/gsl_linalg.h>
#include <gsl/gsl_multifit_nlinear.h>

#include <float.h>
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

struct ce_nls_work {
    gsl_multifit_nlinear_workspace *gsl;
    gsl_vector *x, *s;     /* parameters; singular values */
    gsl_matrix *u, *v;     /* n x p, p x p                */
    double *theta, *trial; /* p each                      */
    double *column;        /* p: lengths of J's columns   */
    double *step;          /* p: Gauss-Newton step        */
    double *seen, *r, *J;  /* last evaluation             */
    bool have;
    ce_nls_function fn;
    void *context;
};

void ce_nls_free(ce_nls *nls)
{
    if (nls == NULL) return;
    ce_nls_work *w = nls->work;
    if (w != NULL) {
        if (w->gsl != NULL) gsl_multifit_nlinear_free(w->gsl);
        gsl_vector_free(w->x);
        gsl_vector_free(w->s);
        gsl_matrix_free(w->u);
        gsl_matrix_free(w->v);
        free(w->theta);
        free(w);
    }
    free(nls->r);
    free(nls);
}

ce_status ce_nls_new(ce_nls **out, size_t n, size_t p)
{
    *out = NULL;
    if (p < 1 || n < p || n > SIZE_MAX / 64 / p) return CE_E_ARG;
    ce_nls *nls = calloc(1, sizeof *nls);
    ce_nls_work *w = calloc(1, sizeof *w);
    double *results = calloc(2 * n + n * p + p * p, sizeof *results);
    double *scratch = calloc(5 * p + n + n * p, sizeof *scratch);
    if (nls == NULL || w == NULL || results == NULL || scratch == NULL) {
        free(nls);
        free(w);
        free(results);
        free(scratch);
        return CE_E_NOMEM;
    }
    *nls = (ce_nls){.n = n, .p = p, .work = w, .r = results};
    nls->leverage = results + n;
    nls->J = results + 2 * n;
    nls->covariance = nls->J + n * p;
    w->theta = scratch;
    w->trial = scratch + p;
    w->column = scratch + 2 * p;
    w->step = scratch + 3 * p;
    w->seen = scratch + 4 * p;
    w->r = scratch + 5 * p;
    w->J = w->r + n;
    gsl_multifit_nlinear_parameters par = gsl_multifit_nlinear_default_parameters();
    w->gsl = gsl_multifit_nlinear_alloc(gsl_multifit_nlinear_trust, &par, n, p);
    w->x = gsl_vector_alloc(p);
    w->s = gsl_vector_alloc(p);
    w->u = gsl_matrix_alloc(n, p);
    w->v = gsl_matrix_alloc(p, p);
    if (w->gsl == NULL || w->x == NULL || w->s == NULL || w->u == NULL || w->v == NULL) {
        ce_nls_free(nls);
        return CE_E_NOMEM;
    }
    *out = nls;
    return CE_OK;
}

/* One evaluation serves GSL's call for the residuals and its later call for the Jacobian. */
static void evaluate(ce_nls *nls, const double *theta)
{
    ce_nls_work *w = nls->work;
    if (w->have && memcmp(theta, w->seen, nls->p * sizeof *theta) == 0) return;
    memcpy(w->seen, theta, nls->p * sizeof *theta);
    w->fn(theta, w->r, w->J, w->context);
    w->have = true;
}

static void evaluate_at(ce_nls *nls, const gsl_vector *x)
{
    for (size_t i = 0; i < nls->p; i++) nls->work->trial[i] = gsl_vector_get(x, i);
    evaluate(nls, nls->work->trial);
}

static int give_residuals(const gsl_vector *x, void *data, gsl_vector *f)
{
    ce_nls *nls = data;
    evaluate_at(nls, x);
    for (size_t i = 0; i < nls->n; i++) gsl_vector_set(f, i, nls->work->r[i]);
    return GSL_SUCCESS;
}

static int give_jacobian(const gsl_vector *x, void *data, gsl_matrix *J)
{
    ce_nls *nls = data;
    evaluate_at(nls, x);
    for (size_t i = 0; i < nls->n; i++)
        for (size_t j = 0; j < nls->p; j++) gsl_matrix_set(J, i, j, nls->work->J[i * nls->p + j]);
    return GSL_SUCCESS;
}

static double sum_of_squares(const ce_nls *nls)
{
    double s = 0;
    for (size_t i = 0; i < nls->n; i++) s += nls->work->r[i] * nls->work->r[i];
    return s;
}

/* Singular values of J with columns scaled to length one: conditioning, covariance, leverage and
 * the Gauss-Newton step all come from it. False when J is not finite or not of full rank. */
static bool decompose(ce_nls *nls)
{
    ce_nls_work *w = nls->work;
    size_t n = nls->n, p = nls->p;
    nls->rcond = 0;
    for (size_t j = 0; j < p; j++) {
        double q = 0;
        for (size_t i = 0; i < n; i++) q += w->J[i * p + j] * w->J[i * p + j];
        q = sqrt(q);
        if (!(q > 0) || !isfinite(q)) return false;
        w->column[j] = q;
        for (size_t i = 0; i < n; i++) gsl_matrix_set(w->u, i, j, w->J[i * p + j] / q);
    }
    if (gsl_linalg_SV_decomp_jacobi(w->u, w->v, w->s) != GSL_SUCCESS) return false;
    nls->rcond = gsl_vector_get(w->s, p - 1) / gsl_vector_get(w->s, 0);
    return nls->rcond > 1e3 * DBL_EPSILON; /* this form catches NaN too */
}

/* step = -(J'J)^-1 J'r; returns its length in residual space, sqrt of the drop it promises. */
static double gauss_newton(ce_nls *nls)
{
    ce_nls_work *w = nls->work;
    size_t n = nls->n, p = nls->p;
    double drop = 0;
    memset(w->step, 0, p * sizeof *w->step);
    for (size_t k = 0; k < p; k++) {
        double q = 0;
        for (size_t i = 0; i < n; i++) q += gsl_matrix_get(w->u, i, k) * w->r[i];
        drop += q * q;
        q /= gsl_vector_get(w->s, k);
        for (size_t j = 0; j < p; j++) w->step[j] -= gsl_matrix_get(w->v, j, k) * q / w->column[j];
    }
    return sqrt(drop);
}

static void take_results(ce_nls *nls)
{
    ce_nls_work *w = nls->work;
    size_t n = nls->n, p = nls->p;
    memcpy(nls->r, w->r, n * sizeof *nls->r);
    memcpy(nls->J, w->J, n * p * sizeof *nls->J);
    for (size_t i = 0; i < n; i++) {
        double h = 0;
        for (size_t k = 0; k < p; k++) h += gsl_matrix_get(w->u, i, k) * gsl_matrix_get(w->u, i, k);
        nls->leverage[i] = h;
    }
    for (size_t i = 0; i < p; i++)
        for (size_t j = 0; j < p; j++) {
            double c = 0;
            for (size_t k = 0; k < p; k++) {
                double s = gsl_vector_get(w->s, k);
                c += gsl_matrix_get(w->v, i, k) * gsl_matrix_get(w->v, j, k) / (s * s);
            }
            nls->covariance[i * p + j] = c / (w->column[i] * w->column[j]);
        }
}

static double relative_size(const double *step, const double *theta, size_t p)
{
    double worst = 0;
    for (size_t j = 0; j < p; j++)
        worst = fmax(worst, fabs(step[j]) / fmax(fabs(theta[j]), DBL_MIN));
    return worst;
}

/* Gauss-Newton steps from where GSL stopped, as long as they shrink: the sum of squares is flat to
 * rounding there, but the parameters still gain digits. theta ends at the best place; the last
 * evaluation and decomposition belong to it. False: rank. */
static bool polish(ce_nls *nls, double *theta)
{
    ce_nls_work *w = nls->work;
    size_t p = nls->p;
    double last = (double)INFINITY;
    evaluate(nls, theta);
    nls->sum = sum_of_squares(nls);
    if (!decompose(nls)) return false;
    for (int i = 0; i < 30; i++) {
        double drop = gauss_newton(nls), size = relative_size(w->step, theta, p);
        nls->offset = drop / sqrt(fmax(nls->sum, DBL_MIN));
        if (size == 0 || !(size < 0.7 * last) || size > 1e-3) break;
        for (size_t j = 0; j < p; j++) w->trial[j] = theta[j] + w->step[j];
        evaluate(nls, w->trial);
        double sum = sum_of_squares(nls);
        /* Of a nearly exact fit the sum is rounding, and a tiny step must not be judged by it. */
        if (!(sum <= nls->sum * (1 + 1e-10)) && !(size < 1e-7 && isfinite(sum))) break;
        memcpy(theta, w->trial, p * sizeof *theta);
        nls->sum = sum;
        last = size;
        if (!decompose(nls)) return false;
        if (size < 2 * DBL_EPSILON) break;
    }
    evaluate(nls, theta);
    return decompose(nls);
}

/* Start and solution are compared in units of the fit: the step left over must be a small part of
 * the standard errors, or of the parameters when the fit is exact. */
static bool converged(ce_nls *nls, const double *theta)
{
    double dof = nls->n > nls->p ? (double)(nls->n - nls->p) : 1;
    double left = gauss_newton(nls);
    nls->offset = left * sqrt(dof / ((double)nls->p * fmax(nls->sum, DBL_MIN)));
    return nls->offset < 1e-6 || relative_size(nls->work->step, theta, nls->p) < 1e-9;
}

ce_status ce_nls_solve(ce_nls *nls, ce_nls_function fn, void *context, double *theta,
                       const ce_nls_options *options, ce_error *err)
{
    ce_nls_work *w = nls->work;
    size_t p = nls->p;
    int why = 0;
    w->fn = fn;
    w->context = context;
    w->have = false;
    evaluate(nls, theta);
    if (!isfinite(sum_of_squares(nls)))
        return ce_fail(err, CE_E_NOFIT, "the start values give no finite residuals");
    gsl_multifit_nlinear_fdf fdf = {
        .f = give_residuals, .df = give_jacobian, .n = nls->n, .p = p, .params = nls};
    for (size_t i = 0; i < p; i++) gsl_vector_set(w->x, i, theta[i]);
    (void)gsl_multifit_nlinear_init(w->x, &fdf, w->gsl);
    /* Its status is not asked: it calls a start at the solution a failure and a singular problem a
     * success. What counts is what polish() and converged() find. */
    (void)gsl_multifit_nlinear_driver(options->max_iterations, options->tolerance, 0, 0, NULL, NULL,
                                      &why, w->gsl);
    nls->iterations = gsl_multifit_nlinear_niter(w->gsl);
    for (size_t i = 0; i < p; i++)
        w->theta[i] = gsl_vector_get(gsl_multifit_nlinear_position(w->gsl), i);
    bool full_rank = polish(nls, w->theta);
    if (!isfinite(nls->sum)) return ce_fail(err, CE_E_NOFIT, "the fit left the finite numbers");
    if (!full_rank) {
        memcpy(theta, w->theta, p * sizeof *theta);
        return ce_fail(err, CE_E_NOFIT,
                       "the data do not determine all %zu parameters (reciprocal condition %.1e)",
                       p, nls->rcond);
    }
    if (!converged(nls, w->theta) && !options->kinked)
        return ce_fail(err, CE_E_NOFIT, "no convergence in %zu iterations", nls->iterations);
    memcpy(theta, w->theta, p * sizeof *theta);
    take_results(nls);
    return CE_OK;
}

ce_status ce_nls_step(ce_nls *nls, ce_nls_function fn, void *context, double *theta)
{
    ce_nls_work *w = nls->work;
    w->fn = fn;
    w->context = context;
    w->have = false;
    evaluate(nls, theta);
    nls->sum = sum_of_squares(nls);
    if (!isfinite(nls->sum) || !decompose(nls)) return CE_E_NOFIT;
    (void)gauss_newton(nls);
    for (size_t j = 0; j < nls->p; j++) theta[j] += w->step[j];
    return CE_OK;
}
