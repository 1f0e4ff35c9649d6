/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text/table.h"

#include "text/dialect.h"
#include "text/header.h"
#include "text/load.h"
#include "text/number.h"
#include "text/split.h"

#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#define MAX_CELLS ((size_t)10000000)

/* Texts of cells and settings: blocks that never move, so that pointers into them stay. */
typedef struct block {
    struct block *next;
    size_t used, room;
    char text[];
} block;

static const char *keep(ce_table *t, ce_span s)
{
    block *b = t->store;
    if (b == NULL || b->room - b->used < s.n + 1) {
        size_t room = s.n + 1 > 8192 ? s.n + 1 : 8192;
        b = malloc(sizeof *b + room);
        if (b == NULL) return NULL;
        *b = (block){.next = t->store, .room = room};
        t->store = b;
    }
    char *to = b->text + b->used;
    if (s.n > 0) memcpy(to, s.at, s.n);
    to[s.n] = '\0';
    b->used += s.n + 1;
    return to;
}

void ce_table_free(ce_table *table)
{
    if (table == NULL) return;
    for (block *b = table->store; b != NULL;) {
        block *next = b->next;
        free(b);
        b = next;
    }
    free(table->setting);
    free(table->column);
    free(table->cell);
    free(table->name);
    *table = (ce_table){0};
}

static ce_status no_memory(const ce_table *t, ce_error *err)
{
    return ce_fail_at(err, CE_E_NOMEM, t->name, 0, 0, "out of memory");
}

/* "# key: value"; other comments are no settings. */
static ce_status add_setting(ce_table *t, const char *p, const char *line_end, size_t line)
{
    while (p < line_end && *p == '#') p++;
    const char *colon = memchr(p, ':', (size_t)(line_end - p));
    if (colon == NULL) return CE_OK;
    ce_setting *s = reallocarray(t->setting, t->n_settings + 1, sizeof *s);
    if (s == NULL) return CE_E_NOMEM;
    t->setting = s;
    s += t->n_settings;
    s->key = keep(t, ce_trim((ce_span){p, (size_t)(colon - p)}));
    s->value = keep(t, ce_trim((ce_span){colon + 1, (size_t)(line_end - colon - 1)}));
    s->line = line;
    if (s->key == NULL || s->value == NULL) return CE_E_NOMEM;
    t->n_settings++;
    return CE_OK;
}

static size_t filled_cells(const ce_splitter *s)
{
    size_t n = s->n;
    while (n > 0 && s->cell[n - 1].n == 0) n--;
    return n;
}

static ce_status set_columns(ce_table *t, const ce_splitter *s, size_t line)
{
    size_t n = filled_cells(s);
    t->column = calloc(n, sizeof *t->column);
    if (t->column == NULL) return CE_E_NOMEM;
    t->n_columns = n;
    for (size_t i = 0; i < n; i++) {
        ce_header h;
        ce_header_split(s->cell[i].at, s->cell[i].n, &h);
        t->column[i] =
            (ce_column){keep(t, (ce_span){h.name, strlen(h.name)}),
                        keep(t, (ce_span){h.unit_text, strlen(h.unit_text)}), h.unit, line, i + 1};
        if (t->column[i].name == NULL || t->column[i].unit_text == NULL) return CE_E_NOMEM;
    }
    return CE_OK;
}

/* A row of nothing but units, below the names. */
static bool units_row(const ce_splitter *s)
{
    size_t filled = 0;
    for (size_t i = 0; i < s->n; i++) {
        const ce_unit *u;
        if (s->cell[i].n == 0 || (s->cell[i].n == 1 && *s->cell[i].at == '-')) continue;
        if (!ce_header_is_unit(s->cell[i], &u) || (u != NULL && strcmp(u->name, "1") == 0))
            return false;
        filled++;
    }
    return filled > 0;
}

static ce_status set_units(ce_table *t, const ce_splitter *s)
{
    for (size_t i = 0; i < s->n && i < t->n_columns; i++) {
        const ce_unit *u;
        if (s->cell[i].n == 0 || !ce_header_is_unit(s->cell[i], &u)) continue;
        t->column[i].unit = u;
        t->column[i].unit_text = keep(t, s->cell[i]);
        if (t->column[i].unit_text == NULL) return CE_E_NOMEM;
    }
    return CE_OK;
}

static ce_status add_row(ce_table *t, const ce_splitter *s, size_t line, ce_error *err)
{
    if (filled_cells(s) > t->n_columns)
        return ce_fail_at(err, CE_E_SYNTAX, t->name, line, t->n_columns + 1,
                          "row has %zu cells, the header names %zu columns: a %s within a value "
                          "must be quoted",
                          filled_cells(s), t->n_columns, ce_delimiter_name(t->delimiter));
    if (t->n_rows == MAX_CELLS / t->n_columns)
        return ce_fail_at(err, CE_E_LIMIT, t->name, line, 0, "too many rows");
    ce_cell *c = t->cell;
    if ((t->n_rows & (t->n_rows - 1)) == 0) {
        size_t want = t->n_rows == 0 ? 1 : 2 * t->n_rows;
        c = reallocarray(t->cell, want, t->n_columns * sizeof *c);
        if (c == NULL) return no_memory(t, err);
        t->cell = c;
    }
    c += t->n_rows * t->n_columns;
    for (size_t i = 0; i < t->n_columns; i++) {
        ce_span v = i < s->n ? s->cell[i] : (ce_span){"", 0};
        c[i] = (ce_cell){keep(t, v), v.n, line, i + 1};
        if (c[i].text == NULL) return no_memory(t, err);
    }
    t->n_rows++;
    return CE_OK;
}

static ce_status read_rows(ce_table *t, const ce_text *text, ce_splitter *s, ce_error *err)
{
    bool units_possible = false;
    size_t line = 1;
    for (const char *p = text->begin; p < text->end;) {
        size_t at = line;
        const char *line_end = ce_line_end(p, text->end);
        if (*p == '#') {
            if (t->n_columns == 0 && add_setting(t, p, line_end, at) != CE_OK)
                return no_memory(t, err);
            line += line_end < text->end;
            p = ce_line_next(line_end, text->end);
            continue;
        }
        ce_status st = ce_split(s, p, text->end, &p, &line, err);
        if (st != CE_OK) return st;
        if (filled_cells(s) == 0) continue;
        if (t->n_columns == 0) {
            units_possible = true;
            if (set_columns(t, s, at) != CE_OK) return no_memory(t, err);
        } else if (units_possible && units_row(s)) {
            units_possible = false;
            if (set_units(t, s) != CE_OK) return no_memory(t, err);
        } else {
            units_possible = false;
            st = add_row(t, s, at, err);
            if (st != CE_OK) return st;
        }
    }
    return CE_OK;
}

static ce_status read_text(ce_table *t, const ce_table_options *o, ce_bytes *bytes, ce_error *err)
{
    ce_text text;
    ce_status st = ce_text_decode(bytes, t->name, o->encoding, &text, err);
    if (st != CE_OK) return st;
    ce_dialect d = ce_sniff_table(&text, o->delimiter, o->decimal);
    t->encoding = text.encoding == o->encoding
                      ? keep(t, (ce_span){o->encoding, strlen(o->encoding)})
                      : text.encoding;
    t->delimiter = d.delimiter;
    t->decimal = d.decimal;
    t->decimal_known = d.decimal_known;
    ce_splitter s;
    ce_splitter_init(&s, t->name, d.delimiter);
    st = t->encoding == NULL ? no_memory(t, err) : read_rows(t, &text, &s, err);
    if (st == CE_OK && t->n_columns == 0)
        st = ce_fail_at(err, CE_E_SYNTAX, t->name, 1, 1, "no header line: the file holds no table");
    ce_splitter_free(&s);
    ce_text_free(&text);
    return st;
}

static ce_status finish(ce_table *t, ce_status st, ce_table *table)
{
    if (st == CE_OK)
        *table = *t;
    else
        ce_table_free(t);
    return st;
}

static const ce_table_options find_out;

ce_status ce_table_read(const char *path, const ce_table_options *options, ce_table *table,
                        ce_error *err)
{
    *table = (ce_table){0};
    ce_table t = {.name = strdup(path)};
    const ce_table_options *o = options == NULL ? &find_out : options;
    ce_bytes bytes = {0};
    ce_status st = t.name == NULL
                       ? no_memory(&t, err)
                       : ce_bytes_load(path, o->max_bytes != 0 ? o->max_bytes : CE_TABLE_MAX_BYTES,
                                       &bytes, err);
    if (st == CE_OK) st = read_text(&t, o, &bytes, err);
    return finish(&t, st, table);
}

ce_status ce_table_read_memory(const void *data, size_t n, const char *name,
                               const ce_table_options *options, ce_table *table, ce_error *err)
{
    *table = (ce_table){0};
    ce_table t = {.name = strdup(name)};
    ce_bytes bytes = {n == SIZE_MAX ? NULL : malloc(n + 1), n};
    ce_status st = CE_OK;
    if (t.name == NULL || bytes.data == NULL) {
        free(bytes.data);
        st = no_memory(&t, err);
    } else {
        if (n > 0) memcpy(bytes.data, data, n);
        bytes.data[n] = '\0';
        st = read_text(&t, options == NULL ? &find_out : options, &bytes, err);
    }
    return finish(&t, st, table);
}

size_t ce_table_find(const ce_table *table, const char *name, size_t from)
{
    size_t i = from;
    while (i < table->n_columns && !ce_same_name(table->column[i].name, name)) i++;
    return i;
}

const ce_setting *ce_table_setting(const ce_table *table, const char *key)
{
    for (size_t i = table->n_settings; i-- > 0;)
        if (ce_same_name(table->setting[i].key, key)) return &table->setting[i];
    return NULL;
}

ce_status ce_cell_number(const ce_table *table, const ce_cell *cell, double *x, ce_error *err)
{
    double other;
    char swapped = table->decimal == ',' ? '.' : ',';
    if (ce_parse_number(cell->text, cell->len, table->decimal, x)) return CE_OK;
    if (ce_parse_number(cell->text, cell->len, swapped, &other))
        return ce_fail_at(err, CE_E_SYNTAX, table->name, cell->line, cell->column,
                          "'%s' has a decimal %s where the file has decimal %ss", cell->text,
                          ce_decimal_name(swapped), ce_decimal_name(table->decimal));
    return ce_fail_at(err, CE_E_SYNTAX, table->name, cell->line, cell->column,
                      "cannot read '%.60s' as a number", cell->text);
}
