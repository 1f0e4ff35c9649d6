/* SPDX-License-Identifier: GPL-3.0-or-later
 * Which standards carry the fit, which do not agree with it, and whether its shape is right. */
#include "fit/fitting.h"
#include "fit/robust.h"
#include "fit/stats.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Marked as outlying when chance explains it less often than this, after Bonferroni. */
#define OUTLIER_ALPHA 0.05

static void set_count(ce_fitting *f, size_t sample, double count)
{
    for (size_t i = 0; i < f->n; i++)
        if (f->sample[i] == sample) f->point[i].count = count;
}

/* ---- points and runs ------------------------------------------------------------------------ */

static void fill_point(ce_fitting *f, size_t j)
{
    ce_fit_point *q = &f->fit->point[j];
    ce_jet jet;
    size_t first = 0;
    while (f->sample[first] != j) first++;
    double variance = ce_eiv_variance(&f->eiv, first, &jet);
    q->fitted_K = jet.value;
    q->residual_K = q->tg_K - q->fitted_K;
    q->mn_adjusted = f->eiv.zeta[first] > 0 ? 1 / f->eiv.zeta[first] : (double)INFINITY;
    if (f->on_runs) {
        variance = f->scale2 / (double)q->n;
        q->tg_u_K = sqrt(variance);
    }
    q->weight = 1 / variance;
    q->leverage = 0;
    for (size_t i = first; i < f->n && f->sample[i] == j; i++)
        q->leverage += f->eiv.nls->leverage[i];
}

/* How far a sample lies from the curve that the others give, in its own standard deviations. Where the
 * variances are known apart from the degrees of freedom of the run scatter, that is the standardised
 * residual itself. Where the scale comes from the scatter of the points (on runs, or with excess
 * found), it must come from the other points alone, or one bad sample hides in the scatter it makes:
 * leaving it out takes r^2 from the sum of squares and one degree of freedom. */
static void judge_point(ce_fitting *f, size_t j)
{
    ce_fit *fit = f->fit;
    ce_fit_point *q = &fit->point[j];
    double h = fmin(q->leverage, 1 - 1e-12), p = (double)fit->p;
    double e = q->residual_K * sqrt(q->weight), n = (double)fit->n_points;
    double r = e / sqrt(1 - h), nu = ce_fitting_nu(f);
    q->influence = r * r * h / ((1 - h) * p);
    q->deleted_t = r;
    if (f->on_runs || isfinite(fit->excess_nu)) {
        nu = fit->dof - 1;
        q->deleted_t = nu > 0 ? r * sqrt(nu / fmax(fit->dof - r * r, 0)) : (double)NAN;
    }
    q->deleted_p = ce_bonferroni(ce_student_two_sided(q->deleted_t, nu), n);
    if (q->deleted_p < OUTLIER_ALPHA) q->flags |= CE_POINT_OUTLYING;
    if (q->leverage > fmin(2 * p / n, 0.9)) q->flags |= CE_POINT_LEVERAGE;
}

/* A run about its sample's mean, or on runs about the curve, judged by the pooled scatter. */
static void judge_runs(ce_fitting *f)
{
    ce_fit *fit = f->fit;
    double n = (double)fit->n_runs, judged = 0;
    double p = f->on_runs ? (double)fit->p : n - fit->run_nu;
    for (size_t i = 0; i < fit->n_runs; i++) {
        ce_fit_run *r = &fit->run[i];
        if (f->on_runs) {
            r->leverage = f->eiv.nls->leverage[i];
            r->residual_K = f->eiv.nls->r[i];
        }
        bool alone = !f->on_runs && fit->point[r->point].n < 2;
        judged += !alone;
        if (alone || !isfinite(fit->run_nu)) continue;
        ce_residual_diagnostics d =
            ce_diagnose_residual(r->residual_K, r->leverage, fit->run_sd_K, n, p);
        r->deleted_t = d.deleted;
        r->deleted_p = ce_student_two_sided(d.deleted, n - p - 1);
    }
    for (size_t i = 0; i < fit->n_runs; i++) {
        ce_fit_run *r = &fit->run[i];
        r->deleted_p = ce_bonferroni(r->deleted_p, judged);
        if (r->deleted_p < OUTLIER_ALPHA) r->flags |= CE_POINT_OUTLYING;
    }
}

static void residual_sd(ce_fitting *f)
{
    double s = 0;
    ce_fit *fit = f->fit;
    if (f->on_runs) {
        fit->residual_sd_K = sqrt(f->scale2);
        return;
    }
    for (size_t j = 0; j < fit->n_points; j++)
        s += fit->point[j].residual_K * fit->point[j].residual_K;
    fit->residual_sd_K = sqrt(s / fit->dof);
}

/* ---- leave one out -------------------------------------------------------------------------- */

/* A sample dominates when the curve has to pass through it (leverage), when leaving it out moves a
 * parameter by twice the half-width of its interval, or when nothing can be fitted without it. */
static bool dominates(const ce_fit *fit, const ce_fit_point *q)
{
    if (q->leverage > 0.9) return true;
    for (size_t i = 0; i < 2; i++) {
        const ce_parameter *a = &fit->parameter[i];
        double shift = i == 0 ? q->shift_tg_inf_K : q->shift_k;
        double room = shift < 0 ? a->value - a->low : a->high - a->value;
        if (!(fabs(shift) <= 2 * room)) return true;
    }
    return false;
}

static void leave_one_out(ce_fitting *f)
{
    ce_fit *fit = f->fit;
    double theta[CE_MAX_PARAMETERS];
    bool enough = fit->n_points > fit->p + 1;
    memcpy(theta, f->eiv.theta, sizeof theta);
    for (size_t j = 0; j < fit->n_points; j++) {
        ce_fit_point *q = &fit->point[j];
        set_count(f, j, 0);
        bool fitted = enough && ce_eiv_refit(&f->eiv, NULL) == CE_OK;
        q->shift_tg_inf_K = fitted ? f->eiv.theta[0] - theta[0] : (double)NAN;
        q->shift_k = fitted ? f->eiv.theta[1] - theta[1] : (double)NAN;
        set_count(f, j, 1);
        memcpy(f->eiv.theta, theta, sizeof f->eiv.theta);
        if (enough && dominates(fit, q)) q->flags |= CE_POINT_DOMINATES;
    }
}

/* ---- shape ---------------------------------------------------------------------------------- */

static ce_status curvature(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    size_t p = f->model->p;
    double largest = 0;
    if (f->model->kinks != NULL || fit->n_points < p + 2 || f->n < p + 2) return CE_OK;
    for (size_t i = 0; i < f->n; i++) largest = fmax(largest, f->point[i].z);
    ce_model more = ce_model_with_curvature(f->model, 1 / largest);
    ce_eiv bent;
    if (ce_eiv_new(&bent, &more, f->n, f->point, &f->eiv.options) != CE_OK)
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    memcpy(bent.theta, f->eiv.theta, sizeof bent.theta);
    bent.theta[p] = 0;
    if (ce_eiv_refit(&bent, NULL) == CE_OK) {
        double drop = fmax(f->eiv.nls->sum - bent.nls->sum, 0);
        double rest = (double)(f->n - p - 1), nu = f->on_runs ? rest : ce_fitting_nu(f);
        fit->curvature_F = f->on_runs ? drop / (bent.nls->sum / rest) : drop;
        fit->curvature_p = ce_f_upper(fit->curvature_F, 1, nu);
    }
    ce_eiv_free(&bent);
    return CE_OK;
}

static ce_status run_tests(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    double n = (double)fit->n_runs, k = (double)fit->n_points, pure = 0;
    if (n <= k) return CE_OK;
    double *value = calloc(fit->n_runs, sizeof *value);
    size_t *group = calloc(fit->n_runs, sizeof *group);
    if (value == NULL || group == NULL) {
        free(value);
        free(group);
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    }
    for (size_t i = 0; i < fit->n_runs; i++) {
        value[i] = fit->run[i].tg_K;
        group[i] = fit->run[i].point;
        double d = value[i] - fit->point[group[i]].tg_K;
        pure += d * d;
    }
    fit->bartlett_p = ce_bartlett(fit->n_runs, value, group, fit->n_points).p;
    fit->levene_p = ce_levene(fit->n_runs, value, group, fit->n_points).p;
    free(value);
    free(group);
    if (f->on_runs) {
        ce_test t = ce_lack_of_fit(f->eiv.nls->sum, pure, n, k, (double)fit->p);
        fit->lack_of_fit_F = t.statistic;
        fit->lack_of_fit_p = t.p;
        fit->lack_of_fit_dof1 = t.dof1;
        fit->lack_of_fit_dof2 = t.dof2;
    } else if (fit->options.scatter == CE_SCATTER_REPEATS) {
        fit->lack_of_fit_F = fit->chi2 / fit->dof;
        fit->lack_of_fit_p = fit->excess_p;
        fit->lack_of_fit_dof1 = fit->dof;
        fit->lack_of_fit_dof2 = fit->excess_p_nu;
    }
    return CE_OK;
}

const char *ce_fit_lack_of_fit_meaning(const ce_fit *fit)
{
    bool uncertain = false, unstated = false;
    for (size_t i = 0; i < fit->n_points; i++) {
        uncertain |= fit->point[i].mn_u_stated > 0;
        unstated |= isnan(fit->point[i].mn_u_stated);
    }
    if (unstated)
        return "whether the samples scatter about the curve by more than their runs do: with "
               "uncertain molar masses that is their uncertainty, not curvature";
    if (uncertain && fit->options.scatter == CE_SCATTER_RESIDUALS)
        return "whether the samples scatter about the curve by more than their runs do: here that "
               "is the uncertainty of the molar masses, not curvature";
    if (uncertain)
        return "whether the samples scatter about the curve by more than their runs and their "
               "certificates explain: not curvature";
    return "whether the samples scatter about the curve by more than their runs do: the shape of "
           "the relation, or differences between samples";
}

/* ---- robust --------------------------------------------------------------------------------- */

static void robust(ce_fitting *f, ce_psi psi, double *theta, double *weight, double *scale)
{
    ce_fit *fit = f->fit;
    memcpy(theta, f->eiv.theta, sizeof f->eiv.theta);
    ce_status status =
        ce_robust_solve(f->eiv.nls, ce_eiv_residuals, &f->eiv, psi, theta, weight, scale);
    for (size_t j = 0; j < fit->n_points; j++) {
        double w = 0, runs = 0;
        for (size_t i = 0; i < f->n; i++)
            if (f->sample[i] == j) w += weight[i], runs++;
        *(psi == CE_HUBER ? &fit->point[j].huber_weight : &fit->point[j].bisquare_weight) =
            status == CE_OK ? w / runs : (double)NAN;
    }
    if (status == CE_OK) return;
    *scale = (double)NAN;
    for (size_t i = 0; i < fit->p; i++) theta[i] = (double)NAN;
}

static ce_status robust_fits(ce_fitting *f, ce_error *err)
{
    double *weight = calloc(f->n, sizeof *weight);
    if (weight == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    robust(f, CE_HUBER, f->fit->huber, weight, &f->fit->huber_scale);
    robust(f, CE_BISQUARE, f->fit->bisquare, weight, &f->fit->bisquare_scale);
    free(weight);
    return CE_OK;
}

/* ---- all ------------------------------------------------------------------------------------ */

ce_status ce_diagnose(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    for (size_t j = 0; j < fit->n_points; j++) fill_point(f, j);
    residual_sd(f);
    if (!fit->options.diagnose) return CE_OK;
    for (size_t j = 0; j < fit->n_points; j++) judge_point(f, j);
    judge_runs(f);
    ce_status status = run_tests(f, err);
    if (status == CE_OK) status = curvature(f, err);
    if (status != CE_OK) return status;
    leave_one_out(f);
    status = robust_fits(f, err);
    if (status != CE_OK) return status;
    /* Back to the solution, which the other fits have overwritten. */
    return ce_eiv_refit(&f->eiv, err);
}

const char *ce_point_flag_text(unsigned bit)
{
    switch (bit) {
    case CE_POINT_OUTLYING:
        return "outlying";
    case CE_POINT_DOMINATES:
        return "dominates";
    case CE_POINT_LEVERAGE:
        return "high leverage";
    default:
        return "";
    }
}
