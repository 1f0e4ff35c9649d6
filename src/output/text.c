/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/text.h"

#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

size_t ce_text_code_point(const char *s, unsigned long *code)
{
    const unsigned char *p = (const unsigned char *)s;
    static const struct {
        unsigned char mask, lead;
        unsigned long least;
    } form[] = {{0x80, 0x00, 0}, {0xE0, 0xC0, 0x80}, {0xF0, 0xE0, 0x800}, {0xF8, 0xF0, 0x10000}};
    for (size_t n = 1; n <= 4; n++) {
        if ((p[0] & form[n - 1].mask) != form[n - 1].lead) continue;
        unsigned long c = p[0] & (unsigned char)~form[n - 1].mask;
        for (size_t i = 1; i < n; i++) {
            if ((p[i] & 0xC0) != 0x80) return 0;
            c = c << 6 | (p[i] & 0x3F);
        }
        if (c < form[n - 1].least || c > 0x10FFFF || (c >= 0xD800 && c <= 0xDFFF)) return 0;
        *code = c;
        return n;
    }
    return 0;
}

static bool in(unsigned long c, unsigned long low, unsigned long high)
{
    return c >= low && c <= high;
}

static bool is_control(unsigned long c)
{
    return c < 0x20 || in(c, 0x7F, 0x9F) || in(c, 0x200B, 0x200F) || in(c, 0x2028, 0x202E) ||
           in(c, 0x2060, 0x206F) || c == 0xFEFF;
}

static size_t columns_of(unsigned long c)
{
    if (in(c, 0x300, 0x36F) || in(c, 0x1AB0, 0x1AFF) || in(c, 0x20D0, 0x20FF)) return 0;
    if (in(c, 0x1100, 0x115F) || in(c, 0x2E80, 0xA4CF) || in(c, 0xAC00, 0xD7A3) ||
        in(c, 0xF900, 0xFAFF) || in(c, 0xFE30, 0xFE6F) || in(c, 0xFF00, 0xFF60) ||
        in(c, 0xFFE0, 0xFFE6) || in(c, 0x1F300, 0x1FAFF) || in(c, 0x20000, 0x3FFFD))
        return 2;
    return 1;
}

/* Copy s, replacing what is not UTF-8 by U+FFFD and, when asked, control characters by '?'. */
static char *copy_clean(const char *s, bool controls_too)
{
    char *out = malloc(3 * strlen(s) + 1), *to = out;
    if (out == NULL) return NULL;
    while (*s != '\0') {
        unsigned long c = 0;
        size_t n = ce_text_code_point(s, &c);
        if (n == 0) {
            memcpy(to, "\xEF\xBF\xBD", 3);
            to += 3;
            s++;
        } else if (controls_too && is_control(c)) {
            *to++ = '?';
            s += n;
        } else {
            memcpy(to, s, n);
            to += n;
            s += n;
        }
    }
    *to = '\0';
    return out;
}

char *ce_text_valid_utf8(const char *s)
{
    return copy_clean(s, false);
}

char *ce_text_shown(const char *s, size_t columns)
{
    char *out = copy_clean(s, true);
    if (out == NULL || columns == 0 || ce_text_columns(out) <= columns) return out;
    size_t room = columns > 3 ? columns - 3 : 0, used = 0;
    char *p = out;
    for (;;) {
        unsigned long c = 0;
        size_t n = ce_text_code_point(p, &c);
        if (n == 0 || used + columns_of(c) > room) break;
        used += columns_of(c);
        p += n;
    }
    /* a cut text has at least as many bytes left as the dots need, save for tiny widths */
    for (size_t i = 0; i < 3 && used + i < columns; i++) *p++ = '.';
    *p = '\0';
    return out;
}

size_t ce_text_columns(const char *s)
{
    size_t total = 0;
    while (*s != '\0') {
        unsigned long c = 0;
        size_t n = ce_text_code_point(s, &c);
        total += n == 0 ? 1 : columns_of(c);
        s += n == 0 ? 1 : n;
    }
    return total;
}

void ce_text_wrap(FILE *to, const char *s, size_t used, size_t indent, size_t width)
{
    bool begun = false; /* something stands on this line already */
    while (*s != '\0') {
        size_t n = strcspn(s, " "), columns = 0;
        for (size_t i = 0; i < n; i++) columns += ((unsigned char)s[i] & 0xC0) != 0x80;
        if (begun && used + 1 + columns > width) {
            fprintf(to, "\n%*s", (int)indent, "");
            used = indent;
        } else if (begun) {
            (void)fputc(' ', to);
            used++;
        }
        (void)fwrite(s, 1, n, to);
        used += columns;
        begun = true;
        s += n;
        s += strspn(s, " ");
    }
    (void)fputc('\n', to);
}
