/* SPDX-License-Identifier: GPL-3.0-or-later
 * Doubts about a result, each with the number behind it. */
#ifndef CE_TRANSITION_FLAGS_H
#define CE_TRANSITION_FLAGS_H

#include "transition/evaluate.h"

void ce_add_flag(ce_transition *transition, ce_flag_code code, double number);
/* Those that the curve gives: overshoot, noise, windows, width, sampling, events. */
void ce_flag_finding(const ce_finding *finding, ce_transition *transition);

#endif
