/* SPDX-License-Identifier: GPL-3.0-or-later
 * Bytes to UTF-8. The three families that instruments write are decoded here, so that reading does
 * not depend on the conversion modules a system has installed; others go through iconv. */
#include "text/load.h"

#include <errno.h>
#include <iconv.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

/* Windows-1252 0x80-0x9F (from memory of the published code page); 0 = not assigned. */
static const uint16_t high_1252[32] = {
    0x20AC, 0,      0x201A, 0x0192, 0x201E, 0x2026, 0x2020, 0x2021, 0x02C6, 0x2030, 0x0160,
    0x2039, 0x0152, 0,      0x017D, 0,      0,      0x2018, 0x2019, 0x201C, 0x201D, 0x2022,
    0x2013, 0x2014, 0x02DC, 0x2122, 0x0161, 0x203A, 0x0153, 0,      0x017E, 0x0178};

static char *put_utf8(char *to, uint32_t c)
{
    if (c < 0x80)
        *to++ = (char)c;
    else if (c < 0x800) {
        *to++ = (char)(0xC0 | (c >> 6));
        *to++ = (char)(0x80 | (c & 0x3F));
    } else if (c < 0x10000) {
        *to++ = (char)(0xE0 | (c >> 12));
        *to++ = (char)(0x80 | ((c >> 6) & 0x3F));
        *to++ = (char)(0x80 | (c & 0x3F));
    } else {
        *to++ = (char)(0xF0 | (c >> 18));
        *to++ = (char)(0x80 | ((c >> 12) & 0x3F));
        *to++ = (char)(0x80 | ((c >> 6) & 0x3F));
        *to++ = (char)(0x80 | (c & 0x3F));
    }
    return to;
}

/* Line and character of a place in UTF-8 (or at least ASCII-like) text. */
static void locate(const char *begin, const char *at, size_t *line, size_t *column)
{
    *line = 1;
    const char *p = begin;
    for (;;) {
        const char *e = ce_line_end(p, at), *next = ce_line_next(e, at);
        if (e == at || next > at) break;
        p = next;
        ++*line;
    }
    *column = 1;
    for (; p < at; p++) *column += ((unsigned char)*p & 0xC0) != 0x80;
}

static ce_status fail_here(ce_error *err, const char *name, const char *begin, const char *at,
                           const char *what)
{
    size_t line, column;
    locate(begin, at, &line, &column);
    return ce_fail_at(err, CE_E_SYNTAX, name, line, column, "%s", what);
}

/* Length of the well-formed UTF-8 sequence at p, 0 when it is not (Unicode Standard, table 3-7,
 * from memory). */
static size_t sequence(const unsigned char *p, const unsigned char *end)
{
    unsigned c = p[0];
    if (c < 0x80) return 1;
    size_t n = c >= 0xC2 && c <= 0xDF ? 2 : (c & 0xF0) == 0xE0 ? 3 : c >= 0xF0 && c <= 0xF4 ? 4 : 0;
    if (n == 0 || (size_t)(end - p) < n) return 0;
    unsigned low = c == 0xE0 ? 0xA0 : c == 0xF0 ? 0x90 : 0x80;
    unsigned high = c == 0xED ? 0x9F : c == 0xF4 ? 0x8F : 0xBF;
    if (p[1] < low || p[1] > high) return 0;
    for (size_t i = 2; i < n; i++)
        if ((p[i] & 0xC0) != 0x80) return 0;
    return n;
}

/* First place that is not well-formed UTF-8; end when all is. */
static const char *malformed(const char *p, const char *end)
{
    const unsigned char *q = (const unsigned char *)p, *e = (const unsigned char *)end;
    while (q < e) {
        uint64_t eight;
        while ((size_t)(e - q) >= sizeof eight) {
            memcpy(&eight, q, sizeof eight);
            if ((eight & UINT64_C(0x8080808080808080)) != 0) break;
            q += sizeof eight;
        }
        size_t n = q < e ? sequence(q, e) : 0;
        if (n == 0) break;
        q += n;
    }
    return p + (q - (const unsigned char *)p);
}

enum { HIGH = 1, CONTROL = 2 };

/* Every byte of every file passes here: no branch, so that compilers can take many at a time. */
static unsigned classes(const char *p, const char *end)
{
    unsigned char high = 0, control = 0;
    size_t n = (size_t)(end - p);
    for (size_t i = 0; i < n; i++) {
        unsigned char c = (unsigned char)p[i];
        high |= c;
        control |=
            (unsigned char)(((c < 0x20) & (c != '\t') & (c != '\n') & (c != '\r')) | (c == 0x7F));
    }
    return (high >= 0x80 ? HIGH : 0U) | (control != 0 ? CONTROL : 0U);
}

static const char *first_control(const char *p, const char *end)
{
    while (p < end && (classes(p, p + 1) & CONTROL) == 0) p++;
    return p;
}

/* A control-Z at the very end is how some old systems end a text; form feeds are blanks. */
static ce_status no_controls(ce_text *t, const char *name, ce_error *err)
{
    if (t->end > t->begin && t->end[-1] == 0x1A) *--t->end = '\0';
    if ((classes(t->begin, t->end) & CONTROL) == 0) return CE_OK;
    for (char *p = t->begin; p < t->end; p++)
        if (*p == '\f' || *p == '\v') *p = ' ';
    const char *bad = first_control(t->begin, t->end);
    if (bad == t->end) return CE_OK;
    return fail_here(err, name, t->begin, bad,
                     *bad == '\0' ? "NUL byte: this is not plain text (or its encoding needs to be "
                                    "stated with --encoding)"
                                  : "control byte: this is not plain text");
}

static ce_status from_utf16(const ce_bytes *b, size_t skip, bool big, const char *name,
                            ce_text *out, ce_error *err)
{
    size_t units = (b->n - skip) / 2;
    char *to = out->begin = out->end = out->memory = malloc(3 * units + 1);
    if (to == NULL) return ce_fail_at(err, CE_E_NOMEM, name, 0, 0, "out of memory");
    const unsigned char *p = (const unsigned char *)b->data + skip;
    for (size_t i = 0; i < units; i++, p += 2) {
        uint32_t c = big ? (uint32_t)p[0] << 8 | p[1] : (uint32_t)p[1] << 8 | p[0];
        if ((c & 0xF800) == 0xD800) {
            uint32_t d = i + 1 == units ? 0
                         : big          ? (uint32_t)p[2] << 8 | p[3]
                                        : (uint32_t)p[3] << 8 | p[2];
            if (c >= 0xDC00 || (d & 0xFC00) != 0xDC00)
                return fail_here(err, name, out->memory, to, "half of a surrogate pair in UTF-16");
            c = 0x10000 + ((c & 0x3FF) << 10) + (d & 0x3FF);
            i++;
            p += 2;
        }
        to = put_utf8(to, c);
    }
    if ((b->n - skip) % 2 != 0)
        return fail_here(err, name, out->memory, to, "UTF-16 text ends in half a character");
    out->end = to;
    *to = '\0';
    return CE_OK;
}

static ce_status from_1252(const ce_bytes *b, bool latin, const char *name, ce_text *out,
                           ce_error *err)
{
    size_t high = 0;
    for (size_t i = 0; i < b->n; i++) high += (unsigned char)b->data[i] >= 0x80;
    char *to = out->begin = out->end = out->memory = malloc(b->n + 2 * high + 1);
    if (to == NULL) return ce_fail_at(err, CE_E_NOMEM, name, 0, 0, "out of memory");
    for (size_t i = 0; i < b->n; i++) {
        unsigned char c = (unsigned char)b->data[i];
        uint32_t u = c < 0x80 || c > 0x9F ? c : latin ? 0 : high_1252[c - 0x80];
        if (u == 0 && c != 0)
            return fail_here(err, name, out->memory, to,
                             "byte that is a letter in no encoding known here: state it with "
                             "--encoding, or this is not text");
        to = put_utf8(to, u);
    }
    out->end = to;
    *to = '\0';
    return CE_OK;
}

static ce_status from_iconv(const ce_bytes *b, const char *name, ce_text *out, ce_error *err)
{
    iconv_t cd = iconv_open("UTF-8", out->encoding);
    if (cd == (iconv_t)-1)
        return ce_fail_at(err, CE_E_ARG, name, 0, 0, "unknown encoding '%s'", out->encoding);
    size_t room = 4 * b->n + 16, left = room, in = b->n;
    char *from = b->data, *to = out->begin = out->end = out->memory = malloc(room + 1);
    ce_status st = CE_OK;
    if (to == NULL)
        st = ce_fail_at(err, CE_E_NOMEM, name, 0, 0, "out of memory");
    else if (iconv(cd, &from, &in, &to, &left) == (size_t)-1 ||
             iconv(cd, NULL, NULL, &to, &left) == (size_t)-1)
        st = fail_here(err, name, out->memory, to, "not valid text in the encoding stated");
    if (st == CE_OK) {
        out->end = to;
        *to = '\0';
    }
    (void)iconv_close(cd);
    return st;
}

/* UTF-16 without a mark: in text of mostly ASCII every other byte is NUL. */
static const char *utf16_by_nuls(const ce_bytes *b)
{
    size_t n = b->n < 4096 ? b->n : 4096, nul[2] = {0, 0};
    if (n < 4) return NULL;
    for (size_t i = 0; i < n; i++)
        if (b->data[i] == '\0') nul[i & 1]++;
    if (10 * nul[1] > 4 * n && 20 * nul[0] < n) return "UTF-16LE";
    if (10 * nul[0] > 4 * n && 20 * nul[1] < n) return "UTF-16BE";
    return NULL;
}

static const char *byte_order_mark(const ce_bytes *b, size_t *length)
{
    static const struct {
        const char *mark;
        size_t n;
        const char *encoding;
    } marks[] = {{"\xEF\xBB\xBF", 3, "UTF-8"},
                 {"\xFF\xFE\0\0", 4, "UTF-32LE"},
                 {"\xFF\xFE", 2, "UTF-16LE"},
                 {"\xFE\xFF", 2, "UTF-16BE"}};
    for (size_t i = 0; i < sizeof marks / sizeof *marks; i++)
        if (b->n >= marks[i].n && memcmp(b->data, marks[i].mark, marks[i].n) == 0) {
            *length = marks[i].n;
            return marks[i].encoding;
        }
    *length = 0;
    return NULL;
}

/* Names that need no iconv. */
static bool same_encoding(const char *a, const char *b)
{
    for (;; a++, b++) {
        while (*a == '-' || *a == '_' || *a == ' ') a++;
        while (*b == '-' || *b == '_' || *b == ' ') b++;
        if (*a == '\0' || strncasecmp(a, b, 1) != 0) return *a == *b;
    }
}

static void find_encoding(const ce_bytes *b, ce_text *t)
{
    bool high = (classes(b->data, b->data + b->n) & HIGH) != 0;
    t->guessed = true;
    t->encoding = utf16_by_nuls(b);
    if (t->encoding != NULL) return;
    t->guessed = high;
    t->encoding = !high                                                  ? "ASCII"
                  : malformed(b->data, b->data + b->n) == b->data + b->n ? "UTF-8"
                                                                         : "Windows-1252";
}

static ce_status decode(ce_bytes *b, size_t skip, const char *name, ce_text *t, ce_error *err)
{
    const char *e = t->encoding;
    if (same_encoding(e, "UTF-16LE")) return from_utf16(b, skip, false, name, t, err);
    if (same_encoding(e, "UTF-16BE")) return from_utf16(b, skip, true, name, t, err);
    if (same_encoding(e, "UTF-16"))
        return from_utf16(b, skip, skip == 2 && (unsigned char)b->data[0] == 0xFE, name, t, err);
    if (same_encoding(e, "Windows-1252") || same_encoding(e, "CP1252"))
        return from_1252(b, false, name, t, err);
    if (same_encoding(e, "ISO-8859-1") || same_encoding(e, "Latin-1"))
        return from_1252(b, true, name, t, err);
    if (!same_encoding(e, "UTF-8") && !same_encoding(e, "ASCII"))
        return from_iconv(b, name, t, err);
    t->memory = b->data;
    t->begin = t->memory + skip;
    t->end = t->memory + b->n;
    b->data = NULL;
    const char *bad = malformed(t->begin, t->end);
    if (bad == t->end) return CE_OK;
    return fail_here(err, name, t->begin, bad,
                     "byte that is not UTF-8: state the encoding, e.g. --encoding Windows-1252");
}

ce_status ce_text_decode(ce_bytes *bytes, const char *name, const char *encoding, ce_text *text,
                         ce_error *err)
{
    *text = (ce_text){0};
    ce_text t = {0};
    size_t skip;
    const char *marked = byte_order_mark(bytes, &skip);
    t.mark = marked != NULL;
    if (encoding != NULL) {
        t.encoding = encoding;
        if (marked == NULL ||
            (!same_encoding(encoding, marked) && !same_encoding(encoding, "UTF-16")))
            skip = 0;
    } else if (marked != NULL)
        t.encoding = marked;
    else
        find_encoding(bytes, &t);
    ce_status st = decode(bytes, skip, name, &t, err);
    if (st == CE_OK) st = no_controls(&t, name, err);
    if (st == CE_OK)
        *text = t;
    else
        ce_text_free(&t);
    free(bytes->data);
    *bytes = (ce_bytes){0};
    return st;
}

void ce_text_free(ce_text *text)
{
    if (text == NULL) return;
    free(text->memory);
    *text = (ce_text){0};
}
