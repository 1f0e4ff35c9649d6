/* SPDX-License-Identifier: GPL-3.0-or-later
 * Profile likelihood: one parameter held, the others free. */
#include "fit/nls.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

typedef struct {
    const ce_profile *profile;
    const ce_nls *full;
    ce_nls *part; /* NULL when there is only the one parameter */
    size_t held;
    double value;
    double *theta, *J, *free_theta, *r; /* p; n x p; p - 1: of the last solution */
} held_fit;

static void fill(held_fit *h, const double *free_theta)
{
    for (size_t j = 0, k = 0; j < h->full->p; j++)
        h->theta[j] = j == h->held ? h->value : free_theta[k++];
}

static void held_function(const double *free_theta, double *r, double *J, void *context)
{
    held_fit *h = context;
    size_t n = h->full->n, p = h->full->p;
    fill(h, free_theta);
    h->profile->fn(h->theta, r, h->J, h->profile->context);
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0, k = 0; j < p; j++)
            if (j != h->held) J[i * (p - 1) + k++] = h->J[i * p + j];
}

/* sqrt(rise of the sum of squares) - sqrt(allowed rise), nearly linear in the value; infinite where
 * the model is not defined. A rank failure still gives a valid sum. */
static double excess_rise(held_fit *h, double value)
{
    double sum = 0;
    h->value = value;
    if (h->part == NULL) {
        fill(h, NULL);
        h->profile->fn(h->theta, h->r, h->J, h->profile->context);
        for (size_t i = 0; i < h->full->n; i++) sum += h->r[i] * h->r[i];
    } else {
        h->part->sum = (double)NAN;
        (void)ce_nls_solve(h->part, held_function, h, h->free_theta, &h->profile->options, NULL);
        sum = h->part->sum;
    }
    if (!isfinite(sum)) return (double)INFINITY;
    return sqrt(fmax(sum - h->full->sum, 0)) - sqrt(h->profile->rise);
}

static void reset(held_fit *h)
{
    for (size_t j = 0, k = 0; j < h->full->p; j++)
        if (j != h->held) h->free_theta[k++] = h->profile->theta[j];
}

/* One side: steps of the Wald half-width, doubled until the rise is too large, then regula falsi
 * (Illinois) with bisection where the model is not defined. */
static double one_side(held_fit *h, double direction, double floor_value)
{
    double at = h->profile->theta[h->held], f_in = -sqrt(h->profile->rise), f_out = f_in;
    double half = sqrt(h->profile->rise * h->full->covariance[h->held * (h->full->p + 1)]);
    double in = at, out = at;
    reset(h);
    for (int i = 0; i < 40 && !(f_out > 0); i++) {
        in = out, f_in = f_out;
        out = at + direction * half * ldexp(1, i);
        if (direction < 0 && out <= floor_value) {
            out = floor_value;
            f_out = (double)INFINITY;
        } else {
            f_out = excess_rise(h, out);
        }
    }
    if (!(f_out > 0)) return direction * (double)INFINITY;
    int side = 0;
    for (int i = 0; i < 100 && fabs(out - in) > 1e-12 * fabs(in) + 1e-14 * half; i++) {
        bool bisect = !isfinite(f_out) || i % 8 == 7;
        double mid = bisect ? 0.5 * (in + out) : (in * f_out - out * f_in) / (f_out - f_in), f;
        f = excess_rise(h, mid);
        if (fabs(f) < 1e-11 * sqrt(h->profile->rise)) return mid;
        if (f > 0) {
            out = mid, f_out = f;
            if (side > 0) f_in *= 0.5;
            side = 1;
        } else {
            in = mid, f_in = f;
            if (side < 0) f_out *= 0.5;
            side = -1;
        }
    }
    return 0.5 * (in + out);
}

ce_status ce_profile_limits(const ce_nls *nls, const ce_profile *profile, size_t i,
                            double floor_value, double *low, double *high)
{
    size_t n = nls->n, p = nls->p;
    held_fit h = {.profile = profile, .full = nls, .held = i};
    double *scratch = calloc(2 * p + n * p + n, sizeof *scratch);
    ce_status status = scratch == NULL ? CE_E_NOMEM : p > 1 ? ce_nls_new(&h.part, n, p - 1) : CE_OK;
    *low = *high = (double)NAN;
    if (status == CE_OK) {
        h.theta = scratch;
        h.free_theta = scratch + p;
        h.r = scratch + 2 * p;
        h.J = h.r + n;
        *low = one_side(&h, -1, floor_value);
        *high = one_side(&h, 1, floor_value);
    }
    ce_nls_free(h.part);
    free(scratch);
    return status;
}
