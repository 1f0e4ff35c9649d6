/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/fit.h>
#include <chainend/series.h>

#include <math.h>
#include <stdlib.h>

ce_status ce_fit_series(const ce_series *series, const ce_fit_options *options, ce_fit *fit,
                        ce_error *err)
{
    *fit = (ce_fit){0};
    ce_standard *standard = calloc(series->n_samples > 0 ? series->n_samples : 1, sizeof *standard);
    if (standard == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    size_t n = 0;
    for (size_t k = 0; k < series->n_samples; k++) {
        const ce_sample *s = &series->sample[k];
        if (s->role != CE_STANDARD || s->n_used == 0) continue;
        standard[n++] = (ce_standard){
            .name = s->name,
            .molar = {.mn_g_mol = s->mn_g_mol,
                      .mw_g_mol = s->mw_g_mol,
                      .chain_ends = s->chain_ends},
            .mn_u_g_mol = s->mn_u_g_mol,
            .n = s->n_used,
            .tg_K = s->tg_K,
            .tg_u_K = s->tg_u_K,
        };
    }
    ce_status st = ce_fit_relation(n, standard, options, fit, err);
    free(standard);
    return st;
}
