/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/budget.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

const char *ce_share_name(ce_share_source source)
{
    switch (source) {
    case CE_SHARE_READING:
        return "reading";
    case CE_SHARE_REPEATABILITY:
        return "repeatability";
    case CE_SHARE_SAMPLE:
        return "between samples";
    case CE_SHARE_TEMPERATURE:
        return "temperature scale";
    case CE_SHARE_RATE:
        return "heating rate";
    case CE_SHARE_CERTIFICATES:
        return "certificates";
    case CE_SHARE_STANDARDS:
        return "standards' samples";
    case CE_SHARE_FIT:
        return "standards' runs";
    case CE_SHARE_COMMON_MN:
        return "common Mn scale";
    case CE_SHARES:
        break;
    }
    return "unknown";
}

/* JCGM 100:2008 5.1 with sensitivity 1 in Tg: reading minus curve is a sum, so that the shares need
 * no covariance terms between sources. */
static void parts(const ce_law *law, const ce_held *held, double part[CE_SHARES])
{
    const ce_prediction *at = &held->at;
    double runs = law->var_run + law->var_own + law->var_exact;
    double certificates = fmax(at->var_fit - at->var_rep - at->var_excess, 0.0);
    bool in_mn = law->fit.excess_r > 0.0;
    part[CE_SHARE_READING] = fmin(law->var_noise, runs);
    part[CE_SHARE_REPEATABILITY] = runs - part[CE_SHARE_READING];
    part[CE_SHARE_SAMPLE] = law->var_sample;
    part[CE_SHARE_TEMPERATURE] = law->var_scale;
    part[CE_SHARE_RATE] = held->var_rate;
    part[CE_SHARE_CERTIFICATES] = certificates + (in_mn ? at->var_excess : 0.0);
    part[CE_SHARE_STANDARDS] = in_mn ? 0.0 : at->var_excess;
    part[CE_SHARE_FIT] = at->var_rep;
    part[CE_SHARE_COMMON_MN] = held->var_common_mn;
}

void ce_budget_fill(const ce_law *law, const ce_held *held, ce_estimate *e)
{
    double part[CE_SHARES], sum = 0.0;
    parts(law, held, part);
    for (size_t i = 0; i < CE_SHARES; i++) sum += part[i];
    e->n_shares = 0;
    if (!(sum > 0.0)) return;
    for (size_t i = 0; i < CE_SHARES; i++) {
        if (!(part[i] > 1e-12 * sum)) continue;
        size_t at = e->n_shares++;
        for (; at > 0 && e->share[at - 1].share < part[i] / sum; at--)
            e->share[at] = e->share[at - 1];
        e->share[at] =
            (ce_share){.source = ce_share_name((ce_share_source)i), .share = part[i] / sum};
    }
}

/* The largest share and what can be done about it, in words that name what it would bring. */
typedef struct {
    const ce_fit *fit;
    const ce_unknown *unknown;
    const ce_estimate *e;
    double share;
} advice;

static double relative_width(const ce_estimate *e)
{
    return e->bound == CE_TWO_SIDED ? 0.5 * (e->high_g_mol - e->low_g_mol) / e->mn_g_mol
                                    : (double)NAN;
}

/* The estimate if the same mean came from four times as many runs that agree as those of the
 * standards do. */
static ce_status with_more_runs(const advice *a, ce_estimate *e, size_t *runs)
{
    ce_unknown u = *a->unknown;
    double mean = a->e->tg_K;
    *runs = 4 * u.n * (u.mean_of == 0 ? 1 : u.mean_of);
    u.n = 1;
    u.tg_K = &mean;
    u.mean_of = *runs;
    if (!isnan(u.tg_u_K)) {
        u.tg_u_K /= sqrt(4.0 * (double)a->unknown->n);
        u.mean_of = 1;
    }
    return ce_estimate_mn(a->fit, &u, a->e->level, e, NULL);
}

static ce_status say_runs(const advice *a, const char *what, char *text, size_t room)
{
    ce_estimate more;
    size_t runs;
    ce_status st = with_more_runs(a, &more, &runs);
    if (st != CE_OK) return st;
    double now = relative_width(a->e), then = relative_width(&more);
    if (isfinite(now) && isfinite(then))
        (void)snprintf(
            text, room,
            "%s is %.0f %% of the variance: measure this unknown more often; %zu runs in "
            "all would bring the interval from ±%.0f %% to ±%.0f %%",
            what, 100.0 * a->share, runs, 100.0 * now, 100.0 * then);
    else if (isfinite(then) && then < 1.0)
        (void)snprintf(text, room,
                       "%s is %.0f %% of the variance: %zu runs in all, with the same mean, would "
                       "close the interval at ±%.0f %%",
                       what, 100.0 * a->share, runs, 100.0 * then);
    else
        (void)snprintf(
            text, room,
            "%s is %.0f %% of the variance, but the reading lies so near the plateau that "
            "even %zu runs in all, with the same mean, would not close the interval usefully: Tg "
            "cannot tell molar masses apart here",
            what, 100.0 * a->share, runs);
    return CE_OK;
}

static const char *remedy(const char *source)
{
    static const struct {
        ce_share_source source;
        const char *remedy;
    } table[] = {
        {CE_SHARE_SAMPLE, "samples of one molar mass differ by it; more runs do not help, knowing "
                          "what differs (tacticity, end groups, residual solvent) does"},
        {CE_SHARE_TEMPERATURE, "measure unknown and standards on one instrument, or calibrate its "
                               "temperature scale better"},
        {CE_SHARE_RATE, "measure at the heating rate of the calibration"},
        {CE_SHARE_CERTIFICATES,
         "better certificates, or further standards with certificates of "
         "their own near this molar mass; more runs of the present standards "
         "do not help"},
        {CE_SHARE_STANDARDS, "further standards help; more runs of the present ones do not"},
        {CE_SHARE_FIT, "measure the standards more often, those near this molar mass first"},
        {CE_SHARE_COMMON_MN,
         "it comes from how all certificates were made; neither runs nor further "
         "standards of the same origin help"},
    };
    for (size_t i = 0; i < sizeof table / sizeof *table; i++)
        if (strcmp(source, ce_share_name(table[i].source)) == 0) return table[i].remedy;
    return "";
}

ce_status ce_estimate_hint(const ce_fit *fit, const ce_unknown *unknown,
                           const ce_estimate *estimate, char *text, size_t room)
{
    if (text == NULL || room == 0 || fit == NULL || unknown == NULL || estimate == NULL)
        return CE_E_ARG;
    text[0] = '\0';
    if (estimate->n_shares == 0) return CE_OK;
    advice a = {fit, unknown, estimate, estimate->share[0].share};
    const char *source = estimate->share[0].source;
    if (strcmp(source, ce_share_name(CE_SHARE_READING)) == 0)
        return say_runs(&a, "the reading itself (noise, windows)", text, room);
    if (strcmp(source, ce_share_name(CE_SHARE_REPEATABILITY)) == 0)
        return say_runs(&a, "repeatability", text, room);
    (void)snprintf(text, room, "%s: %.0f %% of the variance: %s", source, 100.0 * a.share,
                   remedy(source));
    return CE_OK;
}
