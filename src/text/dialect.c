/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text/dialect.h"

#include "text/number.h"
#include "text/split.h"

#include <string.h>

#define SAMPLE ((size_t)32768)

/* The first that explains the text best wins, so the order matters only where two explain it
 * equally: a comma with blanks after it is a delimiter, not a decimal mark before blanks. The last
 * pair is for quoted numbers with decimal comma. */
static const struct {
    char delimiter, decimal;
} pairs[] = {
    {'\t', '.'}, {'\t', ','}, {';', '.'}, {';', ','}, {',', '.'},
    {'|', '.'},  {'|', ','},  {' ', '.'}, {' ', ','}, {',', ','},
};
#define PAIRS (sizeof pairs / sizeof *pairs)

/* "1," is a number to strtod(), but in a first look it is a number and a delimiter. */
static bool number_like(ce_span c, char decimal, bool *marked)
{
    double x;
    if (c.n == 0 || c.at[c.n - 1] == ',' || !ce_parse_number(c.at, c.n, decimal, &x)) return false;
    *marked = *marked || memchr(c.at, decimal, c.n) != NULL;
    return true;
}

static ce_row_kind look(const char *p, const char *line_end, char delimiter, char decimal,
                        size_t *cells, bool *marked)
{
    size_t n = 0, numbers = 0, filled = 0;
    ce_span c;
    while (ce_peek_cell(&p, line_end, delimiter, &c)) {
        n++;
        filled += c.n > 0;
        numbers += number_like(c, decimal, marked);
    }
    if (cells != NULL) *cells = n;
    if (filled == 0) return CE_ROW_BLANK;
    if (numbers < 2) return CE_ROW_TEXT;
    return numbers == filled ? CE_ROW_NUMBERS : 2 * numbers >= filled ? CE_ROW_PART : CE_ROW_TEXT;
}

ce_row_kind ce_row_look(const char *p, const char *line_end, char delimiter, char decimal,
                        size_t *cells)
{
    bool marked = false;
    return look(p, line_end, delimiter, decimal, cells, &marked);
}

typedef struct {
    size_t points, rows;
    bool marked;
} score;

static score rate(const char *p, const char *end, char delimiter, char decimal)
{
    score s = {0};
    while (p < end) {
        const char *e = ce_line_end(p, end);
        bool marked = false;
        ce_row_kind k = look(p, e, delimiter, decimal, NULL, &marked);
        s.rows += k == CE_ROW_NUMBERS || k == CE_ROW_PART;
        s.points += k == CE_ROW_NUMBERS ? 4 : k == CE_ROW_PART;
        s.marked = s.marked || (marked && k == CE_ROW_NUMBERS);
        p = ce_line_next(e, end);
    }
    return s;
}

/* Where a sample that begins at p and is about so long ends: after a whole line. */
static const char *sample_end(const char *p, const char *end, size_t size)
{
    if ((size_t)(end - p) <= size) return end;
    const char *e = ce_line_end(p + size, end);
    return ce_line_next(e, end);
}

ce_dialect ce_sniff_numbers(const ce_text *text, char delimiter, char decimal)
{
    score sum[PAIRS] = {0};
    size_t best = PAIRS;
    const char *limit = sample_end(text->begin, text->end, CE_SNIFF_BYTES);
    size_t size = SAMPLE;
    for (const char *p = text->begin; p < limit; size *= 2) {
        const char *e = sample_end(p, limit, size);
        for (size_t i = 0; i < PAIRS; i++) {
            if ((delimiter != 0 && delimiter != pairs[i].delimiter) ||
                (decimal != 0 && decimal != pairs[i].decimal))
                continue;
            score s = rate(p, e, pairs[i].delimiter, pairs[i].decimal);
            sum[i].points += s.points;
            sum[i].rows += s.rows;
            sum[i].marked = sum[i].marked || s.marked;
            if (sum[i].points > 0 && (best == PAIRS || sum[i].points > sum[best].points)) best = i;
        }
        p = e;
        if (best < PAIRS && sum[best].points >= 12 && (sum[best].marked || decimal != 0)) break;
    }
    if (best == PAIRS)
        return (ce_dialect){delimiter != 0 ? delimiter : ',', decimal != 0 ? decimal : '.', false,
                            0};
    return (ce_dialect){pairs[best].delimiter, pairs[best].decimal,
                        decimal != 0 || sum[best].marked, sum[best].rows};
}

static size_t count_cells(const char *p, const char *line_end, char delimiter, size_t *filled)
{
    size_t n = 0;
    ce_span c;
    *filled = 0;
    while (ce_peek_cell(&p, line_end, delimiter, &c)) {
        n++;
        if (c.n > 0) *filled = n;
    }
    return n;
}

/* Rows cut into as many cells as the first has, times the cells it has beyond one. */
static size_t agreement(const ce_text *t, const char *end, char delimiter)
{
    size_t wide = 0, rows = 0;
    for (const char *p = t->begin; p < end;) {
        const char *e = ce_line_end(p, end);
        size_t filled, n = count_cells(p, e, delimiter, &filled);
        if (filled > 0 && *p != '#') {
            if (wide == 0) wide = n;
            rows += filled <= wide && n >= wide;
        }
        p = ce_line_next(e, end);
    }
    return wide < 2 ? 0 : rows;
}

static char common_decimal(const ce_text *t, const char *end, char delimiter, bool *known)
{
    size_t points = 0, commas = 0;
    for (const char *p = t->begin; p < end;) {
        const char *e = ce_line_end(p, end), *q = p;
        ce_span c;
        while (*p != '#' && ce_peek_cell(&q, e, delimiter, &c)) {
            bool marked = false;
            points += number_like(c, '.', &marked) && marked;
            marked = false;
            commas += number_like(c, ',', &marked) && marked;
        }
        p = ce_line_next(e, end);
    }
    *known = points + commas > 0;
    return commas > points ? ',' : '.';
}

ce_dialect ce_sniff_table(const ce_text *text, char delimiter, char decimal)
{
    static const char marks[] = {'\t', ';', ',', '|', ' '};
    const char *end = sample_end(text->begin, text->end, 8 * SAMPLE);
    ce_dialect d = {.delimiter = delimiter, .decimal = decimal, .decimal_known = decimal != 0};
    for (size_t i = 0; i < sizeof marks && delimiter == 0; i++) {
        size_t rows = agreement(text, end, marks[i]);
        if (rows > d.rows) {
            d.rows = rows;
            d.delimiter = marks[i];
        }
    }
    if (d.delimiter == 0) d.delimiter = ',';
    if (decimal == 0) d.decimal = common_decimal(text, end, d.delimiter, &d.decimal_known);
    return d;
}

const char *ce_delimiter_name(char delimiter)
{
    switch (delimiter) {
    case ',':
        return "comma";
    case ';':
        return "semicolon";
    case '\t':
        return "tab";
    case '|':
        return "pipe";
    case ' ':
        return "blanks";
    default:
        return "unknown";
    }
}

const char *ce_decimal_name(char decimal)
{
    return decimal == ',' ? "comma" : "point";
}
