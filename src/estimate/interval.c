/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/interval.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_roots.h>

#include <math.h>
#include <stdlib.h>

double ce_fieller_g(const ce_straight *line, double t)
{
    return t * t * line->var_b / (line->b * line->b);
}

static ce_set everything(void)
{
    return (ce_set){.n = 1, .low = {-(double)INFINITY}, .high = {(double)INFINITY}};
}

/* A = 0: the condition 2 B x + C <= 0 is linear. */
static ce_set half_line(double B, double C)
{
    ce_set set = everything();
    if (B > 0.0)
        set.high[0] = -C / (2.0 * B);
    else if (B < 0.0)
        set.low[0] = -C / (2.0 * B);
    else if (C > 0.0)
        set.n = 0;
    return set;
}

ce_set ce_fieller(const ce_straight *line, double y, double v, double t)
{
    double t2 = t * t, d = y - line->a, q = v + line->var_a;
    double A = line->b * line->b - t2 * line->var_b;
    double B = -d * line->b - t2 * line->cov_ab;
    double C = d * d - t2 * q;
    if (A == 0.0) return half_line(B, C);

    /* (B^2 - A C) / t^2 without the terms d^2 b^2, which cancel. */
    double D = line->b * line->b * q + line->var_b * d * d + 2.0 * d * line->b * line->cov_ab -
               t2 * (line->var_b * q - line->cov_ab * line->cov_ab);
    if (D < 0.0 && A < 0.0) return everything();
    double root = t * sqrt(fmax(D, 0.0)); /* D < 0 with A > 0 is rounding only */
    double s = B > 0.0 ? -(B + root) : root - B;
    double x1 = s / A, x2 = s == 0.0 ? 0.0 : C / s;
    double low = fmin(x1, x2), high = fmax(x1, x2);
    if (A > 0.0) return (ce_set){.n = 1, .low = {low}, .high = {high}};
    return (ce_set){.n = 2, .low = {-(double)INFINITY, high}, .high = {low, (double)INFINITY}};
}

ce_set ce_set_not_negative(const ce_set *set)
{
    ce_set kept = {0};
    for (size_t i = 0; i < set->n; i++) {
        if (set->high[i] <= 0.0) continue;
        kept.low[kept.n] = fmax(set->low[i], 0.0);
        kept.high[kept.n++] = set->high[i];
    }
    return kept;
}

double ce_bracketed_root(double (*f)(double, void *), void *context, double low, double high)
{
    double at_low = f(low, context), at_high = f(high, context);
    if (at_low == 0.0) return low;
    if (at_high == 0.0) return high;
    if (!(at_low * at_high < 0.0) && !(signbit(at_low) != signbit(at_high))) return (double)NAN;
    gsl_root_fsolver *solver = gsl_root_fsolver_alloc(gsl_root_fsolver_brent);
    gsl_function function = {.function = f, .params = context};
    double root = (double)NAN;
    if (solver != NULL && gsl_root_fsolver_set(solver, &function, low, high) == GSL_SUCCESS) {
        int status = GSL_CONTINUE;
        for (int i = 0; i < 200 && status == GSL_CONTINUE; i++) {
            if (gsl_root_fsolver_iterate(solver) != GSL_SUCCESS) break;
            status = gsl_root_test_interval(gsl_root_fsolver_x_lower(solver),
                                            gsl_root_fsolver_x_upper(solver), 1e-15, 1e-15);
        }
        root = gsl_root_fsolver_root(solver);
    }
    gsl_root_fsolver_free(solver);
    return root;
}

/* The walk writes down where the sign changes; entered says whether z = 0 lies inside. */
typedef struct {
    ce_set set;
    bool inside;
} tracer;

static void cross(tracer *tr, double z)
{
    if (!tr->inside) {
        if (tr->set.n < 2) tr->set.low[tr->set.n++] = z;
        tr->set.high[tr->set.n - 1] = (double)INFINITY;
    } else {
        tr->set.high[tr->set.n - 1] = z;
    }
    tr->inside = !tr->inside;
}

static bool is_inside(double value)
{
    return value <= 0.0;
}

/* Far enough towards z = 0 the function has the sign it has there. */
static double settle_low(const ce_walk *walk)
{
    double ln_low = fmin(walk->ln_low, walk->ln_high - 1.0);
    for (int i = 0; i < 60; i++) {
        if (is_inside(walk->outside(ln_low, walk->context)) == is_inside(walk->at_zero)) break;
        ln_low -= M_LN10;
    }
    return ln_low;
}

ce_status ce_invert_test(const ce_walk *walk, ce_set *set, ce_error *err)
{
    tracer tr = {0};
    *set = (ce_set){0};
    if (!isfinite(walk->at_zero))
        return ce_fail(err, CE_E_DOMAIN, "the relation gives no number at infinite molar mass");
    if (is_inside(walk->at_zero)) cross(&tr, 0.0);

    double ln_low = settle_low(walk), before = ln_low, width = walk->ln_high - ln_low;
    size_t n = walk->nodes < 16 ? 16 : walk->nodes;
    bool was = is_inside(walk->at_zero), estimate_due = isfinite(walk->ln_estimate);
    for (size_t i = 0; i <= n;) {
        double here = ln_low + width * (double)i / (double)n;
        if (estimate_due && walk->ln_estimate <= here) { /* a node of its own: sets can be narrow */
            here = fmax(walk->ln_estimate, before);
            estimate_due = false;
        } else {
            i++;
        }
        double value = walk->outside(here, walk->context);
        if (isnan(value))
            return ce_fail(err, CE_E_DOMAIN,
                           "the relation gives no number at a molar mass of %g g/mol", exp(-here));
        if (is_inside(value) != was) {
            double ln_z = here > before
                              ? ce_bracketed_root(walk->outside, walk->context, before, here)
                              : here;
            if (isnan(ln_z)) return ce_fail(err, CE_E_NOMEM, "out of memory");
            cross(&tr, exp(ln_z));
            was = !was;
        }
        before = here;
    }
    *set = tr.set;
    return CE_OK;
}
