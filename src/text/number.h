/* SPDX-License-Identifier: GPL-3.0-or-later
 * Numbers as text: strict, exact, and the same whatever the locale of the process. */
#ifndef CE_TEXT_NUMBER_H
#define CE_TEXT_NUMBER_H

#include <stdbool.h>
#include <stddef.h>

/* Longest number taken, in bytes. */
#define CE_MAX_NUMBER ((size_t)1000)

/* ce_parse_number - the whole of text[0, len) as one decimal number.
 *   in   text     UTF-8, need not be terminated; no blanks around it
 *        decimal  '.' or ','
 *   out  x        exactly the double that strtod() gives in the C locale; untouched on failure
 *   ret  false when text is anything but [sign] digits [mark digits] [e [sign] digits]: no
 *        hexadecimal, no "inf" or "nan", no thousands marks, nothing too large for a double.
 * U+2212, the typographic minus, is a sign like '-'. */
bool ce_parse_number(const char *text, size_t len, char decimal, double *x);

/* The fast half of it: a number at s, which must be terminated by NUL somewhere. Returns where the
 * number ends, or NULL when there is none (U+2212 is not taken). */
const char *ce_scan_number(const char *s, char decimal, double *x);

#endif
