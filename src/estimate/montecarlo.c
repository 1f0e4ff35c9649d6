/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/order.h"
#include "estimate/law.h"

#include <gsl/gsl_eigen.h>
#include <gsl/gsl_matrix.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>

#include <math.h>
#include <stdlib.h>

enum { MIN_BLOCK = 10000, MAX_TRIALS = 100000000, MIN_BLOCKS = 5 };

ce_monte_carlo_options ce_monte_carlo_options_default(void)
{
    return (ce_monte_carlo_options){.seed = 1, .max_trials = 4000000};
}

/* A square root R of a covariance, C = R R', also of a singular one. */
typedef struct {
    bool empty;
    double root[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
} ce_root;

/* Parameters of very different size: the eigenvalues are taken of the correlation matrix. Negative
 * ones are rounding of a part that is zero. */
static ce_status square_root(const double *c, size_t p, ce_root *out)
{
    double sd[CE_MAX_PARAMETERS];
    out->empty = true;
    for (size_t i = 0; i < p; i++) {
        sd[i] = sqrt(fmax(c[i * p + i], 0.0));
        if (sd[i] > 0.0) out->empty = false;
    }
    if (out->empty) return CE_OK;
    gsl_matrix *m = gsl_matrix_calloc(p, p), *vec = gsl_matrix_alloc(p, p);
    gsl_vector *val = gsl_vector_alloc(p);
    gsl_eigen_symmv_workspace *work = gsl_eigen_symmv_alloc(p);
    ce_status st = CE_E_NOMEM;
    if (m != NULL && vec != NULL && val != NULL && work != NULL) {
        for (size_t i = 0; i < p; i++)
            for (size_t j = 0; j < p; j++)
                if (sd[i] > 0.0 && sd[j] > 0.0)
                    gsl_matrix_set(m, i, j, c[i * p + j] / (sd[i] * sd[j]));
        st = gsl_eigen_symmv(m, val, vec, work) == GSL_SUCCESS ? CE_OK : CE_E_DOMAIN;
    }
    for (size_t i = 0; st == CE_OK && i < p; i++)
        for (size_t j = 0; j < p; j++)
            out->root[i * p + j] =
                sd[i] * gsl_matrix_get(vec, i, j) * sqrt(fmax(gsl_vector_get(val, j), 0.0));
    gsl_matrix_free(m);
    gsl_matrix_free(vec);
    gsl_vector_free(val);
    gsl_eigen_symmv_free(work);
    return st;
}

typedef struct {
    const ce_law *law;
    bool normal, linear;
    double coefficient, power;
    ce_root run, excess, certificates;
    gsl_rng *rng;
} sampler;

static ce_status prepare_sampler(sampler *s, const ce_law *law, bool normal)
{
    const ce_fit *fit = &law->fit;
    double rest[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
    s->law = law;
    s->normal = normal;
    s->linear = ce_law_linear(law, &s->coefficient, &s->power);
    for (size_t i = 0; i < fit->p * fit->p; i++)
        rest[i] = fit->covariance[i] - fit->covariance_run[i] - fit->covariance_excess[i];
    /* What is left of a difference of equal numbers is no certificate part. */
    for (size_t i = 0; i < fit->p; i++)
        if (rest[i * fit->p + i] < 1e-12 * fit->covariance[i * fit->p + i])
            rest[i * fit->p + i] = 0.0;
    ce_status st = square_root(fit->covariance_run, fit->p, &s->run);
    if (st == CE_OK) st = square_root(fit->covariance_excess, fit->p, &s->excess);
    if (st == CE_OK) st = square_root(rest, fit->p, &s->certificates);
    return st;
}

/* Scale factor that turns a normal deviate into Student's t with nu degrees. */
static double t_factor(sampler *s, double nu)
{
    if (s->normal || isinf(nu)) return 1.0;
    return sqrt(nu / gsl_ran_chisq(s->rng, nu));
}

static void shift(sampler *s, const ce_root *root, double factor, double *theta)
{
    if (root->empty) return;
    size_t p = s->law->fit.p;
    for (size_t j = 0; j < p; j++) {
        double e = factor * gsl_ran_ugaussian(s->rng);
        for (size_t i = 0; i < p; i++) theta[i] += root->root[i * p + j] * e;
    }
}

/* One trial: z = 1/Mn, 0 when no finite Mn explains the drawn reading. */
static double draw(sampler *s)
{
    const ce_law *law = s->law;
    const ce_fit *fit = &law->fit;
    double theta[CE_MAX_PARAMETERS], y = law->mean_K;
    /* One scale for the run scatter wherever it enters: it is one estimate of one variance. */
    double run = t_factor(s, fit->run_nu), excess = t_factor(s, fit->excess_nu);
    for (size_t i = 0; i < fit->p; i++) theta[i] = fit->parameter[i].value;
    shift(s, &s->run, run, theta);
    shift(s, &s->excess, excess, theta);
    shift(s, &s->certificates, 1.0, theta);
    double mn = law->common_mn ? gsl_ran_ugaussian(s->rng) : 0.0;
    double rate = gsl_ran_ugaussian(s->rng);
    for (size_t i = 0; i < fit->p; i++)
        theta[i] += mn * fit->mn_common_shift[i] + rate * fit->rate_common_shift[i];
    y += run * sqrt(law->var_run) * gsl_ran_ugaussian(s->rng) + rate * law->rate_K +
         excess * sqrt(law->var_sample) * gsl_ran_ugaussian(s->rng) +
         sqrt(law->var_exact + law->var_scale) * gsl_ran_ugaussian(s->rng);
    if (law->var_own > 0.0)
        y += t_factor(s, law->nu_own) * sqrt(law->var_own) * gsl_ran_ugaussian(s->rng);
    if (s->linear) {
        double x = (theta[0] - y) / (theta[1] * s->coefficient);
        return x > 0.0 ? pow(x, 1.0 / s->power) : 0.0;
    }
    double m;
    if (ce_relation_mn(fit->options.relation, theta, y, &law->like, &m) != CE_OK) return 0.0;
    return m > 0.0 ? 1.0 / m : 0.0;
}

/* Running mean and variance of one quantity over blocks (Welford). */
typedef struct {
    double n, mean, squares;
} running;

static void add(running *r, double x)
{
    double d = x - r->mean;
    r->n += 1.0;
    r->mean += d / r->n;
    r->squares += d * (x - r->mean);
}

static bool stable(const running *r, double delta)
{
    return 2.0 * sqrt(r->squares / (r->n * (r->n - 1.0))) < delta;
}

/* JCGM 101:2008 7.9.2: u = c 10^l with a two-digit integer c; half of 10^l. */
static double tolerance(double u)
{
    return 0.5 * pow(10.0, floor(log10(u)) - 1.0);
}

typedef struct {
    running mean, u, low, high;
} progress;

static void summarise_block(double *z, size_t n, double level, progress *p, running *all)
{
    running block = {0};
    for (size_t i = 0; i < n; i++) {
        add(&block, z[i]);
        add(all, z[i]);
    }
    add(&p->mean, block.mean);
    add(&p->u, sqrt(block.squares / (block.n - 1.0)));
    add(&p->low, ce_quantile(z, n, 0.5 * (1.0 - level)));
    add(&p->high, ce_quantile(z, n, 0.5 * (1.0 + level)));
}

static bool settled(const progress *p, double delta)
{
    return p->mean.n >= MIN_BLOCKS && stable(&p->mean, delta) && stable(&p->u, delta) &&
           stable(&p->low, delta) && stable(&p->high, delta);
}

static double mn_of(double z, double none)
{
    return z > 0.0 ? 1.0 / z : none;
}

static void report(double *z, const running *all, double level, ce_monte_carlo *r)
{
    size_t none = 0;
    for (size_t i = 0; i < r->trials; i++)
        if (!(z[i] > 0.0)) none++;
    r->p_none = (double)none / (double)r->trials;
    r->z_mean = all->mean;
    r->low_g_mol = mn_of(ce_quantile(z, r->trials, 0.5 * (1.0 + level)), (double)INFINITY);
    r->high_g_mol = mn_of(ce_quantile(z, r->trials, 0.5 * (1.0 - level)), (double)NAN);
    r->median_g_mol = mn_of(ce_quantile(z, r->trials, 0.5), (double)INFINITY);
    r->level = level;
}

static void run_trials(sampler *s, double level, size_t max_trials, double *z, ce_monte_carlo *r)
{
    size_t block = (size_t)fmax(ceil(100.0 / (1.0 - level)), (double)MIN_BLOCK);
    progress p = {0};
    running all = {0};
    while (r->trials + block <= max_trials && !r->settled) {
        for (size_t i = 0; i < block; i++) z[r->trials + i] = draw(s);
        summarise_block(z + r->trials, block, level, &p, &all);
        r->trials += block;
        r->z_u = sqrt(all.squares / (all.n - 1.0));
        r->z_delta = r->z_u > 0.0 ? tolerance(r->z_u) : 0.0;
        r->settled = settled(&p, r->z_delta) || !(r->z_u > 0.0);
    }
    report(z, &all, level, r);
}

ce_status ce_monte_carlo_mn(const ce_fit *fit, const ce_unknown *unknown, double level,
                            const ce_monte_carlo_options *options, ce_monte_carlo *result,
                            ce_error *err)
{
    ce_monte_carlo_options o = options == NULL ? ce_monte_carlo_options_default() : *options;
    ce_law law;
    sampler s = {0};
    *result = (ce_monte_carlo){0};
    ce_status st = ce_law_prepare(&law, fit, unknown, level, err);
    if (st != CE_OK) return st;
    double block = fmax(ceil(100.0 / (1.0 - law.level)), (double)MIN_BLOCK);
    if (o.max_trials > MAX_TRIALS || (double)o.max_trials < block)
        return ce_fail(err, CE_E_ARG, "the number of trials must lie between %.0f and %d", block,
                       MAX_TRIALS);
    st = prepare_sampler(&s, &law, o.normal);
    if (st == CE_E_DOMAIN) return ce_fail(err, st, "the covariance of the fit is not usable");
    double *z = st == CE_OK ? malloc(o.max_trials * sizeof *z) : NULL;
    s.rng = gsl_rng_alloc(gsl_rng_mt19937);
    if (z == NULL || s.rng == NULL) {
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    } else {
        gsl_rng_set(s.rng, (unsigned long)o.seed);
        run_trials(&s, law.level, o.max_trials, z, result);
    }
    gsl_rng_free(s.rng);
    free(z);
    return st;
}
