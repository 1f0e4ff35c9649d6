/* SPDX-License-Identifier: GPL-3.0-or-later
 * M-estimation as a diagnostic. */
#ifndef CE_FIT_ROBUST_H
#define CE_FIT_ROBUST_H

#include "fit/nls.h"

typedef enum { CE_HUBER, CE_BISQUARE } ce_psi;

/* ce_robust_solve - iteratively reweighted least squares from the least-squares solution.
 *   Convention: scale = median |r|/0.6745, unweighted, new in every step; residuals are not divided
 *   by sqrt(1 - leverage); Huber 1.345, bisquare 4.685; until the weights stand still (P. J. Huber,
 *   Robust Statistics (1981); W. N. Venables and B. D. Ripley, Modern Applied Statistics with S
 *   (2002), ch. 6, both from memory).
 *   in,out  theta   p, the least-squares solution; the robust one
 *   out     weight  n, 0..1; scale in units of the residuals
 *   ret     CE_OK | CE_E_NOFIT | CE_E_NOMEM. nls is used for the steps. */
ce_status ce_robust_solve(ce_nls *nls, ce_nls_function fn, void *context, ce_psi psi, double *theta,
                          double *weight, double *scale);

#endif
