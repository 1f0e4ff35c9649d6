/* SPDX-License-Identifier: GPL-3.0-or-later
 * Where the steps are: the jump between two straight lines on both sides of a gap, measured against
 * what the lines leave unexplained and how much their slopes differ, for every place and several
 * gaps. */
#include "transition/locate.h"

#include "base/order.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const double gaps_K[] = {4.0, 7.0, 12.0, 20.0, 30.0, 45.0};
enum { GAPS = sizeof gaps_K / sizeof *gaps_K };

/* Evidence that each part of a place needs to be taken for a step of its own. */
static const double split_score = 4.5;

/* Means over cells of half a kelvin (or the spacing) with running sums: a line costs O(1). */
typedef struct {
    size_t n;
    double *T, *y;
    double *sum[5]; /* of t, y, tt, ty, yy up to and without i                                  */
    double spacing, noise, ref_K, ref;
    double low_K, high_K; /* without the first of the segment: its start-up                      */
    double *all;
} grid;

static ce_status grid_make(const ce_curve *c, grid *g)
{
    memset(g, 0, sizeof *g);
    if (c->n < 3) return CE_E_ARG;
    g->all = calloc(8 * c->n + 5, sizeof(double));
    if (g->all == NULL) return CE_E_NOMEM;
    g->T = g->all;
    g->y = g->all + c->n;
    double *scratch = g->all + 2 * c->n;
    for (int k = 0; k < 5; k++) g->sum[k] = g->all + 3 * c->n + (size_t)k * (c->n + 1);
    const double width = fmax(0.5, c->spacing);
    for (size_t i = 0; i < c->n; g->n++) {
        const double end = c->T[i] + 0.999 * width;
        double w = 0.0, t = 0.0, y = 0.0;
        for (; i < c->n && c->T[i] < end; i++) {
            w += c->w[i];
            t += c->w[i] * c->T[i];
            y += c->w[i] * c->y[i];
        }
        g->T[g->n] = t / w;
        g->y[g->n] = y / w;
    }
    g->spacing = (g->T[g->n - 1] - g->T[0]) / (double)(g->n - 1);
    g->low_K = g->T[0] + (c->cooling ? 0.0 : CE_START_UP_K);
    g->high_K = g->T[g->n - 1] - (c->cooling ? CE_START_UP_K : 0.0);
    g->ref_K = g->T[g->n / 2];
    for (size_t i = 0; i < g->n; i++) scratch[i] = g->y[i];
    g->ref = ce_median(scratch, g->n);
    for (int k = 0; k < 5; k++) g->sum[k][0] = 0.0;
    for (size_t i = 0; i < g->n; i++) {
        const double t = g->T[i] - g->ref_K, y = g->y[i] - g->ref;
        const double part[5] = {t, y, t * t, t * y, y * y};
        for (int k = 0; k < 5; k++) g->sum[k][i + 1] = g->sum[k][i] + part[k];
    }
    for (size_t i = 1; i + 1 < g->n; i++)
        scratch[i - 1] = (g->y[i + 1] - 2.0 * g->y[i] + g->y[i - 1]) / sqrt(6.0);
    g->noise = g->n > 2 ? CE_MAD_TO_SD * ce_mad(scratch, g->n - 2) : 0.0;
    return CE_OK;
}

static size_t index_of(const grid *g, double T)
{
    const double guess = (T - g->T[0]) / g->spacing;
    size_t i = guess <= 0.0 ? 0 : guess >= (double)g->n ? g->n : (size_t)guess;
    while (i > 0 && g->T[i - 1] >= T) i--;
    while (i < g->n && g->T[i] < T) i++;
    return i;
}

/* Line over [a, b), b - a >= 3, residual standard deviation in *sd. */
static ce_line line_over(const grid *g, size_t a, size_t b, double *sd)
{
    double s[5];
    const double n = (double)(b - a);
    for (int k = 0; k < 5; k++) s[k] = g->sum[k][b] - g->sum[k][a];
    const double t = s[0] / n, y = s[1] / n;
    const double tt = s[2] - n * t * t, ty = s[3] - n * t * y, yy = s[4] - n * y * y;
    const double slope = tt > 0.0 ? ty / tt : 0.0;
    *sd = sqrt(fmax(yy - slope * ty, 0.0) / (n - 2.0));
    return (ce_line){g->ref_K + t, g->ref + y, slope};
}

/* How far the curve dips below a line over [a, b): a glass warming up does so by a small part of its
 * step, a crystallisation by more. */
static double dip_below(const grid *g, size_t a, size_t b, const ce_line *line)
{
    double most = 0.0;
    for (size_t i = a; i < b; i++) most = fmax(most, ce_line_at(line, g->T[i]) - g->y[i]);
    return most;
}

/* The place at T with one gap; score 0 when there is no room or no rise. */
static ce_place look(const grid *g, double T, double gap, double plausible)
{
    const double half = 0.5 * gap, len = fmax(10.0, gap);
    const ce_place none = {0};
    const size_t a = index_of(g, fmax(T - half - len, g->low_K)), b = index_of(g, T - half);
    const size_t d = index_of(g, T + half), e = index_of(g, fmin(T + half + len, g->high_K + 1e-9));
    if (b < a + 5 || e < d + 5) return none;
    if (g->T[b - 1] - g->T[a] < 0.5 * len || g->T[e - 1] - g->T[d] < 0.45 * len) return none;
    double s1, s2;
    const ce_line left = line_over(g, a, b, &s1), right = line_over(g, d, e, &s2);
    const double step = ce_line_at(&right, T) - ce_line_at(&left, T);
    /* between the lines the curve must rise faster than either: a hook or a bend does not */
    const double rise = ce_line_at(&right, T + half) - ce_line_at(&left, T - half) -
                        gap * fmax(left.slope, right.slope);
    if (!(step > 0.0) || !(rise > 0.25 * step)) return none;
    const double bend = fabs(right.slope - left.slope) * (len + gap);
    /* on a perfect line the last digits would make steps */
    const double climb = (fabs(left.slope) + fabs(right.slope)) * (len + gap);
    const double dip = fmax(dip_below(g, b, d, &left) - 0.15 * step - 3.0 * g->noise, 0.0);
    const double scatter =
        g->noise + 2.0 * (s1 + s2) + 0.08 * bend + 0.005 * step + 1e-3 * climb + 0.2 * dip;
    const double excess = fmax(step / plausible, 1.0);
    return (ce_place){.low_K = T - half,
                      .high_K = T + half,
                      .step = step,
                      .score = step / scatter / (excess * excess)};
}

static int by_score(const void *a, const void *b)
{
    const ce_place *x = a, *y = b;
    return (x->score < y->score) - (x->score > y->score);
}

/* A wide place may hold two steps with a level stretch between them (a blend): two places half as wide
 * or less that are clear of each other and make up its height. best is sorted by score. */
static bool split(const ce_place *best, size_t n, const ce_place *wide, ce_place part[2])
{
    const double gap = wide->high_K - wide->low_K, slack = 0.25 * gap;
    if (gap < 20.0) return false;
    size_t k = 0;
    for (size_t i = 0; i < n && k < 2 && best[i].score > split_score; i++) {
        const ce_place *p = &best[i];
        if (p->low_K < wide->low_K - slack || p->high_K > wide->high_K + slack) continue;
        if (p->high_K - p->low_K > 0.5 * gap || p->step < 0.15 * wide->step) continue;
        if (k == 1 && p->low_K < part[0].high_K + 6.0 && p->high_K > part[0].low_K - 6.0) continue;
        part[k] = *p;
        part[k++].part = true;
    }
    const double sum = k == 2 ? part[0].step + part[1].step : 0.0;
    return sum > 0.75 * wide->step && sum < 1.25 * wide->step;
}

ce_status ce_locate(const ce_curve *curve, double plausible, ce_place *place, size_t room,
                    size_t *found, double *detectable)
{
    grid g;
    *found = 0;
    ce_status st = grid_make(curve, &g);
    if (st != CE_OK) return st;
    ce_place *best = calloc(g.n, sizeof *best);
    if (best == NULL) {
        free(g.all);
        return CE_E_NOMEM;
    }
    for (size_t i = 0; i < g.n; i++)
        for (size_t k = 0; k < GAPS; k++) {
            const ce_place p = look(&g, g.T[i], gaps_K[k], plausible);
            if (p.score > best[i].score) best[i] = p;
        }
    /* What the quiet half of the places would have let through. */
    *detectable = 3.0 * CE_LEAST_SCORE * g.noise;
    qsort(best, g.n, sizeof *best, by_score);
    for (size_t i = 0; i < g.n && *found < room && best[i].score > CE_LEAST_SCORE; i++) {
        bool apart = true;
        for (size_t k = 0; k < *found; k++)
            apart = apart && (best[i].low_K > place[k].high_K + 6.0 ||
                              best[i].high_K < place[k].low_K - 6.0);
        if (apart) place[(*found)++] = best[i];
    }
    for (size_t k = *found; k-- > 0;) {
        ce_place part[2];
        if (*found == room || !split(best, g.n, &place[k], part)) continue;
        place[k] = part[0];
        place[(*found)++] = part[1];
    }
    qsort(place, *found, sizeof *place, by_score);
    free(best);
    free(g.all);
    return CE_OK;
}
