/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/law.h"

#include <gsl/gsl_cdf.h>

#include <math.h>

/* Two-sided significance at which the scatter of an unknown counts as another one than that of the
 * standards: low, because a false alarm costs more than the little that pooling gains. */
#define OWN_SCATTER_P 0.01

ce_unknown ce_unknown_default(void)
{
    return (ce_unknown){.tg_u_K = (double)NAN,
                        .mean_of = 1,
                        .mw_over_mn = (double)NAN,
                        .chain_ends = 2.0,
                        .reading_u_K = (double)NAN};
}

double ce_student(double level, double nu)
{
    if (!(level > 0.0 && level < 1.0 && nu > 0.0)) return (double)NAN;
    double tail = 0.5 * (1.0 - level);
    return isinf(nu) ? gsl_cdf_ugaussian_Qinv(tail) : gsl_cdf_tdist_Qinv(tail, nu);
}

bool ce_fit_span(const ce_fit *fit, double *low, double *high)
{
    *low = (double)INFINITY;
    *high = 0.0;
    for (size_t j = 0; j < fit->n_points; j++) {
        *low = fmin(*low, fit->point[j].molar.mn_g_mol);
        *high = fmax(*high, fit->point[j].molar.mn_g_mol);
    }
    return fit->n_points > 0;
}

static ce_status check_unknown(const ce_fit *fit, const ce_unknown *u, double level, ce_error *err)
{
    if (u->n == 0 || u->tg_K == NULL) return ce_fail(err, CE_E_ARG, "no reading of the unknown");
    for (size_t i = 0; i < u->n; i++)
        if (!(u->tg_K[i] > 0.0) || isinf(u->tg_K[i]))
            return ce_fail(err, CE_E_DOMAIN, "reading %zu is %g K: a Tg must be above 0 K", i + 1,
                           u->tg_K[i]);
    if (!(level > 0.0 && level < 1.0))
        return ce_fail(err, CE_E_ARG, "level %g is not between 0 and 1", level);
    if (u->tg_u_K < 0.0 || isinf(u->tg_u_K))
        return ce_fail(err, CE_E_ARG,
                       "the stated uncertainty of the reading is negative or infinite");
    if (u->mw_over_mn < 1.0)
        return ce_fail(err, CE_E_ARG, "dispersity %g is below 1", u->mw_over_mn);
    if (!(u->chain_ends >= 0.0)) return ce_fail(err, CE_E_ARG, "chain ends must be 0 or more");
    if (fit->p == 0 || fit->p > CE_MAX_PARAMETERS || fit->options.relation >= CE_RELATIONS)
        return ce_fail(err, CE_E_ARG, "the fit is empty");
    if (!(fit->run_nu > 0.0) && isnan(u->tg_u_K))
        return ce_fail(err, CE_E_REFUSED,
                       "the fit does not know the scatter of a run: state the uncertainty of the "
                       "reading");
    return CE_OK;
}

/* Mean of the readings, and the standard deviation of one run judged from them alone. */
static void summarise(ce_law *law, const ce_unknown *u)
{
    double sum = 0.0, squares = 0.0;
    for (size_t i = 0; i < u->n; i++) sum += u->tg_K[i];
    law->mean_K = sum / (double)u->n;
    for (size_t i = 0; i < u->n; i++)
        squares += (u->tg_K[i] - law->mean_K) * (u->tg_K[i] - law->mean_K);
    double each = u->mean_of == 0 ? 1.0 : (double)u->mean_of;
    law->runs = (double)u->n * each;
    law->nu_own = (double)(u->n - 1);
    law->own_sd_K = u->n < 2 ? (double)NAN : sqrt(squares * each / law->nu_own);
}

/* p of a variance ratio own/standards at least as large. */
static double upper_p(double ratio, double nu_own, double nu_w)
{
    return isinf(nu_w) ? gsl_cdf_chisq_Q(ratio * nu_own, nu_own)
                       : gsl_cdf_fdist_Q(ratio, nu_own, nu_w);
}

static void scale_run_part(ce_fit *fit, double factor)
{
    for (size_t i = 0; i < fit->p * fit->p; i++) {
        fit->covariance[i] += (factor - 1.0) * fit->covariance_run[i];
        fit->covariance_run[i] *= factor;
    }
}

/* Note 1 of ce_estimate_mn(). */
static void settle_scatter(ce_law *law)
{
    ce_fit *fit = &law->fit;
    double s2 = fit->run_sd_K * fit->run_sd_K;
    law->run_sd_K = fit->run_sd_K;
    if (isnan(law->own_sd_K)) {
        law->var_run = s2 / law->runs;
        return;
    }
    double own2 = law->own_sd_K * law->own_sd_K;
    double p = s2 > 0.0 ? upper_p(own2 / s2, law->nu_own, fit->run_nu) : 0.0;
    if (p < 0.5 * OWN_SCATTER_P) {
        law->flags |= CE_EST_SCATTERED;
        law->run_sd_K = law->own_sd_K;
        law->var_own = own2 / law->runs;
        return;
    }
    if (p > 1.0 - 0.5 * OWN_SCATTER_P) {
        law->flags |= CE_EST_TOO_QUIET;
    } else if (isfinite(fit->run_nu)) {
        double nu = fit->run_nu + law->nu_own;
        double pooled2 = (fit->run_nu * s2 + law->nu_own * own2) / nu;
        scale_run_part(fit, pooled2 / s2);
        fit->run_sd_K = law->run_sd_K = sqrt(pooled2);
        fit->run_nu = nu;
        law->pooled = true;
        s2 = pooled2;
    }
    law->var_run = s2 / law->runs;
}

/* What the evaluation of the runs itself reports can only raise their scatter. */
static void add_reading(ce_law *law, const ce_unknown *u)
{
    if (!(u->reading_u_K > 0.0)) return;
    double noise = u->reading_u_K * u->reading_u_K / law->runs, known = law->var_run + law->var_own;
    law->var_noise = noise;
    if (noise > known) law->var_exact += noise - known;
}

ce_status ce_law_prepare(ce_law *law, const ce_fit *fit, const ce_unknown *unknown, double level,
                         ce_error *err)
{
    *law = (ce_law){0};
    if (fit == NULL || unknown == NULL) return ce_fail(err, CE_E_ARG, "no fit or no unknown");
    if (level == 0.0) level = fit->options.level;
    ce_status st = check_unknown(fit, unknown, level, err);
    if (st != CE_OK) return st;
    law->fit = *fit;
    law->level = level;
    law->like = (ce_molar){.mn_g_mol = 1.0,
                           .mw_g_mol = isnan(unknown->mw_over_mn) ? 1.0 : unknown->mw_over_mn,
                           .chain_ends = unknown->chain_ends};
    summarise(law, unknown);
    if (isnan(unknown->tg_u_K)) {
        settle_scatter(law);
        add_reading(law, unknown);
    } else {
        law->var_exact = unknown->tg_u_K * unknown->tg_u_K / (double)unknown->n;
        law->var_noise = law->var_exact;
        law->run_sd_K = unknown->tg_u_K;
    }
    law->var_sample = fit->excess_tau_K * fit->excess_tau_K;
    double scale = fit->options.tg_common_u_K;
    law->var_scale = unknown->other_instrument ? scale * scale : 0.0;
    law->rate_K = -unknown->rate_decades * fit->options.rate_slope_u_K;
    law->common_mn = !unknown->certificate_scale;
    return CE_OK;
}

double ce_law_reading_variance(const ce_law *law)
{
    return law->var_run + law->var_own + law->var_sample + law->var_exact + law->var_scale;
}

ce_molar ce_law_molar(const ce_law *law, double z)
{
    double mn = z > 0.0 ? 1.0 / z : (double)INFINITY;
    return (ce_molar){
        .mn_g_mol = mn, .mw_g_mol = law->like.mw_g_mol * mn, .chain_ends = law->like.chain_ends};
}

ce_status ce_law_hold(const ce_law *law, double z, ce_held *held)
{
    ce_molar molar = ce_law_molar(law, z);
    ce_status st = ce_fit_predict(&law->fit, &molar, &held->at);
    if (st != CE_OK) return st;
    double mn = law->common_mn ? held->at.common_mn_K : 0.0;
    double rate = held->at.common_rate_K - law->rate_K;
    held->var_common_mn = mn * mn;
    held->var_rate = rate * rate;
    held->variance =
        ce_law_reading_variance(law) + held->at.var_fit + held->var_common_mn + held->var_rate;
    return isfinite(held->variance) && isfinite(held->at.tg_K) ? CE_OK : CE_E_DOMAIN;
}

double ce_law_nu(const ce_law *law, const ce_held *held)
{
    double exact = law->var_exact + law->var_scale + held->var_common_mn + held->var_rate;
    double nu = ce_fit_nu_parts(&law->fit, &held->at, law->var_run, law->var_sample, exact);
    if (!(law->var_own > 0.0)) return nu;
    double rest = held->variance - law->var_own;
    return held->variance * held->variance /
           (rest * rest / nu + law->var_own * law->var_own / law->nu_own);
}

bool ce_law_linear(const ce_law *law, double *coefficient, double *power)
{
    switch (law->fit.options.relation) {
    case CE_FLORY_FOX:
    case CE_OGAWA:
        *power = 1.0;
        break;
    case CE_ODRISCOLL_SANAYEI:
        *power = 2.0 / 3.0;
        break;
    case CE_UEBERREITER_KANIG:
    case CE_LOG_PLATEAU:
    case CE_LOG_THREE:
    case CE_RELATIONS:
        return false;
    }
    ce_held held;
    if (ce_law_hold(law, 1.0, &held) != CE_OK) return false;
    *coefficient = -held.at.gradient[1];
    return *coefficient > 0.0;
}
