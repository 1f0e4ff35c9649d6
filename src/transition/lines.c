/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/lines.h"

#include <math.h>

/* Variance of the residuals about line and parabola, raised for their correlation: what is left when
 * the parabola itself is not taken for noise. */
static double parabola_variance(const ce_curve *c, size_t a, size_t b, const ce_line *line,
                                double scale, double size)
{
    double square = 0.0, next = 0.0, last = 0.0;
    for (size_t i = a; i < b; i++) {
        const double d = c->T[i] - line->ref_K, q = d * d / scale - 1.0;
        const double r = c->y[i] - ce_line_at(line, c->T[i]) - size * q;
        square += c->w[i] * r * r;
        if (i > a) next += sqrt(c->w[i] * c->w[i - 1]) * r * last;
        last = r;
    }
    const double n = (double)(b - a), most = 0.98;
    const double rho = square > 0.0 ? fmin(fmax(next / square, 0.0), most) : 0.0;
    return n > 3.0 ? square / (n - 3.0) * (1.0 + rho) / (1.0 - rho) : 0.0;
}

bool ce_fit_line(const ce_curve *c, ce_window window, ce_fitted_line *fit)
{
    const size_t a = ce_curve_index(c, window.low_K), b = ce_curve_index(c, window.high_K + 1e-9);
    *fit = (ce_fitted_line){.n = b > a ? b - a : 0};
    if (b < a + 5) return false;
    double w = 0.0, t = 0.0, y = 0.0, tt = 0.0, ty = 0.0;
    for (size_t i = a; i < b; i++) {
        w += c->w[i];
        t += c->w[i] * c->T[i];
        y += c->w[i] * c->y[i];
    }
    t /= w;
    y /= w;
    for (size_t i = a; i < b; i++) {
        const double d = c->T[i] - t;
        tt += c->w[i] * d * d;
        ty += c->w[i] * d * (c->y[i] - y);
    }
    const double slope = tt > 0.0 ? ty / tt : 0.0;
    fit->line = (ce_line){t, y, slope};
    /* residuals: their size, their correlation from point to point, and a parabola in them */
    const double scale = tt / w;
    double square = 0.0, next = 0.0, last = 0.0, qq = 0.0, qr = 0.0;
    for (size_t i = a; i < b; i++) {
        const double d = c->T[i] - t, r = c->y[i] - y - slope * d, q = d * d / scale - 1.0;
        square += c->w[i] * r * r;
        if (i > a) next += sqrt(c->w[i] * c->w[i - 1]) * r * last;
        last = r;
        qq += c->w[i] * q * q;
        qr += c->w[i] * q * r;
    }
    const double n = (double)(b - a),
                 rho = square > 0.0 ? fmin(fmax(next / square, 0.0), 0.98) : 0.0;
    const double variance = square / (n - 2.0), inflate = (1.0 + rho) / (1.0 - rho);
    fit->sd = sqrt(variance);
    fit->var_at = variance * inflate / w;
    fit->var_slope = variance * inflate / tt;
    /* over a uniform window of length L, scale = L^2/12 and the sag is that of q times 1.5 */
    fit->bend = qq > 0.0 ? 1.5 * qr / qq : 0.0;
    fit->bend_u =
        qq > 0.0 ? 1.5 * sqrt(parabola_variance(c, a, b, &fit->line, scale, qr / qq) / qq) : 0.0;
    return true;
}

double ce_reach(const ce_curve *c, double inner, double outer, double limit, double tolerance)
{
    const double way = outer < inner ? -1.0 : 1.0, stride = fmax(2.0, 3.0 * c->spacing);
    double reached = outer;
    int off = 0;
    for (double T = outer + way * stride; way * (limit - T) > -0.5 * stride; T += way * stride) {
        ce_fitted_line fit;
        const ce_window window = {fmin(inner, reached), fmax(inner, reached)};
        if (!ce_fit_line(c, window, &fit)) return reached;
        double w = 0.0, r = 0.0;
        const size_t b = ce_curve_index(c, T + 0.5 * stride);
        for (size_t i = ce_curve_index(c, T - 0.5 * stride); i < b; i++) {
            w += c->w[i];
            r += c->w[i] * (c->y[i] - ce_line_at(&fit.line, c->T[i]));
        }
        if (w > 0.0 && fabs(r / w) > tolerance) {
            if (++off == 2) return reached;
            continue;
        }
        off = 0;
        reached = way > 0.0 ? fmin(T, limit) : fmax(T, limit);
    }
    return reached;
}

/* Solve the symmetric 4 x 4 system by elimination; false when singular. */
static bool solve4(double A[4][4], double b[4])
{
    for (int k = 0; k < 4; k++) {
        if (!(A[k][k] > 1e-12)) return false;
        for (int i = k + 1; i < 4; i++) {
            const double f = A[i][k] / A[k][k];
            for (int j = k; j < 4; j++) A[i][j] -= f * A[k][j];
            b[i] -= f * b[k];
        }
    }
    for (int k = 3; k >= 0; k--) {
        for (int j = k + 1; j < 4; j++) b[k] -= A[k][j] * b[j];
        b[k] /= A[k][k];
    }
    return true;
}

double ce_smooth(const ce_curve *c, double T, double half)
{
    size_t a = ce_curve_index(c, T - half), b = ce_curve_index(c, T + half);
    while (b < a + 6) { /* sparse: take in the nearest points */
        if (a == 0 && b == c->n) return (double)NAN;
        if (b == c->n || (a > 0 && T - c->T[a - 1] < c->T[b] - T))
            a--;
        else
            b++;
    }
    const double reach = fmax(fmax(T - c->T[a], c->T[b - 1] - T), 1e-9) * 1.05;
    double A[4][4] = {{0}}, r[4] = {0};
    for (size_t i = a; i < b; i++) {
        const double u = (c->T[i] - T) / reach, k = 1.0 - u * u, w = c->w[i] * fmax(k, 0.01);
        const double p[4] = {1.0, u, u * u, u * u * u};
        for (int m = 0; m < 4; m++) {
            for (int n = 0; n < 4; n++) A[m][n] += w * p[m] * p[n];
            r[m] += w * p[m] * c->y[i];
        }
    }
    return solve4(A, r) ? r[0] : (double)NAN;
}
