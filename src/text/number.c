/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text/number.h"

#include <locale.h>
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

__extension__ typedef unsigned __int128 wide;

#define EXACT_INTEGER (UINT64_C(1) << 53)

static const double tens[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                              1e8,  1e9,  1e10, 1e11, 1e12, 1e13, 1e14, 1e15,
                              1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};

static const uint64_t whole_tens[] = {UINT64_C(1),
                                      UINT64_C(10),
                                      UINT64_C(100),
                                      UINT64_C(1000),
                                      UINT64_C(10000),
                                      UINT64_C(100000),
                                      UINT64_C(1000000),
                                      UINT64_C(10000000),
                                      UINT64_C(100000000),
                                      UINT64_C(1000000000),
                                      UINT64_C(10000000000),
                                      UINT64_C(100000000000),
                                      UINT64_C(1000000000000),
                                      UINT64_C(10000000000000),
                                      UINT64_C(100000000000000),
                                      UINT64_C(1000000000000000),
                                      UINT64_C(10000000000000000),
                                      UINT64_C(100000000000000000),
                                      UINT64_C(1000000000000000000),
                                      UINT64_C(10000000000000000000)};

static int leading_zeros(wide q)
{
    uint64_t high = (uint64_t)(q >> 64);
    return high != 0 ? __builtin_clzll(high) : 64 + __builtin_clzll((uint64_t)q);
}

/* q * 2^shift, q != 0, rounded to nearest even; sticky: something non-zero lies below q. Only for
 * results in the normal range. */
static double round_even(wide q, int shift, bool sticky)
{
    int drop = 128 - leading_zeros(q) - 53;
    if (drop <= 0) return ldexp((double)(uint64_t)q, shift);
    uint64_t top = (uint64_t)(q >> drop);
    wide rest = q & (((wide)1 << drop) - 1), half = (wide)1 << (drop - 1);
    if (rest > half || (rest == half && (sticky || (top & 1) != 0))) top++;
    return ldexp((double)top, shift + drop);
}

/* w * 10^e correctly rounded, where that is cheap. The first two cases are exact operands and one
 * rounding (Clinger, PLDI 1990, from memory); the others are integer arithmetic without loss. */
static bool exact_product(uint64_t w, long e, double *x)
{
    if (w <= EXACT_INTEGER && e <= 0 && e >= -22)
        *x = (double)w / tens[-e];
    else if (w <= EXACT_INTEGER && e > 0 && e <= 22)
        *x = (double)w * tens[e];
    else if (w != 0 && e >= 0 && e <= 19)
        *x = round_even((wide)w * whole_tens[e], 0, false);
    else if (w != 0 && e < 0 && e >= -19) {
        int up = 64 + __builtin_clzll(w);
        wide n = (wide)w << up, d = whole_tens[-e];
        *x = round_even(n / d, -up, n % d != 0);
    } else
        return false;
    return true;
}

/* Everything else: the C library, in the C locale whatever the process runs in. */
static bool by_library(const char *s, size_t len, char decimal, double *x)
{
    char buf[CE_MAX_NUMBER + 1];
    if (len > CE_MAX_NUMBER) return false;
    memcpy(buf, s, len);
    buf[len] = '\0';
    char *mark = decimal == '.' ? NULL : strchr(buf, decimal), *end = NULL;
    if (mark != NULL) *mark = '.';
    locale_t c = newlocale(LC_ALL_MASK, "C", (locale_t)0);
    if (c == (locale_t)0) return false;
    double v = strtod_l(buf, &end, c);
    freelocale(c);
    if (end != buf + len || !isfinite(v)) return false;
    *x = v;
    return true;
}

static const char *scan_digits(const char *p, uint64_t *w)
{
    uint64_t v = *w;
    for (unsigned d; (d = (unsigned)((unsigned char)*p) - '0') < 10; p++) v = 10 * v + d;
    *w = v;
    return p;
}

/* Digits from the first that is not zero: only so many limit exactness. */
static size_t significant(const char *first, const char *end)
{
    size_t n = 0;
    for (const char *p = first; p < end; p++)
        if (*p >= '0' && *p <= '9' && (n > 0 || *p != '0')) n++;
    return n;
}

/* The exponent after 'e'; NULL when there are no digits. Beyond four digits it only needs to be
 * out of range. */
static const char *scan_exponent(const char *p, long *e)
{
    bool negative = *p == '-';
    if (negative || *p == '+') p++;
    const char *first = p;
    long v = 0;
    for (; *p >= '0' && *p <= '9'; p++)
        if (v < 10000) v = 10 * v + (*p - '0');
    *e += negative ? -v : v;
    return p == first ? NULL : p;
}

const char *ce_scan_number(const char *s, char decimal, double *x)
{
    const char *p = s + (*s == '-' || *s == '+'), *first = p;
    uint64_t w = 0;
    p = scan_digits(p, &w);
    size_t digits = (size_t)(p - first);
    long e = 0;
    if (*p == decimal) {
        const char *fraction = ++p;
        p = scan_digits(p, &w);
        e = -(long)(p - fraction);
        digits += (size_t)(p - fraction);
    }
    if (digits == 0) return NULL;
    const char *mantissa_end = p;
    if (*p == 'e' || *p == 'E') {
        p = scan_exponent(p + 1, &e);
        if (p == NULL) return NULL;
    }
    double v;
    if ((digits > 19 && significant(first, mantissa_end) > 19) || !exact_product(w, e, &v))
        return by_library(s, (size_t)(p - s), decimal, x) ? p : NULL;
    *x = *s == '-' ? -v : v;
    return p;
}

bool ce_parse_number(const char *text, size_t len, char decimal, double *x)
{
    static const char minus[] = "\xE2\x88\x92";
    char buf[CE_MAX_NUMBER + 1];
    size_t n = 0;
    if (len == 0 || len > CE_MAX_NUMBER) return false;
    for (size_t i = 0; i < len;) {
        bool typographic = len - i >= 3 && memcmp(text + i, minus, 3) == 0;
        buf[n++] = typographic ? '-' : text[i];
        i += typographic ? 3 : 1;
    }
    buf[n] = '\0';
    double v;
    if (ce_scan_number(buf, decimal, &v) != buf + n) return false;
    *x = v;
    return true;
}
