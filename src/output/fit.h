/* SPDX-License-Identifier: GPL-3.0-or-later
 * A fitted relation, written out. JSON schema chainend.fit/1. */
#ifndef CE_OUTPUT_FIT_H
#define CE_OUTPUT_FIT_H

#include <chainend/estimate.h>
#include <chainend/fit.h>
#include <chainend/series.h>

#include "output/document.h"

typedef struct {
    const ce_fit *fit;
    ce_construction construction;
    double rate_K_min;
    ce_history history;
    const char *polymer;
    const ce_series *series; /* NULL = not at hand: nothing is said of a reduction of rates */
    size_t n_range;
    const ce_range_row *range; /* working range for one run of an unknown                   */
    double ceiling_tg_K, ceiling_mn_g_mol; /* for one run of an unknown; NaN = no reading has one */
} ce_fit_result;

CE_DOCUMENT(fit, ce_fit_result)

#endif
