/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/sheet.h"

#include "output/number.h"
#include "output/text.h"

#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

#define GAP 2 /* blanks between columns */

void ce_sheet_begin(ce_sheet *table, const ce_sheet_column *column, size_t n_columns)
{
    *table = (ce_sheet){.column = column, .n_columns = n_columns};
}

/* Takes over s, which may be NULL. */
static void append(ce_sheet *table, char *s)
{
    if (table->n_cells == table->capacity && s != NULL) {
        size_t want = table->capacity < 64 ? 64 : 2 * table->capacity;
        char **p = reallocarray(table->cell, want, sizeof *p);
        if (p != NULL) {
            table->cell = p;
            table->capacity = want;
        }
    }
    if (s == NULL || table->n_cells == table->capacity) {
        table->failed = true;
        free(s);
        return;
    }
    table->cell[table->n_cells++] = s;
}

void ce_sheet_text(ce_sheet *table, const char *s, size_t columns)
{
    append(table, ce_text_shown(s, columns));
}

void ce_sheet_cell(ce_sheet *table, const char *fmt, ...)
{
    char *s = NULL;
    va_list ap;
    va_start(ap, fmt);
    int n = vasprintf(&s, fmt, ap);
    va_end(ap);
    if (n < 0) s = NULL;
    append(table, s == NULL ? NULL : ce_text_shown(s, 0));
    free(s);
}

void ce_sheet_none(ce_sheet *table)
{
    ce_sheet_text(table, CE_NO_VALUE, 0);
}

/* Columns left and right of the decimal point; text without digits counts as left. */
static void split(const char *s, size_t *left, size_t *right)
{
    const char *point = strchr(s, '.');
    size_t all = ce_text_columns(s);
    *right = point == NULL ? 0 : ce_text_columns(point);
    *left = all - *right;
}

typedef struct {
    size_t width, left, right;
} measure;

static void measure_cell(measure *m, ce_align align, const char *s)
{
    size_t n = ce_text_columns(s);
    if (align == CE_POINT) {
        size_t left, right;
        split(s, &left, &right);
        if (left > m->left) m->left = left;
        if (right > m->right) m->right = right;
        n = m->left + m->right;
    }
    if (n > m->width) m->width = n;
}

static void put_blanks(FILE *to, size_t n)
{
    while (n-- > 0) (void)fputc(' ', to);
}

static void put_cell(FILE *to, const measure *m, ce_align align, const char *s, bool last)
{
    size_t n = ce_text_columns(s), before = 0;
    if (align == CE_RIGHT) before = m->width - n;
    if (align == CE_POINT) {
        size_t left, right;
        split(s, &left, &right);
        /* the block of numbers stands right in a column that its heading makes wider */
        before = m->width - m->right - left;
    }
    put_blanks(to, before);
    (void)fputs(s, to);
    if (!last) put_blanks(to, m->width - n - before);
}

static void put_heading(const ce_sheet *table, const measure *m, FILE *to, int indent, bool units,
                        bool colour)
{
    put_blanks(to, (size_t)indent);
    if (colour) (void)fputs(units ? "\033[2m" : "\033[1m", to);
    for (size_t c = 0; c < table->n_columns; c++) {
        const ce_sheet_column *column = &table->column[c];
        put_cell(to, &m[c], column->align == CE_LEFT ? CE_LEFT : CE_RIGHT,
                 units ? column->unit : column->heading, c + 1 == table->n_columns);
        if (c + 1 < table->n_columns) put_blanks(to, GAP);
    }
    if (colour) (void)fputs("\033[0m", to);
    (void)fputc('\n', to);
}

static void put_rows(const ce_sheet *table, const measure *m, FILE *to, int indent)
{
    for (size_t i = 0; i < table->n_cells; i++) {
        size_t c = i % table->n_columns;
        if (c == 0) put_blanks(to, (size_t)indent);
        bool last = c + 1 == table->n_columns;
        put_cell(to, &m[c], table->column[c].align, table->cell[i], last);
        if (last)
            (void)fputc('\n', to);
        else
            put_blanks(to, GAP);
    }
}

ce_status ce_sheet_print(ce_sheet *table, FILE *to, int indent, bool colour)
{
    measure *m = calloc(table->n_columns, sizeof *m);
    ce_status st = table->failed || m == NULL ? CE_E_NOMEM : CE_OK;
    if (st == CE_OK) {
        bool units = false;
        for (size_t i = 0; i < table->n_cells; i++) {
            size_t c = i % table->n_columns;
            measure_cell(&m[c], table->column[c].align, table->cell[i]);
        }
        for (size_t c = 0; c < table->n_columns; c++) {
            measure_cell(&m[c], CE_LEFT, table->column[c].heading);
            measure_cell(&m[c], CE_LEFT, table->column[c].unit);
            units = units || table->column[c].unit[0] != '\0';
        }
        put_heading(table, m, to, indent, false, colour);
        if (units) put_heading(table, m, to, indent, true, colour);
        put_rows(table, m, to, indent);
    }
    for (size_t i = 0; i < table->n_cells; i++) free(table->cell[i]);
    free(table->cell);
    free(m);
    *table = (ce_sheet){0};
    return st;
}

void ce_remark(ce_remarks *remarks, const char *subject, const char *text)
{
    char *name = subject == NULL ? NULL : ce_text_shown(subject, 40), *line = NULL;
    char *clean = ce_text_shown(text, 0);
    if (!remarks->any) fprintf(remarks->to, "\n%s\n", remarks->heading);
    remarks->any = true;
    int n = asprintf(&line, "%s%s%s", name == NULL ? "" : name, name == NULL ? "" : ": ",
                     clean == NULL ? "" : clean);
    fputs("  ", remarks->to);
    ce_text_wrap(remarks->to, n < 0 ? "" : line, 2, 4, CE_TEXT_WIDTH);
    if (n >= 0) free(line);
    free(clean);
    free(name);
}

static void put_comma(FILE *to, bool first)
{
    if (!first) (void)fputc(',', to);
}

void ce_csv_text(FILE *to, bool first, const char *s)
{
    put_comma(to, first);
    if (s == NULL) return;
    if (strpbrk(s, ",\"\r\n") == NULL && s[0] != ' ') {
        (void)fputs(s, to);
        return;
    }
    (void)fputc('"', to);
    for (; *s != '\0'; s++) {
        if (*s == '"') (void)fputc('"', to);
        (void)fputc(*s, to);
    }
    (void)fputc('"', to);
}

void ce_csv_number(FILE *to, bool first, double x)
{
    char text[CE_NUMBER_ROOM];
    put_comma(to, first);
    (void)fputs(ce_exact(text, x), to);
}

void ce_csv_count(FILE *to, bool first, size_t n)
{
    put_comma(to, first);
    (void)fprintf(to, "%zu", n);
}

void ce_csv_heading(FILE *to, const char *names)
{
    (void)fprintf(to, "%s\n", names);
}

void ce_csv_end_row(FILE *to)
{
    (void)fputc('\n', to);
}
