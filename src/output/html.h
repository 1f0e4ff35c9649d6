/* SPDX-License-Identifier: GPL-3.0-or-later
 * Pieces of an HTML page. Whatever comes from outside goes through ce_html_text(): nothing in it can become
 * an element. */
#ifndef CE_OUTPUT_HTML_H
#define CE_OUTPUT_HTML_H

#include <chainend/base.h>

#include <stdio.h>

/* Text of an element or of a quoted attribute: made valid UTF-8, control characters and direction marks
 * replaced, markup escaped, cut to columns (0 = any length). */
void ce_html_text(FILE *to, const char *s, size_t columns);
/* Formatted text of our own with text from outside in it: escaped as a whole. */
void ce_html_printf(FILE *to, const char *fmt, ...) CE_PRINTF(2, 3);

/* A table: caption, headings separated by '|' with units after a '~', e.g. "Mn~kg/mol|Tg~°C". The first
 * column holds row headings. */
void ce_html_table_begin(FILE *to, const char *caption, const char *headings);
void ce_html_row_begin(FILE *to, const char *heading);
void ce_html_cell(FILE *to, const char *fmt, ...) CE_PRINTF(2, 3);
void ce_html_row_end(FILE *to);
void ce_html_table_end(FILE *to);

/* An SVG picture as a data address inside the page. CE_OK or CE_E_NOMEM. */
ce_status ce_html_picture(FILE *to, const char *svg, size_t n, const char *alt);

#endif
