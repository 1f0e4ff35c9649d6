/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "fit/robust.h"

#include "base/order.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { MAX_STEPS = 500 };

typedef struct {
    ce_nls_function fn;
    void *context;
    const double *weight;
    size_t n, p;
} weighted;

static void weighted_function(const double *theta, double *r, double *J, void *context)
{
    const weighted *w = context;
    w->fn(theta, r, J, w->context);
    for (size_t i = 0; i < w->n; i++) {
        double root = sqrt(w->weight[i]);
        r[i] *= root;
        for (size_t j = 0; j < w->p; j++) J[i * w->p + j] *= root;
    }
}

static double psi_weight(ce_psi psi, double u)
{
    if (psi == CE_HUBER) return fmin(1, 1.345 / fabs(u));
    double q = 1 - (u / 4.685) * (u / 4.685);
    return fabs(u) < 4.685 ? q * q : 0;
}

ce_status ce_robust_solve(ce_nls *nls, ce_nls_function fn, void *context, ce_psi psi, double *theta,
                          double *weight, double *scale, const ce_nls_options *options)
{
    size_t n = nls->n, p = nls->p;
    double *r = calloc(2 * n + n * p, sizeof *r), *size = r + n, *J = size + n;
    if (r == NULL) return CE_E_NOMEM;
    weighted w = {.fn = fn, .context = context, .weight = weight, .n = n, .p = p};
    ce_status status = CE_OK;
    double moved = (double)INFINITY;
    for (size_t i = 0; i < n; i++) weight[i] = 1;
    for (int step = 0; step < MAX_STEPS && moved > 1e-12 && status == CE_OK; step++) {
        fn(theta, r, J, context);
        for (size_t i = 0; i < n; i++) size[i] = fabs(r[i]);
        *scale = ce_median(size, n) / 0.6745;
        if (!(*scale > 0)) break; /* more than half of the points fit exactly */
        moved = 0;
        for (size_t i = 0; i < n; i++) {
            double next = psi_weight(psi, r[i] / *scale);
            moved = fmax(moved, fabs(next - weight[i]));
            weight[i] = next;
        }
        status = ce_nls_solve(nls, weighted_function, &w, theta, options, NULL);
    }
    free(r);
    if (status == CE_OK && !(*scale > 0)) return CE_E_NOFIT;
    return status == CE_OK && moved > 1e-6 ? CE_E_NOFIT : status;
}
