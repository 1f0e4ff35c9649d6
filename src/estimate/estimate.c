/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/budget.h"
#include "estimate/interval.h"
#include "estimate/law.h"

#include <gsl/gsl_math.h>

#include <math.h>

const char *ce_bound_name(ce_bound bound)
{
    switch (bound) {
    case CE_TWO_SIDED:
        return "two-sided";
    case CE_LOWER_ONLY:
        return "lower-only";
    case CE_ABOVE_PLATEAU:
        return "above-plateau";
    case CE_UNDETERMINED:
        return "undetermined";
    }
    return "unknown";
}

const char *ce_estimate_flag_text(unsigned bit)
{
    switch (bit) {
    case CE_EST_BELOW_STANDARDS:
        return "extrapolated below the smallest standard: the relation is not checked there";
    case CE_EST_ABOVE_STANDARDS:
        return "extrapolated above the largest standard: the relation is not checked there";
    case CE_EST_HIGH_ABSURD:
        return "the upper limit is more than ten times the largest standard: read it as open";
    case CE_EST_SCATTERED:
        return "the readings scatter more than the runs of the standards do: their own scatter is "
               "used; "
               "look for a reason";
    case CE_EST_TOO_QUIET:
        return "the readings agree better than runs can: are they repeats of the whole "
               "measurement?";
    case CE_EST_FALLING:
        return "the fitted Tg falls with rising Mn: this is not an effect of chain ends";
    case CE_EST_CURVE_EXTENDED:
        return "a limit lies outside the standards, where the relation is not checked";
    default:
        return "";
    }
}

/* The fitted line in the abscissa x = coefficient z^power, with what is common to the standards
 * (and, for the rate, to the reading) as one more vector each: Tg = a - K x has gradient (1, -x).
 */
static ce_straight straight_line(const ce_law *law)
{
    const ce_fit *fit = &law->fit;
    const double *c = fit->covariance;
    double mn[2] = {0.0, 0.0};
    double rate[2] = {fit->rate_common_shift[0] - law->rate_K, fit->rate_common_shift[1]};
    if (law->common_mn) {
        mn[0] = fit->mn_common_shift[0];
        mn[1] = fit->mn_common_shift[1];
    }
    return (ce_straight){.a = fit->parameter[0].value,
                         .b = -fit->parameter[1].value,
                         .var_a = c[0] + mn[0] * mn[0] + rate[0] * rate[0],
                         .var_b = c[fit->p + 1] + mn[1] * mn[1] + rate[1] * rate[1],
                         .cov_ab = -(c[1] + mn[0] * mn[1] + rate[0] * rate[1])};
}

typedef struct {
    const ce_law *law;
    double t2;
} test_context;

/* (y - f)^2 - t^2 variance: positive where the reading rejects the molar mass. */
static double test_outside(double ln_z, void *context)
{
    const test_context *c = context;
    ce_held held;
    if (ce_law_hold(c->law, exp(ln_z), &held) != CE_OK) return (double)NAN;
    double d = c->law->mean_K - held.at.tg_K;
    return d * d - c->t2 * held.variance;
}

/* Molar masses searched when there is no closed form: from a monomer to a thousand times the
 * largest standard; towards infinity the walk goes on until the asymptote has its say. */
static ce_status invert_nonlinear(const ce_law *law, double z0, double t, ce_set *set,
                                  ce_error *err)
{
    test_context context = {.law = law, .t2 = t * t};
    ce_held plateau;
    double low, high;
    if (ce_law_hold(law, 0.0, &plateau) != CE_OK)
        return ce_fail(err, CE_E_DOMAIN, "the relation has no asymptote");
    if (!ce_fit_span(&law->fit, &low, &high)) low = 1e3, high = 1e6;
    double d = law->mean_K - plateau.at.tg_K;
    ce_walk walk = {.outside = test_outside,
                    .context = &context,
                    .at_zero = d * d - t * t * plateau.variance,
                    .ln_low = -log(1e3 * high),
                    .ln_high = -log(fmin(1.0, 1e-2 * low)),
                    .ln_estimate = z0 > 0.0 ? log(z0) : (double)NAN,
                    .nodes = 480};
    return ce_invert_test(&walk, set, err);
}

static ce_set in_z(const ce_set *x, double coefficient, double power)
{
    ce_set z = *x;
    for (size_t i = 0; i < x->n; i++) {
        z.low[i] = pow(x->low[i] / coefficient, 1.0 / power);
        z.high[i] = pow(x->high[i] / coefficient, 1.0 / power);
    }
    return z;
}

static ce_status find_set(const ce_law *law, double z0, ce_estimate *e, ce_set *set, ce_error *err)
{
    double coefficient, power;
    ce_straight line = straight_line(law);
    e->g = ce_fieller_g(&line, e->t);
    if (!ce_law_linear(law, &coefficient, &power)) return invert_nonlinear(law, z0, e->t, set, err);
    ce_set x = ce_fieller(&line, law->mean_K, ce_law_reading_variance(law), e->t);
    x = ce_set_not_negative(&x);
    *set = in_z(&x, coefficient, power);
    return CE_OK;
}

/* Section "classification" of chainend-methods(7): what the set in z >= 0 says about Mn. */
static void classify(const ce_set *z, ce_estimate *e)
{
    e->low_g_mol = e->high_g_mol = (double)NAN;
    if (z->n == 0) {
        e->bound = CE_ABOVE_PLATEAU;
        return;
    }
    bool open_above = z->low[0] == 0.0, open_below = isinf(z->high[z->n - 1]);
    bool significant = e->g < 1.0;
    e->disjoint = z->n == 2;
    if (e->disjoint) {
        e->bound = CE_UNDETERMINED;
        e->low_g_mol = 1.0 / z->low[1];
        e->high_g_mol = 1.0 / z->high[0];
        return;
    }
    if (!open_below) e->low_g_mol = 1.0 / z->high[0];
    if (!open_above) e->high_g_mol = 1.0 / z->low[0];
    e->bound = !significant || open_below ? CE_UNDETERMINED
               : open_above               ? CE_LOWER_ONLY
                                          : CE_TWO_SIDED;
}

static bool beyond(double value, double low, double high)
{
    return value < low * (1.0 - 1e-9) || value > high * (1.0 + 1e-9);
}

/* Outside the standards, and how far. */
static void mark_extrapolation(const ce_law *law, ce_estimate *e)
{
    double low, high;
    if (law->fit.parameter[1].value < 0.0 && ce_relation_parameters(law->fit.options.relation) == 2)
        e->flags |= CE_EST_FALLING;
    e->cap_g_mol = (double)NAN;
    if (!ce_fit_span(&law->fit, &low, &high)) return;
    e->cap_g_mol = 10.0 * high;
    double where = isfinite(e->mn_g_mol) ? e->mn_g_mol : e->low_g_mol;
    e->below_standards = where < low * (1.0 - 1e-9);
    e->above_standards = where > high * (1.0 + 1e-9);
    if (e->below_standards) e->flags |= CE_EST_BELOW_STANDARDS;
    if (e->above_standards) e->flags |= CE_EST_ABOVE_STANDARDS;
    if (e->high_g_mol > e->cap_g_mol && !e->disjoint) e->flags |= CE_EST_HIGH_ABSURD;
    if (beyond(e->low_g_mol, low, high) || beyond(e->high_g_mol, low, high))
        e->flags |= CE_EST_CURVE_EXTENDED;
}

/* z of the point estimate; 0 at and above the plateau; an error where nothing can be read off. */
static ce_status point_estimate(const ce_law *law, double *z0, ce_error *err)
{
    double mn;
    *z0 = 0.0;
    ce_status st = ce_fit_mn(&law->fit, law->mean_K, &law->like, &mn);
    if (st == CE_OK && mn > 0.0 && isfinite(mn)) *z0 = 1.0 / mn;
    if (st == CE_OK || st == CE_E_DOMAIN) {
        if (!(law->like.chain_ends > 0.0))
            return ce_fail(err, CE_E_DOMAIN,
                           "a molecule without chain ends: the relation says nothing about its Mn");
        return CE_OK;
    }
    return ce_fail(err, st, "no molar mass can be read off the relation");
}

ce_status ce_estimate_law(const ce_law *law, ce_estimate *e, ce_error *err)
{
    *e = (ce_estimate){.level = law->level,
                       .tg_K = law->mean_K,
                       .u_K = sqrt(ce_law_reading_variance(law)),
                       .mn_g_mol = (double)NAN,
                       .u_log = (double)NAN,
                       .flags = law->flags,
                       .run_sd_K = law->run_sd_K,
                       .run_nu = law->var_own > 0.0 ? law->nu_own : law->fit.run_nu,
                       .own_sd_K = law->own_sd_K,
                       .pooled = law->pooled};
    double z0;
    ce_held held;
    ce_set set;
    ce_status st = point_estimate(law, &z0, err);
    if (st == CE_OK && (st = ce_law_hold(law, z0, &held)) != CE_OK)
        st = ce_fail(err, st, "the relation cannot be evaluated for this unknown (is Mw needed?)");
    if (st != CE_OK) return st;
    e->nu = ce_law_nu(law, &held);
    e->t = ce_student(law->level, e->nu);
    if (!isfinite(e->t))
        return ce_fail(err, CE_E_DOMAIN, "no degrees of freedom left for an interval");
    st = find_set(law, z0, e, &set, err);
    if (st != CE_OK) return st;
    classify(&set, e);
    if (z0 > 0.0) {
        e->mn_g_mol = 1.0 / z0;
        e->u_log = sqrt(held.variance) / fabs(held.at.dtg_dmn * e->mn_g_mol);
    }
    mark_extrapolation(law, e);
    ce_budget_fill(law, &held, e);
    return CE_OK;
}

ce_status ce_estimate_mn(const ce_fit *fit, const ce_unknown *unknown, double level,
                         ce_estimate *estimate, ce_error *err)
{
    ce_law law;
    ce_status st = ce_law_prepare(&law, fit, unknown, level, err);
    if (st == CE_OK) st = ce_estimate_law(&law, estimate, err);
    if (st != CE_OK) *estimate = (ce_estimate){0};
    return st;
}

ce_status ce_estimate_tg(const ce_fit *fit, const ce_molar *molar, double mn_u_rel, size_t runs,
                         double level, ce_tg_estimate *e, ce_error *err)
{
    *e = (ce_tg_estimate){0};
    if (level == 0.0) level = fit->options.level;
    if (!(level > 0.0 && level < 1.0) || runs == 0)
        return ce_fail(err, CE_E_ARG, "level must lie between 0 and 1, runs must be 1 or more");
    if (!(mn_u_rel >= 0.0 && mn_u_rel < 1.0))
        return ce_fail(err, CE_E_ARG, "the relative uncertainty of Mn must lie between 0 and 1");
    ce_prediction at;
    if (!(molar->mn_g_mol > 0.0) || ce_fit_predict(fit, molar, &at) != CE_OK)
        return ce_fail(err, CE_E_DOMAIN, "no Tg at a molar mass of %g g/mol (is Mw needed?)",
                       molar->mn_g_mol);
    double rate = at.common_rate_K * at.common_rate_K;
    double from_mn = isfinite(molar->mn_g_mol) ? at.dtg_dmn * molar->mn_g_mol * mn_u_rel : 0.0;
    double run = fit->run_sd_K * fit->run_sd_K / (double)runs;
    double sample = fit->excess_tau_K * fit->excess_tau_K;
    double mean = at.var_fit + rate, whole = mean + run + sample + from_mn * from_mn;
    *e = (ce_tg_estimate){.mn_g_mol = molar->mn_g_mol,
                          .tg_K = at.tg_K,
                          .u_mean_K = sqrt(mean),
                          .u_K = sqrt(whole),
                          .level = level,
                          .u_scale_K = fabs(at.common_tg_K)};
    e->nu_mean = ce_fit_nu_parts(fit, &at, 0.0, 0.0, rate);
    e->nu = ce_fit_nu_parts(fit, &at, run, sample, rate + from_mn * from_mn);
    double t_mean = ce_student(level, e->nu_mean), t = ce_student(level, e->nu);
    e->mean_low_K = at.tg_K - t_mean * e->u_mean_K;
    e->mean_high_K = at.tg_K + t_mean * e->u_mean_K;
    e->low_K = at.tg_K - t * e->u_K;
    e->high_K = at.tg_K + t * e->u_K;
    double low, high;
    if (ce_fit_span(fit, &low, &high)) {
        e->below_standards = molar->mn_g_mol < low * (1.0 - 1e-9);
        e->above_standards = molar->mn_g_mol > high * (1.0 + 1e-9);
    }
    return CE_OK;
}
