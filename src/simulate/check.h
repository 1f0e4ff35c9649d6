/* SPDX-License-Identifier: GPL-3.0-or-later
 * Impossible input, refused before anything is computed. */
#ifndef CE_SIMULATE_CHECK_H
#define CE_SIMULATE_CHECK_H

#include <chainend/simulate.h>

/* CE_OK | CE_E_DOMAIN with the option of the command line in the message. */
ce_status ce_simulation_check(const ce_simulation_config *config, ce_error *err);

#endif
