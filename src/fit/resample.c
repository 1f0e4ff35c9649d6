/* SPDX-License-Identifier: GPL-3.0-or-later
 * Bootstrap of whole samples: the runs of one sample share its molar mass and stay together. */
#include "fit/fitting.h"
#include "fit/stats.h"

#include "base/counter_rng.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { MAX_REDRAWS = 1000 };

/* Draw k samples with replacement into count; true when enough different molar masses are among
 * them to fit. Each resample has its own stream, so that their order and number do not matter. */
static bool draw(const ce_fitting *f, uint64_t resample, double *count)
{
    size_t k = f->n_standards;
    ce_counter_rng rng = ce_counter_rng_start(f->fit->options.seed, resample);
    for (int again = 0; again < MAX_REDRAWS; again++) {
        size_t distinct = 0;
        memset(count, 0, k * sizeof *count);
        for (size_t i = 0; i < k; i++) {
            size_t j = (size_t)ce_counter_rng_below(&rng, k);
            distinct += count[j] == 0;
            count[j]++;
        }
        if (distinct >= f->model->p + 1) return true;
    }
    return false;
}

static void set_counts(ce_fitting *f, const double *count)
{
    for (size_t i = 0; i < f->n; i++) f->point[i].count = count[f->sample[i]];
}

/* One fit with these counts from the solution; its parameters into column i of the table. */
static bool fit_counts(ce_fitting *f, const double *count, const double *theta, double *table,
                       size_t i, size_t rows)
{
    set_counts(f, count);
    memcpy(f->eiv.theta, theta, sizeof f->eiv.theta);
    if (ce_eiv_refit(&f->eiv, NULL) != CE_OK) return false;
    for (size_t j = 0; j < f->model->p; j++) table[j * rows + i] = f->eiv.theta[j];
    return true;
}

/* Leave-one-out fits for the acceleration; how many could be fitted. */
static size_t jackknife(ce_fitting *f, const double *theta, double *count, double *table)
{
    size_t k = f->n_standards, done = 0;
    for (size_t j = 0; j < k; j++) {
        for (size_t i = 0; i < k; i++) count[i] = i != j;
        done += fit_counts(f, count, theta, table, done, k);
    }
    return done;
}

ce_status ce_resample(ce_fitting *f, ce_error *err)
{
    ce_fit *fit = f->fit;
    size_t b = fit->options.resamples, k = f->n_standards, p = f->model->p;
    if (b < 100 || b > 10000000)
        return ce_fail(err, CE_E_ARG, "resamples must be 100 to 10000000, they are %zu", b);
    double theta[CE_MAX_PARAMETERS];
    double *table = calloc(b * p, sizeof *table), *jack = calloc(k * p, sizeof *jack);
    double *count = calloc(k, sizeof *count);
    ce_status status = table == NULL || jack == NULL || count == NULL ? CE_E_NOMEM : CE_OK;
    for (size_t j = 0; j < p; j++) theta[j] = fit->parameter[j].value;
    for (size_t j = p; j < CE_MAX_PARAMETERS; j++) theta[j] = 0;
    if (status == CE_OK) {
        size_t done = 0, jacks = jackknife(f, theta, count, jack);
        for (size_t i = 0; i < b; i++)
            if (draw(f, i, count)) done += fit_counts(f, count, theta, table, done, b);
        fit->n_resampled = done;
        for (size_t j = 0; j < p && done >= 2; j++) {
            ce_bca c = ce_bca_limits(done, table + j * b, theta[j], jacks, jack + j * k,
                                     fit->options.level);
            fit->resampled[j] = (ce_resampled){.sd = c.sd,
                                               .bias = c.mean - theta[j],
                                               .percentile_low = c.percentile_low,
                                               .percentile_high = c.percentile_high,
                                               .bca_low = c.low,
                                               .bca_high = c.high};
        }
    }
    free(table);
    free(jack);
    free(count);
    return status == CE_OK ? CE_OK : ce_fail(err, status, "out of memory");
}
