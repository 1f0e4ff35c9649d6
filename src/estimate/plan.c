/* SPDX-License-Identifier: GPL-3.0-or-later
 * What to measure next: sequential V-optimal design for the molar masses that matter. */
#include "estimate/design.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_linalg.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { CANDIDATES = 41, P = CE_MAX_PARAMETERS };

ce_plan_options ce_plan_options_default(void)
{
    return (ce_plan_options){.want = (double)NAN,
                             .mn_u_rel = 0.05,
                             .low_g_mol = (double)NAN,
                             .high_g_mol = (double)NAN,
                             .runs_per_standard = 3,
                             .unknown_runs = 1,
                             .most_unknown_runs = 12,
                             .standard_cost = 5.0,
                             .most_steps = 40};
}

static double run_variance(const ce_design *d)
{
    return d->fit->run_sd_K * d->fit->run_sd_K;
}

static double variance_of(const ce_design *d, const ce_design_point *q)
{
    const double tau = d->fit->excess_tau_K;
    return run_variance(d) / q->runs + q->slope_u_K * q->slope_u_K + tau * tau;
}

/* Inverse of the information matrix of the design; false when singular. */
bool ce_design_covariance(const ce_design *d, double C[P * P])
{
    const size_t p = d->fit->p;
    double M[P * P] = {0}, scale[P];
    for (size_t j = 0; j < d->n; j++) {
        const double w = 1.0 / variance_of(d, &d->point[j]);
        for (size_t a = 0; a < p; a++)
            for (size_t b = 0; b < p; b++)
                M[a * p + b] += w * d->point[j].gradient[a] * d->point[j].gradient[b];
    }
    for (size_t a = 0; a < p; a++) scale[a] = M[a * p + a] > 0.0 ? 1.0 / sqrt(M[a * p + a]) : 0.0;
    for (size_t a = 0; a < p; a++)
        for (size_t b = 0; b < p; b++) C[a * p + b] = M[a * p + b] * scale[a] * scale[b];
    gsl_matrix_view v = gsl_matrix_view_array(C, p, p);
    if (gsl_linalg_cholesky_decomp1(&v.matrix) != GSL_SUCCESS ||
        gsl_linalg_cholesky_invert(&v.matrix) != GSL_SUCCESS)
        return false;
    for (size_t a = 0; a < p; a++)
        for (size_t b = 0; b < p; b++) C[a * p + b] *= scale[a] * scale[b];
    return true;
}

/* Student factor with Welch-Satterthwaite degrees: run_part of the variance has those of the runs, which
 * grow with the runs that are added. */
static double factor(const ce_design *d, double total, double run_part)
{
    double nu = d->fit->run_nu;
    if (isfinite(nu))
        for (size_t j = 0; j < d->n; j++)
            nu +=
                d->point[j].runs -
                (d->point[j].point == SIZE_MAX ? 1.0 : (double)d->fit->point[d->point[j].point].n);
    const double tail = 0.5 * (1.0 - d->level);
    if (isinf(nu) || !(run_part > 0.0)) return gsl_cdf_ugaussian_Qinv(tail);
    return gsl_cdf_tdist_Qinv(tail, nu * (total / run_part) * (total / run_part));
}

/* Half-width over Mn at a target; C NULL: a perfect calibration. */
static double half_width(const ce_design *d, const double *C, size_t i, double unknown_runs)
{
    const ce_prediction *at = &d->at[i];
    const size_t p = d->fit->p;
    const double tau = d->fit->excess_tau_K, run = run_variance(d) / unknown_runs;
    double curve = 0.0, rep = 0.0;
    if (C != NULL) {
        double g[P] = {0};
        for (size_t a = 0; a < p; a++)
            for (size_t b = 0; b < p; b++) g[a] += C[a * p + b] * at->gradient[b];
        for (size_t a = 0; a < p; a++) curve += at->gradient[a] * g[a];
        for (size_t j = 0; j < d->n; j++) {
            double l = 0.0;
            for (size_t a = 0; a < p; a++) l += g[a] * d->point[j].gradient[a];
            l /= variance_of(d, &d->point[j]);
            rep += l * l * run_variance(d) / d->point[j].runs;
        }
    }
    const double common = at->common_mn_K * at->common_mn_K;
    const double total = run + tau * tau + curve + common;
    return factor(d, total, run + rep) * sqrt(total) / fabs(at->dtg_dmn) / d->target[i].mn_g_mol;
}

typedef struct {
    double mean_square, worst;
    size_t limiting;
} quality;

static quality rate(const ce_design *d)
{
    double C[P * P];
    quality q = {HUGE_VAL, HUGE_VAL, 0};
    if (!ce_design_covariance(d, C)) return q;
    q = (quality){0.0, 0.0, 0};
    for (size_t i = 0; i < d->n_targets; i++) {
        const double w = half_width(d, C, i, d->unknown_runs);
        q.mean_square += w * w / (double)d->n_targets;
        if (w > q.worst) {
            q.worst = w;
            q.limiting = i;
        }
    }
    return q;
}

ce_status ce_design_make_point(const ce_fit *fit, const ce_molar *molar, double mn_u_g_mol,
                               double runs, size_t point, ce_design_point *q)
{
    ce_prediction at;
    if (ce_fit_predict(fit, molar, &at) != CE_OK) return CE_E_DOMAIN;
    *q = (ce_design_point){.slope_u_K = fabs(at.dtg_dmn) * (mn_u_g_mol > 0.0 ? mn_u_g_mol : 0.0),
                           .mn_g_mol = molar->mn_g_mol,
                           .runs = runs,
                           .point = point};
    memcpy(q->gradient, at.gradient, sizeof q->gradient);
    return CE_OK;
}

static ce_molar linear_chain(double mn_g_mol)
{
    return (ce_molar){.mn_g_mol = mn_g_mol, .mw_g_mol = mn_g_mol, .chain_ends = 2.0};
}

/* The step that gains most for its cost; its gain, 0 when none does. The design is left as it was. */
static double best_step(ce_design *d, const quality *now, ce_plan_step *step)
{
    double best = 0.0;
    if (d->unknown_runs < (double)d->o.most_unknown_runs) {
        d->unknown_runs += 1.0;
        const quality q = rate(d);
        d->unknown_runs -= 1.0;
        best = now->mean_square - q.mean_square;
        *step = (ce_plan_step){CE_PLAN_UNKNOWN_RUN, 0, (double)NAN, 1.0, q.worst, q.mean_square};
    }
    for (size_t j = 0; j < d->n; j++) {
        if (d->point[j].point == SIZE_MAX) continue;
        d->point[j].runs += 1.0;
        const quality q = rate(d);
        d->point[j].runs -= 1.0;
        if (now->mean_square - q.mean_square <= best) continue;
        best = now->mean_square - q.mean_square;
        *step = (ce_plan_step){
            CE_PLAN_STANDARD_RUN, d->point[j].point, d->point[j].mn_g_mol, 1.0, q.worst,
            q.mean_square};
    }
    const double runs = (double)d->o.runs_per_standard, cost = runs + d->o.standard_cost;
    for (int k = 0; k < CANDIDATES; k++) {
        const double mn =
            d->o.low_g_mol * pow(d->o.high_g_mol / d->o.low_g_mol, (double)k / (CANDIDATES - 1));
        const ce_molar molar = linear_chain(mn);
        if (ce_design_make_point(d->fit, &molar, d->o.mn_u_rel * mn, runs, SIZE_MAX,
                                 &d->point[d->n]) != CE_OK)
            continue;
        d->n++;
        const quality q = rate(d);
        d->n--;
        if ((now->mean_square - q.mean_square) / cost <= best) continue;
        best = (now->mean_square - q.mean_square) / cost;
        *step = (ce_plan_step){CE_PLAN_NEW_STANDARD, 0, mn, cost, q.worst, q.mean_square};
    }
    return best;
}

static void take(ce_design *d, const ce_plan_step *step)
{
    const ce_molar molar = linear_chain(step->mn_g_mol);
    switch (step->kind) {
    case CE_PLAN_UNKNOWN_RUN:
        d->unknown_runs += 1.0;
        break;
    case CE_PLAN_STANDARD_RUN:
        for (size_t j = 0; j < d->n; j++)
            if (d->point[j].point == step->point) d->point[j].runs += 1.0;
        break;
    case CE_PLAN_NEW_STANDARD:
        if (ce_design_make_point(d->fit, &molar, d->o.mn_u_rel * step->mn_g_mol,
                                 (double)d->o.runs_per_standard, SIZE_MAX,
                                 &d->point[d->n]) == CE_OK)
            d->n++;
        break;
    }
}

/* A step that gains less than a thousandth of what is left is not worth its run. */
static const double least_gain = 1e-3;

static void walk(ce_design *d, ce_plan *plan)
{
    quality now = rate(d);
    while (plan->n_steps < d->o.most_steps && now.worst > plan->want) {
        ce_plan_step *step = &plan->step[plan->n_steps];
        if (!(best_step(d, &now, step) > least_gain * now.mean_square)) break;
        take(d, step);
        plan->n_steps++;
        now = rate(d);
    }
    double C[P * P];
    const bool good = ce_design_covariance(d, C);
    for (size_t i = 0; i < plan->n_targets; i++)
        plan->target[i].then = good ? half_width(d, C, i, d->unknown_runs) : (double)NAN;
    plan->unknown_runs = (size_t)d->unknown_runs;
    plan->met = now.worst <= plan->want;
    plan->limiting = now.limiting;
}

static ce_status check(const ce_fit *fit, size_t n, const double *mn, const ce_plan_options *o,
                       ce_error *err)
{
    if (fit == NULL || n == 0) return ce_fail(err, CE_E_ARG, "no molar mass to plan for is named");
    if (!(o->want > 0.0 && o->want < 10.0))
        return ce_fail(err, CE_E_ARG, "the wanted half-width must be a positive share of Mn");
    if (o->runs_per_standard == 0 || o->unknown_runs == 0 ||
        o->most_unknown_runs < o->unknown_runs || !(o->mn_u_rel >= 0.0 && o->mn_u_rel < 1.0) ||
        !(o->standard_cost >= 0.0) || o->most_steps > 100000)
        return ce_fail(err, CE_E_ARG, "impossible options of the plan");
    for (size_t i = 0; i < n; i++)
        if (!(mn[i] > 0.0 && isfinite(mn[i])))
            return ce_fail(err, CE_E_DOMAIN, "a molar mass of %g g/mol cannot be planned for",
                           mn[i]);
    return CE_OK;
}

static ce_status set_up(ce_design *d, ce_plan *plan, ce_prediction *at, const double *mn,
                        ce_error *err)
{
    const ce_fit *fit = d->fit;
    double low = HUGE_VAL, high = 0.0;
    for (size_t j = 0; j < fit->n_points; j++) {
        const ce_fit_point *q = &fit->point[j];
        low = fmin(low, q->molar.mn_g_mol);
        high = fmax(high, q->molar.mn_g_mol);
        if (ce_design_make_point(fit, &q->molar, q->mn_u_g_mol, (double)q->n, j,
                                 &d->point[d->n++]) != CE_OK)
            return ce_fail(err, CE_E_DOMAIN, "standard '%.60s' cannot be predicted", q->name);
    }
    if (isnan(d->o.low_g_mol)) d->o.low_g_mol = low;
    if (isnan(d->o.high_g_mol)) d->o.high_g_mol = high;
    if (!(d->o.low_g_mol > 0.0 && d->o.high_g_mol >= d->o.low_g_mol))
        return ce_fail(err, CE_E_ARG, "the range of new standards is empty");
    for (size_t i = 0; i < plan->n_targets; i++) {
        const ce_molar molar = linear_chain(mn[i]);
        if (ce_fit_predict(fit, &molar, &at[i]) != CE_OK || !(fabs(at[i].dtg_dmn) > 0.0))
            return ce_fail(err, CE_E_DOMAIN, "the relation says nothing about Mn at %g g/mol",
                           mn[i]);
        plan->target[i] = (ce_plan_target){.mn_g_mol = mn[i], .tg_K = at[i].tg_K};
    }
    return CE_OK;
}

static void look_around(ce_design *d, ce_plan *plan)
{
    double C[P * P];
    const bool good = ce_design_covariance(d, C);
    plan->reachable = true;
    for (size_t i = 0; i < plan->n_targets; i++) {
        plan->target[i].now = good ? half_width(d, C, i, d->unknown_runs) : (double)NAN;
        plan->target[i].floor = half_width(d, NULL, i, (double)d->o.most_unknown_runs);
        plan->reachable = plan->reachable && plan->target[i].floor <= plan->want;
    }
}

ce_status ce_plan_make(const ce_fit *fit, size_t n, const double *mn_g_mol,
                       const ce_plan_options *options, ce_plan *plan, ce_error *err)
{
    *plan = (ce_plan){0};
    ce_status st = check(fit, n, mn_g_mol, options, err);
    if (st != CE_OK) return st;
    ce_design d = {.fit = fit,
                   .o = *options,
                   .level = options->level == 0.0 ? fit->options.level : options->level,
                   .unknown_runs = (double)options->unknown_runs,
                   .n_targets = n};
    ce_prediction *at = calloc(n, sizeof *at);
    plan->target = calloc(n, sizeof *plan->target);
    plan->step = calloc(options->most_steps + 1, sizeof *plan->step);
    d.point = calloc(fit->n_points + options->most_steps + 1, sizeof *d.point);
    plan->n_targets = n;
    plan->want = options->want;
    plan->level = d.level;
    d.at = at;
    d.target = plan->target;
    if (at == NULL || plan->target == NULL || plan->step == NULL || d.point == NULL)
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    if (st == CE_OK) st = set_up(&d, plan, at, mn_g_mol, err);
    if (st == CE_OK) {
        look_around(&d, plan);
        walk(&d, plan);
    }
    free(at);
    free(d.point);
    if (st != CE_OK) ce_plan_free(plan);
    return st;
}

void ce_plan_free(ce_plan *plan)
{
    if (plan == NULL) return;
    free(plan->target);
    free(plan->step);
    *plan = (ce_plan){0};
}
