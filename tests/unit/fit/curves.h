/* SPDX-License-Identifier: GPL-3.0-or-later
 * Curves that are not ours, through the solver that is: y = f(theta, x) with equal weights. */
#ifndef CE_TEST_FIT_CURVES_H
#define CE_TEST_FIT_CURVES_H

#include "fit/nls.h"

#include <stdlib.h>

typedef double (*curve_function)(const double *theta, const double *x, double *gradient);
typedef struct {
    size_t n, p, columns; /* columns of x, row-major; 0 counts as one */
    const double *x, *y;
    curve_function f;
} curve;

static inline void curve_residuals(const double *theta, double *r, double *J, void *context)
{
    const curve *c = context;
    size_t step = c->columns > 0 ? c->columns : 1;
    for (size_t i = 0; i < c->n; i++) {
        double *row = J + i * c->p;
        r[i] = c->y[i] - c->f(theta, c->x + i * step, row);
        for (size_t j = 0; j < c->p; j++) row[j] = -row[j];
    }
}

/* Fitted and owned by the caller, or the test fails. */
static inline ce_nls *fit_curve(const curve *c, double *theta)
{
    ce_nls *nls = NULL;
    ce_error err = CE_ERROR_INIT;
    ce_nls_options o = CE_NLS_DEFAULT;
    curve copy = *c;
    o.max_iterations = 5000;
    assert_int_equal(ce_nls_new(&nls, c->n, c->p), CE_OK);
    ce_status status = ce_nls_solve(nls, curve_residuals, &copy, theta, &o, &err);
    if (status != CE_OK) print_error("%s\n", err.message);
    assert_int_equal(status, CE_OK);
    return nls;
}

static inline double line(const double *b, const double *x, double *g)
{
    g[0] = 1, g[1] = x[0];
    return b[0] + b[1] * x[0];
}
static inline double quadratic(const double *b, const double *x, double *g)
{
    g[0] = 1, g[1] = x[0], g[2] = x[0] * x[0];
    return b[0] + b[1] * x[0] + b[2] * x[0] * x[0];
}

/* NIST StRD Pontius: load cell calibration, deflection against load. */
static const double pontius_y[40] = {
    .11019,  .21956,  .32949,  .43899,  .54803,  .65694,  .76562,  .87487,  .98292,  1.09146,
    1.20001, 1.30822, 1.41599, 1.52399, 1.63194, 1.73947, 1.84646, 1.95392, 2.06128, 2.16844,
    .11052,  .22018,  .32939,  .43886,  .54798,  .65739,  .76596,  .87474,  .98300,  1.09150,
    1.20004, 1.30818, 1.41613, 1.52408, 1.63159, 1.73965, 1.84696, 1.95445, 2.06177, 2.16829};
static inline void pontius_x(double *x)
{
    for (size_t i = 0; i < 40; i++) x[i] = 150000.0 * (double)(i % 20 + 1);
}

#endif
