/* SPDX-License-Identifier: GPL-3.0-or-later
 * Evaluated runs, written out: text, CSV, JSON (schema chainend.tg/1). */
#ifndef CE_OUTPUT_TG_H
#define CE_OUTPUT_TG_H

#include <chainend/series.h>

#include "output/document.h"

typedef struct {
    size_t n;
    const ce_evaluation *run;
    ce_construction take; /* the one that counts as "the Tg" */
} ce_tg_result;

CE_DOCUMENT(tg, ce_tg_result)

#endif
