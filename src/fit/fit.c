/* SPDX-License-Identifier: GPL-3.0-or-later
 * The fit from the standards to the parameters with their intervals. */
#include "fit/fitting.h"
#include "fit/predict.h"
#include "fit/stats.h"

#include <gsl/gsl_linalg.h>

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char *const scatter_names[] = {"auto", "repeats", "stated", "residuals"};
static const char *const excess_names[] = {"auto", "none", "additive", "multiplicative"};
enum { N_SCATTER = 4, N_EXCESS = 4 };

static unsigned find_name(const char *const *names, unsigned n, const char *name, bool *found)
{
    unsigned i = 0;
    while (i < n && (name == NULL || strcmp(name, names[i]) != 0)) i++;
    if (found != NULL) *found = i < n;
    return i < n ? i : 0;
}

const char *ce_scatter_name(ce_scatter scatter)
{
    return (unsigned)scatter < N_SCATTER ? scatter_names[scatter] : "";
}

ce_scatter ce_scatter_find(const char *name, bool *found)
{
    return (ce_scatter)find_name(scatter_names, N_SCATTER, name, found);
}

const char *ce_excess_name(ce_excess excess)
{
    return (unsigned)excess < N_EXCESS ? excess_names[excess] : "";
}

ce_excess ce_excess_find(const char *name, bool *found)
{
    return (ce_excess)find_name(excess_names, N_EXCESS, name, found);
}

ce_fit_options ce_fit_options_default(void)
{
    return (ce_fit_options){.relation = CE_FLORY_FOX,
                            .scatter = CE_SCATTER_AUTO,
                            .excess = CE_EXCESS_AUTO,
                            .level = 0.95,
                            .compare = true,
                            .diagnose = true,
                            .seed = 1,
                            .max_iterations = 200,
                            .tolerance = 1e-7};
}

static ce_status check_options(const ce_fit_options *o, ce_error *err)
{
    if ((unsigned)o->relation >= CE_RELATIONS || (unsigned)o->scatter >= N_SCATTER ||
        (unsigned)o->excess >= N_EXCESS)
        return ce_fail(err, CE_E_ARG, "no such relation, scatter or excess");
    if (!(o->level > 0 && o->level < 1))
        return ce_fail(err, CE_E_ARG, "the level must lie between 0 and 1, it is %g", o->level);
    if (!(o->mn_common_u_rel >= 0 && o->mn_common_u_rel < 1) ||
        !(o->tg_common_u_K >= 0 && isfinite(o->tg_common_u_K)) ||
        !(o->rate_slope_u_K >= 0 && isfinite(o->rate_slope_u_K)))
        return ce_fail(
            err, CE_E_ARG,
            "an uncertainty common to all standards must be 0 or positive, a relative one "
            "below 1");
    if (!(o->tolerance > 0 && o->tolerance < 1) || o->max_iterations == 0)
        return ce_fail(err, CE_E_ARG,
                       "the solver needs a tolerance between 0 and 1 and iterations");
    return CE_OK;
}

/* ---- covariance and its parts --------------------------------------------------------------- */

/* Inverse of a symmetric positive definite matrix, scaled to a unit diagonal first: Tg_inf and K
 * differ by five orders of magnitude. False when it is not definite. */
static bool invert(size_t p, double *a)
{
    double d[CE_MAX_PARAMETERS];
    for (size_t i = 0; i < p; i++) {
        if (!(a[i * p + i] > 0)) return false;
        d[i] = sqrt(a[i * p + i]);
    }
    for (size_t i = 0; i < p; i++)
        for (size_t j = 0; j < p; j++) a[i * p + j] /= d[i] * d[j];
    gsl_matrix_view m = gsl_matrix_view_array(a, p, p);
    if (gsl_linalg_cholesky_decomp1(&m.matrix) != GSL_SUCCESS ||
        gsl_linalg_cholesky_invert(&m.matrix) != GSL_SUCCESS)
        return false;
    for (size_t i = 0; i < p; i++)
        for (size_t j = 0; j < p; j++) a[i * p + j] /= d[i] * d[j];
    return true;
}

static void sandwich(size_t p, const double *bread, const double *filling, double *out)
{
    for (size_t i = 0; i < p; i++)
        for (size_t j = 0; j < p; j++) {
            double s = 0;
            for (size_t k = 0; k < p; k++)
                for (size_t l = 0; l < p; l++)
                    s += bread[i * p + k] * filling[k * p + l] * bread[j * p + l];
            out[i * p + j] = s;
        }
}

/* The estimate's response to a small change of the readings: (F'WF)^-1 F'W change, with F and the
 * weights at the stated molar masses. */
static void response(const ce_fitting *f, const double *bread, const double *change, double *shift)
{
    size_t p = f->model->p;
    double right[CE_MAX_PARAMETERS] = {0};
    for (size_t i = 0; i < f->n; i++) {
        ce_jet jet;
        double v = ce_eiv_variance(&f->eiv, i, &jet);
        for (size_t j = 0; j < p; j++) right[j] += jet.gradient[j] * change[i] / v;
    }
    for (size_t i = 0; i < p; i++) {
        shift[i] = 0;
        for (size_t j = 0; j < p; j++) shift[i] += bread[i * p + j] * right[j];
    }
}

/* Effects of one standard uncertainty of what is common to all standards. When the stated molar
 * masses are all too large by u, the readings belong to z (1 + u) and lie slope z u off. */
static ce_status common_shifts(ce_fitting *f, const double *bread)
{
    ce_fit *fit = f->fit;
    const ce_fit_options *o = &fit->options;
    double *change = f->n == 0 ? NULL : calloc(3 * f->n, sizeof *change);
    if (change == NULL) return CE_E_NOMEM;
    double *mn = change, *tg = change + f->n, *rate = change + 2 * f->n;
    for (size_t i = 0; i < f->n; i++) {
        ce_jet jet;
        (void)ce_eiv_variance(&f->eiv, i, &jet);
        mn[i] = jet.slope * f->point[i].z * o->mn_common_u_rel;
        tg[i] = o->tg_common_u_K;
        rate[i] = o->rate_slope_u_K * f->standard[f->sample[i]].rate_decades;
    }
    response(f, bread, mn, fit->mn_common_shift);
    response(f, bread, tg, fit->tg_common_shift);
    response(f, bread, rate, fit->rate_common_shift);
    free(change);
    return CE_OK;
}

static ce_status covariances(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    size_t p = f->model->p;
    double bread[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS] = {0};
    double run[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS] = {0};
    double tau[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS] = {0};
    for (size_t i = 0; i < f->n; i++) {
        ce_jet jet;
        double v = ce_eiv_variance(&f->eiv, i, &jet);
        for (size_t k = 0; k < p; k++)
            for (size_t l = 0; l < p; l++) {
                double g = jet.gradient[k] * jet.gradient[l];
                bread[k * p + l] += g / v;
                run[k * p + l] += g * f->var_run[i] / (v * v);
                tau[k * p + l] += g * (f->point[i].var_y - f->var_run[i]) / (v * v);
            }
    }
    for (size_t i = 0; i < p * p; i++) fit->covariance[i] = f->scale2 * f->eiv.nls->covariance[i];
    if (!invert(p, bread))
        return ce_fail(err, CE_E_NOFIT, "the standards do not determine all %zu parameters", p);
    if (f->on_runs) {
        memcpy(fit->covariance_run, fit->covariance, sizeof fit->covariance);
    } else {
        sandwich(p, bread, run, fit->covariance_run);
        sandwich(p, bread, tau, fit->covariance_excess);
        if (fit->excess_r > 0)
            for (size_t i = 0; i < p * p; i++)
                fit->covariance_excess[i] = fit->covariance[i] - fit->covariance_run[i];
    }
    if (common_shifts(f, bread) != CE_OK) return ce_fail(err, CE_E_NOMEM, "out of memory");
    return CE_OK;
}

/* ---- parameters ----------------------------------------------------------------------------- */

static double parameter_nu(const ce_fit *fit, size_t i, double common2)
{
    size_t at = i * fit->p + i;
    ce_prediction part = {.var_fit = fit->covariance[at]};
    part.var_rep = fmin(fmax(fit->covariance_run[at], 0), part.var_fit);
    part.var_excess = fmin(fmax(fit->covariance_excess[at], 0), part.var_fit - part.var_rep);
    return ce_fit_nu_parts(fit, &part, 0, 0, common2);
}

static ce_status parameters(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    for (size_t i = 0; i < fit->p; i++) {
        ce_parameter *q = &fit->parameter[i];
        double mn = fit->mn_common_shift[i], tg = fit->tg_common_shift[i];
        double rate = fit->rate_common_shift[i], common2 = mn * mn + tg * tg + rate * rate;
        q->value = f->eiv.theta[i];
        q->u_common = sqrt(common2);
        q->u = sqrt(fit->covariance[i * fit->p + i] + common2);
        q->nu = parameter_nu(fit, i, common2);
        double t = ce_student_factor(fit->options.level, q->nu);
        q->low = q->value - t * q->u;
        q->high = q->value + t * q->u;
        if (f->model->linear) continue;
        ce_profile profile = {.fn = ce_eiv_residuals,
                              .context = &f->eiv,
                              .theta = f->eiv.theta,
                              .rise = t * t * f->scale2,
                              .options = f->eiv.options};
        /* Molar masses (the breakpoints) are positive. */
        bool molar = strcmp(ce_relation_parameter_unit(fit->options.relation, i), "g/mol") == 0;
        double floor_value =
            molar && q->value > 0 && f->model->kinks != NULL ? 0 : -(double)INFINITY;
        if (ce_profile_limits(f->eiv.nls, &profile, i, floor_value, &q->low, &q->high) != CE_OK)
            return ce_fail(err, CE_E_NOMEM, "out of memory");
        q->low = q->value - hypot(q->value - q->low, t * q->u_common);
        q->high = q->value + hypot(q->high - q->value, t * q->u_common);
    }
    /* The profiles moved the adjusted points. */
    ce_eiv_residuals(f->eiv.theta, f->eiv.nls->r, f->eiv.nls->J, &f->eiv);
    /* How far the interval reaches towards zero. What is common to all standards scales the second
     * parameter and cannot make it zero: left out where the interval is symmetric. */
    const ce_parameter *k = &fit->parameter[1];
    double reach = k->value > 0 ? k->value - k->low : k->high - k->value;
    if (f->model->linear)
        reach = ce_student_factor(fit->options.level, parameter_nu(fit, 1, 0)) *
                sqrt(fit->covariance[fit->p + 1]);
    fit->slope_significance = reach * reach / (k->value * k->value);
    return CE_OK;
}

/* ---- the whole ------------------------------------------------------------------------------ */

static void set_undetermined(ce_fit *fit)
{
    double nan = (double)NAN;
    fit->lack_of_fit_F = fit->lack_of_fit_p = fit->lack_of_fit_dof1 = fit->lack_of_fit_dof2 = nan;
    fit->curvature_F = fit->curvature_p = fit->bartlett_p = fit->levene_p = nan;
    fit->huber_scale = fit->bisquare_scale = nan;
    fit->mid_mn_g_mol = fit->spread_tg_inf_low_K = fit->spread_tg_inf_high_K = nan;
    fit->spread_mid_low_g_mol = fit->spread_mid_high_g_mol = nan;
    for (size_t i = 0; i < CE_MAX_PARAMETERS; i++) fit->huber[i] = fit->bisquare[i] = nan;
}

static void likelihood(ce_fitting *f)
{
    ce_fit *fit = f->fit;
    double n = (double)f->n, p = (double)fit->p, rest = 0;
    if (f->on_runs) {
        fit->log_likelihood = ce_log_likelihood(f->eiv.nls->sum, n);
        fit->aicc = ce_aicc(fit->log_likelihood, p + 1, n);
        return;
    }
    for (size_t i = 0; i < f->n; i++) rest += log(2 * M_PI * f->point[i].var_y);
    fit->log_likelihood = -0.5 * (f->eiv.nls->sum + rest);
    fit->aicc = ce_aicc(fit->log_likelihood, p, n);
}

static ce_status run_fit(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    const ce_fit_options *o = &fit->options;
    ce_status status = ce_prepare(f, err);
    if (status != CE_OK) return status;
    ce_nls_options nls = {.tolerance = o->tolerance, .max_iterations = o->max_iterations};
    status = ce_eiv_new(&f->eiv, f->model, f->n, f->point, &nls);
    if (status != CE_OK) return ce_fail(err, status, "%s", ce_status_text(status));
    status = ce_fit_with_excess(f, err);
    if (status != CE_OK) return status;
    fit->rcond = f->eiv.nls->rcond;
    fit->iterations = f->eiv.nls->iterations;
    likelihood(f);
    status = covariances(f, err);
    if (status == CE_OK) status = parameters(f, err);
    if (status == CE_OK) status = ce_diagnose(f, err);
    if (status == CE_OK && o->resamples > 0) status = ce_resample(f, err);
    /* Last, because it takes the excess scatter out again. */
    if (status == CE_OK && o->compare) status = ce_compare(f, err);
    if (status == CE_OK && ce_advise(f) != CE_OK)
        status = ce_fail(err, CE_E_NOMEM, "out of memory");
    return status;
}

ce_status ce_fit_relation(size_t n_standards, const ce_standard *standard,
                          const ce_fit_options *options, ce_fit *fit, ce_error *err)
{
    *fit = (ce_fit){.options = options == NULL ? ce_fit_options_default() : *options};
    ce_status status = check_options(&fit->options, err);
    if (status == CE_OK && n_standards == 0)
        status = ce_fail(err, CE_E_NOFIT, "no standards: nothing to fit");
    if (status == CE_OK) {
        ce_fitting f = {.n_standards = n_standards,
                        .standard = standard,
                        .fit = fit,
                        .model = ce_relation_model(fit->options.relation)};
        fit->p = f.model->p;
        set_undetermined(fit);
        status = run_fit(&f, err);
        ce_fitting_free(&f);
    }
    if (status != CE_OK) ce_fit_free(fit);
    return status;
}

void ce_fit_free(ce_fit *fit)
{
    if (fit == NULL) return;
    for (size_t i = 0; fit->point != NULL && i < fit->n_points; i++) free(fit->point[i].name);
    free(fit->point);
    free(fit->run);
    ce_messages_free(&fit->warnings);
    *fit = (ce_fit){0};
}
