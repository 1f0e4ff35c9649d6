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
            .rate_decades = s->rate_decades,
        };
    }
    ce_fit_options o = options != NULL ? *options : ce_fit_options_default();
    if (!isnan(series->rate_slope_u_K)) o.rate_slope_u_K = series->rate_slope_u_K;
    ce_status st = ce_fit_relation(n, standard, &o, fit, err);
    free(standard);
    return st;
}

/* ---- heating rates ------------------------------------------------------------------------ */

typedef struct {
    size_t n;
    size_t *sample;
    double *tg_K, *rate_K_min;
} rated;

static void free_rated(rated *r)
{
    free(r->sample);
    free(r->tg_K);
    free(r->rate_K_min);
}

static ce_status used_rows(const ce_series *series, rated *r, ce_error *err)
{
    const size_t room = series->n_rows > 0 ? series->n_rows : 1;
    *r = (rated){0, calloc(room, sizeof *r->sample), calloc(room, sizeof *r->tg_K),
                 calloc(room, sizeof *r->rate_K_min)};
    if (r->sample == NULL || r->tg_K == NULL || r->rate_K_min == NULL)
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    for (size_t k = 0; k < series->n_samples; k++)
        for (size_t i = 0; i < series->sample[k].n_rows; i++) {
            const ce_series_row *row = &series->row[series->sample[k].row[i]];
            if (!row->used) continue;
            if (isnan(row->rate_K_min))
                return ce_fail_at(err, CE_E_REFUSED, series->path, row->line, 0,
                                  "sample '%.60s': its heating rate is not known, so its Tg "
                                  "cannot be reduced to another: fill the column 'rate'",
                                  row->sample);
            r->sample[r->n] = k;
            r->tg_K[r->n] = row->tg_K;
            r->rate_K_min[r->n++] = row->rate_K_min;
        }
    return CE_OK;
}

static bool all_at(const rated *r, double rate_K_min)
{
    for (size_t i = 0; i < r->n; i++)
        if (fabs(r->rate_K_min[i] / rate_K_min - 1.0) > 1e-9) return false;
    return true;
}

ce_status ce_fit_reduce_rates(ce_series *series, ce_rate_slope *slope, ce_error *err)
{
    ce_rate_slope fitted = {.slope_K_decade = (double)NAN};
    rated r;
    ce_status st = used_rows(series, &r, err);
    const bool nothing = st == CE_OK && all_at(&r, series->reduce_to_K_min);
    if (st == CE_OK && !nothing)
        st = ce_rate_slope_fit(r.n, r.sample, r.tg_K, r.rate_K_min, series->reduce_to_K_min,
                               &fitted, err);
    free_rated(&r);
    if (slope != NULL) *slope = fitted;
    if (st != CE_OK || nothing) return st;
    series->rate_K_min = series->reduce_to_K_min;
    series->rate_slope_K_decade = fitted.slope_K_decade;
    series->rate_slope_u_K = fitted.u_K_decade;
    series->rate_slope_nu = fitted.nu;
    for (size_t i = 0; i < series->n_rows; i++) {
        ce_series_row *row = &series->row[i];
        if (!row->used) continue;
        double tg = ce_rate_reduce(&fitted, row->tg_K, row->rate_K_min, NULL);
        row->reduced_K = row->tg_K - tg;
        row->tg_K = tg;
    }
    return ce_series_average(series) == CE_OK ? CE_OK : ce_fail(err, CE_E_NOMEM, "out of memory");
}
