/* SPDX-License-Identifier: GPL-3.0-or-later
 * A delimited text file as settings, a header and rows of text cells. Serves every file that is
 * small and of mixed content (series, temperature references); runs, which are large and numeric,
 * are read by src/run/ with the parts this is made of. */
#ifndef CE_TEXT_TABLE_H
#define CE_TEXT_TABLE_H

#include <chainend/base.h>

#include "base/quantity.h"

#include <stdbool.h>

/* What to assume instead of finding out; {0} = find out all. */
typedef struct {
    const char *encoding; /* iconv name                                              */
    char delimiter;       /* ',' ';' '\t' '|' ' ' (runs of blanks)                   */
    char decimal;         /* '.' or ','                                              */
    size_t max_bytes;     /* refuse larger files; 0 = CE_TABLE_MAX_BYTES             */
} ce_table_options;
#define CE_TABLE_MAX_BYTES ((size_t)64 << 20)

/* One "# key: value" line above the header, both sides trimmed; value may be "". */
typedef struct {
    const char *key, *value;
    size_t line;
} ce_setting;

/* One header cell, taken apart: "mn (g/mol)" is name "mn", unit_text "g/mol", unit g/mol. A unit
 * in a row below the names counts too. */
typedef struct {
    const char *name;      /* without its unit, trimmed; may be ""                    */
    const char *unit_text; /* as written; "" when none                                */
    const ce_unit *unit;   /* NULL when none, or (unit_text not "") when not known    */
    size_t line, column;   /* 1-based; column counts cells                            */
} ce_column;

/* One cell: quotes undone, blanks around it trimmed unless it was quoted. */
typedef struct {
    const char *text; /* UTF-8, NUL-terminated, never NULL                       */
    size_t len;
    size_t line, column; /* 1-based; column counts cells                            */
} ce_cell;

typedef struct {
    char *name;           /* of the file, as given                                   */
    const char *encoding; /* "UTF-8", "Windows-1252" ...                             */
    char delimiter, decimal;
    bool decimal_known; /* false: no cell says which decimal mark it is, '.' taken */
    size_t n_settings, n_columns, n_rows;
    ce_setting *setting;
    ce_column *column;
    ce_cell *cell; /* n_rows x n_columns, row by row; missing ones at the end of a row are "" */
    void *store;   /* of the texts                                            */
} ce_table;

/* ce_table_read - read a table from a file ("-": standard input).
 *   in   path, options (NULL = find out all)
 *   out  table  the caller's to free with ce_table_free(); empty unless CE_OK
 *   ret  CE_OK | CE_E_IO | CE_E_SYNTAX (undecodable, ragged, no header, unclosed quote) |
 *        CE_E_LIMIT | CE_E_NOMEM, err with file, line and column
 * Blank lines and lines that begin with '#' below the header are skipped. A row longer than the
 * header is refused unless its extra cells are empty; a shorter one is filled with "". */
ce_status ce_table_read(const char *path, const ce_table_options *options, ce_table *table,
                        ce_error *err);
/* The same from memory; name stands in messages. */
ce_status ce_table_read_memory(const void *bytes, size_t n, const char *name,
                               const ce_table_options *options, ce_table *table, ce_error *err);
void ce_table_free(ce_table *table);

/* Number of the column with that name (case, blanks, '_' and '-' ignored), from 0; n_columns when
 * there is none. Looks from column `from` on, so that duplicates can be found. */
size_t ce_table_find(const ce_table *table, const char *name, size_t from);
/* The cell of a row and column, both from 0 and in range. */
static inline const ce_cell *ce_table_cell(const ce_table *table, size_t row, size_t column)
{
    return &table->cell[row * table->n_columns + column];
}
/* The value of the last setting of that name (compared like column names); NULL when absent. */
const ce_setting *ce_table_setting(const ce_table *table, const char *key);
/* A cell as a number in the table's decimal mark, as it stands (no unit conversion). CE_E_SYNTAX
 * with the position, and a hint when the other decimal mark would have done. */
ce_status ce_cell_number(const ce_table *table, const ce_cell *cell, double *x, ce_error *err);

#endif
