/* SPDX-License-Identifier: GPL-3.0-or-later
 * Evaluated runs, written out: text, CSV, JSON (schema chainend.tg/1). */
#ifndef CE_OUTPUT_TG_H
#define CE_OUTPUT_TG_H

#include <chainend/series.h>

#include <stdio.h>

typedef struct {
    size_t n;
    const ce_evaluation *run;
    ce_construction take; /* the one that counts as "the Tg" */
} ce_tg_result;

/* All return CE_OK, CE_E_NOMEM or CE_E_IO. */
ce_status ce_write_tg_text(const ce_tg_result *result, FILE *to, bool colour);
ce_status ce_write_tg_csv(const ce_tg_result *result, FILE *to);
ce_status ce_write_tg_json(const ce_tg_result *result, FILE *to);

#endif
