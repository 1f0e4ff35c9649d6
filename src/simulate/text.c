/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "simulate/text.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

void ce_text_put_n(ce_text *t, const char *s, size_t n)
{
    if (t->failed) return;
    if (n > t->room - t->n) {
        size_t room = 2 * (t->room + n) + 4096;
        char *p = realloc(t->s, room);
        if (p == NULL) {
            t->failed = true;
            return;
        }
        t->s = p;
        t->room = room;
    }
    if (n > 0) memcpy(t->s + t->n, s, n);
    t->n += n;
}

void ce_text_put(ce_text *t, const char *s)
{
    ce_text_put_n(t, s, strlen(s));
}

void ce_text_put_line(ce_text *t, const char *s)
{
    for (; *s != '\0'; s++) {
        char c = (unsigned char)*s < 0x20 || *s == 0x7f ? '?' : *s;
        ce_text_put_n(t, &c, 1);
    }
}

size_t ce_text_fixed(char buf[64], double x, int decimals, char mark)
{
    double scaled = fabs(x);
    for (int i = 0; i < decimals; i++) scaled *= 10.0;
    /* digits of the rounded scaled value */
    unsigned long long v = scaled < 9.0e18 ? (unsigned long long)(scaled + 0.5) : 0;
    char digits[32];
    size_t n = 0, out = 0;
    if (x < 0.0 && v > 0) buf[out++] = '-';
    while (v > 0 || n <= (size_t)decimals) {
        digits[n++] = (char)('0' + v % 10);
        v /= 10;
    }
    while (n > 0) {
        buf[out++] = digits[--n];
        if (n == (size_t)decimals && decimals > 0) buf[out++] = mark;
    }
    return out;
}

void ce_text_put_fixed(ce_text *t, double x, int decimals)
{
    char buf[64];
    ce_text_put_n(t, buf, ce_text_fixed(buf, x, decimals, '.'));
}
