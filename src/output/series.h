/* SPDX-License-Identifier: GPL-3.0-or-later
 * A series with its pairs, written out. JSON schema chainend.series/1. */
#ifndef CE_OUTPUT_SERIES_H
#define CE_OUTPUT_SERIES_H

#include <chainend/series.h>

#include "output/document.h"

CE_DOCUMENT(series, ce_series)

/* One line: "half_step at 10 K/min, history erased". */
void ce_write_definition(ce_construction construction, double rate_K_min, ce_history history,
                         FILE *to);

#endif
