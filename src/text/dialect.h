/* SPDX-License-Identifier: GPL-3.0-or-later
 * Which delimiter and which decimal mark a text uses. */
#ifndef CE_TEXT_DIALECT_H
#define CE_TEXT_DIALECT_H

#include "text/load.h"

typedef struct {
    char delimiter, decimal;
    bool decimal_known; /* false: no number has a mark, '.' taken                          */
    size_t rows;        /* of numbers that speak for it, in the sample looked at           */
} ce_dialect;

/* How far down a table of numbers is looked for. */
#define CE_SNIFF_BYTES ((size_t)4 << 20)

/* For tables of numbers under any preamble: the pair that makes the most rows of the text numeric.
 * delimiter, decimal: given by the caller or 0. rows is 0 when nothing looks like a table. */
ce_dialect ce_sniff_numbers(const ce_text *text, char delimiter, char decimal);
/* For tables of mixed content whose first line (comments aside) is the header: the delimiter that
 * cuts most rows into as many cells as the header has. */
ce_dialect ce_sniff_table(const ce_text *text, char delimiter, char decimal);

/* How a row looks in a dialect. */
typedef enum { CE_ROW_BLANK, CE_ROW_TEXT, CE_ROW_PART, CE_ROW_NUMBERS } ce_row_kind;
/* CE_ROW_NUMBERS: at least two numbers and nothing else but empty cells; CE_ROW_PART: at least two
 * numbers, and they are at least half of the cells. cells may be NULL. */
ce_row_kind ce_row_look(const char *p, const char *line_end, char delimiter, char decimal,
                        size_t *cells);
/* "comma", "semicolon", "tab", "pipe", "blanks"; "point", "comma" */
const char *ce_delimiter_name(char delimiter);
const char *ce_decimal_name(char decimal);

#endif
