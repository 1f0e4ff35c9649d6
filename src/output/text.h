/* SPDX-License-Identifier: GPL-3.0-or-later
 * Text from files, made safe to show. */
#ifndef CE_OUTPUT_TEXT_H
#define CE_OUTPUT_TEXT_H

#include <stddef.h>
#include <stdio.h>

/* A copy in which every byte that is not part of valid UTF-8 is U+FFFD. NULL when out of memory. */
char *ce_text_valid_utf8(const char *s);
/* A copy fit for a terminal or a figure: valid UTF-8; control characters (C0, C1, DEL) and the
 * marks that turn the writing direction (U+200E-200F, 202A-202E, 2066-2069) become '?'; longer than
 * room columns (0 = any length): cut, ending in "...". NULL when out of memory. */
char *ce_text_shown(const char *s, size_t columns);
/* Columns the text takes on a terminal; s is valid UTF-8. East Asian wide characters count two,
 * combining marks none. */
size_t ce_text_columns(const char *s);
/* Write s in lines of at most width columns, broken at blanks; the first line begins where the cursor is, at
 * column used, the others after indent blanks. Ends with a newline. */
void ce_text_wrap(FILE *to, const char *s, size_t used, size_t indent, size_t width);
/* Widest line of text output. */
#define CE_TEXT_WIDTH 98
/* Length in bytes of the valid UTF-8 sequence at s (1-4) and its code point; 0 when invalid. */
size_t ce_text_code_point(const char *s, unsigned long *code);

#endif
