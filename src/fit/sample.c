/* SPDX-License-Identifier: GPL-3.0-or-later
 * From the standards to the points of the fit. */
#include "fit/fitting.h"
#include "fit/stats.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static double stated(const ce_standard *s, size_t i)
{
    return s->tg_u_K == NULL ? (double)NAN : s->tg_u_K[i];
}

static ce_status check_molar(const ce_standard *s, ce_error *err)
{
    double mn = s->molar.mn_g_mol, mw = s->molar.mw_g_mol, u = s->mn_u_g_mol;
    if (!(mn > 0) || !isfinite(mn))
        return ce_fail(err, CE_E_DOMAIN,
                       "standard '%s': Mn must be a positive number of g/mol, it is %g", s->name,
                       mn);
    if (u < 0 || isinf(u))
        return ce_fail(err, CE_E_DOMAIN,
                       "standard '%s': the uncertainty of Mn must not be negative", s->name);
    if (u >= mn)
        return ce_fail(err, CE_E_DOMAIN,
                       "standard '%s': the uncertainty of Mn (%g g/mol) is not smaller than Mn "
                       "(%g g/mol); check its unit",
                       s->name, u, mn);
    if (!isnan(mw) && !(mw > 0 && isfinite(mw)))
        return ce_fail(err, CE_E_DOMAIN, "standard '%s': Mw must be positive, it is %g", s->name,
                       mw);
    if (!(s->molar.chain_ends >= 0) || !isfinite(s->molar.chain_ends))
        return ce_fail(err, CE_E_DOMAIN, "standard '%s': chain ends must be 0 or more, they are %g",
                       s->name, s->molar.chain_ends);
    return CE_OK;
}

static ce_status check_readings(const ce_standard *s, ce_error *err)
{
    if (s->n == 0)
        return ce_fail(err, CE_E_DOMAIN, "standard '%s' has no run; leave it out or give it a Tg",
                       s->name);
    if (!isfinite(s->rate_decades))
        return ce_fail(err, CE_E_DOMAIN, "standard '%s': its heating rate is not known", s->name);
    for (size_t i = 0; i < s->n; i++) {
        if (!(s->tg_K[i] > 0) || !isfinite(s->tg_K[i]))
            return ce_fail(
                err, CE_E_DOMAIN,
                "standard '%s', run %zu: Tg must be a positive temperature in kelvin, it "
                "is %g",
                s->name, i + 1, s->tg_K[i]);
        double u = stated(s, i);
        if (u < 0 || isinf(u) || u == 0)
            return ce_fail(err, CE_E_DOMAIN,
                           "standard '%s', run %zu: a stated uncertainty of Tg must be positive",
                           s->name, i + 1);
    }
    return CE_OK;
}

static int rising(const void *l, const void *r)
{
    double a = *(const double *)l, b = *(const double *)r;
    return (a > b) - (a < b);
}

/* Molar masses the relation can tell apart. 0 when out of memory. */
static size_t count_distinct(const ce_fitting *f)
{
    double *x = f->n_standards == 0 ? NULL : calloc(f->n_standards, sizeof *x);
    if (x == NULL) return 0;
    for (size_t i = 0; i < f->n_standards; i++)
        x[i] = ce_relation_abscissa(f->fit->options.relation, &f->standard[i].molar);
    qsort(x, f->n_standards, sizeof *x, rising);
    size_t n = 1;
    for (size_t i = 1; i < f->n_standards; i++) n += x[i] - x[i - 1] > 1e-9 * fabs(x[i]);
    free(x);
    return n;
}

static ce_status check_count(const ce_fitting *f, ce_error *err)
{
    size_t need = f->model->p + 1, distinct = count_distinct(f);
    const char *name = ce_relation_name(f->fit->options.relation);
    if (distinct == 0) return ce_fail(err, CE_E_NOMEM, "out of memory");
    if (distinct >= need) return CE_OK;
    if (f->n_standards < need)
        return ce_fail(err, CE_E_NOFIT,
                       "%zu standard%s, but %s has %zu parameters and needs at least %zu with "
                       "different molar masses; add standards",
                       f->n_standards, f->n_standards == 1 ? "" : "s", name, f->model->p, need);
    bool rings = true;
    for (size_t j = 0; j < f->n_standards; j++)
        rings &= ce_relation_abscissa(f->fit->options.relation, &f->standard[j].molar) == 0;
    if (rings && distinct == 1)
        return ce_fail(
            err, CE_E_NOFIT,
            "no standard has a chain end, so %s cannot depend on the molar mass; add linear "
            "standards",
            name);
    if (distinct == 1)
        return ce_fail(
            err, CE_E_NOFIT,
            "all %zu standards have the same molar mass, so nothing can be fitted to it; "
            "add standards of other molar masses",
            f->n_standards);
    return ce_fail(err, CE_E_NOFIT,
                   "only %zu different molar masses, but %s has %zu parameters and needs at least "
                   "%zu; add standards of other molar masses",
                   distinct, name, f->model->p, need);
}

static ce_status check(const ce_fitting *f, ce_error *err)
{
    bool need_mw = f->fit->options.relation == CE_OGAWA;
    for (size_t i = 0; i < f->n_standards; i++) {
        ce_status status = check_molar(&f->standard[i], err);
        if (status == CE_OK) status = check_readings(&f->standard[i], err);
        if (status != CE_OK) return status;
        if (need_mw && isnan(f->standard[i].molar.mw_g_mol))
            return ce_fail(err, CE_E_DOMAIN,
                           "standard '%s' has no Mw, which %s needs; state Mw or the dispersity",
                           f->standard[i].name, ce_relation_name(CE_OGAWA));
    }
    return check_count(f, err);
}

/* ---- run scatter ---------------------------------------------------------------------------- */

typedef struct {
    double ss, nu;            /* within samples                         */
    size_t runs, with_stated; /* all runs; those with a stated uncertainty */
    double square;            /* sum of the squared stated ones         */
} scatter_sum;

static scatter_sum sum_scatter(const ce_fitting *f)
{
    scatter_sum sum = {0};
    for (size_t j = 0; j < f->n_standards; j++) {
        const ce_standard *s = &f->standard[j];
        double mean = 0;
        for (size_t i = 0; i < s->n; i++) mean += s->tg_K[i] / (double)s->n;
        for (size_t i = 0; i < s->n; i++) {
            double u = stated(s, i);
            sum.ss += (s->tg_K[i] - mean) * (s->tg_K[i] - mean);
            if (!isnan(u)) sum.with_stated++, sum.square += u * u;
        }
        sum.nu += (double)(s->n - 1);
        sum.runs += s->n;
    }
    /* A slope fitted within the samples has used up one degree of freedom. */
    if (f->fit->options.rate_slope_u_K > 0) sum.nu -= 1;
    return sum;
}

static ce_status need_stated(const ce_fitting *f, ce_error *err)
{
    for (size_t j = 0; j < f->n_standards; j++)
        for (size_t i = 0; i < f->standard[j].n; i++)
            if (isnan(stated(&f->standard[j], i)))
                return ce_fail(err, CE_E_REFUSED,
                               "standard '%s', run %zu has no stated uncertainty of Tg; state one "
                               "for every run, or take the scatter from repeats",
                               f->standard[j].name, i + 1);
    return CE_OK;
}

static ce_status settle_scatter(ce_fitting *f, const scatter_sum *sum, ce_error *err)
{
    ce_scatter *scatter = &f->fit->options.scatter;
    bool automatic = *scatter == CE_SCATTER_AUTO;
    if (automatic)
        *scatter = sum->nu > 0                     ? CE_SCATTER_REPEATS
                   : sum->with_stated == sum->runs ? CE_SCATTER_STATED
                                                   : CE_SCATTER_RESIDUALS;
    if (*scatter == CE_SCATTER_REPEATS && !(sum->nu > 0))
        return ce_fail(err, CE_E_REFUSED,
                       "no standard has a repeat, so the scatter of a run is not known; measure at "
                       "least one standard again, or state the uncertainty of each Tg");
    if (*scatter == CE_SCATTER_REPEATS && !(sum->ss > 0))
        return ce_fail(err, CE_E_REFUSED,
                       "the repeats of every standard agree to the last digit, so they say nothing "
                       "about scatter; give more digits, or state the uncertainty of each Tg");
    if (*scatter == CE_SCATTER_STATED) return need_stated(f, err);
    if (*scatter == CE_SCATTER_RESIDUALS && automatic && f->mn_uncertain)
        return ce_fail(
            err, CE_E_REFUSED,
            "one run per standard and no stated uncertainty of Tg, while Mn is uncertain: "
            "the residuals cannot tell the two apart; measure repeats, state the "
            "uncertainty of each Tg, or ask for scatter from residuals");
    return CE_OK;
}

/* ---- points --------------------------------------------------------------------------------- */

/* Mean of a standard and its variance: inverse-variance weights for stated uncertainties. */
static void mean_of(const ce_fitting *f, const ce_standard *s, double *mean, double *var)
{
    bool weighted = f->fit->options.scatter == CE_SCATTER_STATED;
    double sw = 0, swy = 0, base = s->tg_K[0], sd = f->fit->run_sd_K;
    for (size_t i = 0; i < s->n; i++) {
        double u = weighted ? s->tg_u_K[i] : 1, w = 1 / (u * u);
        sw += w;
        swy += w * (s->tg_K[i] - base);
    }
    *mean = base + swy / sw;
    *var = weighted ? 1 / sw : sd * sd / (double)s->n;
}

static ce_eiv_point make_point(const ce_standard *s, double y, double var, bool exact)
{
    double z = 1 / s->molar.mn_g_mol, u = isnan(s->mn_u_g_mol) || exact ? 0 : s->mn_u_g_mol;
    return (ce_eiv_point){.z = z,
                          .sd_z = z * (u / s->molar.mn_g_mol),
                          .y = y,
                          .var_y = var,
                          .count = 1,
                          .chain = ce_chain_of(&s->molar)};
}

static void fill_points(ce_fitting *f)
{
    size_t at = 0, run = 0;
    for (size_t j = 0; j < f->n_standards; j++) {
        const ce_standard *s = &f->standard[j];
        ce_fit_point *q = &f->fit->point[j];
        double mean, var;
        mean_of(f, s, &mean, &var);
        *q = (ce_fit_point){.name = q->name,
                            .molar = s->molar,
                            .mn_u_g_mol = isnan(s->mn_u_g_mol) || f->on_runs ? 0 : s->mn_u_g_mol,
                            .mn_u_stated = s->mn_u_g_mol,
                            .mn_adjusted = s->molar.mn_g_mol,
                            .n = s->n,
                            .first_run = run,
                            .tg_K = mean,
                            .tg_u_K = sqrt(var)};
        for (size_t i = 0; i < s->n; i++, run++) {
            f->fit->run[run] = (ce_fit_run){.point = j,
                                            .tg_K = s->tg_K[i],
                                            .tg_u_K = stated(s, i),
                                            .residual_K = s->tg_K[i] - mean,
                                            .leverage = 1 / (double)s->n,
                                            .deleted_t = (double)NAN,
                                            .deleted_p = (double)NAN};
            if (!f->on_runs) continue;
            f->sample[at] = j;
            f->var_run[at] = 1;
            f->point[at++] = make_point(s, s->tg_K[i], 1, true);
        }
        if (f->on_runs) continue;
        f->sample[at] = j;
        f->var_run[at] = var;
        f->point[at++] = make_point(s, mean, var, false);
    }
}

static ce_status allocate(ce_fitting *f, size_t runs)
{
    ce_fit *fit = f->fit;
    f->n = f->on_runs ? runs : f->n_standards;
    fit->point = calloc(f->n_standards, sizeof *fit->point);
    fit->run = calloc(runs, sizeof *fit->run);
    f->point = calloc(f->n, sizeof *f->point);
    f->var_run = calloc(f->n, sizeof *f->var_run);
    f->sample = calloc(f->n, sizeof *f->sample);
    if (fit->point == NULL || fit->run == NULL || f->point == NULL || f->var_run == NULL ||
        f->sample == NULL)
        return CE_E_NOMEM;
    fit->n_points = f->n_standards;
    fit->n_runs = runs;
    for (size_t j = 0; j < f->n_standards; j++) {
        fit->point[j].name = strdup(f->standard[j].name == NULL ? "" : f->standard[j].name);
        if (fit->point[j].name == NULL) return CE_E_NOMEM;
    }
    return CE_OK;
}

ce_status ce_prepare(ce_fitting *f, ce_error *err)
{
    ce_status status = check(f, err);
    if (status != CE_OK) return status;
    for (size_t j = 0; j < f->n_standards; j++) {
        f->mn_uncertain |= f->standard[j].mn_u_g_mol > 0;
        f->mn_unstated |= isnan(f->standard[j].mn_u_g_mol);
    }
    scatter_sum sum = sum_scatter(f);
    status = settle_scatter(f, &sum, err);
    if (status != CE_OK) return status;
    f->on_runs = f->fit->options.scatter == CE_SCATTER_RESIDUALS;
    bool repeats = f->fit->options.scatter == CE_SCATTER_REPEATS;
    f->fit->run_sd_K = repeats ? sqrt(sum.ss / sum.nu) : sqrt(sum.square / (double)sum.runs);
    f->fit->run_nu = repeats ? sum.nu : (double)INFINITY;
    if (allocate(f, sum.runs) != CE_OK) return ce_fail(err, CE_E_NOMEM, "out of memory");
    fill_points(f);
    return CE_OK;
}

void ce_fitting_free(ce_fitting *f)
{
    ce_eiv_free(&f->eiv);
    free(f->point);
    free(f->var_run);
    free(f->sample);
}
