/* SPDX-License-Identifier: GPL-3.0-or-later
 * A series with its pairs, written out. JSON schema chainend.series/1. */
#ifndef CE_OUTPUT_SERIES_H
#define CE_OUTPUT_SERIES_H

#include <chainend/series.h>

#include "output/document.h"

#include <jansson.h>

CE_DOCUMENT(series, ce_series)

/* One line: "half_step at 10 K/min, history erased". */
void ce_write_definition(ce_construction construction, double rate_K_min, ce_history history,
                         FILE *to);

/* The polymer, safe to show and cut to columns; or that it is not stated. */
void ce_write_polymer(const char *polymer, size_t columns, FILE *to);
/* How rates were reduced: a line of text, or nothing; an object, or null. */
void ce_write_rate_reduction(const ce_series *series, FILE *to);
json_t *ce_json_rate_reduction(const ce_series *series);

#endif
