/* SPDX-License-Identifier: GPL-3.0-or-later
 * What a fit says at a molar mass. Only plain members of ce_fit are used, so that a fit read back
 * from a file predicts the same digits. */
#include "fit/predict.h"
#include "fit/model.h"
#include "fit/stats.h"

#include <gsl/gsl_cdf.h>

#include <math.h>
#include <string.h>

double ce_quadratic_form(size_t p, const double *matrix, const double *g)
{
    double q = 0;
    for (size_t i = 0; i < p; i++)
        for (size_t j = 0; j < p; j++) q += g[i] * matrix[i * p + j] * g[j];
    return q;
}

static double dot(size_t p, const double *a, const double *b)
{
    double s = 0;
    for (size_t i = 0; i < p; i++) s += a[i] * b[i];
    return s;
}

void ce_fit_theta(const ce_fit *fit, double theta[CE_MAX_PARAMETERS])
{
    for (size_t i = 0; i < CE_MAX_PARAMETERS; i++) theta[i] = fit->parameter[i].value;
}

ce_status ce_fit_predict(const ce_fit *fit, const ce_molar *molar, ce_prediction *prediction)
{
    *prediction = (ce_prediction){.tg_K = (double)NAN};
    const ce_model *model = ce_relation_model(fit->options.relation);
    if (model == NULL || model->p != fit->p || !(molar->mn_g_mol > 0)) return CE_E_DOMAIN;
    ce_chain chain = ce_chain_of(molar);
    double theta[CE_MAX_PARAMETERS], z = 1 / molar->mn_g_mol;
    ce_jet jet;
    ce_fit_theta(fit, theta);
    model->eval(model, theta, z, &chain, &jet);
    if (!isfinite(jet.value)) return CE_E_DOMAIN;
    size_t p = fit->p;
    *prediction =
        (ce_prediction){.tg_K = jet.value,
                        .var_fit = fmax(ce_quadratic_form(p, fit->covariance, jet.gradient), 0),
                        .dtg_dz = jet.slope,
                        .dtg_dmn = z > 0 ? -z * z * jet.slope : 0,
                        .common_mn_K = dot(p, jet.gradient, fit->mn_common_shift),
                        .common_tg_K = dot(p, jet.gradient, fit->tg_common_shift),
                        .common_rate_K = dot(p, jet.gradient, fit->rate_common_shift)};
    memcpy(prediction->gradient, jet.gradient, sizeof jet.gradient);
    /* The run part is taken at the stated molar masses, the whole at the adjusted ones: where all
     * is run scatter the part may come out larger by rounding or a little more. */
    double run = fmax(ce_quadratic_form(p, fit->covariance_run, jet.gradient), 0);
    double excess = fmax(ce_quadratic_form(p, fit->covariance_excess, jet.gradient), 0);
    prediction->var_rep = fmin(run, prediction->var_fit);
    prediction->var_excess = fmin(excess, prediction->var_fit - prediction->var_rep);
    return CE_OK;
}

ce_status ce_fit_mn(const ce_fit *fit, double tg_K, const ce_molar *like, double *mn_g_mol)
{
    double theta[CE_MAX_PARAMETERS];
    ce_fit_theta(fit, theta);
    return ce_relation_mn(fit->options.relation, theta, tg_K, like, mn_g_mol);
}

double ce_fit_nu_parts(const ce_fit *fit, const ce_prediction *prediction, double var_run,
                       double var_excess, double var_exact)
{
    double total = var_run + var_excess + var_exact, run = var_run, excess = var_excess;
    if (prediction != NULL) {
        total += prediction->var_fit;
        run += prediction->var_rep;
        excess += prediction->var_excess;
    }
    double q = run * run / fit->run_nu;
    if (excess > 0) q += excess * excess / fit->excess_nu;
    return q > 0 ? total * total / q : (double)INFINITY;
}

double ce_fit_nu(const ce_fit *fit, const ce_prediction *prediction, double var_extra)
{
    return ce_fit_nu_parts(fit, prediction, var_extra, 0, 0);
}

ce_status ce_fit_band(const ce_fit *fit, const ce_molar *molar, double mn_u_rel, size_t runs,
                      double level, ce_band *band)
{
    *band = (ce_band){.tg_K = (double)NAN};
    if (level == 0) level = fit->options.level;
    if (!(level > 0 && level < 1) || runs < 1 || !(mn_u_rel >= 0 && mn_u_rel < 1)) return CE_E_ARG;
    ce_prediction at;
    ce_status status = ce_fit_predict(fit, molar, &at);
    if (status != CE_OK) return status;
    double run = fit->run_sd_K * fit->run_sd_K / (double)runs;
    double excess = fit->excess_tau_K * fit->excess_tau_K;
    double mn = isfinite(molar->mn_g_mol) ? at.dtg_dmn * mn_u_rel * molar->mn_g_mol : 0;
    band->tg_K = at.tg_K;
    band->u_mean_K = sqrt(at.var_fit);
    band->nu_mean = ce_fit_nu_parts(fit, &at, 0, 0, 0);
    band->u_new_K = sqrt(at.var_fit + run + excess + mn * mn);
    band->nu_new = ce_fit_nu_parts(fit, &at, run, excess, mn * mn);
    double t_mean = ce_student_factor(level, band->nu_mean);
    double t_new = ce_student_factor(level, band->nu_new), p = (double)fit->p;
    double scheffe = sqrt(isfinite(band->nu_mean) && band->nu_mean < 1e9
                              ? p * gsl_cdf_fdist_Qinv(1 - level, p, band->nu_mean)
                              : gsl_cdf_chisq_Qinv(1 - level, p));
    band->mean_low_K = at.tg_K - t_mean * band->u_mean_K;
    band->mean_high_K = at.tg_K + t_mean * band->u_mean_K;
    band->new_low_K = at.tg_K - t_new * band->u_new_K;
    band->new_high_K = at.tg_K + t_new * band->u_new_K;
    band->curve_low_K = at.tg_K - scheffe * band->u_mean_K;
    band->curve_high_K = at.tg_K + scheffe * band->u_mean_K;
    return CE_OK;
}
