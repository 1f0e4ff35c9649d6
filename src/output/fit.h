/* SPDX-License-Identifier: GPL-3.0-or-later
 * A fitted relation, written out. JSON schema chainend.fit/1. */
#ifndef CE_OUTPUT_FIT_H
#define CE_OUTPUT_FIT_H

#include <chainend/fit.h>
#include <chainend/series.h>

#include <stdio.h>

typedef struct {
    const ce_fit *fit;
    ce_construction construction;
    double rate_K_min;
    ce_history history;
    const char *polymer;
    double ceiling_tg_K, ceiling_mn_g_mol; /* for one run of an unknown; NaN = no reading has one */
} ce_fit_result;

/* All return CE_OK, CE_E_NOMEM or CE_E_IO. */
ce_status ce_write_fit_text(const ce_fit_result *result, FILE *to, bool colour);
ce_status ce_write_fit_csv(const ce_fit_result *result, FILE *to);
ce_status ce_write_fit_json(const ce_fit_result *result, FILE *to);

#endif
