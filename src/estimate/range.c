/* SPDX-License-Identifier: GPL-3.0-or-later
 * How far up and how well: the working range of a calibration. */
#include "estimate/budget.h"
#include "estimate/interval.h"

#include <math.h>

/* The law of an unknown whose mean of runs runs lies at tg_K. */
static ce_status law_at(ce_law *law, const ce_fit *fit, size_t runs, double level, double tg_K,
                        ce_error *err)
{
    ce_unknown u = ce_unknown_default();
    u.n = 1;
    u.tg_K = &tg_K;
    u.mean_of = runs;
    return ce_law_prepare(law, fit, &u, level, err);
}

ce_status ce_ceiling(const ce_fit *fit, size_t runs, double level, double *tg_K, double *mn_g_mol)
{
    *tg_K = *mn_g_mol = (double)NAN;
    if (fit == NULL || runs == 0 || fit->p < 2) return CE_E_ARG;
    const ce_molar plateau = {
        .mn_g_mol = (double)INFINITY, .mw_g_mol = (double)INFINITY, .chain_ends = 2.0};
    ce_prediction top;
    if (ce_fit_predict(fit, &plateau, &top) != CE_OK) return CE_E_ARG;

    /* t belongs to the degrees of freedom at the estimate, which move a little with the reading:
     * repeat until they agree. A falling relation meets its plateau from above. */
    double side = fit->parameter[1].value < 0.0 && fit->p == 2 ? 1.0 : -1.0, reading = top.tg_K;
    for (int i = 0; i < 50; i++) {
        ce_law law;
        ce_estimate e;
        ce_held held;
        ce_status st = law_at(&law, fit, runs, level, reading, NULL);
        if (st == CE_OK) st = ce_estimate_law(&law, &e, NULL);
        if (st == CE_OK) st = ce_law_hold(&law, 0.0, &held);
        if (st != CE_OK) return st == CE_E_DOMAIN ? CE_E_ARG : st;
        if (e.g >= 1.0) return CE_E_REFUSED;
        double next = top.tg_K + side * e.t * sqrt(held.variance);
        bool settled = fabs(next - reading) < 1e-12 * top.tg_K;
        reading = next;
        if (settled) break;
    }
    *tg_K = reading;
    const ce_molar like = {.mn_g_mol = 1.0, .mw_g_mol = 1.0, .chain_ends = 2.0};
    return ce_fit_mn(fit, reading, &like, mn_g_mol) == CE_OK ? CE_OK : CE_E_ARG;
}

ce_status ce_working_range(const ce_fit *fit, size_t runs, double level, size_t n,
                           const double *mn_g_mol, ce_range_row *row, ce_error *err)
{
    for (size_t i = 0; i < n; i++) {
        ce_molar molar = {.mn_g_mol = mn_g_mol[i], .mw_g_mol = mn_g_mol[i], .chain_ends = 2.0};
        ce_prediction at;
        ce_law law;
        ce_estimate e;
        row[i] = (ce_range_row){.mn_g_mol = mn_g_mol[i], .relative = (double)NAN};
        if (!(mn_g_mol[i] > 0.0) || isinf(mn_g_mol[i]) || ce_fit_predict(fit, &molar, &at) != CE_OK)
            return ce_fail(err, CE_E_DOMAIN, "no Tg at a molar mass of %g g/mol", mn_g_mol[i]);
        ce_status st = law_at(&law, fit, runs, level, at.tg_K, err);
        if (st == CE_OK) st = ce_estimate_law(&law, &e, err);
        if (st != CE_OK) return st;
        row[i].tg_K = at.tg_K;
        row[i].low_g_mol = e.low_g_mol;
        row[i].high_g_mol = e.high_g_mol;
        row[i].bound = e.bound;
        if (e.bound == CE_TWO_SIDED)
            row[i].relative = 0.5 * (e.high_g_mol - e.low_g_mol) / mn_g_mol[i];
    }
    return CE_OK;
}
