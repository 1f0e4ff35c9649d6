/* SPDX-License-Identifier: GPL-3.0-or-later
 * Errors in both variables, through the code that fits Flory-Fox: a line is Tg = a - K z with
 * K = -slope. */
#include "check.h"

#include "base/counter_rng.h"
#include "fit/eiv.h"

typedef struct {
    double a, b, sa, sb, cov, sum;
} line_fit;

static line_fit fit_line(size_t n, const double *x, const double *sx, const double *y,
                         const double *sy)
{
    ce_eiv_point p[16];
    for (size_t i = 0; i < n; i++)
        p[i] = (ce_eiv_point){.z = x[i],
                              .sd_z = sx == NULL ? 0 : sx[i],
                              .y = y[i],
                              .var_y = sy[i] * sy[i],
                              .count = 1,
                              .chain = {.ends = 2}};
    ce_eiv eiv;
    ce_error err = CE_ERROR_INIT;
    ce_nls_options o = CE_NLS_DEFAULT;
    assert_int_equal(ce_eiv_new(&eiv, ce_relation_model(CE_FLORY_FOX), n, p, &o), CE_OK);
    ce_status status = ce_eiv_fit(&eiv, &err);
    if (status != CE_OK) print_error("%s\n", err.message);
    assert_int_equal(status, CE_OK);
    const double *c = eiv.nls->covariance;
    line_fit f = {eiv.theta[0], -eiv.theta[1], sqrt(c[0]), sqrt(c[3]), -c[1], eiv.nls->sum};
    ce_eiv_free(&eiv);
    return f;
}

static const double pearson_x[] = {0, .9, 1.8, 2.6, 3.3, 4.4, 5.2, 6.1, 6.5, 7.4};
static const double pearson_y[] = {5.9, 5.4, 4.4, 4.6, 3.5, 3.7, 2.8, 2.8, 2.4, 1.5};

/* Pearson's data with York's weights. Slope and intercept: Williamson; Neri et al. (1989); standard
 * errors 0.2950 and 0.0580: D. York et al., Am. J. Phys. 72 (2004) 367, table II. Further digits:
 * York's iteration in NumPy. */
static void pearson_york(void **state)
{
    (void)state;
    static const double wx[] = {1000, 1000, 500, 800, 200, 80, 60, 20, 1.8, 1};
    static const double wy[] = {1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500};
    double sx[10], sy[10];
    for (size_t i = 0; i < 10; i++) sx[i] = 1 / sqrt(wx[i]), sy[i] = 1 / sqrt(wy[i]);
    line_fit f = fit_line(10, pearson_x, sx, pearson_y, sy);
    assert_close(f.a, 5.47991022403, 5e-12);
    assert_close(f.b, -0.48053340745, 5e-12);
    assert_close(f.sum / 8, 1.483, 5e-4);
    assert_close(f.sa, 0.2950, 5e-5);
    assert_close(f.sb, 0.0580, 5e-5);
    assert_digits(f.sa, 0.2949707355, 1e-9);
    assert_digits(f.sb, 0.057985009, 1e-8);
    assert_digits(f.cov, -0.01647254466, 1e-9);
    assert_digits(f.sum, 11.866353194, 1e-10);
}

/* The same points with rounded standard deviations: reference of SciPy's own tests of ODRPACK, which
 * stopped at the convergence of its sum of squares (with SciPy 1.10.1 and tighter tolerances a
 * becomes 5.47673713): six digits. */
static void pearson_odrpack(void **state)
{
    (void)state;
    static const double sx[] = {.03, .03, .04, .035, .07, .11, .13, .22, .74, 1};
    static const double sy[] = {1, .74, .5, .35, .22, .22, .12, .12, .1, .04};
    line_fit f = fit_line(10, pearson_x, sx, pearson_y, sy);
    double scale = sqrt(f.sum / 8);
    assert_digits(f.a, 5.4767400299231674, 1e-6);
    assert_digits(f.b, -0.4796082367610305, 2e-6);
    assert_digits(f.sa * scale, 0.3590121690702467, 2e-6);
    assert_digits(f.sb * scale, 0.0706291186037444, 2e-6);
}

/* Ordinary, weighted and Deming regression are special cases (values: NumPy). */
static void pearson_special_cases(void **state)
{
    (void)state;
    static const double wy[] = {1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500};
    double one[10], half[10], sy[10];
    for (size_t i = 0; i < 10; i++) one[i] = 1, half[i] = 0.5, sy[i] = 1 / sqrt(wy[i]);
    line_fit ols = fit_line(10, pearson_x, NULL, pearson_y, one);
    line_fit wls = fit_line(10, pearson_x, NULL, pearson_y, sy);
    line_fit deming = fit_line(10, pearson_x, one, pearson_y, one);
    line_fit deming4 = fit_line(10, pearson_x, half, pearson_y, one);
    assert_digits(ols.a, 5.76118519044, 1e-11);
    assert_digits(ols.b, -0.539577274984, 1e-11);
    assert_digits(wls.a, 6.10010931667, 1e-11);
    assert_digits(wls.b, -0.610812956584, 1e-11);
    assert_digits(deming.a, 5.78404377453, 1e-11);
    assert_digits(deming.b, -0.545561197521, 1e-11);
    assert_digits(deming4.a, 5.76802567454, 1e-11);
    assert_digits(deming4.b, -0.541367977628, 1e-11);
}

/* ISO/TS 28037:2010, straight lines; values as quoted in the documentation of the GUM Tree
 * Calculator. */
static void iso_ts_28037(void **state)
{
    (void)state;
    static const double x[] = {1.2, 1.9, 2.9, 4.0, 4.7, 5.9}, ux[] = {.2, .2, .2, .2, .2, .2};
    static const double y[] = {3.4, 4.4, 7.2, 8.5, 10.8, 13.5}, uy[] = {.2, .2, .2, .4, .4, .4};
    line_fit f = fit_line(6, x, ux, y, uy);
    assert_close(f.a, 0.5788, 5e-5);
    assert_close(f.sa, 0.4764, 5e-5);
    assert_close(f.b, 2.159, 1e-3); /* printed 2.159; York's equations give 2.15966 */
    assert_close(f.sb, 0.1355, 5e-5);
    assert_close(f.cov, -0.0577, 5e-5);
    assert_close(f.sum, 2.743, 5e-4);
    assert_digits(f.a, 0.578822122149, 1e-11);
    assert_digits(f.b, 2.1596565674, 1e-10);
    assert_digits(f.sa, 0.4764206296, 1e-9);
    assert_digits(f.sb, 0.1355479275, 1e-9);
    static const double i6[] = {1, 2, 3, 4, 5, 6};
    static const double y1[] = {3.3, 5.6, 7.1, 9.3, 10.7, 12.1}, u1[] = {.5, .5, .5, .5, .5, .5};
    line_fit one = fit_line(6, i6, NULL, y1, u1);
    assert_close(one.a, 1.867, 5e-4);
    assert_close(one.sa, 0.465, 5e-4);
    assert_close(one.b, 1.757, 5e-4);
    assert_close(one.sb, 0.120, 5e-4);
    assert_close(one.cov, -0.050, 5e-4);
    assert_close(one.sum, 1.665, 5e-4);
    static const double y2[] = {3.2, 4.3, 7.6, 8.6, 11.7, 12.8}, u2[] = {.5, .5, .5, 1, 1, 1};
    line_fit two = fit_line(6, i6, NULL, y2, u2);
    assert_digits(two.a, 0.885232067510549, 1e-12);
    assert_digits(two.sa, 0.529708143508836, 1e-12);
    assert_digits(two.b, 2.05696202531646, 1e-12);
    assert_digits(two.sb, 0.177892016741205, 1e-12);
    assert_digits(two.sum, 4.13080168776, 1e-11);
}

/* ---- the reduction to the parameters is the full problem ------------------------------------ */

static const double truth[CE_RELATIONS][CE_MAX_PARAMETERS] = {
    [CE_FLORY_FOX] = {388, 1.8e5},         [CE_UEBERREITER_KANIG] = {388, 500},
    [CE_ODRISCOLL_SANAYEI] = {388, 1.4e4}, [CE_OGAWA] = {388, 1.8e5},
    [CE_LOG_PLATEAU] = {388, 70, 30000},   [CE_LOG_THREE] = {388, 120, 45, 6000, 60000}};

static size_t make_points(ce_relation relation, uint64_t seed, double r, ce_eiv_point *p)
{
    static const double mn[] = {1500, 2200, 3400, 5000, 9000, 16000, 35000, 70000, 150000, 300000};
    ce_counter_rng rng = ce_counter_rng_start(seed, (uint64_t)relation);
    for (size_t i = 0; i < 10; i++) {
        ce_molar m = {mn[i], 1.3 * mn[i], 2};
        double z = (1 + r * ce_counter_rng_normal(&rng)) / mn[i];
        p[i] = (ce_eiv_point){.z = z,
                              .sd_z = r * z,
                              .y = ce_relation_tg(relation, truth[relation], &m) +
                                   0.3 * ce_counter_rng_normal(&rng),
                              .var_y = 0.09,
                              .count = 1,
                              .chain = ce_chain_of(&m)};
    }
    return 10;
}

/* The full problem, parameters and true z together, as solved by the same solver. */
typedef struct {
    const ce_model *model;
    size_t n;
    const ce_eiv_point *p;
} full_problem;

static void full_residuals(const double *t, double *r, double *J, void *context)
{
    const full_problem *f = context;
    size_t p = f->model->p, q = p + f->n;
    memset(J, 0, 2 * f->n * q * sizeof *J);
    for (size_t i = 0; i < f->n; i++) {
        const ce_eiv_point *e = &f->p[i];
        ce_jet jet;
        double sy = sqrt(e->var_y), zeta = e->z * t[p + i];
        f->model->eval(f->model, t, zeta, &e->chain, &jet);
        r[i] = (e->y - jet.value) / sy;
        r[f->n + i] = (e->z - zeta) / e->sd_z;
        for (size_t j = 0; j < p; j++) J[i * q + j] = -jet.gradient[j] / sy;
        J[i * q + p + i] = -jet.slope * e->z / sy;
        J[(f->n + i) * q + p + i] = -e->z / e->sd_z;
    }
}

static void reduced_is_full(void **state)
{
    (void)state;
    for (unsigned rel = CE_FLORY_FOX; rel <= CE_OGAWA; rel++)
        for (uint64_t seed = 1; seed <= 5; seed++) {
            ce_eiv_point p[10];
            size_t n = make_points((ce_relation)rel, seed, 0.05, p);
            ce_eiv eiv;
            ce_nls_options o = CE_NLS_DEFAULT;
            const ce_model *model = ce_relation_model((ce_relation)rel);
            assert_int_equal(ce_eiv_new(&eiv, model, n, p, &o), CE_OK);
            assert_int_equal(ce_eiv_fit(&eiv, NULL), CE_OK);
            full_problem full = {model, n, p};
            ce_nls *nls = NULL;
            double t[12];
            for (size_t i = 0; i < 12; i++) t[i] = i < 2 ? eiv.theta[i] * 1.001 : 1;
            assert_int_equal(ce_nls_new(&nls, 20, 12), CE_OK);
            assert_int_equal(ce_nls_solve(nls, full_residuals, &full, t, &o, NULL), CE_OK);
            assert_digits(eiv.nls->sum, nls->sum, 1e-11);
            for (size_t i = 0; i < 2; i++) {
                assert_digits(eiv.theta[i], t[i], 1e-10);
                assert_digits(eiv.nls->covariance[i * 3], nls->covariance[i * 13], 1e-8);
            }
            for (size_t i = 0; i < n; i++) assert_digits(eiv.zeta[i], p[i].z * t[2 + i], 1e-9);
            ce_nls_free(nls);
            ce_eiv_free(&eiv);
        }
}

/* Where the sum of squares is smooth its derivative is 2 J'r; kinks included. */
static void jacobian_is_the_derivative(void **state)
{
    (void)state;
    for (unsigned rel = 0; rel < CE_RELATIONS; rel++) {
        ce_eiv_point p[10];
        size_t n = make_points((ce_relation)rel, 3, 0.08, p);
        const ce_model *model = ce_relation_model((ce_relation)rel);
        ce_eiv eiv;
        ce_nls_options o = CE_NLS_DEFAULT;
        assert_int_equal(ce_eiv_new(&eiv, model, n, p, &o), CE_OK);
        double t[CE_MAX_PARAMETERS], r[10], J[60], up[10], down[10], rest[60];
        for (size_t j = 0; j < CE_MAX_PARAMETERS; j++) t[j] = truth[rel][j] * 1.01;
        ce_eiv_residuals(t, r, J, &eiv);
        for (size_t j = 0; j < model->p; j++) {
            double at = t[j], h = 1e-6 * at;
            t[j] = at + h;
            ce_eiv_residuals(t, up, rest, &eiv);
            t[j] = at - h;
            ce_eiv_residuals(t, down, rest, &eiv);
            t[j] = at;
            for (size_t i = 0; i < n; i++) {
                double want = (up[i] - down[i]) / (2 * h);
                assert_close(J[i * model->p + j], want, 1e-5 * fabs(want) + 1e-7 / fabs(at));
            }
        }
        ce_eiv_free(&eiv);
    }
}

/* Kinks included, the squared residual is the least over all true z: none on a fine grid is less. */
static void residual_is_the_shortest_distance(void **state)
{
    (void)state;
    for (unsigned rel = 0; rel < CE_RELATIONS; rel++)
        for (uint64_t seed = 1; seed <= 10; seed++) {
            ce_eiv_point p[10];
            size_t n = make_points((ce_relation)rel, seed, 0.15, p);
            const ce_model *model = ce_relation_model((ce_relation)rel);
            ce_eiv eiv;
            ce_nls_options o = CE_NLS_DEFAULT;
            double r[10], J[60];
            assert_int_equal(ce_eiv_new(&eiv, model, n, p, &o), CE_OK);
            ce_eiv_residuals(truth[rel], r, J, &eiv);
            for (size_t i = 0; i < n; i++) {
                double least = (double)INFINITY;
                for (int k = -4000; k <= 4000; k++) {
                    double zeta = p[i].z + p[i].sd_z * k / 1000.0;
                    ce_jet jet;
                    model->eval(model, truth[rel], zeta, &p[i].chain, &jet);
                    double e = p[i].y - jet.value, d = (p[i].z - zeta) / p[i].sd_z;
                    least = fmin(least, e * e / p[i].var_y + d * d);
                }
                assert_true(r[i] * r[i] <= least * (1 + 1e-9) + 1e-12);
                assert_close(r[i] * r[i], least, 0.02 * least + 0.02);
            }
            ce_eiv_free(&eiv);
        }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(pearson_york),
        cmocka_unit_test(pearson_odrpack),
        cmocka_unit_test(pearson_special_cases),
        cmocka_unit_test(iso_ts_28037),
        cmocka_unit_test(reduced_is_full),
        cmocka_unit_test(jacobian_is_the_derivative),
        cmocka_unit_test(residual_is_the_shortest_distance),
    };
    return cmocka_run_group_tests_name("fit/eiv", tests, NULL, NULL);
}
