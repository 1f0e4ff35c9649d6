/* SPDX-License-Identifier: GPL-3.0-or-later
 * Rows of numbers in bulk. Plain rows (numbers, delimiters, blanks) are scanned where they stand;
 * every other line goes through libcsv and is judged. Both give the same table. */
#include "run/reader.h"

#include "base/large.h"
#include "text/number.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

/* What went wrong with a row that is only forgiven when it is the last. */
typedef struct {
    ce_error error;
    size_t n; /* such rows since the last good one */
} pending;

typedef struct {
    ce_reader *r;
    double *row; /* one value a column */
    size_t line; /* of the row at hand */
    pending bad;
    size_t text_line; /* first text line since the last good row, 0 none */
    bool text_is_header, blank_seen;
    size_t dropped_first; /* lines */
} scanner;

ce_status ce_lines_add(ce_line_map *map, size_t row, size_t line)
{
    if (map->n > 0) {
        const ce_stretch *last = &map->item[map->n - 1];
        if (line - last->line == row - last->row) return CE_OK;
    }
    if ((map->n & (map->n - 1)) == 0) {
        size_t want = map->n == 0 ? 1 : 2 * map->n;
        ce_stretch *p = reallocarray(map->item, want, sizeof *p);
        if (p == NULL) return CE_E_NOMEM;
        map->item = p;
    }
    map->item[map->n++] = (ce_stretch){row, line};
    return CE_OK;
}

size_t ce_lines_find(const ce_line_map *map, size_t row)
{
    size_t lo = 0, hi = map->n;
    while (hi - lo > 1) {
        size_t mid = lo + (hi - lo) / 2;
        if (map->item[mid].row <= row)
            lo = mid;
        else
            hi = mid;
    }
    return map->n == 0 ? 0 : map->item[lo].line + (row - map->item[lo].row);
}

static ce_status make_room(ce_reader *r)
{
    ce_rows *rows = &r->rows;
    if (rows->n >= CE_MAX_POINTS)
        return ce_reader_fail(r, CE_E_LIMIT, ce_lines_find(&rows->lines, rows->n - 1), 0,
                              "more than %zu rows", CE_MAX_POINTS);
    size_t want = rows->room + rows->room / 2 + 16;
    for (size_t c = 0; c < r->n_columns; c++) {
        if (rows->room > 0 && rows->value[c] == NULL) continue;
        double *p = reallocarray(rows->value[c], want, sizeof *p);
        if (p == NULL) return ce_reader_no_memory(r);
        rows->value[c] = p;
    }
    rows->room = want;
    return CE_OK;
}

/* A good row closes what was open before it: a break, or a bad row that was not the last. */
static ce_status close_gap(scanner *s)
{
    ce_reader *r = s->r;
    ce_rows *rows = &r->rows;
    if (s->bad.n > 0) {
        if (r->err != NULL && r->err->code == CE_OK) *r->err = s->bad.error;
        return s->bad.error.code;
    }
    if (rows->n > 0 && (s->text_line > 0 || s->blank_seen)) {
        ce_break *p = reallocarray(rows->gap, rows->n_gaps + 1, sizeof *p);
        if (p == NULL) return ce_reader_no_memory(r);
        rows->gap = p;
        ce_break_kind kind = s->text_is_header  ? CE_BREAK_HEADER
                             : s->text_line > 0 ? CE_BREAK_TEXT
                                                : CE_BREAK_BLANK;
        rows->gap[rows->n_gaps++] =
            (ce_break){rows->n, s->text_line > 0 ? s->text_line : s->line - 1, kind};
    }
    s->text_line = 0;
    s->text_is_header = s->blank_seen = false;
    return CE_OK;
}

static ce_status keep_row(scanner *s)
{
    ce_reader *r = s->r;
    ce_rows *rows = &r->rows;
    if (s->bad.n > 0 || s->text_line > 0 || s->blank_seen) CE_TRY(close_gap(s));
    if (rows->n == rows->room) CE_TRY(make_room(r));
    if (ce_lines_add(&rows->lines, rows->n, s->line) != CE_OK) return ce_reader_no_memory(r);
    for (size_t c = 0; c < r->n_columns; c++)
        if (rows->value[c] != NULL) rows->value[c][rows->n] = s->row[c];
    rows->n++;
    return CE_OK;
}

/* ---- plain rows --------------------------------------------------------------------------- */

static inline const char *skip_blanks(const char *p, bool tabs)
{
    while (*p == ' ' || (tabs && *p == '\t')) p++;
    return p;
}

/* One plain row at p, its numbers into row; NULL when it is anything else. *next: the next line. */
static const char *plain_row(const char *p, const ce_reader *r, double *row)
{
    size_t n = r->n_columns;
    char delimiter = r->dialect.delimiter, decimal = r->dialect.decimal;
    bool blanks = delimiter == ' ';
    for (size_t c = 0; c < n; c++) {
        p = skip_blanks(p, blanks);
        p = ce_scan_number(p, decimal, &row[c]);
        if (p == NULL) return NULL;
        const char *after = skip_blanks(p, blanks);
        if (c + 1 < n) {
            if (blanks ? after == p : *after != delimiter) return NULL;
            p = blanks ? after : after + 1;
        } else
            p = after;
    }
    if (r->trailing && *p == delimiter) p = skip_blanks(p + 1, blanks);
    if (*p == '\n') return p + 1;
    if (*p == '\r') return p[1] == '\n' ? p + 2 : p + 1;
    return NULL;
}

/* As many plain rows as there are from p on; a last line without line end is left to the other
 * way. */
static ce_status plain_rows(scanner *s, const char **p)
{
    ce_reader *r = s->r;
    for (;;) {
        const char *next = plain_row(*p, r, s->row);
        if (next == NULL) return CE_OK;
        CE_TRY(keep_row(s));
        s->line++;
        *p = next;
    }
}

/* ---- any other line ----------------------------------------------------------------------- */

/* What instruments and spreadsheets write where a number is missing or impossible: such a cell is a
 * bad number, not a word. */
static bool not_a_number_word(ce_span c)
{
    static const char *const words[] = {"nan",  "inf", "infinity", "na",   "n/a",  "null",
                                        "none", "ind", "overflow", "over", "#n/a", "err"};
    if (c.n > 0 && strchr("+-#.0123456789", *c.at) != NULL) return true;
    for (size_t i = 0; i < sizeof words / sizeof *words; i++)
        if (strlen(words[i]) == c.n && strncasecmp(c.at, words[i], c.n) == 0) return true;
    return false;
}

static size_t filled_cells(const ce_splitter *s)
{
    size_t n = s->n;
    while (n > 0 && ce_trim(s->cell[n - 1]).n == 0) n--;
    return n;
}

/* Segments may be named instead of numbered: all that counts is where the name changes (FNV-1a). */
static double number_of_name(ce_span name)
{
    uint64_t h = 14695981039346656037u;
    for (size_t i = 0; i < name.n; i++) h = (h ^ (unsigned char)name.at[i]) * 1099511628211u;
    return (double)(h >> 11);
}

/* The numbers of the split line into s->row (NaN where empty); how many, and the first used cell
 * that is something else. */
static size_t numbers_of(scanner *s, size_t *wrong)
{
    const ce_reader *r = s->r;
    size_t numbers = 0;
    *wrong = CE_NOWHERE;
    for (size_t c = 0; c < r->n_columns; c++) {
        s->row[c] = (double)NAN;
        if (c >= r->split.n) continue;
        ce_span v = ce_trim(r->split.cell[c]);
        if (v.n == 0) continue;
        if (ce_parse_number(v.at, v.n, r->dialect.decimal, &s->row[c]))
            numbers++;
        else if (c == r->segment && r->header_line > 0 && !not_a_number_word(v))
            s->row[c] = number_of_name(v);
        else if (r->rows.value[c] != NULL && *wrong == CE_NOWHERE)
            *wrong = c;
    }
    return numbers;
}

/* Is the line words rather than a damaged row of numbers. */
static bool is_words(const ce_splitter *s, size_t numbers)
{
    if (numbers >= 2) return false;
    for (size_t i = 0; i < s->n; i++) {
        ce_span c = ce_trim(s->cell[i]);
        if (c.n == 0) continue;
        /* A comment mark stands before anything. */
        if (c.n > 1 && *c.at == '#' && !not_a_number_word((ce_span){c.at + 1, c.n - 1}))
            return true;
        return !not_a_number_word(c);
    }
    return false;
}

static ce_status bad_number(scanner *s, ce_error *e, size_t c)
{
    const ce_reader *r = s->r;
    double x;
    ce_span v = ce_trim(r->split.cell[c]);
    int n = (int)(v.n < 40 ? v.n : 40);
    char other = r->dialect.decimal == ',' ? '.' : ',';
    bool both = memchr(v.at, ',', v.n) != NULL && memchr(v.at, '.', v.n) != NULL;
    if (both)
        return ce_fail_at(e, CE_E_SYNTAX, r->run->name, s->line, c + 1,
                          "'%.*s' has a thousands mark, which is ambiguous: write numbers without",
                          n, v.at);
    if (ce_parse_number(v.at, v.n, other, &x))
        return ce_fail_at(e, CE_E_SYNTAX, r->run->name, s->line, c + 1,
                          "'%.*s' has a decimal %s where the table has decimal %ss: overrule with "
                          "--decimal, or mend the file",
                          n, v.at, ce_decimal_name(other), ce_decimal_name(r->dialect.decimal));
    return ce_fail_at(e, CE_E_SYNTAX, r->run->name, s->line, c + 1,
                      "cannot read '%.*s' as a number", n, v.at);
}

/* The first row of a table is forgiven once, with a warning; the last as well (see finish()). */
static ce_status bad_row(scanner *s, const ce_error *e)
{
    ce_reader *r = s->r;
    if (r->rows.n == 0 && s->bad.n == 0 && s->dropped_first == 0) {
        s->dropped_first = s->line;
        if (ce_run_warn(r->run, CE_WARNING, e->line, e->column, "first row left out: %s",
                        e->message) != CE_OK)
            return ce_reader_no_memory(r);
        return CE_OK;
    }
    if (s->bad.n++ == 0) s->bad.error = *e;
    return CE_OK;
}

/* Do the cells of this line repeat the header. */
static ce_status check_header(scanner *s, const char *p, const char *line_end, bool *is)
{
    ce_reader *r = s->r;
    *is = false;
    ce_span *cell = reallocarray(NULL, r->n_columns, sizeof *cell);
    if (cell == NULL) return ce_reader_no_memory(r);
    size_t same = 0, roles = 0, other = CE_NOWHERE;
    if (ce_reader_header_cells(r, p, line_end, cell))
        for (size_t c = 0; c < r->n_columns; c++) {
            char text[CE_HEADER_NAME];
            ce_header h;
            size_t n = cell[c].n < sizeof text ? cell[c].n : sizeof text - 1;
            memcpy(text, cell[c].at, n);
            text[n] = '\0';
            bool equal = ce_same_name(text, r->column[c].title);
            (void)ce_sign_of(text, text, sizeof text);
            ce_header_split(text, strlen(text), &h);
            ce_meaning m = ce_meaning_of(h.name, h.unit);
            roles += ce_meaning_is_quantity(m);
            same += equal;
            if (!equal && other == CE_NOWHERE && r->rows.value[c] != NULL) other = c;
        }
    free(cell);
    *is = same > 0 && other == CE_NOWHERE;
    if (roles >= 2 && r->header_line == 0)
        return ce_reader_fail(r, CE_E_SYNTAX, s->line, 1,
                              "a header below rows of numbers without one: split the file");
    if (roles >= 2 && !*is && other != CE_NOWHERE)
        return ce_reader_fail(r, CE_E_SYNTAX, s->line, other + 1,
                              "this header differs from that of line %zu: the tables stacked in a "
                              "file must have the same columns; split the file",
                              r->header_line);
    return CE_OK;
}

/* A row of units below a later header must repeat the first one's. */
static ce_status check_units(scanner *s, const char *p, const char *line_end, bool *is)
{
    ce_reader *r = s->r;
    size_t units = 0, other = CE_NOWHERE;
    ce_span *cell = reallocarray(NULL, r->n_columns, sizeof *cell);
    if (cell == NULL) return ce_reader_no_memory(r);
    bool all = ce_reader_header_cells(r, p, line_end, cell);
    for (size_t c = 0; all && c < r->n_columns; c++) {
        const ce_unit *u;
        if (cell[c].n == 0) continue;
        all = ce_header_is_unit(cell[c], &u);
        units += u != NULL;
        if (u != r->column[c].head.unit && other == CE_NOWHERE && r->rows.value[c] != NULL)
            other = c;
    }
    free(cell);
    *is = all && units > 0;
    if (*is && other != CE_NOWHERE)
        return ce_reader_fail(r, CE_E_SYNTAX, s->line, other + 1,
                              "these units differ from those above: the tables stacked in a file "
                              "must have the same columns; split the file");
    return CE_OK;
}

static ce_status text_line(scanner *s, const char *p, const char *line_end)
{
    bool is = false, units = false;
    CE_TRY(check_header(s, p, line_end, &is));
    if (!is) CE_TRY(check_units(s, p, line_end, &units));
    if (!is && !units) CE_TRY(ce_reader_entry(s->r, p, line_end, s->line));
    if (s->text_line == 0) s->text_line = s->line;
    s->text_is_header = s->text_is_header || is;
    return CE_OK;
}

/* Judge one line that is split already. */
static ce_status judge(scanner *s, const char *p, const char *line_end)
{
    ce_reader *r = s->r;
    size_t filled = filled_cells(&r->split), wrong;
    if (filled == 0) {
        s->blank_seen = true;
        return CE_OK;
    }
    size_t numbers = numbers_of(s, &wrong);
    bool fits = filled <= r->n_columns && r->split.n >= r->n_columns;
    if (wrong == CE_NOWHERE && fits && numbers > 0) return keep_row(s);
    if (is_words(&r->split, numbers)) return text_line(s, p, line_end);
    ce_error e = CE_ERROR_INIT;
    if (filled > r->n_columns)
        (void)ce_fail_at(&e, CE_E_SYNTAX, r->run->name, s->line, r->n_columns + 1,
                         "row has %zu cells, the table %zu columns%s", filled, r->n_columns,
                         r->dialect.delimiter == ',' ? ": decimal commas need another delimiter"
                                                     : "");
    else if (wrong != CE_NOWHERE)
        (void)bad_number(s, &e, wrong);
    else
        (void)ce_fail_at(&e, CE_E_SYNTAX, r->run->name, s->line, filled + 1,
                         "row ends after %zu cells, the table has %zu columns", filled,
                         r->n_columns);
    return bad_row(s, &e);
}

static ce_status finish(scanner *s)
{
    ce_reader *r = s->r;
    ce_status st = CE_OK;
    if (s->bad.n > 1 || (s->bad.n == 1 && r->rows.n == 0)) {
        s->bad.n = s->bad.n > 0 ? s->bad.n : 1;
        if (r->err != NULL && r->err->code == CE_OK) *r->err = s->bad.error;
        return s->bad.error.code;
    }
    if (s->bad.n == 1)
        st = ce_run_warn(r->run, CE_WARNING, s->bad.error.line, s->bad.error.column,
                         "last row left out: %s", s->bad.error.message);
    else if (s->text_line > 0)
        st = ce_run_warn(r->run, CE_NOTE, s->text_line, 0, "text after the table is not used");
    return st == CE_OK ? CE_OK : ce_reader_no_memory(r);
}

static ce_status read_on(scanner *s)
{
    ce_reader *r = s->r;
    const char *p = r->data, *end = r->text.end;
    while (p < end) {
        /* Where the delimiter is also the decimal mark only quotes tell them apart. */
        if (r->plain_rows && r->dialect.delimiter != r->dialect.decimal) CE_TRY(plain_rows(s, &p));
        if (p == end) break;
        const char *begin = p, *line_end = ce_line_end(p, end);
        size_t next_line = s->line;
        CE_TRY(ce_split(&r->split, p, end, &p, &next_line, r->err));
        CE_TRY(judge(s, begin, line_end));
        s->line = next_line;
    }
    return finish(s);
}

/* Columns of which no value is needed are parsed and forgotten. */
static void drop_unused(ce_reader *r)
{
    if (r->behave) return;
    for (size_t c = 0; c < r->n_columns; c++) {
        bool used = c == r->segment;
        for (size_t g = 0; g < r->n_groups; g++)
            used = used || c == r->group[g].time || c == r->group[g].temperature ||
                   c == r->group[g].signal;
        if (used) continue;
        free(r->rows.value[c]);
        r->rows.value[c] = NULL;
    }
}

static void trim_to_size(ce_rows *rows, size_t n_columns)
{
    for (size_t c = 0; c < n_columns; c++) {
        if (rows->value[c] == NULL || rows->n == 0) continue;
        double *p = reallocarray(rows->value[c], rows->n, sizeof *p);
        if (p != NULL) rows->value[c] = p;
    }
}

ce_status ce_reader_rows(ce_reader *r)
{
    ce_rows *rows = &r->rows;
    rows->value = calloc(r->n_columns, sizeof *rows->value);
    double *row = reallocarray(NULL, r->n_columns, sizeof *row);
    ce_status st = rows->value == NULL || row == NULL ? ce_reader_no_memory(r) : CE_OK;
    if (st == CE_OK) {
        /* As many rows as the first line suggests, so that arrays need not grow by copying. */
        size_t bytes = (size_t)(r->text.end - r->data);
        const char *e = ce_line_end(r->data, r->text.end);
        rows->room = 0;
        st = make_room(r);
        drop_unused(r);
        size_t guess = bytes / ((size_t)(e - r->data) + 1);
        if (guess < CE_MAX_POINTS) rows->room = guess;
        if (rows->room < 16) rows->room = 16;
        for (size_t c = 0; st == CE_OK && c < r->n_columns; c++) {
            if (rows->value[c] == NULL) continue;
            free(rows->value[c]);
            rows->value[c] = ce_large(rows->room, sizeof(double));
            if (rows->value[c] == NULL) st = ce_reader_no_memory(r);
        }
    }
    scanner s = {.r = r, .row = row, .line = r->data_line};
    if (st == CE_OK) st = read_on(&s);
    if (st == CE_OK) trim_to_size(rows, r->n_columns);
    if (st == CE_OK && rows->n < CE_MIN_POINTS)
        st = ce_reader_fail(r, CE_E_SYNTAX, r->data_line, 0,
                            "only %zu rows of numbers: a run needs at least %zu", rows->n,
                            CE_MIN_POINTS);
    free(row);
    return st;
}
