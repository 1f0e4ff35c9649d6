/* SPDX-License-Identifier: GPL-3.0-or-later
 *
 * For 0 < beta < 1 exp(-xi^beta) is the Laplace transform of a one-sided stable density rho(rate)
 * (Pollard, Bull. Am. Math. Soc. 52 (1946) 908, from memory). In s = ln rate the integral is taken
 * by the trapezoidal rule, which converges exponentially because the integrand is analytic in
 * |Im s| < pi/2; the step is halved until the error, measured, is small enough. */
#include "simulate/kernel.h"

#include <math.h>
#include <stdbool.h>
#include <stdlib.h>

/* Kanter's integral (Ann. Probab. 3 (1975) 697, from memory), u = rate^(-beta/(1-beta)):
 * rate rho = beta/((1-beta) pi) * integral 0..pi of A u exp(-A u) dtheta,
 * A = sin((1-beta) theta) sin(beta theta)^(beta/(1-beta)) / sin(theta)^(1/(1-beta)).
 * The integrand and all its derivatives vanish at pi and it is even about 0: trapezoidal rule. */
static double density_integral(double beta, double s)
{
    double p = beta / (1.0 - beta), ln_u = -p * s, sum = 0.0;
    size_t n = 256;
    if (beta > 0.9) n = 2048;
    for (size_t i = 0; i < n; i++) {
        double ln_a;
        if (i == 0) {
            ln_a = log(1.0 - beta) + p * log(beta);
        } else {
            double th = M_PI * (double)i / (double)n;
            ln_a =
                log(sin((1.0 - beta) * th)) + p * log(sin(beta * th)) - log(sin(th)) / (1.0 - beta);
        }
        double ln_au = ln_a + ln_u;
        if (ln_au > 6.7) continue; /* exp(-e^6.7) is nothing */
        sum += (i == 0 ? 0.5 : 1.0) * exp(ln_au - exp(ln_au));
    }
    return p * sum / (double)n;
}

/* Convergent series in rate^-beta (Humbert 1945, Pollard 1946, from memory), for rates >= 1:
 * rate rho = (1/pi) sum k>=1 of (-1)^(k+1) Gamma(1 + beta k)/k! sin(pi beta k) rate^(-beta k). */
static double density_series(double beta, double s)
{
    double sum = 0.0;
    for (int k = 1; k < 20000; k++) {
        double size = exp(lgamma(1.0 + beta * k) - lgamma(1.0 + k) - beta * k * s);
        sum += (k % 2 == 1 ? 1.0 : -1.0) * size * sin(M_PI * beta * k);
        if (size < 1.0e-18) break;
    }
    return sum / M_PI;
}

double ce_kernel_density(double beta, double ln_rate)
{
    double d = ln_rate < 1.0 ? density_integral(beta, ln_rate) : density_series(beta, ln_rate);
    return d > 0.0 ? d : 0.0;
}

double ce_kernel_value(const ce_kernel *kernel, double xi)
{
    double sum = 0.0;
    for (size_t k = 0; k < kernel->n; k++) sum += kernel->weight[k] * exp(-kernel->rate[k] * xi);
    return sum;
}

static double measured_error(const ce_kernel *kernel, double beta)
{
    /* xi^beta from 1e-9 to 50: outside both sides are constant within any tolerance of interest */
    double worst = 0.0;
    enum { POINTS = 500 };
    for (int i = 0; i <= POINTS; i++) {
        double ln_p = log(1.0e-9) + (log(50.0) - log(1.0e-9)) * i / POINTS;
        double e = fabs(ce_kernel_value(kernel, exp(ln_p / beta)) - exp(-exp(ln_p)));
        if (e > worst) worst = e;
    }
    return worst;
}

static ce_status fill(ce_kernel *kernel, double beta, double low, double high, double step)
{
    size_t n = (size_t)ceil((high - low) / step) + 1;
    kernel->n = 0;
    kernel->rate = calloc(n, sizeof *kernel->rate);
    kernel->weight = calloc(n, sizeof *kernel->weight);
    if (kernel->rate == NULL || kernel->weight == NULL) return CE_E_NOMEM;
    for (size_t k = 0; k < n; k++) {
        double s = low + step * (double)k, w = step * ce_kernel_density(beta, s);
        if (w < 1.0e-15) continue;
        kernel->rate[kernel->n] = exp(s);
        kernel->weight[kernel->n++] = w;
    }
    kernel->error = measured_error(kernel, beta);
    return CE_OK;
}

static ce_status single(ce_kernel *kernel)
{
    kernel->rate = calloc(1, sizeof *kernel->rate);
    kernel->weight = calloc(1, sizeof *kernel->weight);
    if (kernel->rate == NULL || kernel->weight == NULL) return CE_E_NOMEM;
    kernel->n = 1;
    kernel->rate[0] = kernel->weight[0] = 1.0;
    return CE_OK;
}

ce_status ce_kernel_build(double beta, double tolerance, ce_kernel *kernel, ce_error *err)
{
    *kernel = (ce_kernel){0};
    bool known = beta == 1.0 || (beta >= CE_KERNEL_MIN_BETA && beta <= CE_KERNEL_MAX_BETA);
    if (!known || !(tolerance >= 1e-12 && tolerance <= 1e-2))
        return ce_fail(err, CE_E_DOMAIN, "no sum of exponentials for beta %g, tolerance %g", beta,
                       tolerance);
    ce_status st = CE_E_NOFIT;
    if (beta == 1.0) {
        st = single(kernel);
    } else {
        /* Weight above high is high^-beta/Gamma(1-beta): dropped, relaxed at once. Below low the
         * density is smaller than exp(-40). */
        double low = (1.0 - beta) / beta * (log(1.0 - beta) - log(40.0)) + log(beta);
        double high = -log(0.25 * tolerance * tgamma(1.0 - beta)) / beta;
        for (double step = 0.8; step > 0.002 && st == CE_E_NOFIT; step *= 0.75) {
            ce_kernel_free(kernel);
            st = fill(kernel, beta, low, high, step);
            if (st == CE_OK && !(kernel->error <= tolerance)) st = CE_E_NOFIT;
        }
    }
    if (st == CE_OK) return CE_OK;
    ce_kernel_free(kernel);
    return ce_fail(err, st,
                   st == CE_E_NOMEM ? "out of memory"
                                    : "the sum of exponentials does not reach %g for "
                                      "beta %g",
                   tolerance, beta);
}

void ce_kernel_free(ce_kernel *kernel)
{
    free(kernel->rate);
    free(kernel->weight);
    *kernel = (ce_kernel){0};
}
