/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/construct.h"

#include <math.h>

static double height(const ce_trace *t, const ce_lines *l, size_t i)
{
    const double g = ce_line_at(&l->glass, t->T[i]);
    return (t->y[i] - g) / (ce_line_at(&l->liquid, t->T[i]) - g);
}

/* First crossing of a normalised height going up: the index after it, n when there is none. */
static size_t crossing(const ce_trace *t, const ce_lines *l, double f, double *T)
{
    double before = height(t, l, 0);
    for (size_t i = 1; i < t->n; i++) {
        const double h = height(t, l, i);
        if (before < f && h >= f) {
            *T = t->T[i - 1] + (t->T[i] - t->T[i - 1]) * (f - before) / (h - before);
            return i;
        }
        before = h;
    }
    return t->n;
}

static double slope_at(const ce_trace *t, size_t i)
{
    return (t->y[i + 1] - t->y[i - 1]) / (t->T[i + 1] - t->T[i - 1]);
}

/* Greatest slope between two points of the trace, refined by a parabola through three slopes. */
static bool steepest(const ce_trace *t, size_t from, size_t to, ce_line *tangent)
{
    size_t best = 0;
    double most = -1e300;
    if (from < 2) from = 2;
    for (size_t i = from; i <= to && i + 2 < t->n; i++)
        if (slope_at(t, i) > most) {
            most = slope_at(t, i);
            best = i;
        }
    if (best == 0) return false;
    const double a = slope_at(t, best - 1), c = slope_at(t, best + 1), d = t->T[1] - t->T[0];
    const double curve = a - 2.0 * most + c;
    const double u = curve < 0.0 ? fmin(fmax(0.5 * (a - c) / curve, -1.0), 1.0) : 0.0;
    const double slope = most + 0.5 * (c - a) * u + 0.5 * curve * u * u;
    const double y = t->y[best] + u * d * (most + 0.25 * (c - a) * u);
    *tangent = (ce_line){t->T[best] + u * d, y, slope};
    return true;
}

static double meets(const ce_line *a, const ce_line *b)
{
    const double turn = a->slope - b->slope;
    return turn > 0.0 ? a->ref_K + (ce_line_at(b, a->ref_K) - a->at_ref) / turn : (double)NAN;
}

/* Where the trace crosses a horizontal level nearest to a temperature. */
static double level_crossing(const ce_trace *t, double level, double near)
{
    double best = (double)NAN;
    for (size_t i = 1; i < t->n; i++) {
        if (!(t->y[i - 1] < level && t->y[i] >= level)) continue;
        const double T =
            t->T[i - 1] + (t->T[i] - t->T[i - 1]) * (level - t->y[i - 1]) / (t->y[i] - t->y[i - 1]);
        if (isnan(best) || fabs(T - near) < fabs(best - near)) best = T;
    }
    return best;
}

/* Integral of (liquid - glass) from Tf to T2 = integral of (y - glass) to T2 (Moynihan et al.,
 * J. Am. Ceram. Soc. 59 (1976) 12, from memory); the difference of the lines is d0 + d1 (T - Tr) and
 * the quadratic is solved without cancellation. */
static double equal_areas(const ce_trace *t, const ce_lines *l, double to)
{
    double area = 0.0;
    size_t i = 1;
    for (; i < t->n && t->T[i] <= to + 1e-9; i++)
        area += 0.5 * (t->T[i] - t->T[i - 1]) *
                (t->y[i] - ce_line_at(&l->glass, t->T[i]) + t->y[i - 1] -
                 ce_line_at(&l->glass, t->T[i - 1]));
    const double T2 = t->T[i - 1], d0 = ce_line_at(&l->liquid, T2) - ce_line_at(&l->glass, T2);
    const double d1 = l->liquid.slope - l->glass.slope, root = d0 * d0 - 2.0 * d1 * area;
    return root < 0.0 || !(d0 > 0.0) ? (double)NAN : T2 - 2.0 * area / (d0 + sqrt(root));
}

/* Temperatures between the first 0.45 of the height and the last 0.55 before a point of the trace. */
static double shoulder(const ce_trace *t, const ce_lines *l, size_t low, size_t high)
{
    size_t from = low, to = high;
    while (from < high && height(t, l, from) < 0.45) from++;
    while (to > from && height(t, l, to) > 0.55) to--;
    return t->T[to] - t->T[from];
}

double ce_shoulder_doubt(const ce_points *p)
{
    const double share = p->shoulder_K / fmax(p->high_K - p->low_K, 0.1);
    return fmin(fmax((share - 0.16) / 0.06, 0.0), 1.0) * p->shoulder_K / sqrt(12.0);
}

double ce_tangent_doubt(const ce_points *p, ce_construction construction)
{
    return fabs(p->apart[construction]) / sqrt(12.0);
}

static void meet_lines(const ce_line *tangent, const ce_lines *l, double at[CE_CONSTRUCTIONS])
{
    at[CE_INFLECTION] = tangent->ref_K;
    at[CE_ONSET] = meets(tangent, &l->glass);
    at[CE_END] = meets(tangent, &l->liquid);
}

/* The steepest place off the steepest by a quarter of the rise or more, when it is a peak of the slope of
 * its own and nine tenths as steep. */
static void other_tangent(const ce_trace *t, const ce_lines *l, size_t low, size_t top,
                          ce_points *p)
{
    const double off = 0.25 * (p->high_K - p->low_K);
    double most = 0.9 * (p->tangent.slope - l->glass.slope) + l->glass.slope;
    size_t best = 0;
    for (size_t i = low > 3 ? low : 3; i < top && i + 3 < t->n; i++) {
        const double slope = slope_at(t, i);
        if (fabs(t->T[i] - p->tangent.ref_K) < off || slope < most) continue;
        if (slope < slope_at(t, i - 1) || slope < slope_at(t, i + 1)) continue;
        most = slope;
        best = i;
    }
    if (best == 0) return;
    const ce_line tangent = {t->T[best], t->y[best], most};
    double at[CE_CONSTRUCTIONS] = {0};
    meet_lines(&tangent, l, at);
    static const ce_construction by_tangent[] = {CE_INFLECTION, CE_ONSET, CE_END};
    for (size_t k = 0; k < 3; k++) {
        const double apart = at[by_tangent[k]] - p->at[by_tangent[k]];
        p->apart[by_tangent[k]] = isfinite(apart) ? apart : 0.0;
    }
}

bool ce_construct(const ce_trace *t, const ce_lines *l, double area_K, ce_points *p)
{
    *p = (ce_points){.low_K = (double)NAN, .high_K = (double)NAN};
    for (int k = 0; k < CE_CONSTRUCTIONS; k++) p->at[k] = (double)NAN;
    if (t->n < 8) return false;
    for (size_t i = 0; i < t->n; i++)
        if (!(ce_line_at(&l->liquid, t->T[i]) > ce_line_at(&l->glass, t->T[i]))) return false;
    double half = (double)NAN;
    const size_t after = crossing(t, l, 0.5, &half);
    if (after == t->n) return false;
    p->at[CE_HALF_STEP] = half;
    p->step = ce_line_at(&l->liquid, half) - ce_line_at(&l->glass, half);
    size_t low = after, high = after, top = after;
    while (low > 1 && height(t, l, low - 1) > 0.1) low--;
    while (high + 1 < t->n && height(t, l, high) < 0.9) high++;
    const double farthest = t->T[high] + 1.5 * (t->T[high] - t->T[low - 1]);
    while (top + 1 < t->n && (height(t, l, top) < 0.8 || t->y[top + 1] > t->y[top]) &&
           t->T[top] < farthest)
        top++;
    p->low_K = t->T[low - 1];
    p->high_K = t->T[high];
    p->shoulder_K = shoulder(t, l, low, high);
    double most = 0.0;
    for (size_t i = after; i < t->n && t->T[i] <= area_K; i++)
        most = fmax(most, height(t, l, i) - 1.0);
    p->overshoot = most;
    p->at[CE_FICTIVE] = equal_areas(t, l, area_K);
    if (!steepest(t, low, top, &p->tangent)) return true;
    meet_lines(&p->tangent, l, p->at);
    other_tangent(t, l, low, top, p);
    const double on = p->at[CE_ONSET], end = p->at[CE_END];
    if (isfinite(on) && isfinite(end))
        p->at[CE_MIDPOINT] = level_crossing(
            t, 0.5 * (ce_line_at(&l->glass, on) + ce_line_at(&l->liquid, end)), half);
    return true;
}
