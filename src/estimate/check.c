/* SPDX-License-Identifier: GPL-3.0-or-later
 * Does a calibration still hold? Controls, control chart and drift. */
#include <chainend/estimate.h>

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static const double warning_limit = 2.0, action_limit = 3.0; /* ISO 7870-2 */
static const double year_days = 365.25, scatter_alpha = 0.01;

static double two_sided_p(double t, double nu)
{
    if (isinf(nu)) return 2.0 * gsl_cdf_ugaussian_Q(fabs(t));
    return 2.0 * gsl_cdf_tdist_Q(fabs(t), nu);
}

static double factor(double level, double nu)
{
    return isinf(nu) ? gsl_cdf_ugaussian_Qinv(0.5 * (1.0 - level))
                     : gsl_cdf_tdist_Qinv(0.5 * (1.0 - level), nu);
}

/* Expected Tg at the certified Mn; variances that one run and any number of runs have. */
typedef struct {
    ce_prediction at;
    double var_run, var_certificate, var_sample;
} expectation;

static ce_status expect(const ce_fit *fit, const ce_control *c, expectation *e, ce_error *err)
{
    const double u = c->mn_u_g_mol > 0.0 ? c->mn_u_g_mol : 0.0;
    if (c->n == 0) return ce_fail(err, CE_E_ARG, "control '%.60s' has no run", c->name);
    if (ce_fit_predict(fit, &c->molar, &e->at) != CE_OK || !isfinite(e->at.tg_K))
        return ce_fail(err, CE_E_DOMAIN, "control '%.60s': the relation gives no Tg at its Mn",
                       c->name);
    e->var_run = fit->run_sd_K * fit->run_sd_K;
    e->var_certificate = e->at.dtg_dmn * u * e->at.dtg_dmn * u;
    e->var_sample = fit->excess_tau_K * fit->excess_tau_K;
    return CE_OK;
}

static void judge_scatter(const ce_fit *fit, const ce_control *c, ce_control_result *r)
{
    double squares = 0.0;
    const double nu = (double)c->n - 1.0;
    r->own_sd_K = (double)NAN;
    if (c->n < 2) return;
    for (size_t i = 0; i < c->n; i++) squares += (c->tg_K[i] - r->tg_K) * (c->tg_K[i] - r->tg_K);
    r->own_sd_K = sqrt(squares / nu);
    const double F = squares / nu / (fit->run_sd_K * fit->run_sd_K);
    const double p =
        isinf(fit->run_nu) ? gsl_cdf_chisq_Q(F * nu, nu) : gsl_cdf_fdist_Q(F, nu, fit->run_nu);
    r->scattered = p < scatter_alpha;
}

static ce_status judge(const ce_fit *fit, const ce_control *c, double level, ce_control_result *r,
                       expectation *e, ce_error *err)
{
    ce_status st = expect(fit, c, e, err);
    if (st != CE_OK) return st;
    for (size_t i = 0; i < c->n; i++) r->tg_K += c->tg_K[i] / (double)c->n;
    const double run = e->var_run / (double)c->n;
    r->n = c->n;
    r->expected_K = e->at.tg_K;
    r->difference_K = r->tg_K - r->expected_K;
    r->u_K = sqrt(run + e->var_sample + e->var_certificate + e->at.var_fit);
    r->nu = ce_fit_nu_parts(fit, &e->at, run, e->var_sample, e->var_certificate);
    r->normalised = r->difference_K / (factor(level, r->nu) * r->u_K);
    r->p = two_sided_p(r->difference_K / r->u_K, r->nu);
    judge_scatter(fit, c, r);
    return CE_OK;
}

/* The weighted mean of the differences: what a shifted temperature scale does to all of them. The
 * curve's own uncertainty is common and does not average out. */
static void common_shift(const ce_control *c, const expectation *e, ce_check *k)
{
    double w = 0.0, sum = 0.0, curve = 0.0, squares = 0.0;
    for (size_t i = 0; i < k->n; i++) {
        const double wi =
            1.0 / (e[i].var_run / (double)c[i].n + e[i].var_sample + e[i].var_certificate);
        w += wi;
        sum += wi * k->item[i].difference_K;
        curve += wi * sqrt(e[i].at.var_fit);
        squares += wi * k->item[i].nu;
    }
    k->shift_K = sum / w;
    k->shift_u_K = hypot(sqrt(1.0 / w), curve / w);
    k->shift_p = two_sided_p(k->shift_K / k->shift_u_K, squares / w);
}

/* ---- chart -------------------------------------------------------------------------------- */

static int by_day(const void *a, const void *b)
{
    const ce_chart_point *x = a, *y = b;
    if (x->day != y->day) return x->day < y->day ? -1 : 1;
    return (x->control > y->control) - (x->control < y->control);
}

static bool beyond(const ce_chart_point *p, double limit, double side)
{
    return p->z * side > limit;
}

static void apply_rules(ce_check *k)
{
    for (size_t i = 0; i < k->n_chart; i++) {
        ce_chart_point *p = &k->chart[i];
        const double side = p->z < 0.0 ? -1.0 : 1.0;
        p->warning = beyond(p, warning_limit, side);
        p->action = beyond(p, action_limit, side);
        for (size_t back = 1; back <= 2 && back <= i && p->warning; back++)
            p->action = p->action || beyond(p - back, warning_limit, side);
        k->n_warnings += p->warning;
        k->n_actions += p->action;
    }
}

static ce_status draw_chart(const ce_control *c, const expectation *e, ce_check *k, ce_error *err)
{
    size_t room = 0;
    for (size_t i = 0; i < k->n; i++) room += c[i].n;
    k->chart = calloc(room, sizeof *k->chart);
    if (k->chart == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    for (size_t i = 0; i < k->n; i++)
        for (size_t j = 0; j < c[i].n; j++) {
            if (c[i].day == NULL || isnan(c[i].day[j])) continue;
            const double u =
                sqrt(e[i].var_run + e[i].var_sample + e[i].var_certificate + e[i].at.var_fit);
            const double d = c[i].tg_K[j] - k->item[i].expected_K;
            k->chart[k->n_chart++] = (ce_chart_point){i, c[i].day[j], d, d / u, false, false};
        }
    if (k->n_chart > 0) qsort(k->chart, k->n_chart, sizeof *k->chart, by_day);
    apply_rules(k);
    return CE_OK;
}

/* One slope over the dates within each control: certificates cancel. Against the scatter of runs the
 * calibration knows. */
static void find_drift(const ce_fit *fit, ce_check *k)
{
    double xx = 0.0, xy = 0.0;
    size_t dates = 0;
    k->drift_K_year = k->drift_u_K_year = k->drift_p = k->drift_nu = (double)NAN;
    for (size_t i = 1; i < k->n_chart; i++) dates += k->chart[i].day > k->chart[i - 1].day;
    if (dates < 2) return;
    for (size_t c = 0; c < k->n; c++) {
        double n = 0.0, x = 0.0, y = 0.0;
        for (size_t i = 0; i < k->n_chart; i++)
            if (k->chart[i].control == c) {
                n += 1.0;
                x += k->chart[i].day;
                y += k->chart[i].difference_K;
            }
        for (size_t i = 0; i < k->n_chart; i++)
            if (k->chart[i].control == c) {
                const double dx = k->chart[i].day - x / n;
                xx += dx * dx;
                xy += dx * (k->chart[i].difference_K - y / n);
            }
    }
    if (!(xx > 0.0)) return;
    k->drift_K_year = xy / xx * year_days;
    k->drift_u_K_year = fit->run_sd_K / sqrt(xx) * year_days;
    k->drift_nu = fit->run_nu;
    k->drift_p = two_sided_p(k->drift_K_year / k->drift_u_K_year, fit->run_nu);
}

ce_status ce_check_calibration(const ce_fit *fit, size_t n, const ce_control *control, double level,
                               ce_check *check, ce_error *err)
{
    *check = (ce_check){.level = level == 0.0 && fit != NULL ? fit->options.level : level, .n = n};
    if (fit == NULL || n == 0 || !(check->level > 0.0 && check->level < 1.0))
        return ce_fail(err, CE_E_ARG, "there is no control to check with");
    check->item = calloc(n, sizeof *check->item);
    expectation *e = calloc(n, sizeof *e);
    ce_status st =
        check->item == NULL || e == NULL ? ce_fail(err, CE_E_NOMEM, "out of memory") : CE_OK;
    for (size_t i = 0; i < n && st == CE_OK; i++)
        st = judge(fit, &control[i], check->level, &check->item[i], &e[i], err);
    if (st == CE_OK) st = draw_chart(control, e, check, err);
    if (st == CE_OK) {
        common_shift(control, e, check);
        find_drift(fit, check);
        /* every control, their common shift, and the drift where there is one */
        const double tests = (double)n + (n > 1 ? 1.0 : 0.0) + (isnan(check->drift_p) ? 0.0 : 1.0);
        check->limit_p = (1.0 - check->level) / tests;
        check->holds = check->n_actions == 0 && !(check->drift_p < check->limit_p) &&
                       !(n > 1 && check->shift_p < check->limit_p);
        for (size_t i = 0; i < n; i++)
            check->holds = check->holds && !(check->item[i].p < check->limit_p);
    }
    free(e);
    if (st != CE_OK) ce_check_free(check);
    return st;
}

void ce_check_free(ce_check *check)
{
    if (check == NULL) return;
    free(check->item);
    free(check->chart);
    *check = (ce_check){0};
}
