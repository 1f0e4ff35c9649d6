/* SPDX-License-Identifier: GPL-3.0-or-later
 * Any bytes as a table of text: read or refused, and what is read hangs together. */
#include "fuzz.h"

#include "text/table.h"

#include <string.h>

static void check(const ce_table *t)
{
    MUST(t->n_columns > 0 && t->n_columns <= CE_MAX_COLUMNS);
    for (size_t c = 0; c < t->n_columns; c++) {
        MUST(t->column[c].name != NULL && t->column[c].unit_text != NULL);
        MUST(t->column[c].column == c + 1 && t->column[c].line > 0);
        MUST(ce_table_find(t, t->column[c].name, c) == c);
    }
    size_t line = t->column[0].line;
    for (size_t r = 0; r < t->n_rows; r++) {
        MUST(ce_table_cell(t, r, 0)->line > line);
        line = ce_table_cell(t, r, 0)->line;
        for (size_t c = 0; c < t->n_columns; c++) {
            const ce_cell *cell = ce_table_cell(t, r, c);
            double x;
            MUST(cell->text[cell->len] == '\0' && cell->len <= CE_MAX_CELL);
            MUST(cell->line == line && cell->column == c + 1);
            (void)ce_cell_number(t, cell, &x, NULL);
        }
    }
    for (size_t s = 0; s < t->n_settings; s++) MUST(ce_table_setting(t, t->setting[s].key) != NULL);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    ce_table t;
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_table_read_memory(data, size, "fuzz", NULL, &t, &err);
    MUST(st == err.code);
    if (st == CE_OK)
        check(&t);
    else {
        MUST(t.cell == NULL && t.n_rows == 0 && err.message[0] != '\0');
        for (const char *p = err.message; *p != '\0'; p++) MUST((unsigned char)*p >= 0x20);
    }
    ce_table_free(&t);
    return 0;
}
