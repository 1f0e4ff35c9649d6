/* SPDX-License-Identifier: GPL-3.0-or-later
 * Small helpers on jansson: absent numbers are null, text is always valid UTF-8. */
#ifndef CE_OUTPUT_JSON_H
#define CE_OUTPUT_JSON_H

#include <chainend/base.h>

#include <jansson.h>
#include <stdio.h>

/* A number, or null when it is not finite. */
json_t *ce_json_number(double x);
/* A string, or null for NULL; bytes that are not UTF-8 become U+FFFD. */
json_t *ce_json_text(const char *s);
/* Write with two blanks of indent, members in the order they were set, every double with 17
 * significant digits, and a newline at the end. Takes over the reference. CE_OK or CE_E_NOMEM /
 * CE_E_IO. */
ce_status ce_json_write(json_t *root, FILE *to);

#endif
