/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text/header.h"

#include <ctype.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

static void copy(char *to, size_t room, ce_span from)
{
    size_t n = from.n < room ? from.n : room - 1;
    while (n > 0 && n < from.n && ((unsigned char)from.at[n] & 0xC0) == 0x80) n--;
    memcpy(to, from.at, n);
    to[n] = '\0';
}

/* What is left when [from, to) is cut out, in one blank-separated piece. */
static void cut(ce_span text, const char *from, const char *to, ce_header *h)
{
    ce_span a = ce_trim((ce_span){text.at, (size_t)(from - text.at)});
    ce_span b = ce_trim((ce_span){to, (size_t)(text.at + text.n - to)});
    char joined[CE_HEADER_NAME];
    size_t room = sizeof joined;
    copy(joined, room, a);
    size_t n = strlen(joined);
    if (b.n > 0 && n + 2 < room) {
        if (n > 0) joined[n++] = ' ';
        copy(joined + n, room - n, b);
    }
    copy(h->name, sizeof h->name, ce_trim((ce_span){joined, strlen(joined)}));
}

static bool take(ce_header *h, ce_span text, const char *from, const char *to, ce_span unit)
{
    h->unit = ce_unit_find(unit.at, unit.n);
    copy(h->unit_text, sizeof h->unit_text, unit);
    cut(text, from, to, h);
    return true;
}

/* The symbol of a unit that has no place in a run: "mV", "MW", "kPa". One letter alone may be the
 * name of a sample. */
static bool foreign_symbol(ce_span s)
{
    static const char *const prefix[] = {"", "n", "u", "µ", "μ", "m", "c", "h", "k", "M", "G"};
    static const char *const symbol[] = {"V", "A", "W", "J", "Pa", "bar", "Hz", "Ohm", "eV"};
    for (size_t i = 0; i < sizeof prefix / sizeof *prefix; i++)
        for (size_t k = 0; k < sizeof symbol / sizeof *symbol; k++) {
            size_t a = strlen(prefix[i]), b = strlen(symbol[k]);
            if (a + b > 1 && a + b == s.n && memcmp(s.at, prefix[i], a) == 0 &&
                memcmp(s.at + a, symbol[k], b) == 0)
                return true;
        }
    return false;
}

/* "%", the symbol of a unit, or letters with a slash, also before a bracket ("cal/(s g)"): nobody
 * writes a remark like that. */
static bool looks_like_unit(ce_span s)
{
    const char *slash = memchr(s.at, '/', s.n), *blank = memchr(s.at, ' ', s.n);
    bool quotient = slash != NULL && (blank == NULL || (slash < blank && slash[1] == '('));
    return s.n > 0 && ((s.n <= 16 && quotient) || (s.n == 1 && *s.at == '%') || foreign_symbol(s));
}

static const char *closing(const char *open, const char *end)
{
    char o = *open, c = o == '(' ? ')' : o == '[' ? ']' : '}';
    size_t depth = 0;
    for (const char *p = open; p < end; p++) {
        depth += *p == o;
        if (*p == c && --depth == 0) return p;
    }
    return NULL;
}

/* The last bracket that holds a unit; within it, a unit before or after a comma: "(W/g, exo up)".
 */
static bool bracketed(ce_span t, ce_header *h)
{
    const char *end = t.at + t.n;
    for (const char *p = end; p-- > t.at;) {
        if (*p != '(' && *p != '[' && *p != '{') continue;
        const char *close = closing(p, end);
        if (close == NULL) continue;
        ce_span inside = ce_trim((ce_span){p + 1, (size_t)(close - p - 1)});
        /* "DSC/(mW/mg)": the slash belongs to the bracket. */
        const char *from = p > t.at && p[-1] == '/' ? p - 1 : p;
        if (*p == '[' || ce_unit_find(inside.at, inside.n) != NULL || looks_like_unit(inside))
            return take(h, t, from, close + 1, inside);
        const char *comma = memchr(inside.at, ',', inside.n);
        if (comma == NULL) continue;
        ce_span left = ce_trim((ce_span){inside.at, (size_t)(comma - inside.at)});
        ce_span right = ce_trim((ce_span){comma + 1, (size_t)(inside.at + inside.n - comma - 1)});
        if (ce_unit_find(left.at, left.n) != NULL) return take(h, t, p + 1, comma + 1, left);
        if (ce_unit_find(right.at, right.n) != NULL) return take(h, t, comma, close, right);
    }
    return false;
}

/* "HF/mW endo up": after a slash, the longest run of words that is a unit. */
static bool slashed(ce_span t, ce_header *h)
{
    const char *end = t.at + t.n;
    for (const char *p = t.at; p < end; p++) {
        if (*p != '/') continue;
        for (const char *e = end; e > p + 1; e--) {
            if (e != end && *e != ' ') continue;
            ce_span u = ce_trim((ce_span){p + 1, (size_t)(e - p - 1)});
            if (ce_unit_find(u.at, u.n) != NULL) return take(h, t, p, e, u);
        }
    }
    return false;
}

static bool usable_word(const ce_unit *u)
{
    return u != NULL && strcmp(u->name, "1") != 0;
}

/* "Name unit", "Name in unit", "Name, unit", "Name / unit": the longest unit at the end. */
static bool trailing(ce_span t, ce_header *h)
{
    const char *end = t.at + t.n;
    for (const char *p = t.at + 1; p < end; p++) {
        if (p[-1] != ' ' && p[-1] != ',' && p[-1] != ';') continue;
        ce_span u = ce_trim((ce_span){p, (size_t)(end - p)});
        if (!usable_word(ce_unit_find(u.at, u.n))) continue;
        const char *from = p;
        while (from > t.at && strchr(" ,;/", from[-1]) != NULL) from--;
        if (from - t.at > 3 && strncasecmp(from - 3, " in", 3) == 0) from -= 3;
        if (from - t.at > 3 && strncasecmp(from - 3, " en", 3) == 0) from -= 3;
        return from > t.at && take(h, t, from, end, u);
    }
    return false;
}

/* "Heat flow / cal/(s g)": what stands behind a slash between blanks is a unit, known or not. */
static bool behind_slash(ce_span t, ce_header *h)
{
    const char *end = t.at + t.n;
    for (const char *p = t.at + 1; p + 2 < end; p++) {
        if (p[0] != '/' || p[-1] != ' ' || p[1] != ' ') continue;
        ce_span u = ce_trim((ce_span){p + 1, (size_t)(end - p - 1)});
        return looks_like_unit(u) && take(h, t, p, end, u);
    }
    return false;
}

/* "HF/mV", "Heat flow mV": a unit that is none of ours, told by its symbol at the end. */
static bool foreign(ce_span t, ce_header *h)
{
    const char *end = t.at + t.n, *p = end;
    while (p > t.at && strchr(" /,;", p[-1]) == NULL) p--;
    ce_span u = {p, (size_t)(end - p)};
    if (p == t.at || !foreign_symbol(u)) return false;
    while (p > t.at && strchr(" /,;", p[-1]) != NULL) p--;
    return p > t.at && take(h, t, p, end, u);
}

void ce_header_split(const char *text, size_t len, ce_header *header)
{
    *header = (ce_header){0};
    ce_span t = ce_trim((ce_span){text, len});
    if (bracketed(t, header) || behind_slash(t, header) || trailing(t, header) ||
        slashed(t, header) || foreign(t, header))
        return;
    copy(header->name, sizeof header->name, t);
}

bool ce_header_is_unit(ce_span cell, const ce_unit **unit)
{
    cell = ce_trim(cell);
    *unit = ce_unit_find(cell.at, cell.n);
    if (*unit != NULL) return true;
    if (cell.n > 1 && *cell.at == '/') {
        *unit = ce_unit_find(cell.at + 1, cell.n - 1);
        return *unit != NULL;
    }
    if (cell.n > 2 && *cell.at == '[' && cell.at[cell.n - 1] == ']') return true;
    if (cell.n > 2 && *cell.at == '(' && cell.at[cell.n - 1] == ')')
        return looks_like_unit((ce_span){cell.at + 1, cell.n - 2});
    return looks_like_unit(cell);
}

static char skip_to(const char **p)
{
    while (**p == ' ' || **p == '_' || **p == '-' || **p == '.') ++*p;
    return (char)tolower((unsigned char)**p);
}

bool ce_same_name(const char *a, const char *b)
{
    for (;; a++, b++) {
        char x = skip_to(&a), y = skip_to(&b);
        if (x != y) return false;
        if (x == '\0') return true;
    }
}
