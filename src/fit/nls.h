/* SPDX-License-Identifier: GPL-3.0-or-later
 * Nonlinear least squares: GSL's solver with an analytic Jacobian, its answer checked and polished.
 */
#ifndef CE_FIT_NLS_H
#define CE_FIT_NLS_H

#include <chainend/base.h>

#include <stdbool.h>

/* Residuals r (n, weighted) and their Jacobian J (row-major n x p, by theta). NaN or infinite
 * residuals mark a theta that is not allowed. */
typedef void (*ce_nls_function)(const double *theta, double *r, double *J, void *context);

typedef struct {
    double tolerance;      /* relative change at which GSL stops and the polish takes over       */
    size_t max_iterations; /* of GSL                                                           */
    bool kinked;           /* the minimum may lie on a kink, where no gradient vanishes         */
} ce_nls_options;
#define CE_NLS_DEFAULT                                                                             \
    {                                                                                              \
        .tolerance = 1e-7, .max_iterations = 200                                                   \
    }

typedef struct ce_nls_work ce_nls_work; /* scratch, hidden: it holds GSL objects */

/* Workspace and result of fits of one size; to be used again for the next fit of that size. */
typedef struct {
    size_t n, p;
    double *r, *J;      /* at the solution: n, n x p                                          */
    double sum;         /* r'r                                                                */
    double *covariance; /* (J'J)^-1, row-major p x p, unscaled                                */
    double *leverage;   /* n: diagonal of J (J'J)^-1 J'                                       */
    double rcond;       /* smallest by largest singular value of J with columns of length 1   */
    double offset;      /* relative offset of Bates and Watts: Gauss-Newton step left over    */
    size_t iterations;
    ce_nls_work *work;
} ce_nls;

/* n >= p >= 1. CE_OK | CE_E_ARG | CE_E_NOMEM (then *nls is NULL). */
ce_status ce_nls_new(ce_nls **nls, size_t n, size_t p);
void ce_nls_free(ce_nls *nls);

/* ce_nls_solve - least squares from a start.
 *   in,out  theta  start; the solution (unchanged unless CE_OK)
 *   ret     CE_OK | CE_E_NOFIT (not finite at the start, no convergence, rank)
 *   On CE_OK all results in nls stand. On "rank" nls->sum and theta stand too, the rest does not.
 *   Convergence is judged by the relative offset, D. M. Bates and D. G. Watts, Technometrics 23
 *   (1981) 179 (from memory), not by what the solver claims. */
ce_status ce_nls_solve(ce_nls *nls, ce_nls_function fn, void *context, double *theta,
                       const ce_nls_options *options, ce_error *err);

/* ce_nls_step - one Gauss-Newton step: theta moves to the minimum of the problem linearised there.
 *   ret  CE_OK | CE_E_NOFIT (not finite, rank; theta unchanged). nls->r, J are those at the start. */
ce_status ce_nls_step(ce_nls *nls, ce_nls_function fn, void *context, double *theta);

/* What a profile likelihood interval needs beside the fit. */
typedef struct {
    ce_nls_function fn;
    void *context;
    const double *theta; /* p, the solution                                                    */
    double rise;         /* allowed rise of the sum of squares: t^2 s^2                        */
    ce_nls_options options;
} ce_profile;
/* Limits of parameter i: where the sum of squares, minimised over the others, has risen by that
 * much (D. M. Bates and D. G. Watts, Nonlinear Regression Analysis (1988), ch. 6, from memory).
 * Infinite where it never does; floor_value, for a parameter that cannot be less, may be -inf.
 * nls holds the solution. CE_OK | CE_E_NOMEM. */
ce_status ce_profile_limits(const ce_nls *nls, const ce_profile *profile, size_t i,
                            double floor_value, double *low, double *high);

#endif
