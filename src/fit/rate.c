/* SPDX-License-Identifier: GPL-3.0-or-later
 * Heating rate: parallel lines of Tg against log10 of the rate, one line a sample. */
#include "fit/stats.h"

#include <chainend/fit.h>

#include <math.h>
#include <stdlib.h>

typedef struct {
    size_t sample;
    double x, y; /* decades from the reference rate; K */
} rated_run;

static int by_sample(const void *l, const void *r)
{
    const rated_run *a = l, *b = r;
    if (a->sample != b->sample) return a->sample < b->sample ? -1 : 1;
    return (a->x > b->x) - (a->x < b->x);
}

typedef struct {
    double xx, xy, yy, nu; /* within samples, pooled; nu before the slope          */
    double separate;       /* residual sum with a slope of its own in each sample  */
    size_t slopes, runs;   /* samples at two rates or more; their runs             */
} pooled;

static void add_sample(pooled *all, const rated_run *run, size_t n)
{
    double mx = 0, my = 0, xx = 0, xy = 0, yy = 0;
    for (size_t i = 0; i < n; i++) mx += run[i].x / (double)n, my += run[i].y / (double)n;
    for (size_t i = 0; i < n; i++) {
        double dx = run[i].x - mx, dy = run[i].y - my;
        xx += dx * dx, xy += dx * dy, yy += dy * dy;
    }
    bool sloped = run[n - 1].x - run[0].x > 1e-9;
    all->nu += (double)(n - 1);
    all->yy += yy;
    all->separate += yy;
    if (!sloped) return;
    all->xx += xx, all->xy += xy;
    all->separate -= xy * xy / xx;
    all->slopes++;
    all->runs += n;
}

static ce_status check(size_t n, const double *tg_K, const double *rate, double reference,
                       ce_error *err)
{
    if (!(reference > 0) || !isfinite(reference))
        return ce_fail(err, CE_E_DOMAIN,
                       "the reference heating rate must be positive, it is %g K/min", reference);
    for (size_t i = 0; i < n; i++) {
        if (!(rate[i] > 0) || !isfinite(rate[i]))
            return ce_fail(err, CE_E_DOMAIN,
                           "run %zu: the heating rate must be positive, it is %g K/min", i + 1,
                           rate[i]);
        if (!isfinite(tg_K[i])) return ce_fail(err, CE_E_DOMAIN, "run %zu has no Tg", i + 1);
    }
    return CE_OK;
}

ce_status ce_rate_slope_fit(size_t n, const size_t *sample, const double *tg_K,
                            const double *rate_K_min, double reference_K_min, ce_rate_slope *slope,
                            ce_error *err)
{
    *slope = (ce_rate_slope){
        .slope_K_decade = (double)NAN, .parallel_F = (double)NAN, .parallel_p = (double)NAN};
    ce_status status = check(n, tg_K, rate_K_min, reference_K_min, err);
    if (status != CE_OK) return status;
    rated_run *run = calloc(n > 0 ? n : 1, sizeof *run);
    if (run == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    for (size_t i = 0; i < n; i++)
        run[i] = (rated_run){sample[i], log10(rate_K_min[i] / reference_K_min), tg_K[i]};
    qsort(run, n, sizeof *run, by_sample);
    pooled all = {0};
    for (size_t i = 0, j; i < n; i = j) {
        for (j = i + 1; j < n && run[j].sample == run[i].sample;) j++;
        add_sample(&all, run + i, j - i);
    }
    free(run);
    if (all.slopes == 0)
        return ce_fail(
            err, CE_E_NOFIT,
            "no sample was measured at two heating rates, so the effect of the rate is not "
            "known; measure one at the reference rate of %g K/min too",
            reference_K_min);
    if (!(all.nu - 1 > 0))
        return ce_fail(
            err, CE_E_NOFIT,
            "two runs at two heating rates give a slope but not its uncertainty; measure a "
            "further run");
    double b = all.xy / all.xx, rss = fmax(all.yy - b * all.xy, 0), nu = all.nu - 1;
    *slope = (ce_rate_slope){.slope_K_decade = b,
                             .u_K_decade = sqrt(rss / nu / all.xx),
                             .nu = nu,
                             .reference_K_min = reference_K_min,
                             .run_sd_K = sqrt(rss / nu),
                             .n_runs = all.runs,
                             .n_samples = all.slopes,
                             .parallel_F = (double)NAN,
                             .parallel_p = (double)NAN};
    double more = (double)all.slopes - 1, rest = nu - more;
    if (more > 0 && rest > 0 && all.separate > 0) {
        slope->parallel_F = fmax(rss - all.separate, 0) / more / (all.separate / rest);
        slope->parallel_p = ce_f_upper(slope->parallel_F, more, rest);
    }
    return CE_OK;
}

double ce_rate_reduce(const ce_rate_slope *slope, double tg_K, double rate_K_min, double *decades)
{
    double x = rate_K_min > 0 ? log10(rate_K_min / slope->reference_K_min) : (double)NAN;
    if (decades != NULL) *decades = x;
    return tg_K - slope->slope_K_decade * x;
}
