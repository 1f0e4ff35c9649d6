/* SPDX-License-Identifier: GPL-3.0-or-later
 * Unknowns on a ruler of molar mass, for the terminal. */
#ifndef CE_OUTPUT_RULER_H
#define CE_OUTPUT_RULER_H

#include "output/estimate.h"

/* One line an unknown: interval and estimate on a log axis of Mn, under it the standards and the
 * ceiling. Nothing is written when no answer is an Mn. ascii: no character outside ASCII. CE_OK or
 * CE_E_NOMEM. */
ce_status ce_write_ruler(const ce_estimate_result *result, FILE *to, bool ascii);

#endif
