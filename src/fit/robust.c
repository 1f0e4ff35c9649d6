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
    ce_psi psi;
    size_t n, p;
    double *weight, *size; /* n; n scratch */
    double scale, moved;
} reweighting;

static double psi_weight(ce_psi psi, double u)
{
    if (psi == CE_HUBER) return fmin(1, 1.345 / fabs(u));
    double q = 1 - (u / 4.685) * (u / 4.685);
    return fabs(u) < 4.685 ? q * q : 0;
}

/* New scale and weights from the residuals, which are then weighted. */
static void reweighted_function(const double *theta, double *r, double *J, void *context)
{
    reweighting *w = context;
    w->fn(theta, r, J, w->context);
    for (size_t i = 0; i < w->n; i++) w->size[i] = fabs(r[i]);
    w->scale = ce_median(w->size, w->n) / 0.6745;
    w->moved = 0;
    for (size_t i = 0; i < w->n; i++) {
        double next = psi_weight(w->psi, r[i] / w->scale), root = sqrt(next);
        w->moved = fmax(w->moved, fabs(next - w->weight[i]));
        w->weight[i] = next;
        r[i] *= root;
        for (size_t j = 0; j < w->p; j++) J[i * w->p + j] *= root;
    }
}

/* One Gauss-Newton step for each set of weights: for a relation linear in its parameters that is the
 * weighted fit itself, for the others it comes to rest at the same place. */
ce_status ce_robust_solve(ce_nls *nls, ce_nls_function fn, void *context, ce_psi psi, double *theta,
                          double *weight, double *scale)
{
    reweighting w = {.fn = fn,
                     .context = context,
                     .psi = psi,
                     .n = nls->n,
                     .p = nls->p,
                     .weight = weight,
                     .moved = (double)INFINITY};
    w.size = calloc(nls->n, sizeof *w.size);
    if (w.size == NULL) return CE_E_NOMEM;
    ce_status status = CE_OK;
    for (size_t i = 0; i < nls->n; i++) weight[i] = 1;
    for (int step = 0; step < MAX_STEPS && w.moved > 1e-12 && status == CE_OK; step++)
        status = ce_nls_step(nls, reweighted_function, &w, theta);
    *scale = w.scale;
    free(w.size);
    /* A scale of 0: more than half of the points fit exactly. */
    return status == CE_OK && (w.moved > 1e-6 || !(w.scale > 0)) ? CE_E_NOFIT : status;
}
