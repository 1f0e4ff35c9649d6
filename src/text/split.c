/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text/split.h"

#include "text/load.h"

#include <stdlib.h>
#include <string.h>

void ce_splitter_init(ce_splitter *s, const char *name, char delimiter)
{
    *s = (ce_splitter){.name = name, .delimiter = delimiter};
}

void ce_splitter_free(ce_splitter *s)
{
    if (s->ready) csv_free(&s->csv);
    free(s->cell);
    free(s->offset);
    free(s->text);
    *s = (ce_splitter){0};
}

static ce_status room_for(ce_splitter *s, size_t len)
{
    if (s->n == CE_MAX_COLUMNS) return CE_E_LIMIT;
    if (s->n == s->cell_room) {
        size_t want = s->cell_room == 0 ? 16 : 2 * s->cell_room;
        size_t *o = reallocarray(s->offset, want, sizeof *o);
        if (o == NULL) return CE_E_NOMEM;
        s->offset = o;
        ce_span *c = reallocarray(s->cell, want, sizeof *c);
        if (c == NULL) return CE_E_NOMEM;
        s->cell = c;
        s->cell_room = want;
    }
    if (s->used + len + 1 > s->text_room) {
        size_t want = 2 * (s->used + len + 1) + 256;
        char *t = realloc(s->text, want);
        if (t == NULL) return CE_E_NOMEM;
        s->text = t;
        s->text_room = want;
    }
    return CE_OK;
}

static void on_cell(void *text, size_t len, void *ctx)
{
    ce_splitter *s = ctx;
    if (s->status != CE_OK) return;
    s->status = len > CE_MAX_CELL ? CE_E_LIMIT : room_for(s, len);
    if (s->status != CE_OK) return;
    if (len > 0) memcpy(s->text + s->used, text, len);
    s->text[s->used + len] = '\0';
    s->offset[s->n] = s->used;
    s->cell[s->n++].n = len;
    s->used += len + 1;
}

static void on_record(int end, void *ctx)
{
    (void)end;
    ((ce_splitter *)ctx)->ended = true;
}

/* An unclosed quote ends here instead of swallowing the memory. */
static void *cell_realloc(void *p, size_t n)
{
    return n > CE_MAX_CELL + 256 ? NULL : realloc(p, n);
}

static ce_status start_csv(ce_splitter *s)
{
    if (s->ready) csv_free(&s->csv);
    s->ready = csv_init(&s->csv, 0) == 0;
    if (!s->ready) return CE_E_NOMEM;
    csv_set_realloc_func(&s->csv, cell_realloc);
    csv_set_delim(&s->csv, (unsigned char)s->delimiter);
    return CE_OK;
}

static ce_status feed(ce_splitter *s, const char *p, size_t n)
{
    if (csv_parse(&s->csv, p, n, on_cell, on_record, s) != n)
        return s->csv.entry_size >= CE_MAX_CELL ? CE_E_LIMIT : CE_E_NOMEM;
    return s->status;
}

static ce_status explain(ce_splitter *s, ce_status st, size_t line, ce_error *err)
{
    s->ready = s->ready && (csv_free(&s->csv), false);
    if (st == CE_E_NOMEM) return ce_fail_at(err, st, s->name, line, 0, "out of memory");
    if (s->n >= CE_MAX_COLUMNS)
        return ce_fail_at(err, st, s->name, line, s->n + 1, "more than %zu columns",
                          CE_MAX_COLUMNS);
    return ce_fail_at(err, st, s->name, line, s->n + 1,
                      "cell is longer than %zu bytes: a quote that is never closed?", CE_MAX_CELL);
}

static ce_status split_blanks(ce_splitter *s, const char *p, const char *line_end)
{
    ce_span c;
    while (ce_peek_cell(&p, line_end, ' ', &c)) {
        char *none = NULL;
        if (c.n > CE_MAX_CELL) return CE_E_LIMIT;
        ce_status st = room_for(s, c.n);
        if (st != CE_OK) return st;
        none = s->text + s->used;
        memcpy(none, c.at, c.n);
        none[c.n] = '\0';
        s->offset[s->n] = s->used;
        s->cell[s->n++].n = c.n;
        s->used += c.n + 1;
    }
    return CE_OK;
}

static bool blank_line(const char *p, const char *line_end, char delimiter)
{
    while (p < line_end && (*p == ' ' || (*p == '\t' && delimiter != '\t'))) p++;
    return p == line_end;
}

/* Lines are fed until libcsv says the record is complete: inside quotes it goes on. */
static ce_status split_csv(ce_splitter *s, const char **p, const char *end, size_t *line,
                           ce_error *err)
{
    size_t first = *line;
    if (!s->ready) {
        ce_status st = start_csv(s);
        if (st != CE_OK) return explain(s, st, first, err);
    }
    for (s->ended = false; !s->ended;) {
        const char *e = ce_line_end(*p, end);
        ce_status st = feed(s, *p, (size_t)(e - *p));
        if (st == CE_OK) st = feed(s, "\n", 1);
        if (st != CE_OK) return explain(s, st, *line, err);
        if (!s->ended && e == end) {
            size_t column = s->n + 1;
            (void)explain(s, CE_E_SYNTAX, first, NULL);
            return ce_fail_at(err, CE_E_SYNTAX, s->name, first, column,
                              "the quote that opens this cell is never closed");
        }
        *line += e < end;
        *p = ce_line_next(e, end);
    }
    return CE_OK;
}

ce_status ce_split(ce_splitter *s, const char *p, const char *end, const char **next, size_t *line,
                   ce_error *err)
{
    const char *line_end = ce_line_end(p, end);
    s->n = s->used = 0;
    s->status = CE_OK;
    ce_status st = CE_OK;
    if (s->delimiter == ' ' || blank_line(p, line_end, s->delimiter)) {
        st = s->delimiter == ' ' ? split_blanks(s, p, line_end) : CE_OK;
        if (st != CE_OK) return explain(s, st, *line, err);
        *line += line_end < end;
        p = ce_line_next(line_end, end);
    } else
        st = split_csv(s, &p, end, line, err);
    for (size_t i = 0; i < s->n; i++) s->cell[i].at = s->text + s->offset[i];
    *next = p;
    return st;
}

ce_span ce_trim(ce_span s)
{
    for (;;) {
        if (s.n > 0 && (*s.at == ' ' || *s.at == '\t'))
            s.at++, s.n--;
        else if (s.n > 1 && memcmp(s.at, "\xC2\xA0", 2) == 0)
            s.at += 2, s.n -= 2;
        else
            break;
    }
    for (;;) {
        if (s.n > 0 && (s.at[s.n - 1] == ' ' || s.at[s.n - 1] == '\t'))
            s.n--;
        else if (s.n > 1 && memcmp(s.at + s.n - 2, "\xC2\xA0", 2) == 0)
            s.n -= 2;
        else
            break;
    }
    return s;
}

static const char *find_delimiter(const char *p, const char *line_end, char delimiter)
{
    while (p < line_end && !(delimiter == ' ' ? *p == ' ' || *p == '\t' : *p == delimiter)) p++;
    return p;
}

bool ce_peek_cell(const char **p, const char *line_end, char delimiter, ce_span *cell)
{
    const char *q = *p;
    if (q == NULL) return false;
    if (delimiter == ' ') {
        while (q < line_end && (*q == ' ' || *q == '\t')) q++;
        if (q == line_end) return false;
    }
    const char *from = q;
    if (*from == '"' && from < line_end) {
        const char *close = memchr(from + 1, '"', (size_t)(line_end - from - 1));
        q = close == NULL ? line_end : close + 1;
    }
    q = find_delimiter(q, line_end, delimiter);
    *cell = ce_trim((ce_span){from, (size_t)(q - from)});
    if (cell->n >= 2 && cell->at[0] == '"' && cell->at[cell->n - 1] == '"')
        *cell = (ce_span){cell->at + 1, cell->n - 2};
    *p = q == line_end ? NULL : q + 1;
    if (delimiter == ' ' && *p == NULL) *p = line_end;
    return true;
}
