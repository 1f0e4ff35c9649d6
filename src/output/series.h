/* SPDX-License-Identifier: GPL-3.0-or-later
 * A series with its pairs, written out. JSON schema chainend.series/1. */
#ifndef CE_OUTPUT_SERIES_H
#define CE_OUTPUT_SERIES_H

#include <chainend/series.h>

#include <stdio.h>

/* All return CE_OK, CE_E_NOMEM or CE_E_IO. */
ce_status ce_write_series_text(const ce_series *series, FILE *to, bool colour);
ce_status ce_write_series_csv(const ce_series *series, FILE *to);
ce_status ce_write_series_json(const ce_series *series, FILE *to);

/* One line: "half_step at 10 K/min, history erased". */
void ce_write_definition(ce_construction construction, double rate_K_min, ce_history history,
                         FILE *to);

#endif
