/* SPDX-License-Identifier: GPL-3.0-or-later
 * Where the table begins, and what stands above it: preamble, names, units. */
#include "run/reader.h"

#include "text/number.h"
#include "text/value.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define ABOVE      8   /* lines above the table that may be its header                  */
#define LOOK_ROWS  20  /* rows whose cells are counted                                  */
#define PART_ROWS  3   /* rows with words in them make a table when there are so many   */
#define PART_CLEAR 50  /* ... and so many settle it                                     */
#define LOOK_BELOW 200 /* lines below the first rows that may hold a header             */

typedef struct {
    const char *p, *end;
    size_t line;
    ce_row_kind kind;
} seen_line;

/* The last lines that are not blank, the nearest first. */
typedef struct {
    seen_line item[ABOVE];
    size_t n;
} above;

static void push(above *a, seen_line l)
{
    memmove(&a->item[1], &a->item[0], (ABOVE - 1) * sizeof a->item[0]);
    a->item[0] = l;
    if (a->n < ABOVE) a->n++;
}

/* The table begins with the first two rows of numbers in a row; where there are none, with the
 * first rows that mix numbers and words alike. p, line: where to begin. */
static void find_data(ce_reader *r, const char *p, size_t line, above *found)
{
    above a = {0}, at_pending = {0}, at_part = {0}, at_candidate = {0};
    seen_line pending = {0}, part = {0}, candidate = {0};
    size_t part_cells = 0, part_rows = 0;
    for (; p < r->text.end; line++) {
        const char *e = ce_line_end(p, r->text.end);
        size_t cells;
        ce_row_kind k = ce_row_look(p, e, r->dialect.delimiter, r->dialect.decimal, &cells);
        seen_line l = {p, e, line, k};
        p = ce_line_next(e, r->text.end);
        if (k == CE_ROW_BLANK) continue;
        if (k == CE_ROW_NUMBERS && pending.p != NULL) break;
        pending = k == CE_ROW_NUMBERS ? l : (seen_line){0};
        if (k == CE_ROW_NUMBERS) at_pending = a;
        bool more = k == CE_ROW_PART && part_rows > 0 && cells == part_cells;
        part_rows = more ? part_rows + 1 : k == CE_ROW_PART;
        part_cells = cells;
        if (part_rows == 1) {
            candidate = l;
            at_candidate = a;
        }
        if (part_rows >= PART_ROWS && part.p == NULL) {
            part = candidate;
            at_part = at_candidate;
        }
        if (part_rows >= PART_CLEAR) break;
        push(&a, l);
    }
    bool numbers = pending.p != NULL;
    *found = numbers ? at_pending : at_part;
    r->data = numbers ? pending.p : part.p;
    r->data_line = numbers ? pending.line : part.line;
}

/* The number of cells most of the first rows have; a delimiter at the end of each opens no column.
 */
static ce_status count_columns(ce_reader *r)
{
    size_t count[LOOK_ROWS], n = 0, best = 0, votes = 0, open = 0;
    for (const char *p = r->data; p < r->text.end && n < LOOK_ROWS;) {
        const char *e = ce_line_end(p, r->text.end), *q = p;
        ce_row_kind k = ce_row_look(p, e, r->dialect.delimiter, r->dialect.decimal, &count[n]);
        ce_span c = {NULL, 0};
        while (ce_peek_cell(&q, e, r->dialect.delimiter, &c)) {
        }
        if (k != CE_ROW_BLANK && k != CE_ROW_TEXT) {
            n++;
            open += c.n == 0;
        }
        p = ce_line_next(e, r->text.end);
    }
    for (size_t i = 0; i < n; i++) {
        size_t same = 0;
        for (size_t j = 0; j < n; j++) same += count[j] == count[i];
        if (same > votes) votes = same, best = count[i];
    }
    r->trailing = open == n && best > 2;
    r->n_columns = best - r->trailing;
    if (r->n_columns > CE_MAX_COLUMNS)
        return ce_reader_fail(r, CE_E_LIMIT, r->data_line, CE_MAX_COLUMNS + 1,
                              "more than %zu columns", CE_MAX_COLUMNS);
    r->column = calloc(r->n_columns, sizeof *r->column);
    return r->column == NULL ? ce_reader_no_memory(r) : CE_OK;
}

/* ---- header cells --------------------------------------------------------------------------- */

/* Ways to cut a header other than its rows' delimiter: at tabs or two blanks; behind brackets. */
enum { WIDE_BLANKS = 1, BRACKETS = 2 };

static const char *cut_at(const char *p, const char *end, char way)
{
    for (; p < end; p++) {
        if (way == WIDE_BLANKS && (*p == '\t' || (*p == ' ' && p + 1 < end && p[1] == ' ')))
            return p;
        if (way == BRACKETS && (*p == ')' || *p == ']') && (p + 1 == end || p[1] == ' '))
            return p + 1;
    }
    return end;
}

static bool next_cell(const char **p, const char *end, char way, ce_span *cell)
{
    if (way != WIDE_BLANKS && way != BRACKETS) return ce_peek_cell(p, end, way, cell);
    while (*p < end && (**p == ' ' || **p == '\t')) ++*p;
    if (*p == end) return false;
    const char *e = cut_at(*p, end, way);
    *cell = ce_trim((ce_span){*p, (size_t)(e - *p)});
    *p = e;
    return true;
}

static bool cut_header(const ce_reader *r, const char *p, const char *end, char way, ce_span *cell)
{
    size_t n = 0;
    ce_span c;
    while (next_cell(&p, end, way, &c)) {
        if (n < r->n_columns)
            cell[n] = c;
        else if (c.n > 0)
            return false;
        n++;
    }
    return n >= r->n_columns && n <= r->n_columns + 1;
}

static const char *past_comment(const char *p, const char *end)
{
    while (p < end && (*p == '#' || *p == ' ' || *p == '%')) p++;
    if (end - p > 2 && p[0] == '/' && p[1] == '/') p += 2;
    return p;
}

bool ce_reader_header_cells(const ce_reader *r, const char *p, const char *line_end, ce_span *cells)
{
    static const char ways[] = {'\t', WIDE_BLANKS, BRACKETS, ' ', ';', ',', '|'};
    /* A blank before the first delimiter is an empty first cell, not a comment's. */
    const char *q = past_comment(p, line_end);
    if (r->dialect.delimiter != ' ' && cut_header(r, q, line_end, r->dialect.delimiter, cells))
        return true;
    for (size_t i = 0; i < sizeof ways; i++)
        if (cut_header(r, q, line_end, ways[i], cells)) return true;
    return false;
}

static void copy_title(char *to, ce_span from)
{
    size_t n = from.n < CE_HEADER_NAME ? from.n : CE_HEADER_NAME - 1;
    while (n > 0 && n < from.n && ((unsigned char)from.at[n] & 0xC0) == 0x80) n--;
    memcpy(to, from.at, n);
    to[n] = '\0';
}

static void name_columns(ce_reader *r, const ce_span *cell)
{
    for (size_t i = 0; i < r->n_columns; i++) {
        ce_run_column *c = &r->column[i];
        char clean[CE_HEADER_NAME];
        copy_title(c->title, cell[i]);
        c->sign = ce_sign_of(c->title, clean, sizeof clean);
        ce_header_split(clean, strlen(clean), &c->head);
        c->direction = ce_direction_of(c->title);
    }
}

static size_t recognised(const ce_reader *r, const ce_span *cell)
{
    size_t n = 0;
    for (size_t i = 0; i < r->n_columns; i++) {
        char title[CE_HEADER_NAME], clean[CE_HEADER_NAME];
        ce_header h;
        copy_title(title, cell[i]);
        (void)ce_sign_of(title, clean, sizeof clean);
        ce_header_split(clean, strlen(clean), &h);
        ce_meaning m = h.name[0] == '\0' ? CE_MEANS_UNKNOWN : ce_meaning_of(h.name, h.unit);
        n += ce_meaning_is_quantity(m);
    }
    return n;
}

/* A row of nothing but units: which of its cells are, and are at least half of them known. */
static bool units_row(const ce_reader *r, const ce_span *cell)
{
    size_t filled = 0, known = 0;
    for (size_t i = 0; i < r->n_columns; i++) {
        const ce_unit *u;
        if (cell[i].n == 0 || (cell[i].n == 1 && *cell[i].at == '-')) continue;
        if (!ce_header_is_unit(cell[i], &u)) return false;
        filled++;
        known += u != NULL;
    }
    return filled > 0 && 2 * known >= filled;
}

static void set_units(ce_reader *r, const ce_span *cell)
{
    for (size_t i = 0; i < r->n_columns; i++) {
        ce_header *h = &r->column[i].head;
        const ce_unit *u;
        if (cell[i].n == 0 || !ce_header_is_unit(cell[i], &u)) continue;
        h->unit = u;
        size_t n = cell[i].n < CE_HEADER_UNIT ? cell[i].n : CE_HEADER_UNIT - 1;
        memcpy(h->unit_text, cell[i].at, n);
        h->unit_text[n] = '\0';
    }
}

/* Words that are no number and no "key: value" name columns even when none of them is known. */
static bool may_be_names(const ce_reader *r, const ce_span *cell)
{
    for (size_t i = 0; i < r->n_columns; i++) {
        double x;
        if (cell[i].n == 0 || ce_parse_number(cell[i].at, cell[i].n, r->dialect.decimal, &x) ||
            memchr(cell[i].at, ':', cell[i].n) != NULL)
            return false;
    }
    return true;
}

/* How many cells of a line name a quantity, whatever the number of cells. */
static size_t known_words(const ce_reader *r, const char *p, const char *end, size_t *cells)
{
    char way = r->dialect.delimiter == ' ' ? WIDE_BLANKS : r->dialect.delimiter;
    size_t known = 0;
    ce_span c;
    *cells = 0;
    p = past_comment(p, end);
    while (next_cell(&p, end, way, &c)) {
        char title[CE_HEADER_NAME];
        ce_header h;
        copy_title(title, c);
        (void)ce_sign_of(title, title, sizeof title);
        ce_header_split(title, strlen(title), &h);
        ce_meaning m = h.name[0] == '\0' ? CE_MEANS_UNKNOWN : ce_meaning_of(h.name, h.unit);
        known += ce_meaning_is_quantity(m) ? 1 : 0;
        if (c.n > 0) ++*cells;
    }
    return known;
}

/* Numbers may stand above the header, of a calibration say: when nothing above the first rows names
 * a quantity but a line below them does, the table is the one below. */
static ce_status look_below(ce_reader *r, above *a)
{
    size_t cells, line = r->data_line, first = line;
    for (size_t i = 0; i < a->n; i++)
        if (known_words(r, a->item[i].p, a->item[i].end, &cells) >= 2) return CE_OK;
    const char *p = r->data;
    for (; p < r->text.end && line < first + LOOK_BELOW; line++) {
        const char *e = ce_line_end(p, r->text.end);
        if (ce_row_look(p, e, r->dialect.delimiter, r->dialect.decimal, &cells) == CE_ROW_TEXT &&
            known_words(r, p, e, &cells) >= 2)
            break;
        p = ce_line_next(e, r->text.end);
    }
    if (p == r->text.end || line == first + LOOK_BELOW) return CE_OK;
    const char *data = r->data;
    find_data(r, p, line, a);
    if (r->data == NULL) {
        r->data = data;
        r->data_line = first;
        return CE_OK;
    }
    if (ce_run_warn(r->run, CE_WARNING, first, 0,
                    "numbers above the header of line %zu are not used", line) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

/* A line that speaks of time and temperature but has another number of cells than the rows is a
 * header that does not fit: whatever the rows are, they are not what it says. */
static ce_status other_header(ce_reader *r, const above *a)
{
    for (size_t i = 0; i < a->n && i < 3; i++) {
        size_t cells = 0, known = 0;
        if (r->dialect.delimiter != ' ')
            known = known_words(r, a->item[i].p, a->item[i].end, &cells);
        if (known >= 2 && cells != r->n_columns)
            return ce_reader_fail(r, CE_E_SYNTAX, a->item[i].line, 0,
                                  "the header names %zu columns, the rows have %zu%s", cells,
                                  r->n_columns,
                                  r->dialect.delimiter == ',' && cells < r->n_columns
                                      ? ": decimal commas need another delimiter"
                                      : "");
    }
    return CE_OK;
}

/* Names: the nearest line above the table with known words, else the nearest that may be one.
 * Units: a row of units between the names and the table. */
static ce_status read_header(ce_reader *r, const above *a)
{
    ce_span *cell = reallocarray(NULL, r->n_columns, sizeof *cell);
    if (cell == NULL) return ce_reader_no_memory(r);
    size_t names = ABOVE, units = ABOVE, maybe = ABOVE;
    for (size_t i = 0; i < a->n && i < 5 && names == ABOVE; i++) {
        const seen_line *l = &a->item[i];
        if (l->kind == CE_ROW_NUMBERS || !ce_reader_header_cells(r, l->p, l->end, cell)) continue;
        if (units == ABOVE && units_row(r, cell))
            units = i;
        else if (recognised(r, cell) >= (r->n_columns > 2 ? 2 : 1))
            names = i;
        else if (maybe == ABOVE && i <= 1 && l->kind == CE_ROW_TEXT && may_be_names(r, cell))
            maybe = i;
    }
    if (names == ABOVE) names = maybe;
    if (names < ABOVE && ce_reader_header_cells(r, a->item[names].p, a->item[names].end, cell)) {
        name_columns(r, cell);
        r->header_line = a->item[names].line;
    }
    if (units < ABOVE && (names == ABOVE || units < names) &&
        ce_reader_header_cells(r, a->item[units].p, a->item[units].end, cell)) {
        set_units(r, cell);
        r->units_line = a->item[units].line;
    }
    free(cell);
    for (size_t i = 0; i < names && names < ABOVE; i++)
        if (i != units && ce_run_warn(r->run, CE_WARNING, a->item[i].line, 0,
                                      "the first row is left out: it holds neither units nor "
                                      "numbers alone") != CE_OK)
            return ce_reader_no_memory(r);
    return names < ABOVE ? CE_OK : other_header(r, a);
}

/* ---- preamble ------------------------------------------------------------------------------- */

#define LONGEST_ENTRY 1000
#define HEAVIEST_G    100.0 /* a sample of more is a slip of the unit                       */

/* Append the cell to text, after a blank. */
static void join(char *text, size_t room, ce_span c)
{
    size_t n = strlen(text);
    if (c.n == 0 || n + c.n + 2 > room) return;
    if (n > 0) text[n++] = ' ';
    memcpy(text + n, c.at, c.n);
    text[n + c.n] = '\0';
}

/* "Key: value", "key = value", or the key in the first cell and the value in the others. */
static bool take_apart(const ce_reader *r, const char *p, const char *end, char *key, char *value)
{
    ce_span first, c;
    const char *q = p, *mark = NULL;
    char way = r->dialect.delimiter == ' ' ? WIDE_BLANKS : r->dialect.delimiter;
    *key = *value = '\0';
    if (!next_cell(&q, end, way, &first)) return false;
    for (const char *m = first.at; m < first.at + first.n && mark == NULL; m++)
        if (*m == ':' || *m == '=') mark = m;
    /* A mark at the end of the first cell belongs to the key. */
    if (mark != NULL && (mark + 1 < first.at + first.n || q == NULL || q >= end)) {
        join(key, LONGEST_ENTRY, ce_trim((ce_span){first.at, (size_t)(mark - first.at)}));
        const char *v = mark + 1;
        if (way == ',' || way == WIDE_BLANKS) /* the comma may belong to a sentence or number */
            join(value, LONGEST_ENTRY, ce_trim((ce_span){v, (size_t)(end - v)}));
        else {
            join(value, LONGEST_ENTRY, ce_trim((ce_span){v, (size_t)(first.at + first.n - v)}));
            while (q != NULL && next_cell(&q, end, way, &c)) join(value, LONGEST_ENTRY, c);
        }
        return *key != '\0';
    }
    size_t n = first.n;
    while (n > 0 && strchr(":= ", first.at[n - 1]) != NULL) n--;
    join(key, LONGEST_ENTRY, (ce_span){first.at, n});
    while (q != NULL && next_cell(&q, end, way, &c)) join(value, LONGEST_ENTRY, c);
    return *key != '\0' && *value != '\0';
}

static ce_status note_mass(ce_reader *r, const char *value, size_t line)
{
    double g;
    char other = r->dialect.decimal == ',' ? '.' : ',';
    const char *mark = strpbrk(value, ".,");
    /* The preamble may use the other decimal mark; three digits behind it could be thousands. */
    bool sure = mark == NULL || *mark == r->dialect.decimal || strspn(mark + 1, "0123456789") != 3;
    bool ok = ce_parse_value(value, r->dialect.decimal, CE_DIM_MASS, NULL, &g, NULL, NULL) == CE_OK;
    if (!ok && sure) ok = ce_parse_value(value, other, CE_DIM_MASS, NULL, &g, NULL, NULL) == CE_OK;
    if (ok && g > HEAVIEST_G && isnan(r->o->mass_g))
        return ce_reader_fail(r, CE_E_DOMAIN, line, 0,
                              "a sample mass of %g g does not go into a DSC: give --mass", g);
    if (ok && g > 0.0) {
        if (!isnan(r->run->mass_g)) {
            if (fabs(g - r->run->mass_g) > 1e-6 * g) r->other_mass_line = line;
            return CE_OK;
        }
        r->run->mass_g = g;
        r->mass_line = line;
        if (ce_run_set_fact(r->run, "sample mass", CE_ORIGIN_STATED, line, "--mass", "%.6g mg",
                            1000.0 * g) != CE_OK)
            return ce_reader_no_memory(r);
        return CE_OK;
    }
    if (ce_run_warn(r->run, CE_WARNING, line, 0,
                    "the mass '%.60s' is not a number with a unit of mass: not used; give --mass",
                    value) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status note_sign(ce_reader *r, const char *whole, const char *value, bool is_key,
                           size_t line)
{
    ce_sign sign = ce_sign_of(whole, NULL, 0);
    if (sign == CE_SIGN_AUTO) {
        if (is_key && ce_run_warn(r->run, CE_WARNING, line, 0,
                                  "'%.60s' does not say which direction of heat flow is up: give "
                                  "--sign",
                                  value) != CE_OK)
            return ce_reader_no_memory(r);
        return CE_OK;
    }
    if (r->sign != CE_SIGN_AUTO && r->sign != sign && r->o->sign == CE_SIGN_AUTO)
        return ce_reader_fail(r, CE_E_SYNTAX, line, 0,
                              "the sign of heat flow contradicts line %zu: give --sign",
                              r->sign_line);
    r->sign = sign;
    r->sign_line = line;
    return CE_OK;
}

ce_status ce_reader_entry(ce_reader *r, const char *p, const char *end, size_t line)
{
    char key[LONGEST_ENTRY], value[LONGEST_ENTRY], whole[2 * LONGEST_ENTRY + 8];
    p = past_comment(p, end);
    if (!take_apart(r, p, end, key, value)) {
        *whole = '\0';
        join(whole, sizeof whole, ce_trim((ce_span){p, (size_t)(end - p)}));
        return note_sign(r, whole, "", false, line);
    }
    ce_header h;
    ce_header_split(key, strlen(key), &h);
    const char *name = key;
    if (h.unit != NULL && h.name[0] != '\0') {
        /* "Mass (mg): 5.2" */
        join(value, LONGEST_ENTRY, (ce_span){h.unit_text, strlen(h.unit_text)});
        name = h.name;
    }
    if (ce_run_add_entry(r->run, name, strlen(name), value, strlen(value), line) != CE_OK)
        return ce_reader_no_memory(r);
    ce_key k = ce_key_of(name);
    (void)snprintf(whole, sizeof whole, "%s: %s", key, value);
    CE_TRY(note_sign(r, whole, value, k == CE_KEY_DIRECTION && *value != '\0', line));
    if (k == CE_KEY_MASS && *value != '\0') return note_mass(r, value, line);
    double rate;
    if (k == CE_KEY_RATE &&
        ce_parse_value(value, r->dialect.decimal, CE_DIM_RATE, NULL, &rate, NULL, NULL) == CE_OK) {
        if (isnan(r->rate_K_min)) {
            r->rate_K_min = rate;
            r->rate_line = line;
        } else if (fabs(rate - r->rate_K_min) > 1e-6 * fabs(rate))
            r->other_rate_line = line;
    }
    return CE_OK;
}

static ce_status read_preamble(ce_reader *r)
{
    size_t line = 1;
    for (const char *p = r->text.begin; p < r->data; line++) {
        const char *e = ce_line_end(p, r->text.end);
        size_t cells;
        bool numbers =
            ce_row_look(p, e, r->dialect.delimiter, r->dialect.decimal, &cells) == CE_ROW_NUMBERS;
        if (line != r->header_line && line != r->units_line && !numbers)
            CE_TRY(ce_reader_entry(r, p, e, line));
        p = ce_line_next(e, r->text.end);
    }
    return CE_OK;
}

ce_status ce_reader_layout(ce_reader *r)
{
    above a;
    find_data(r, r->text.begin, 1, &a);
    if (r->data == NULL)
        return ce_reader_fail(r, CE_E_SYNTAX, 1, 0,
                              "no rows of numbers in at least two columns: not a run, or overrule "
                              "--delimiter and --decimal");
    CE_TRY(look_below(r, &a));
    CE_TRY(count_columns(r));
    CE_TRY(read_header(r, &a));
    CE_TRY(read_preamble(r));
    for (size_t i = 0; i < r->n_columns; i++) {
        ce_run_column *c = &r->column[i];
        c->role = c->head.name[0] != '\0' ? ce_meaning_of(c->head.name, c->head.unit)
                  : c->head.unit != NULL  ? ce_meaning_of("", c->head.unit)
                                          : CE_MEANS_UNKNOWN;
    }
    return CE_OK;
}
