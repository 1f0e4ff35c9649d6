/* SPDX-License-Identifier: GPL-3.0-or-later
 * Structural relaxation of one glass, marched through time. */
#ifndef CE_SIMULATE_RELAX_H
#define CE_SIMULATE_RELAX_H

#include <chainend/simulate.h>

/* ln of the relaxation time in s, Tool-Narayanaswamy-Moynihan: ln A + x h/T + (1 - x) h/Tf. */
double ce_relax_ln_tau(const ce_glass *glass, double t_K, double tf_K);
/* Lowest temperature at which the glass follows a ramp as fast as rate_K_min in equilibrium, to all
 * digits that matter: where to start a history. */
double ce_relax_equilibrium(const ce_glass *glass, double rate_K_min);

typedef struct ce_relax ce_relax;
/* In equilibrium at t_K. CE_OK | CE_E_NOMEM | CE_E_NOFIT. */
ce_status ce_relax_start(const ce_glass *glass, ce_relax_scheme scheme, double t_K, ce_relax **out,
                         ce_error *err);
/* Back to equilibrium at t_K with other values of the glass but the same beta. */
void ce_relax_restart(ce_relax *relax, const ce_glass *glass, double t_K);
/* One step: temperature changes linearly by dt_K over dt_s > 0. CE_OK | CE_E_NOMEM. */
ce_status ce_relax_step(ce_relax *relax, double dt_s, double dt_K);
/* The next step belongs to another ramp or hold: nothing is extrapolated over the kink. */
void ce_relax_kink(ce_relax *relax);
double ce_relax_fictive(const ce_relax *relax);
void ce_relax_free(ce_relax *relax);

#endif
