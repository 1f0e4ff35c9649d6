/* SPDX-License-Identifier: GPL-3.0-or-later
 * The other relations on the same points: what cannot be told apart, and how far it spreads. */
#include "fit/fitting.h"
#include "fit/stats.h"

#include <math.h>

/* Relations are kept until their weights add to this (K. P. Burnham and D. R. Anderson, Model
 * Selection and Multimodel Inference (2002), from memory). */
#define CONFIDENCE_SET 0.95

static bool needs_mw(const ce_fitting *f)
{
    for (size_t j = 0; j < f->n_standards; j++)
        if (isnan(f->standard[j].molar.mw_g_mol)) return true;
    return false;
}

/* The variances are those before any excess, so that what one relation explains by its shape is not
 * hidden by the scatter another one needed. */
static void use_base_variances(ce_fitting *f)
{
    for (size_t i = 0; i < f->n; i++) {
        const ce_standard *s = &f->standard[f->sample[i]];
        f->point[i].var_y = f->var_run[i];
        if (!f->on_runs)
            f->point[i].sd_z =
                s->mn_u_g_mol > 0 ? f->point[i].z * s->mn_u_g_mol / s->molar.mn_g_mol : 0;
    }
}

static ce_status fit_other(ce_fitting *f, ce_relation relation, double mid_tg, ce_comparison *c)
{
    const ce_model *model = ce_relation_model(relation);
    *c = (ce_comparison){.relation = relation,
                         .aicc = (double)NAN,
                         .chi2 = (double)NAN,
                         .tg_inf_K = (double)NAN,
                         .mid_mn_g_mol = (double)NAN,
                         .residual_sd_K = (double)NAN};
    if (relation == CE_OGAWA && needs_mw(f)) return CE_OK;
    if (f->n_standards < model->p + 1) return CE_OK;
    ce_eiv other;
    ce_nls_options options = f->eiv.options;
    if (ce_eiv_new(&other, model, f->n, f->point, &options) != CE_OK) return CE_E_NOMEM;
    if (ce_eiv_fit(&other, NULL) == CE_OK) {
        ce_molar linear = {.mn_g_mol = 1, .mw_g_mol = (double)NAN, .chain_ends = 2};
        double square = 0;
        if (relation == CE_OGAWA)
            linear.mw_g_mol = f->standard[0].molar.mw_g_mol / f->standard[0].molar.mn_g_mol;
        c->fitted = true;
        c->chi2 = other.nls->sum;
        c->tg_inf_K = other.theta[0];
        (void)ce_relation_mn(relation, other.theta, mid_tg, &linear, &c->mid_mn_g_mol);
        for (size_t i = 0; i < f->n; i++) {
            ce_jet jet;
            (void)ce_eiv_variance(&other, i, &jet);
            square += (f->point[i].y - jet.value) * (f->point[i].y - jet.value);
        }
        c->residual_sd_K = sqrt(square / (double)(f->n - model->p));
    }
    ce_eiv_free(&other);
    return CE_OK;
}

/* AICc of all fitted relations. On runs the variance is estimated with each; on means it is known,
 * but when even the best relation leaves more than it explains, all are scaled by that excess
 * (QAICc), which counts as one parameter more. */
static void fill_aicc(ce_fitting *f)
{
    ce_fit *fit = f->fit;
    double inflation = 1, n = (double)f->n, rest = 0;
    for (size_t i = 0; i < fit->n_comparison; i++) {
        const ce_comparison *c = &fit->comparison[i];
        double dof = n - (double)ce_relation_parameters(c->relation);
        double ratio = c->fitted ? c->chi2 / dof : (double)INFINITY;
        inflation = i == 0 ? ratio : fmin(inflation, ratio);
    }
    inflation = fmax(inflation, 1);
    for (size_t i = 0; i < f->n; i++) rest += log(2 * M_PI * f->point[i].var_y);
    for (size_t i = 0; i < fit->n_comparison; i++) {
        ce_comparison *c = &fit->comparison[i];
        double p = (double)ce_relation_parameters(c->relation);
        if (!c->fitted) continue;
        if (f->on_runs)
            c->aicc = ce_aicc(ce_log_likelihood(c->chi2, n), p + 1, n);
        else
            c->aicc = ce_aicc(-0.5 * (c->chi2 / inflation + rest), p + (inflation > 1), n);
    }
}

static void fill_weights(ce_fit *fit)
{
    double best = (double)INFINITY, sum = 0;
    for (size_t i = 0; i < fit->n_comparison; i++)
        if (fit->comparison[i].fitted) best = fmin(best, fit->comparison[i].aicc);
    for (size_t i = 0; i < fit->n_comparison; i++) {
        ce_comparison *c = &fit->comparison[i];
        /* With too few samples for the correction nothing can be told apart from it. */
        c->weight = !c->fitted || !isfinite(c->aicc) ? 0 : exp(-0.5 * (c->aicc - best));
        sum += c->weight;
    }
    for (size_t i = 0; i < fit->n_comparison; i++) fit->comparison[i].weight /= sum > 0 ? sum : 1;
}

static void mark_plausible(ce_fit *fit)
{
    double sum = 0;
    for (size_t round = 0; round < fit->n_comparison && sum < CONFIDENCE_SET; round++) {
        ce_comparison *best = NULL;
        for (size_t i = 0; i < fit->n_comparison; i++) {
            ce_comparison *c = &fit->comparison[i];
            if (c->fitted && !c->plausible && c->weight > 0 &&
                (best == NULL || c->weight > best->weight))
                best = c;
        }
        if (best == NULL) break;
        best->plausible = true;
        sum += best->weight;
    }
    for (size_t i = 0; i < fit->n_comparison; i++)
        if (fit->comparison[i].relation == fit->options.relation)
            fit->comparison[i].plausible = true;
}

static void widen(double value, double *low, double *high)
{
    if (isnan(value)) return;
    if (isnan(*low) || value < *low) *low = value;
    if (isnan(*high) || value > *high) *high = value;
}

static double middle(const ce_fitting *f, double *tg)
{
    double lo = (double)INFINITY, hi = 0;
    for (size_t j = 0; j < f->n_standards; j++) {
        lo = fmin(lo, f->standard[j].molar.mn_g_mol);
        hi = fmax(hi, f->standard[j].molar.mn_g_mol);
    }
    double mid = sqrt(lo * hi);
    ce_molar molar = {.mn_g_mol = mid, .mw_g_mol = (double)NAN, .chain_ends = 2};
    if (f->fit->options.relation == CE_OGAWA)
        molar.mw_g_mol = mid * f->standard[0].molar.mw_g_mol / f->standard[0].molar.mn_g_mol;
    *tg = ce_relation_tg(f->fit->options.relation, f->eiv.theta, &molar);
    return mid;
}

ce_status ce_compare(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    double mid_tg;
    fit->mid_mn_g_mol = middle(f, &mid_tg);
    use_base_variances(f);
    fit->n_comparison = CE_RELATIONS;
    for (size_t i = 0; i < CE_RELATIONS; i++)
        if (fit_other(f, (ce_relation)i, mid_tg, &fit->comparison[i]) != CE_OK)
            return ce_fail(err, CE_E_NOMEM, "out of memory");
    fill_aicc(f);
    fill_weights(fit);
    mark_plausible(fit);
    for (size_t i = 0; i < fit->n_comparison; i++) {
        const ce_comparison *c = &fit->comparison[i];
        if (!c->plausible) continue;
        widen(c->tg_inf_K, &fit->spread_tg_inf_low_K, &fit->spread_tg_inf_high_K);
        widen(c->mid_mn_g_mol, &fit->spread_mid_low_g_mol, &fit->spread_mid_high_g_mol);
    }
    return CE_OK;
}
