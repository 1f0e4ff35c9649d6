/* SPDX-License-Identifier: GPL-3.0-or-later
 * Structural relaxation of a glass: the shape of its heat-capacity step on heating and on cooling.
 *
 * Tool-Narayanaswamy-Moynihan model: the fictive temperature Tf follows the temperature with the
 * relaxation time
 *     tau = tau_r exp{ h [ x (1/T - 1/Tr) + (1 - x) (1/Tf - 1/Tr) ] },
 * and a stretched-exponential response exp[-(t/tau)^beta] (Narayanaswamy, J. Am. Ceram. Soc. 54
 * (1971) 491; Moynihan et al., J. Am. Ceram. Soc. 59 (1976) 12; from memory). tau_r is chosen so
 * that (rate of the scan) * tau_r = Tr^2/h: then Tr lies on the transition and the scan rate drops
 * out of the shape, which depends on temperatures and on ratios of rates only.
 *
 * The stretched exponential is expanded in exponential modes, equidistant in the logarithm of the
 * rate, weighted by its exact distribution of rates (a one-sided stable law; trapezoidal rule), so
 * that one step in temperature costs O(modes) instead of a sum over the whole history. */
#ifndef CE_TRANSITION_RELAX_H
#define CE_TRANSITION_RELAX_H

#include <stdbool.h>
#include <stddef.h>

enum { CE_MODES = 48, CE_CHAINS = 4 };

/* The exponential modes of exp[-(t/tau)^beta], in chains whose rates double from mode to mode:
 * mode k of chain c has the rate slowest[c] * 2^k / tau and the weight[c][k]. */
typedef struct {
    size_t chains, n;
    double slowest[CE_CHAINS];
    double weight[CE_CHAINS][CE_MODES];
} ce_modes;

typedef struct {
    double tr_K;     /* reference temperature of the transition                                */
    double h_K;      /* activation enthalpy over the gas constant                              */
    double beta;     /* stretching exponent, 0 < beta < 1                                      */
    double x;        /* Narayanaswamy's partition parameter, 0 < x <= 1                        */
    double cooling;  /* rate of the cooling before, over the rate of the scan                  */
    double age_K;    /* time of annealing times the rate of the scan, K; 0 = none              */
    double age_at_K; /* temperature of annealing                                               */
    double lag_K;    /* instrument: first-order lag times the rate of the scan; 0 = none       */
    double
        fine_at_K;  /* where the integration takes its finest steps, and these; both fixed       */
    double fine_K;  /* during a fit, so that the curve is smooth in the parameters             */
    ce_modes modes; /* set by ce_relax_modes() from beta                                      */
} ce_relax;

/* Fill in the modes for a stretching exponent. */
void ce_relax_modes(double beta, ce_modes *modes);

/* Heating from low[0] after cooling from equilibrium and annealing: the fictive temperature tf[] at
 * the middle of n cells low[i]..high[i] (K, rising, not overlapping), and its mean slope dTf/dT over
 * the cell, the heat-capacity step normalised to 0..1, in step[]. With cooling_scan the same on the
 * way down, without history. The lag smears step[] but not tf[]. */
void ce_relax_scan(const ce_relax *relax, bool cooling_scan, size_t n, const double *low,
                   const double *high, double *tf, double *step);

#endif
