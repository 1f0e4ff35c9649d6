/* SPDX-License-Identifier: GPL-3.0-or-later
 * What the numbers mean, said plainly. Warnings doubt the fit; notes explain it. */
#include "fit/fitting.h"

#include <math.h>

/* Fewer degrees of freedom than this make a pooled scatter a guess (common practice). */
#define FEW_REPEATS 4

static ce_status say(ce_fitting *f, ce_severity severity, const char *text)
{
    return ce_messages_say(&f->fit->warnings, severity, NULL, 0, 0, "%s", text);
}
#define SAY(f, severity, ...)                                                                      \
    ce_messages_say(&(f)->fit->warnings, severity, NULL, 0, 0, __VA_ARGS__)

static ce_status about_scatter(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    ce_status s = CE_OK;
    if (f->on_runs && f->mn_uncertain)
        s = say(
            f, CE_WARNING,
            "the certificates' uncertainty of Mn is ignored with scatter from residuals: the "
            "repeats of a sample share its error, and the stated intervals can be far too short; "
            "take the scatter from repeats or stated uncertainties");
    else if (f->on_runs && f->mn_unstated)
        s = say(f, CE_WARNING,
                "no uncertainty of Mn is stated and the scatter is taken from the residuals: the "
                "intervals hold only if the molar masses are exact");
    if (s == CE_OK && f->on_runs && fit->n_runs == fit->n_points)
        s = say(
            f, CE_WARNING,
            "one run per standard and no stated uncertainty of Tg: the scatter of a run is judged "
            "by the curve it is to judge; measure repeats");
    if (s == CE_OK && fit->options.scatter == CE_SCATTER_REPEATS && fit->run_nu < FEW_REPEATS)
        s = SAY(
            f, CE_WARNING,
            "the scatter of a run rests on %g degree%s of freedom only: intervals are wide because "
            "it is hardly known; measure more repeats",
            fit->run_nu, fit->run_nu == 1 ? "" : "s");
    if (s == CE_OK && fit->levene_p < 0.01)
        s = SAY(
            f, CE_WARNING,
            "the samples' repeats do not scatter equally (p = %.2g), yet one scatter is used for "
            "all; look at the runs of the samples that scatter most",
            fit->levene_p);
    return s;
}

static ce_status about_certificates(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    ce_status s = CE_OK;
    if (!f->on_runs && f->mn_unstated && fit->excess_r > 0)
        s = SAY(
            f, CE_WARNING,
            "no uncertainty of Mn is stated for some standards; %.2g %% was estimated from the "
            "scatter between samples with %g degrees of freedom; state the certificates' standard "
            "uncertainty",
            100 * fit->excess_r, fit->excess_nu);
    else if (!f->on_runs && f->mn_unstated)
        s = say(
            f, CE_WARNING,
            "no uncertainty of Mn is stated for some standards and the scatter does not show one: "
            "those molar masses are taken as exact; state the certificates' standard uncertainty");
    for (size_t j = 0; s == CE_OK && j < fit->n_points; j++) {
        const ce_fit_point *q = &fit->point[j];
        if (q->mn_u_stated > 0.3 * q->molar.mn_g_mol)
            s = SAY(f, CE_WARNING,
                    "standard '%s': Mn is uncertain by %.0f %%; is that a standard uncertainty?",
                    q->name, 100 * q->mn_u_stated / q->molar.mn_g_mol);
    }
    return s;
}

static ce_status about_excess(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    if (fit->options.excess == CE_EXCESS_ADDITIVE && fit->excess_tau_K > 0)
        return SAY(
            f, CE_WARNING,
            "samples scatter about the curve by %.2g K more than their uncertainties explain "
            "(p = %.2g); it was added to every sample, the unknown included: tacticity, end "
            "groups, residual monomer or moisture?",
            fit->excess_tau_K, fit->excess_p);
    if (fit->options.excess == CE_EXCESS_MULTIPLICATIVE && fit->excess_r > 0 && f->mn_uncertain)
        return SAY(
            f, CE_WARNING,
            "samples scatter about the curve by more than their uncertainties explain (p = "
            "%.2g); the relative uncertainty of Mn was raised to %.2g %% where less is stated",
            fit->excess_p, 100 * fit->excess_r);
    if (fit->options.excess == CE_EXCESS_NONE && fit->excess_p < 0.05)
        return SAY(f, CE_WARNING,
                   "samples scatter about the curve by more than their uncertainties explain (p = "
                   "%.2g) and that was not to be added: the intervals are too short",
                   fit->excess_p);
    if (fit->excess_p > 0.999)
        return SAY(
            f, CE_NOTE,
            "samples scatter about the curve by much less than their uncertainties allow (p = "
            "%.4f): are the stated uncertainties standard ones, not expanded?",
            fit->excess_p);
    return CE_OK;
}

static ce_status about_slope(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    const ce_parameter *k = &fit->parameter[1];
    const char *name = ce_relation_parameter_name(fit->options.relation, 1);
    if (k->value <= 0)
        return SAY(
            f, CE_WARNING,
            "%s is not positive: Tg falls as the molar mass grows, which no chain-end effect "
            "does; do the samples differ in more than length (end groups, branching, rings, "
            "crystallinity, residues)?",
            name);
    if (fit->slope_significance >= 1)
        return SAY(
            f, CE_WARNING,
            "%s is not significant: these standards do not show that Tg depends on the molar "
            "mass at all, so no molar mass can be read off; add standards of low molar mass",
            name);
    return CE_OK;
}

static ce_status about_points(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    ce_status s = CE_OK;
    for (size_t j = 0; s == CE_OK && j < fit->n_points; j++) {
        const ce_fit_point *q = &fit->point[j];
        if ((q->flags & CE_POINT_DOMINATES) && !isfinite(q->shift_k))
            s = SAY(f, CE_WARNING, "standard '%s' decides alone: without it there is no fit",
                    q->name);
        else if (q->flags & CE_POINT_DOMINATES)
            s = SAY(f, CE_WARNING,
                    "standard '%s' dominates (leverage %.2f of at most 1): without it Tg_inf would "
                    "shift by %+.2g K and %s by %+.2g %%; add a standard near it",
                    q->name, q->leverage, q->shift_tg_inf_K,
                    ce_relation_parameter_name(fit->options.relation, 1),
                    100 * q->shift_k / fit->parameter[1].value);
        if (s == CE_OK && (q->flags & CE_POINT_OUTLYING))
            s = SAY(f, CE_WARNING,
                    "standard '%s' lies %+.2f K off the curve (p = %.2g for the worst of %zu): "
                    "check its Mn and its runs; it was kept",
                    q->name, q->residual_K, q->deleted_p, fit->n_points);
    }
    for (size_t i = 0; s == CE_OK && i < fit->n_runs; i++) {
        const ce_fit_run *r = &fit->run[i];
        if (r->flags & CE_POINT_OUTLYING)
            s = SAY(f, CE_WARNING,
                    "standard '%s', run %zu lies %+.2f K off its %s (p = %.2g for the worst of "
                    "%zu): look "
                    "at its curve; it was kept",
                    fit->point[r->point].name, i - fit->point[r->point].first_run + 1,
                    r->residual_K, f->on_runs ? "curve" : "sample's mean", r->deleted_p,
                    fit->n_runs);
    }
    return s;
}

static ce_status about_shape(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    ce_status s = CE_OK;
    double lo = (double)INFINITY, hi = 0;
    for (size_t j = 0; j < fit->n_points; j++) {
        lo = fmin(lo, fit->point[j].molar.mn_g_mol);
        hi = fmax(hi, fit->point[j].molar.mn_g_mol);
    }
    if (hi < 4 * lo)
        s = SAY(f, CE_WARNING,
                "the standards span %.3g to %.3g g/mol only: over so narrow a range Tg_inf is an "
                "extrapolation that depends on the relation chosen",
                lo, hi);
    if (s == CE_OK && fit->curvature_p < 0.05)
        s = SAY(f, CE_WARNING,
                "the data ask for more curvature than the relation has (p = %.2g); compare the "
                "relations, or leave out the lowest molar masses",
                fit->curvature_p);
    if (s == CE_OK && fit->rcond < 1e-7)
        s = SAY(f, CE_WARNING, "the parameters are hardly determined (reciprocal condition %.1e)",
                fit->rcond);
    return s;
}

static ce_status about_robust(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    for (size_t i = 0; i < fit->p; i++) {
        double shift = fit->bisquare[i] - fit->parameter[i].value;
        if (fabs(shift) > 2 * fit->parameter[i].u)
            return SAY(
                f, CE_WARNING,
                "a robust fit gives %s = %.5g instead of %.5g: single samples or runs pull the "
                "fit; see which have a low robust weight",
                ce_relation_parameter_name(fit->options.relation, i), fit->bisquare[i],
                fit->parameter[i].value);
    }
    return CE_OK;
}

static ce_status about_relations(ce_fitting *f)
{
    const ce_fit *fit = f->fit;
    size_t plausible = 0;
    const ce_comparison *best = NULL, *own = NULL;
    for (size_t i = 0; i < fit->n_comparison; i++) {
        const ce_comparison *c = &fit->comparison[i];
        plausible += c->plausible;
        if (c->relation == fit->options.relation) own = c;
        if (c->fitted && (best == NULL || c->weight > best->weight)) best = c;
    }
    if (own != NULL && best != NULL && own->weight < 0.05 && best != own)
        return SAY(f, CE_WARNING,
                   "%s describes these standards better than %s (Akaike weights %.2g and %.2g)",
                   ce_relation_name(best->relation), ce_relation_name(own->relation), best->weight,
                   own->weight);
    if (plausible < 2) return CE_OK;
    return SAY(
        f, CE_NOTE,
        "%zu relations describe these standards about as well; between them Tg_inf runs from "
        "%.1f to %.1f K",
        plausible, fit->spread_tg_inf_low_K, fit->spread_tg_inf_high_K);
}

ce_status ce_advise(ce_fitting *f)
{
    ce_status (*const about[])(ce_fitting *) = {about_scatter, about_certificates, about_excess,
                                                about_slope,   about_points,       about_shape,
                                                about_robust,  about_relations};
    ce_status s = CE_OK;
    for (size_t i = 0; i < sizeof about / sizeof *about && s == CE_OK; i++) s = about[i](f);
    return s;
}
