/* SPDX-License-Identifier: GPL-3.0-or-later
 * The stretched exponential as a sum of exponentials. */
#ifndef CE_SIMULATE_KERNEL_H
#define CE_SIMULATE_KERNEL_H

#include <chainend/base.h>

/* exp(-xi^beta) = sum of weight[k] exp(-rate[k] xi) to within error for every xi >= 0; the weights
 * are positive and add to 1 - error at the least. Rates rise geometrically. */
typedef struct {
    size_t n;
    double *rate, *weight;
    double error; /* largest found on a dense logarithmic grid of xi */
} ce_kernel;

/* The betas the sum is made for, besides 1: below, the rates would leave the range of a double;
 * above, the spectrum is so narrow that the plain superposition sum is as cheap. */
#define CE_KERNEL_MIN_BETA 0.05
#define CE_KERNEL_MAX_BETA 0.95

/* Build the sum for such a beta with an error of at most tolerance (1e-12 to
 * 1e-2). CE_OK | CE_E_DOMAIN | CE_E_NOFIT (tolerance not reached) | CE_E_NOMEM. Free with
 * ce_kernel_free(), which accepts an empty one. */
ce_status ce_kernel_build(double beta, double tolerance, ce_kernel *kernel, ce_error *err);
void ce_kernel_free(ce_kernel *kernel);
double ce_kernel_value(const ce_kernel *kernel, double xi);

/* Spectrum rate * rho(rate) of exp(-xi^beta) = integral of rho(r) exp(-r xi) dr, 0 < beta < 1. */
double ce_kernel_density(double beta, double ln_rate);

#endif
