/* SPDX-License-Identifier: GPL-3.0-or-later
 * The relaxation model with free baselines, fitted by nonlinear least squares; the parameters that
 * enter linearly are eliminated in each step (variable projection: Golub and Pereyra, SIAM J. Numer.
 * Anal. 10 (1973) 413; Jacobian in Kaufman's form, BIT 15 (1975) 49; both from memory). */
#include "transition/step.h"

#include <gsl/gsl_blas.h>
#include <gsl/gsl_linalg.h>
#include <gsl/gsl_multifit_nlinear.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Shape parameters, each on a scale where a normal prior of the width given is a mild statement
 * about glasses: it decides only what the curve leaves open. */
enum { S_TR, S_UNIT, S_X, S_BETA, S_COOLING, S_AGE, S_AGE_AT, S_LAG, S_HOOK };
static const double prior_sd[CE_SHAPES] = {
    [S_TR] = 20.0,  /* K, around the step found                                             */
    [S_UNIT] = 0.6, /* ln of Tr^2/h in K, around 1.2 K                                      */
    [S_X] = 0.4,    /* ln of odds of x over Tr^2/h, around 0.3 /K                                 */
    [S_BETA] = 0.4, /* logit of beta minus logit of x, around ln 2.5                        */
    [S_COOLING] = 0.8, /* ln of the rate ratio, around equal rates                             */
    [S_AGE] = 3.0,     /* ln of annealing time times rate in K, around 3 K                     */
    [S_AGE_AT] = 6.0,  /* K below Tr, around 16 K                                              */
    [S_LAG] = 1.5,     /* ln of the instrument's lag in K, around 0.2 K                        */
    [S_HOOK] = 1.0,    /* ln of the decay of the start-up in K, around 3 K                     */
};
/* The start-up decays on a time of its own and, faster, on the instrument's lag. */
enum { L_GLASS, L_GLASS_SLOPE, L_STEP, L_STEP_SLOPE, L_HOOK, L_LAGGING };
static const double lever_K = 50.0; /* unit of the slopes: K */

static double logistic(double v)
{
    return 1.0 / (1.0 + exp(-v));
}

static bool active(const ce_model *m, size_t j)
{
    if (j == S_COOLING) return !m->cooling;
    if (j == S_AGE || j == S_AGE_AT) return m->aged && !m->cooling;
    return true;
}

static ce_relax relax_of(const ce_model *m, const double *shape)
{
    ce_relax r = {.tr_K = shape[S_TR],
                  .fine_at_K = m->ref_K,
                  .fine_K = m->fine_K,
                  .cooling = exp(fmin(fmax(shape[S_COOLING], -7.0), 7.0)),
                  .age_K = m->aged ? exp(fmin(shape[S_AGE], 14.0)) : 0.0,
                  .lag_K = exp(fmin(shape[S_LAG], 2.0)),
                  .age_at_K = shape[S_TR] - fmax(shape[S_AGE_AT], 1.0)};
    const double unit = exp(fmin(fmax(shape[S_UNIT], -2.5), 3.0)), least = -4.0;
    const double odds = fmax(shape[S_X] + log(unit), least);
    r.h_K = r.tr_K * r.tr_K / unit;
    r.x = logistic(odds);
    r.beta = fmin(fmax(logistic(odds + shape[S_BETA]), 0.12), 0.97);
    return r;
}

/* Mean of exp(v) over a cell from a to b; nothing grows beyond the start of the segment. */
static double hook_mean(double a, double b)
{
    const double mid = fmin(0.5 * (a + b), 0.0), half = 0.5 * fabs(b - a);
    return mid < -40.0 ? 0.0 : exp(mid) * (half < 1e-4 ? 1.0 : sinh(half) / half);
}

static double hook_rate(const ce_model *m, const double *shape)
{
    return exp(-fmin(fmax(shape[S_HOOK], -1.5), 3.5)) * (m->cooling ? 1.0 : -1.0);
}

static double hook_at(const ce_model *m, double rate, double low, double high)
{
    return hook_mean(rate * (low - m->hook_from_K), rate * (high - m->hook_from_K));
}

/* The modes computed last: most shape parameters leave beta alone. */
typedef struct {
    double beta; /* 0 = none yet                                                                 */
    ce_modes modes;
} known_modes;

/* The columns of the linear parameters at n cells, row by row with stride CE_LINEAR. */
static void columns(const ce_model *m, const double *shape, known_modes *known, size_t n,
                    const double *low, const double *high, double *tf, double *step, double *out)
{
    ce_relax r = relax_of(m, shape);
    if (known->beta != r.beta) {
        known->beta = r.beta;
        ce_relax_modes(r.beta, &known->modes);
    }
    r.modes = known->modes;
    ce_relax_scan(&r, m->cooling, n, low, high, tf, step);
    const double hook = hook_rate(m, shape);
    const double lagging = (m->cooling ? 1.0 : -1.0) / r.lag_K;
    for (size_t i = 0; i < n; i++) {
        const double T = 0.5 * (low[i] + high[i]), t = (T - m->ref_K) / lever_K;
        double *row = out + i * CE_LINEAR;
        row[L_GLASS] = 1.0;
        row[L_GLASS_SLOPE] = t;
        row[L_STEP] = step[i];
        row[L_STEP_SLOPE] = step[i] * (tf[i] - m->ref_K) / lever_K;
        row[L_HOOK] = hook_at(m, hook, low[i], high[i]);
        row[L_LAGGING] = hook_at(m, lagging, low[i], high[i]);
    }
}

/* Everything a residual evaluation needs. Rows: the cells, one row a linear parameter (its prior),
 * one row a shape parameter (its prior). */
typedef struct {
    ce_model *m;
    const ce_cells *cells;
    size_t rows; /* cells + CE_LINEAR                                                     */
    double linear_prior[CE_LINEAR]; /* 1/sd; 0 = none                                           */
    double *tf, *step; /* scratch, one a cell                                                   */
    double *phi, *alt; /* rows * CE_LINEAR                                                      */
    double *q;         /* orthonormal columns, CE_LINEAR * rows                                 */
    double *y, *root;  /* weighted signal; root of weight of each cell                          */
    double coef[CE_LINEAR];
    bool used[CE_LINEAR];
    known_modes known;
} problem;

/* Orthonormalise phi's columns into q (modified Gram-Schmidt, twice), solve for the coefficients
 * and leave the residual of y in res. */
static void project(problem *p, double *res)
{
    double R[CE_LINEAR][CE_LINEAR] = {{0}}, b[CE_LINEAR];
    const size_t n = p->rows;
    for (size_t k = 0; k < CE_LINEAR; k++) {
        double *qk = p->q + k * n, size = 0.0, left = 0.0;
        for (size_t i = 0; i < n; i++) {
            qk[i] = p->phi[i * CE_LINEAR + k];
            size += qk[i] * qk[i];
        }
        for (int pass = 0; pass < 2; pass++)
            for (size_t j = 0; j < k; j++) {
                if (!p->used[j]) continue;
                const double *qj = p->q + j * n;
                double dot = 0.0;
                for (size_t i = 0; i < n; i++) dot += qj[i] * qk[i];
                for (size_t i = 0; i < n; i++) qk[i] -= dot * qj[i];
                R[j][k] += dot;
            }
        for (size_t i = 0; i < n; i++) left += qk[i] * qk[i];
        p->used[k] = left > 1e-20 * size && size > 0.0;
        R[k][k] = sqrt(left);
        if (p->used[k])
            for (size_t i = 0; i < n; i++) qk[i] /= R[k][k];
    }
    memcpy(res, p->y, n * sizeof *res);
    for (size_t k = 0; k < CE_LINEAR; k++) {
        b[k] = 0.0;
        if (!p->used[k]) continue;
        const double *qk = p->q + k * n;
        for (size_t i = 0; i < n; i++) b[k] += qk[i] * res[i];
        for (size_t i = 0; i < n; i++) res[i] -= b[k] * qk[i];
    }
    for (size_t k = CE_LINEAR; k-- > 0;) {
        double v = b[k];
        for (size_t j = k + 1; j < CE_LINEAR; j++) v -= R[k][j] * p->coef[j];
        p->coef[k] = p->used[k] ? v / R[k][k] : 0.0;
    }
}

static void weigh(const problem *p, double *phi)
{
    for (size_t i = 0; i < p->cells->n; i++)
        for (size_t k = 0; k < CE_LINEAR; k++) phi[i * CE_LINEAR + k] *= p->root[i];
    double *tail = phi + p->cells->n * CE_LINEAR;
    memset(tail, 0, CE_LINEAR * CE_LINEAR * sizeof *tail);
    for (size_t k = 0; k < CE_LINEAR; k++) tail[k * CE_LINEAR + k] = p->linear_prior[k];
}

static int residual(const gsl_vector *shape, void *data, gsl_vector *f)
{
    problem *p = data;
    const ce_cells *c = p->cells;
    columns(p->m, shape->data, &p->known, c->n, c->low, c->high, p->tf, p->step, p->phi);
    weigh(p, p->phi);
    project(p, f->data);
    for (size_t j = 0; j < CE_SHAPES; j++) {
        const double v = gsl_vector_get(shape, j);
        gsl_vector_set(f, p->rows + j, (v - p->m->centre[j]) / prior_sd[j]);
        if (!isfinite(v)) return GSL_EDOM;
    }
    return GSL_SUCCESS;
}

/* Derivative of the weighted model by one shape parameter, at fixed linear coefficients. */
static void slope_by(problem *p, const double *shape, size_t j, double *out)
{
    const ce_cells *c = p->cells;
    double moved[CE_SHAPES];
    memcpy(moved, shape, sizeof moved);
    const double h = j == S_TR || j == S_AGE_AT ? 0.02 : 0.01;
    moved[j] += h;
    if (j == S_HOOK) { /* the scan does not depend on it                                       */
        const double was = hook_rate(p->m, shape), now = hook_rate(p->m, moved);
        memset(out, 0, p->rows * sizeof *out);
        for (size_t i = 0; i < c->n; i++)
            out[i] = (hook_at(p->m, now, c->low[i], c->high[i]) -
                      hook_at(p->m, was, c->low[i], c->high[i])) *
                     p->root[i] * p->coef[L_HOOK] / h;
        return;
    }
    known_modes other = {
        0}; /* what the derivatives by the other parameters use stays known         */
    const bool same = relax_of(p->m, moved).beta == p->known.beta;
    columns(p->m, moved, same ? &p->known : &other, c->n, c->low, c->high, p->tf, p->step, p->alt);
    weigh(p, p->alt);
    for (size_t i = 0; i < p->rows; i++) {
        double d = 0.0;
        for (size_t k = 0; k < CE_LINEAR; k++)
            d += (p->alt[i * CE_LINEAR + k] - p->phi[i * CE_LINEAR + k]) * p->coef[k];
        out[i] = d / h;
    }
}

static int jacobian(const gsl_vector *shape, void *data, gsl_matrix *J)
{
    problem *p = data;
    double *col = malloc(p->rows * sizeof *col);
    if (col == NULL) return GSL_ENOMEM;
    gsl_matrix_set_zero(J);
    gsl_vector_view tmp = gsl_vector_view_array(p->alt, p->rows);
    const ce_cells *c = p->cells; /* the solver may have tried another point since */
    columns(p->m, shape->data, &p->known, c->n, c->low, c->high, p->tf, p->step, p->phi);
    weigh(p, p->phi);
    project(p, tmp.vector.data);
    for (size_t j = 0; j < CE_SHAPES; j++) {
        gsl_matrix_set(J, p->rows + j, j, 1.0 / prior_sd[j]);
        if (!active(p->m, j)) continue;
        slope_by(p, shape->data, j, col);
        for (size_t k = 0; k < CE_LINEAR; k++) {
            if (!p->used[k]) continue;
            const double *qk = p->q + k * p->rows;
            double dot = 0.0;
            for (size_t i = 0; i < p->rows; i++) dot += qk[i] * col[i];
            for (size_t i = 0; i < p->rows; i++) col[i] -= dot * qk[i];
        }
        for (size_t i = 0; i < p->rows; i++) gsl_matrix_set(J, i, j, -col[i]);
    }
    free(col);
    return GSL_SUCCESS;
}

/* Normal matrix of all parameters with its priors, the rows weighted by share (NULL = 1). */
static gsl_matrix *normal_matrix(const ce_design *d, const double *share)
{
    gsl_matrix *N = gsl_matrix_calloc(CE_FREE, CE_FREE);
    if (N == NULL) return NULL;
    for (size_t a = 0; a < CE_FREE; a++)
        for (size_t b = 0; b <= a; b++) {
            const double *Ja = d->J + a * d->n, *Jb = d->J + b * d->n;
            double dot = 0.0;
            for (size_t i = 0; i < d->cells; i++)
                dot += (share == NULL ? 1.0 : share[i]) * Ja[i] * Jb[i];
            for (size_t i = d->cells; i < d->n; i++) dot += Ja[i] * Jb[i];
            if (a == b) {
                if (a < CE_SHAPES)
                    dot += 1.0 / (prior_sd[a] * prior_sd[a]);
                else if (!(dot > 0.0))
                    dot = 1e300; /* a parameter that is not used            */
                dot *= 1.0 + 1e-10;
            }
            gsl_matrix_set(N, a, b, dot);
            gsl_matrix_set(N, b, a, dot);
        }
    return N;
}

/* The Jacobian of all parameters at the solution, and their covariance. */
static int linearise(problem *p, const double *shape, const double *res, ce_design *d)
{
    ce_model *m = p->m;
    d->n = p->rows;
    d->cells = p->cells->n;
    d->J = calloc(d->n * (CE_FREE + 1), sizeof *d->J);
    if (d->J == NULL) return GSL_ENOMEM;
    d->r = d->J + d->n * CE_FREE;
    memcpy(d->r, res, d->n * sizeof *res);
    for (size_t j = 0; j < CE_SHAPES; j++)
        if (active(m, j)) slope_by(p, shape, j, d->J + j * d->n);
    for (size_t k = 0; k < CE_LINEAR; k++)
        for (size_t i = 0; p->used[k] && i < d->n; i++)
            d->J[(CE_SHAPES + k) * d->n + i] = p->phi[i * CE_LINEAR + k];
    gsl_matrix *N = normal_matrix(d, NULL);
    if (N == NULL) return GSL_ENOMEM;
    int status = gsl_linalg_cholesky_decomp1(N);
    if (status == GSL_SUCCESS) status = gsl_linalg_cholesky_invert(N);
    for (size_t a = 0; status == GSL_SUCCESS && a < CE_FREE; a++)
        for (size_t b = 0; b < CE_FREE; b++) m->cov[a][b] = gsl_matrix_get(N, a, b);
    gsl_matrix_free(N);
    return status;
}

void ce_design_free(ce_design *design)
{
    free(design->J);
    *design = (ce_design){0};
}

ce_status ce_model_reweigh(const ce_design *d, const double *share, double shift[CE_FREE])
{
    gsl_matrix *N = normal_matrix(d, share);
    if (N == NULL) return CE_E_NOMEM;
    for (size_t a = 0; a < CE_FREE; a++) {
        shift[a] = 0.0;
        for (size_t i = 0; i < d->cells; i++)
            shift[a] += (share[i] - 1.0) * d->J[a * d->n + i] * d->r[i];
    }
    gsl_vector_view g = gsl_vector_view_array(shift, CE_FREE);
    int status = gsl_linalg_cholesky_decomp1(N);
    if (status == GSL_SUCCESS) status = gsl_linalg_cholesky_svx(N, &g.vector);
    gsl_matrix_free(N);
    return status == GSL_SUCCESS ? CE_OK : CE_E_NOFIT;
}

/* Iterate until two steps in a row improve chi-square by less than a hundredth of what one standard
 * deviation of a parameter is worth; valleys of nearly equivalent histories are not walked to the
 * end. */
static int descend(gsl_multifit_nlinear_workspace *w, size_t points)
{
    enum { MOST = 40 };
    double chi2 = gsl_blas_dnrm2(w->f);
    int slow = 0;
    chi2 *= chi2;
    for (int i = 0; i < MOST && slow < 2; i++) {
        const int status = gsl_multifit_nlinear_iterate(w);
        if (status == GSL_ENOPROG) break; /* no step helps: as good as it gets                 */
        if (status != GSL_SUCCESS) return status;
        double now = gsl_blas_dnrm2(w->f);
        now *= now;
        slow = chi2 - now < 0.01 * fmax(1.0, now / (double)points) ? slow + 1 : 0;
        chi2 = now;
    }
    return isfinite(chi2) ? GSL_SUCCESS : GSL_EDOM;
}

static int solve(problem *p, gsl_vector *shape, ce_design *design)
{
    gsl_multifit_nlinear_parameters par = gsl_multifit_nlinear_default_parameters();
    par.solver = gsl_multifit_nlinear_solver_cholesky;
    par.trs = gsl_multifit_nlinear_trs_lm;
    const size_t rows = p->rows + CE_SHAPES, n = p->cells->n;
    gsl_multifit_nlinear_workspace *w =
        gsl_multifit_nlinear_alloc(gsl_multifit_nlinear_trust, &par, rows, CE_SHAPES);
    if (w == NULL) return GSL_ENOMEM;
    gsl_multifit_nlinear_fdf fdf = {
        .f = residual, .df = jacobian, .n = rows, .p = CE_SHAPES, .params = p};
    int status = gsl_multifit_nlinear_init(shape, &fdf, w);
    if (status == GSL_SUCCESS) status = descend(w, n);
    gsl_vector_memcpy(shape, w->x);
    p->m->iterations = gsl_multifit_nlinear_niter(w);
    if (status == GSL_SUCCESS) { /* leave everything at the solution */
        status = residual(shape, p, w->f);
        double chi2 = 0.0;
        for (size_t i = 0; i < n; i++) chi2 += gsl_vector_get(w->f, i) * gsl_vector_get(w->f, i);
        p->m->total = gsl_blas_dnrm2(w->f) * gsl_blas_dnrm2(w->f);
        p->m->misfit = chi2 / (double)(n > 20 ? n - 10 : n);
    }
    memcpy(p->m->shape, shape->data, sizeof p->m->shape);
    memcpy(p->m->linear, p->coef, sizeof p->m->linear);
    if (status == GSL_SUCCESS && design != NULL)
        status = linearise(p, shape->data, w->f->data, design);
    gsl_multifit_nlinear_free(w);
    return status;
}

void ce_model_history(ce_model *m, const ce_past *h)
{
    m->shape[S_UNIT] = h->unit;
    m->shape[S_X] = h->x;
    m->shape[S_COOLING] = h->cooling;
    m->aged = h->age > 0.0;
    if (m->aged) m->shape[S_AGE] = h->age;
    if (m->aged) m->shape[S_AGE_AT] = h->age_below_K;
}

ce_model ce_model_start(bool cooling, double centre_K, double width_K, double sigma,
                        double hook_from_K)
{
    const double mean[CE_SHAPES] = {
        [S_TR] = centre_K + 2.0, [S_UNIT] = log(1.2), [S_X] = log(0.3),
        [S_BETA] = 1.0,          [S_COOLING] = 0.0,   [S_AGE] = log(30.0),
        [S_AGE_AT] = 16.0,       [S_LAG] = log(0.2),  [S_HOOK] = log(3.0)};
    ce_model m = {.cooling = cooling,
                  .ref_K = centre_K,
                  .sigma = sigma,
                  .hook_from_K = hook_from_K,
                  .fine_K = 0.2};
    memcpy(m.centre, mean, sizeof mean);
    memcpy(m.shape, mean, sizeof mean);
    /* broad steps go with small Tr^2/h and x: polystyrene to poly(vinyl chloride) on one line */
    /* on cooling nothing sharpens the step: the same glass is twice as wide */
    const double wide = cooling ? 0.5 * width_K : width_K;
    const double broad = fmin(fmax((wide - 6.0) / 7.0, 0.0), 1.0);
    m.shape[S_UNIT] = 0.55 - 1.1 * broad;
    m.shape[S_X] = -0.85 - 0.75 * broad;
    return m;
}

/* Room and weights; false when there is no memory. What is in *room must be freed. */
static bool problem_open(problem *p, ce_model *model, const ce_cells *cells, double step,
                         double **room)
{
    const size_t n = cells->n, rows = n + CE_LINEAR;
    *p = (problem){.m = model, .cells = cells, .rows = rows};
    p->linear_prior[L_STEP_SLOPE] = 1.0 / (0.4 * step);
    p->linear_prior[L_HOOK] = 1.0 / (30.0 * step);
    p->linear_prior[L_LAGGING] = 1.0 / (30.0 * step);
    *room = calloc(4 * n + rows + 3 * rows * CE_LINEAR, sizeof **room);
    if (*room == NULL) return false;
    p->tf = *room;
    p->step = p->tf + n;
    p->root = p->step + n;
    p->y = p->root + n;
    p->phi = p->y + rows;
    p->alt = p->phi + rows * CE_LINEAR;
    p->q = p->alt + rows * CE_LINEAR;
    for (size_t i = 0; i < n; i++) {
        p->root[i] =
            1.0 / hypot(model->sigma / sqrt(cells->w[i]), fmax(cells->sd[i], model->least_sd));
        p->y[i] = cells->y[i] * p->root[i];
    }
    return true;
}

ce_status ce_model_fit(const ce_cells *cells, double step, ce_model *model, ce_design *design)
{
    problem p;
    double *room;
    gsl_vector *shape = gsl_vector_alloc(CE_SHAPES);
    int status = GSL_ENOMEM;
    if (shape != NULL && problem_open(&p, model, cells, step, &room)) {
        memcpy(shape->data, model->shape, sizeof model->shape);
        status = solve(&p, shape, design);
        free(room);
    }
    gsl_vector_free(shape);
    return status == GSL_SUCCESS ? CE_OK : status == GSL_ENOMEM ? CE_E_NOMEM : CE_E_NOFIT;
}

/* Where the step of the model first reaches a half. */
static double half_of(const ce_cells *c, const double *step)
{
    size_t i = 0;
    while (i + 1 < c->n && step[i] < 0.5) i++;
    return c->T[i];
}

ce_status ce_model_try(const ce_cells *cells, double step, ce_model *model)
{
    problem p;
    double *room;
    if (!problem_open(&p, model, cells, step, &room)) return CE_E_NOMEM;
    double *res = p.alt; /* not needed here otherwise                                           */
    columns(model, model->shape, &p.known, cells->n, cells->low, cells->high, p.tf, p.step, p.phi);
    model->shape[S_TR] += model->ref_K - half_of(cells, p.step);
    columns(model, model->shape, &p.known, cells->n, cells->low, cells->high, p.tf, p.step, p.phi);
    weigh(&p, p.phi);
    project(&p, res);
    model->total = 0.0;
    for (size_t i = 0; i < p.rows; i++) model->total += res[i] * res[i];
    for (size_t j = 0; j < CE_SHAPES; j++) {
        const double off = (model->shape[j] - model->centre[j]) / prior_sd[j];
        model->total += off * off;
    }
    free(room);
    return CE_OK;
}

void ce_model_columns(const ce_model *m, size_t n, const double *low, const double *high,
                      double *phi, double *tf, double *step)
{
    known_modes none = {0};
    columns(m, m->shape, &none, n, low, high, tf, step, phi);
}

void ce_model_combine(const ce_model *m, size_t n, const double *phi, double *y)
{
    for (size_t i = 0; i < n; i++) {
        y[i] = 0.0;
        for (size_t k = 0; k < CE_LINEAR; k++)
            if (k != L_HOOK && k != L_LAGGING) y[i] += m->linear[k] * phi[i * CE_LINEAR + k];
    }
}

ce_lines ce_model_lines(const ce_model *m)
{
    const double *c = m->linear;
    return (ce_lines){
        .glass = {m->ref_K, c[L_GLASS], c[L_GLASS_SLOPE] / lever_K},
        .liquid = {m->ref_K, c[L_GLASS] + c[L_STEP],
                   (c[L_GLASS_SLOPE] + c[L_STEP_SLOPE]) / lever_K},
    };
}

double ce_model_hook(const ce_model *m, double T)
{
    return m->linear[L_HOOK] * hook_at(m, hook_rate(m, m->shape), T, T);
}

double ce_model_lag(const ce_model *m)
{
    return relax_of(m, m->shape).lag_K * (m->cooling ? -1.0 : 1.0);
}

void ce_model_move(ce_model *m, size_t parameter, double by)
{
    if (parameter < CE_SHAPES)
        m->shape[parameter] += by;
    else
        m->linear[parameter - CE_SHAPES] += by;
}

double ce_model_increment(const ce_model *m, size_t parameter)
{
    if (parameter < CE_SHAPES)
        return active(m, parameter) ? 0.02 * fmin(prior_sd[parameter], 1.0) : 0.0;
    return 1e-4 * fmax(fabs(m->linear[L_STEP]), 1e-300);
}
