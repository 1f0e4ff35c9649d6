/* SPDX-License-Identifier: GPL-3.0-or-later
 * Text that grows, and numbers in it that do not depend on the locale. */
#ifndef CE_SIMULATE_TEXT_H
#define CE_SIMULATE_TEXT_H

#include <stdbool.h>
#include <stddef.h>

/* Start from {0}; s is the caller's to free(). A failed allocation latches. */
typedef struct {
    char *s;
    size_t n, room;
    bool failed;
} ce_text;

void ce_text_put_n(ce_text *t, const char *s, size_t n);
void ce_text_put(ce_text *t, const char *s);
/* Control bytes become '?', so that it stays on its line. */
void ce_text_put_line(ce_text *t, const char *s);
/* A number with fixed decimals (0 to 15) into buf[64]; returns its length, no terminator. */
size_t ce_text_fixed(char buf[64], double x, int decimals, char mark);
void ce_text_put_fixed(ce_text *t, double x, int decimals);

#endif
