/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "fit/starts.h"

#include <math.h>
#include <stdlib.h>

bool ce_start_line(const ce_model *model, size_t n, const ce_eiv_point *point,
                   double (*transform)(double), double *a, double *b)
{
    double slope_x = 0; /* dTg/dx of the first pass */
    for (int pass = 0; pass < 2; pass++) {
        double sw = 0, sx = 0, sy = 0, sxx = 0, sxy = 0;
        for (int round = 0; round < 2; round++) { /* means first: the sums of squares cancel */
            double mx = round ? sx / sw : 0, my = round ? sy / sw : 0;
            for (size_t i = 0; i < n; i++) {
                const ce_eiv_point *p = &point[i];
                double x = model->abscissa(p->z, &p->chain);
                double y = transform == NULL ? p->y : transform(p->y);
                double r = p->z > 0 ? p->sd_z / p->z : 0;
                double w = p->count / (p->var_y + slope_x * slope_x * x * x * r * r);
                if (round == 0) {
                    sw += w, sx += w * x, sy += w * y;
                } else {
                    sxx += w * (x - mx) * (x - mx);
                    sxy += w * (x - mx) * (y - my);
                }
            }
        }
        *b = sxy / sxx;
        *a = (sy - *b * sx) / sw;
        if (!isfinite(*a) || !isfinite(*b)) return false;
        /* Of a transformed y the slope is only rough, at the asymptote of 1/y. */
        slope_x = transform == NULL ? *b : *b / (*a * *a);
    }
    return true;
}

/* ---- segments: a grid over the breakpoints, the rest being linear ---------------------------- */

enum { STEPS = 6, SEGMENT_SAMPLES = 64 };

typedef struct {
    size_t n, p;
    double x[SEGMENT_SAMPLES], y[SEGMENT_SAMPLES], w[SEGMENT_SAMPLES]; /* x = log10 Mn, rising */
} sorted_points;

static int by_z_falling(const void *l, const void *r)
{
    double a = ((const ce_eiv_point *)l)->z, b = ((const ce_eiv_point *)r)->z;
    return (a < b) - (a > b);
}

/* Sorted by Mn, samples of one Mn merged; the weights use the slope of a straight line in z. More
 * than SEGMENT_SAMPLES points are thinned: these are start values only. */
static bool sort_points(const ce_model *self, size_t n, const ce_eiv_point *point, sorted_points *s)
{
    ce_eiv_point copy[SEGMENT_SAMPLES];
    size_t taken = 0, stride = 1 + (n - 1) / SEGMENT_SAMPLES;
    double a, b;
    *s = (sorted_points){0};
    for (size_t i = 0; i < n; i += stride)
        if (point[i].count > 0) copy[taken++] = point[i];
    qsort(copy, taken, sizeof *copy, by_z_falling);
    const ce_model *line = ce_relation_model(CE_UEBERREITER_KANIG); /* its abscissa is z */
    if (!ce_start_line(line, n, point, NULL, &a, &b)) return false;
    for (size_t i = 0; i < taken; i++) {
        const ce_eiv_point *p = &copy[i];
        double x = self->abscissa(p->z, &p->chain);
        double w = p->count / (p->var_y + b * b * p->sd_z * p->sd_z);
        size_t k = s->n;
        if (k > 0 && x - s->x[k - 1] < 1e-9) {
            s->y[k - 1] = (s->w[k - 1] * s->y[k - 1] + w * p->y) / (s->w[k - 1] + w);
            s->w[k - 1] += w;
        } else {
            s->x[k] = x, s->y[k] = p->y, s->w[k] = w;
            s->n++;
        }
    }
    return true;
}

/* Weighted linear least squares on 1, min(x - x2, 0) and, with three regimes, min(x - x1, 0) by the
 * normal equations of at most three unknowns; returns the sum of squares, infinite when singular.
 */
static double hinge_fit(const sorted_points *s, size_t hinges, const double *at, double *c)
{
    double m[3][4] = {{0}};
    size_t q = hinges + 1;
    for (size_t i = 0; i < s->n; i++) {
        double f[3] = {1, 0, 0};
        for (size_t h = 0; h < hinges; h++) f[h + 1] = fmin(s->x[i] - at[h], 0);
        for (size_t r = 0; r < q; r++) {
            for (size_t k = 0; k < q; k++) m[r][k] += s->w[i] * f[r] * f[k];
            m[r][3] += s->w[i] * f[r] * (s->y[i] - s->y[s->n - 1]);
        }
    }
    for (size_t r = 0; r < q; r++) { /* elimination without pivoting: the matrix is definite */
        if (!(m[r][r] > 1e-14 * m[0][0])) return (double)INFINITY;
        for (size_t k = r + 1; k < q; k++) {
            double f = m[k][r] / m[r][r];
            for (size_t l = r; l < 4; l++) m[k][l] -= f * m[r][l];
        }
    }
    for (size_t r = q; r-- > 0;) {
        c[r] = m[r][3];
        for (size_t k = r + 1; k < q; k++) c[r] -= m[r][k] * c[k];
        c[r] /= m[r][r];
    }
    double sum = 0;
    for (size_t i = 0; i < s->n; i++) {
        double e = s->y[i] - s->y[s->n - 1] - c[0];
        for (size_t h = 0; h < hinges; h++) e -= c[h + 1] * fmin(s->x[i] - at[h], 0);
        sum += s->w[i] * e * e;
    }
    c[0] += s->y[s->n - 1];
    return sum;
}

typedef struct {
    double sum;
    double theta[CE_MAX_PARAMETERS];
} candidate;

/* Keep the best few, best first. */
static void keep(candidate *best, size_t *n, const candidate *c)
{
    if (*n == CE_MAX_STARTS && !(c->sum < best[*n - 1].sum)) return;
    size_t i = *n < CE_MAX_STARTS ? (*n)++ : *n - 1;
    while (i > 0 && c->sum < best[i - 1].sum) {
        best[i] = best[i - 1];
        i--;
    }
    best[i] = *c;
}

static double grid(double lo, double hi, int step)
{
    return lo + (hi - lo) * (step + 0.5) / STEPS;
}

static size_t give(const candidate *best, size_t n, size_t p,
                   double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS])
{
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < p; j++) theta[i][j] = best[i].theta[j];
    return n;
}

/* The best place in each gap between neighbours, two samples below it at least, one above. */
size_t ce_starts_log_plateau(const ce_model *self, size_t n, const ce_eiv_point *point,
                             double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS])
{
    sorted_points s;
    candidate best[CE_MAX_STARTS] = {0};
    size_t found = 0;
    if (!sort_points(self, n, point, &s) || s.n < 4) return 0;
    for (size_t gap = 1; gap + 1 < s.n; gap++) {
        candidate here = {.sum = (double)INFINITY};
        for (int i = 0; i < STEPS; i++) {
            double c[3] = {0}, at = grid(s.x[gap], s.x[gap + 1], i), sum = hinge_fit(&s, 1, &at, c);
            if (sum < here.sum) here = (candidate){sum, {c[0], c[1], pow(10, at)}};
        }
        if (isfinite(here.sum)) keep(best, &found, &here);
    }
    return give(best, found, self->p, theta);
}

size_t ce_starts_log_three(const ce_model *self, size_t n, const ce_eiv_point *point,
                           double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS])
{
    sorted_points s;
    candidate best[CE_MAX_STARTS] = {0};
    size_t found = 0;
    if (!sort_points(self, n, point, &s) || s.n < 6) return 0;
    for (size_t low = 1; low + 3 < s.n; low++)
        for (size_t high = low + 2; high + 1 < s.n; high++) {
            candidate here = {.sum = (double)INFINITY};
            for (int i = 0; i < STEPS * STEPS; i++) {
                double c[3], at[2] = {grid(s.x[high], s.x[high + 1], i / STEPS),
                                      grid(s.x[low], s.x[low + 1], i % STEPS)};
                double sum = hinge_fit(&s, 2, at, c);
                if (sum < here.sum)
                    here =
                        (candidate){sum, {c[0], c[1] + c[2], c[1], pow(10, at[1]), pow(10, at[0])}};
            }
            if (isfinite(here.sum)) keep(best, &found, &here);
        }
    return give(best, found, self->p, theta);
}
