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
