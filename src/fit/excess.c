/* SPDX-License-Identifier: GPL-3.0-or-later
 * Scatter between samples beyond what their uncertainties explain. */
#include "fit/fitting.h"
#include "fit/stats.h"

#include <math.h>

/* Beyond this relative uncertainty a molar mass is not known, and the excess is something else. */
#define LARGEST_R 0.5
/* An automatic fit adds excess scatter when chance explains it less often than this: sooner in Mn,
 * where too small a stated uncertainty costs coverage and one raised for nothing costs little
 * (tests/bench/fit_coverage). */
#define EXCESS_ALPHA_TG 0.05
#define EXCESS_ALPHA_MN 0.10

static double stated_r(const ce_fitting *f, size_t i)
{
    const ce_standard *s = &f->standard[f->sample[i]];
    return s->mn_u_g_mol > 0 ? s->mn_u_g_mol / s->molar.mn_g_mol : 0;
}

static void set_r(ce_fitting *f, double r)
{
    for (size_t i = 0; i < f->n; i++) f->point[i].sd_z = f->point[i].z * fmax(r, stated_r(f, i));
}

static void set_tau2(ce_fitting *f, double tau2)
{
    for (size_t i = 0; i < f->n; i++) f->point[i].var_y = f->var_run[i] + tau2;
}

static double refitted_sum(ce_fitting *f)
{
    return ce_eiv_refit(&f->eiv, NULL) == CE_OK ? f->eiv.nls->sum : (double)NAN;
}

static double sum_at_r(double r, void *context)
{
    set_r(context, r);
    return refitted_sum(context);
}

static double sum_at_tau2(double tau2, void *context)
{
    set_tau2(context, tau2);
    return refitted_sum(context);
}

double ce_fitting_nu(const ce_fitting *f)
{
    double run = 0, excess = 0;
    for (size_t i = 0; i < f->n; i++) {
        ce_jet jet;
        double v = ce_eiv_variance(&f->eiv, i, &jet);
        run += f->var_run[i] / v / (double)f->n;
        /* Additive: what is not run scatter in Tg; in Mn: everything the slope brings in. */
        double rest = f->fit->excess_tau_K > 0 ? f->point[i].var_y - f->var_run[i]
                      : f->fit->excess_r > 0   ? v - f->var_run[i]
                                               : 0;
        excess += rest / v / (double)f->n;
    }
    double q = run * run / f->fit->run_nu;
    if (excess > 0) q += excess * excess / f->fit->excess_nu;
    return q > 0 ? 1 / q : (double)INFINITY;
}

static void largest_possible_tau2(const ce_fitting *f, double *upper)
{
    double lo = (double)INFINITY, hi = -(double)INFINITY;
    for (size_t i = 0; i < f->n; i++) lo = fmin(lo, f->point[i].y), hi = fmax(hi, f->point[i].y);
    *upper = (hi - lo) * (hi - lo) * (double)f->n + 1;
}

static void try_multiplicative(ce_fitting *f)
{
    double r = ce_paule_mandel(sum_at_r, f, f->fit->dof, LARGEST_R);
    f->fit->excess_r = r;
    if (r > 0) f->fit->excess_nu = f->fit->dof;
    set_r(f, isnan(r) ? 0 : r);
}

static void try_additive(ce_fitting *f)
{
    double upper;
    largest_possible_tau2(f, &upper);
    double tau2 = ce_paule_mandel(sum_at_tau2, f, f->fit->dof, upper);
    f->fit->excess_tau_K = sqrt(tau2);
    if (tau2 > 0) f->fit->excess_nu = f->fit->dof;
    set_tau2(f, isnan(tau2) ? 0 : tau2);
}

/* What AUTO comes to, after the test. Certificates without a stated uncertainty get one from the
 * scatter, whatever the test says: its power is small. */
static ce_excess resolve(const ce_fitting *f)
{
    ce_excess asked = f->fit->options.excess;
    if (asked != CE_EXCESS_AUTO) return asked;
    if (f->mn_unstated) return CE_EXCESS_MULTIPLICATIVE;
    if (!(f->fit->excess_p < (f->mn_uncertain ? EXCESS_ALPHA_MN : EXCESS_ALPHA_TG)))
        return CE_EXCESS_NONE;
    return f->mn_uncertain ? CE_EXCESS_MULTIPLICATIVE : CE_EXCESS_ADDITIVE;
}

static ce_status include_excess(ce_fitting *f, ce_error *err)
{
    bool automatic = f->fit->options.excess == CE_EXCESS_AUTO;
    double start[CE_MAX_PARAMETERS];
    for (size_t i = 0; i < CE_MAX_PARAMETERS; i++) start[i] = f->eiv.theta[i];
    ce_excess excess = resolve(f);
    if (excess == CE_EXCESS_MULTIPLICATIVE) {
        try_multiplicative(f);
        if (isnan(f->fit->excess_r)) {
            if (!automatic)
                return ce_fail(
                    err, CE_E_NOFIT,
                    "no relative uncertainty of Mn up to %g explains the scatter between "
                    "samples; it is not in Mn: ask for additive excess",
                    LARGEST_R);
            f->fit->excess_r = 0;
            excess = CE_EXCESS_ADDITIVE;
            for (size_t i = 0; i < CE_MAX_PARAMETERS; i++) f->eiv.theta[i] = start[i];
        }
    }
    if (excess == CE_EXCESS_ADDITIVE) {
        try_additive(f);
        if (isnan(f->fit->excess_tau_K))
            return ce_fail(err, CE_E_NOFIT, "the scatter between samples could not be estimated");
    }
    if (automatic && f->fit->excess_r == 0 && f->fit->excess_tau_K == 0) excess = CE_EXCESS_NONE;
    f->fit->options.excess = excess;
    for (size_t i = 0; f->fit->excess_r > 0 && i < f->n; i++) {
        ce_fit_point *q = &f->fit->point[f->sample[i]];
        q->mn_u_g_mol = fmax(f->fit->excess_r, stated_r(f, i)) * q->molar.mn_g_mol;
    }
    return excess == CE_EXCESS_NONE ? CE_OK : ce_eiv_refit(&f->eiv, err);
}

ce_status ce_fit_with_excess(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    ce_status status = ce_eiv_fit(&f->eiv, err);
    if (status != CE_OK) return status;
    fit->dof = (double)(f->n - f->model->p);
    fit->chi2 = f->eiv.nls->sum;
    fit->excess_nu = (double)INFINITY;
    fit->chi2_p = fit->excess_p = fit->excess_p_nu = (double)NAN;
    f->scale2 = 1;
    if (f->on_runs) { /* the scatter about the curve is all there is: no excess over it */
        f->scale2 = fit->chi2 / fit->dof;
        fit->run_sd_K = sqrt(f->scale2);
        fit->run_nu = fit->dof;
        fit->options.excess = CE_EXCESS_NONE;
        return CE_OK;
    }
    fit->chi2_p = ce_chi2_upper(fit->chi2, fit->dof);
    fit->excess_p_nu = ce_fitting_nu(f);
    fit->excess_p = ce_f_upper(fit->chi2 / fit->dof, fit->dof, fit->excess_p_nu);
    return include_excess(f, err);
}
