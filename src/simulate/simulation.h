/* SPDX-License-Identifier: GPL-3.0-or-later
 * The inside of a simulated run. */
#ifndef CE_SIMULATE_SIMULATION_H
#define CE_SIMULATE_SIMULATION_H

#include "simulate/trace.h"

struct ce_simulation {
    ce_simulation_config config; /* its programme steps are owned          */
    ce_programme_step *step;
    size_t n;
    double *t_s, *t_K, *signal_mW, *tf_K[CE_MAX_GLASSES];
    size_t last_heating, last_heating_n; /* rows of the last recorded heating; n 0 = none */
    size_t n_truth;
    ce_ramp_truth *truth;
};

/* What the instrument makes of a sample whose trace is known: every run of a sample after the first
 * costs only this. trace belongs to config (same programme, glasses, interval). */
ce_status ce_simulation_record(const ce_simulation_config *config, const ce_trace *trace,
                               ce_simulation **simulation, ce_error *err);

#endif
