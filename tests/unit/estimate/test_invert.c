/* SPDX-License-Identifier: GPL-3.0-or-later
 * Test inversion for curves that are not straight. */
#include "check.h"

#include "estimate/interval.h"
#include "estimate/law.h"

#include <gsl/gsl_multifit.h>

/* y = Vm x/(K + x) as a function of z = 1/x, like a Tg relation with a plateau. */
typedef struct {
    double vm, k, c[3]; /* var Vm, cov, var K */
    double y, v, t;
} saturation;

static double saturation_outside(double ln_z, void *context)
{
    const saturation *s = context;
    double z = exp(ln_z), f = s->vm / (1.0 + s->k * z);
    double gv = 1.0 / (1.0 + s->k * z), gk = -s->vm * z / ((1.0 + s->k * z) * (1.0 + s->k * z));
    double var = gv * gv * s->c[0] + 2.0 * gv * gk * s->c[1] + gk * gk * s->c[2];
    return (s->y - f) * (s->y - f) - s->t * s->t * (s->v + var);
}

/* Puromycin data, treated (R's datasets, after Bates and Watts 1988, A1.3): fit and inverse computed
 * for this project with R. */
static ce_set puromycin(double y, double m)
{
    const double sv = 6.94715516, sk = 0.0082809494985, corr = 0.7650837018, s = 10.9336581913;
    saturation c = {.vm = 212.68374314,
                    .k = 0.064121281682,
                    .c = {sv * sv, corr * sv * sk, sk * sk},
                    .y = y,
                    .v = s * s / m,
                    .t = ce_student(0.95, 10.0)};
    double d = y - c.vm;
    ce_walk walk = {.outside = saturation_outside,
                    .context = &c,
                    .at_zero = d * d - c.t * c.t * (c.v + c.c[0]),
                    .ln_low = log(1e-3),
                    .ln_high = log(1e4),
                    .ln_estimate = log((c.vm / y - 1.0) / c.k),
                    .nodes = 100};
    ce_set set;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_invert_test(&walk, &set, &err), CE_OK);
    return set;
}

static void puromycin_readings(void **state)
{
    (void)state;
    ce_set set = puromycin(150.0, 1.0);
    assert_int_equal(set.n, 1);
    assert_digits(1.0 / set.high[0], 0.08915497425, 1e-8);
    assert_digits(1.0 / set.low[0], 0.304979338, 1e-8);
    set = puromycin(200.0, 4.0);
    assert_int_equal(set.n, 1);
    assert_digits(1.0 / set.high[0], 0.4231927397, 1e-8);
    assert_true(set.low[0] == 0.0);
}

/* A set narrower than the walk's nodes is found through the estimate; without one and with the
 * asymptote outside the set is empty. */
static void narrow_and_empty_sets(void **state)
{
    (void)state;
    ce_set set = puromycin(150.0, 1.0);
    saturation c = {.vm = 200.0, .k = 0.064, .y = 150.0, .v = 1e-12, .t = 2.0};
    ce_walk walk = {.outside = saturation_outside,
                    .context = &c,
                    .at_zero = 2500.0,
                    .ln_low = log(1e-3),
                    .ln_high = log(1e4),
                    .ln_estimate = log(1.0 / 3.0 / c.k),
                    .nodes = 16};
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_invert_test(&walk, &set, &err), CE_OK);
    assert_int_equal(set.n, 1);
    assert_digits(set.low[0] * c.k, 1.0 / 3.0, 1e-6);
    assert_true(set.low[0] < set.high[0]);
    c.y = 201.0;
    walk.at_zero = 1.0;
    walk.ln_estimate = NAN;
    assert_int_equal(ce_invert_test(&walk, &set, &err), CE_OK);
    assert_int_equal(set.n, 0);
    walk.at_zero = NAN;
    assert_int_equal(ce_invert_test(&walk, &set, &err), CE_E_DOMAIN);
}

/* NIST StRD Pontius: a load cell, deflection = b0 + b1 load + b2 load^2 (certified). The load of a
 * deflection of 1.239722: 1705106 (NIST handbook pmd61a), interval 1704513 to 1705698 (from memory). */
static const double deflection[40] = {
    .11019,  .21956,  .32949,  .43899,  .54803,  .65694,  .76562,  .87487,  .98292,  1.09146,
    1.20001, 1.30822, 1.41599, 1.52399, 1.63194, 1.73947, 1.84646, 1.95392, 2.06128, 2.16844,
    .11052,  .22018,  .32939,  .43886,  .54798,  .65739,  .76596,  .87474,  .98300,  1.09150,
    1.20004, 1.30818, 1.41613, 1.52408, 1.63159, 1.73965, 1.84696, 1.95445, 2.06177, 2.16829};

typedef struct {
    gsl_vector *b;
    gsl_matrix *c;
    double y, v, t;
} quadratic;

static double quadratic_at(const quadratic *q, double x, double *var)
{
    double g[3] = {1.0, x, x * x}, f = 0.0;
    *var = 0.0;
    for (size_t i = 0; i < 3; i++) {
        f += g[i] * gsl_vector_get(q->b, i);
        for (size_t j = 0; j < 3; j++) *var += g[i] * g[j] * gsl_matrix_get(q->c, i, j);
    }
    return f;
}

/* x is the load in units of 1e6. */
static double quadratic_outside(double ln_x, void *context)
{
    const quadratic *q = context;
    double var, f = quadratic_at(q, exp(ln_x), &var);
    return (q->y - f) * (q->y - f) - q->t * q->t * (q->v + var);
}

static double quadratic_root(double x, void *context)
{
    const quadratic *q = context;
    double var;
    return quadratic_at(q, x, &var) - q->y;
}

static void load_cell(void **state)
{
    (void)state;
    gsl_matrix *X = gsl_matrix_alloc(40, 3);
    gsl_vector *y = gsl_vector_alloc(40);
    quadratic q = {.b = gsl_vector_alloc(3), .c = gsl_matrix_alloc(3, 3), .y = 1.239722};
    for (size_t i = 0; i < 40; i++) {
        double x = 0.15 * (double)(i % 20 + 1);
        gsl_matrix_set(X, i, 0, 1.0);
        gsl_matrix_set(X, i, 1, x);
        gsl_matrix_set(X, i, 2, x * x);
        gsl_vector_set(y, i, deflection[i]);
    }
    gsl_multifit_linear_workspace *w = gsl_multifit_linear_alloc(40, 3);
    double chi2;
    gsl_multifit_linear(X, y, q.b, q.c, &chi2, w);
    q.v = chi2 / 37.0;
    q.t = ce_student(0.95, 37.0);
    double var, f0 = quadratic_at(&q, 0.0, &var), s = sqrt(q.v);
    double x0 = ce_bracketed_root(quadratic_root, &q, 0.0, 3.0);
    ce_walk walk = {.outside = quadratic_outside,
                    .context = &q,
                    .at_zero = (q.y - f0) * (q.y - f0) - q.t * q.t * (q.v + var),
                    .ln_low = log(0.01),
                    .ln_high = log(3.0),
                    .ln_estimate = log(x0),
                    .nodes = 50};
    ce_set set;
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_invert_test(&walk, &set, &err);
    gsl_multifit_linear_free(w);
    gsl_matrix_free(X);
    gsl_vector_free(y);
    gsl_vector_free(q.b);
    gsl_matrix_free(q.c);
    assert_int_equal(st, CE_OK);
    assert_digits(s, 0.205177424076185E-03, 1e-9); /* certified: the data are those of NIST */
    assert_digits(1e6 * x0, 1705105.569, 1e-9);
    assert_int_equal(set.n, 1);
    assert_digits(1e6 * set.low[0], 1704513.373, 1e-9);
    assert_digits(1e6 * set.high[0], 1705697.764, 1e-9);
}

static void bracketed_root_refuses(void **state)
{
    (void)state;
    saturation c = {.vm = 200.0, .k = 0.064, .y = 300.0, .v = 1.0, .t = 2.0};
    assert_true(isnan(ce_bracketed_root(saturation_outside, &c, 0.0, 3.0)));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(puromycin_readings),
        cmocka_unit_test(narrow_and_empty_sets),
        cmocka_unit_test(load_cell),
        cmocka_unit_test(bracketed_root_refuses),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
