/* SPDX-License-Identifier: GPL-3.0-or-later
 * Tables for reading (aligned text) and for machines (CSV). */
#ifndef CE_OUTPUT_SHEET_H
#define CE_OUTPUT_SHEET_H

#include <chainend/base.h>

#include <stdbool.h>
#include <stdio.h>

typedef enum {
    CE_LEFT,
    CE_RIGHT,
    CE_POINT /* numbers under one another by their decimal point */
} ce_align;

typedef struct {
    const char *heading, *unit; /* unit: second heading line; "" = none */
    ce_align align;
} ce_sheet_column;

/* A text table being filled row by row, cell by cell. Start with ce_sheet_begin(). Running out of
 * memory is remembered and reported by ce_sheet_print(). */
typedef struct {
    const ce_sheet_column *column; /* borrowed */
    size_t n_columns;
    char **cell; /* n_cells, row-major, valid UTF-8 */
    size_t n_cells, capacity;
    bool failed;
} ce_sheet;

void ce_sheet_begin(ce_sheet *table, const ce_sheet_column *column, size_t n_columns);
/* Append one cell, printf-like; control characters are replaced. */
void ce_sheet_cell(ce_sheet *table, const char *fmt, ...) CE_PRINTF(2, 3);
/* Append text from a file or file name, cut to columns (0 = any length). */
void ce_sheet_text(ce_sheet *table, const char *s, size_t columns);
/* Append an absent value. */
void ce_sheet_none(ce_sheet *table);
/* Print with indent blanks before each line, headings bold when colour is set, and free the cells.
 * CE_OK or CE_E_NOMEM (then nothing is printed). */
ce_status ce_sheet_print(ce_sheet *table, FILE *to, int indent, bool colour);

/* Remarks under a heading that appears with the first of them: "  subject: text", wrapped. subject may be NULL. */
typedef struct {
    FILE *to;
    const char *heading;
    bool any;
} ce_remarks;
void ce_remark(ce_remarks *remarks, const char *subject, const char *text);

/* CSV after RFC 4180 with '\n' line ends: numbers in full, absent ones empty. Each call writes one
 * cell; first is true for the first of a row. */
void ce_csv_text(FILE *to, bool first, const char *s);
void ce_csv_number(FILE *to, bool first, double x);
void ce_csv_count(FILE *to, bool first, size_t n);
/* The heading row: names in one comma-separated literal. */
void ce_csv_heading(FILE *to, const char *names);
void ce_csv_end_row(FILE *to);

#endif
