/* SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CE_SERIES_INTERNAL_H
#define CE_SERIES_INTERNAL_H

#include <chainend/series.h>

#include "text/table.h"

/* The columns a series file may have. */
typedef enum {
    COL_SAMPLE,
    COL_ROLE,
    COL_RUN,
    COL_TG,
    COL_TG_U,
    COL_MN,
    COL_MN_U,
    COL_MW,
    COL_DISPERSITY,
    COL_CHAIN_ENDS,
    COL_RATE,
    COL_SEGMENT,
    COL_MASS,
    COL_GLASS_WINDOW,
    COL_LIQUID_WINDOW,
    COL_DATE,
    COL_NOTE,
    COLUMNS
} ce_series_column;

/* Where each of them stands in the table, and in which unit; SIZE_MAX = not there. */
typedef struct {
    size_t at[COLUMNS];
    const ce_unit *unit[COLUMNS];
} ce_series_columns;

/* Find the columns; unknown ones are named in a note, missing units and duplicates are errors.
 * CE_OK, CE_E_SYNTAX (messages and err say why) or CE_E_NOMEM. */
ce_status ce_series_map_columns(const ce_table *table, ce_series_columns *columns,
                                ce_messages *messages, ce_error *err);
/* One table row as a series row. CE_OK, CE_E_SYNTAX (every fault of it is in messages; the row holds
 * nothing) or CE_E_NOMEM. */
ce_status ce_series_read_row(const ce_table *table, const ce_series_columns *columns, size_t i,
                             ce_series_row *row, ce_messages *messages);
/* Where a run lies whose path is relative to its series file; the caller's to free(), NULL = no memory. */
char *ce_series_resolve(const char *series_path, const char *run);
/* An empty series with nothing stated. */
void ce_series_clear(ce_series *series);
/* Rows of one name become samples, in order of first appearance. CE_OK or CE_E_NOMEM. */
ce_status ce_series_group(ce_series *series);
void ce_series_row_clear(ce_series_row *row);

#endif
