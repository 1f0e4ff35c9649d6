/* SPDX-License-Identifier: GPL-3.0-or-later
 * One record of delimited text into its cells: quoting by libcsv, runs of blanks by hand. */
#ifndef CE_TEXT_SPLIT_H
#define CE_TEXT_SPLIT_H

#include <chainend/base.h>

#include <csv.h>
#include <stdbool.h>

/* A stretch of text; not terminated unless said. */
typedef struct {
    const char *at;
    size_t n;
} ce_span;

typedef struct ce_splitter {
    struct csv_parser csv;
    bool ready;          /* csv is initialised                              */
    const char *name;    /* of the file, for messages                       */
    char delimiter;      /* ' ' = runs of blanks and tabs                   */
    ce_span *cell;       /* of the last record; each terminated by NUL      */
    size_t n, cell_room; /* cells                                           */
    char *text;          /* what the cells point into                       */
    size_t used, text_room;
    size_t *offset;   /* of the cells in text, while it still grows      */
    ce_status status; /* latched by the callbacks                        */
    bool ended;       /* the record is complete                          */
} ce_splitter;

void ce_splitter_init(ce_splitter *s, const char *name, char delimiter);
void ce_splitter_free(ce_splitter *s);

/* ce_split - the record that begins at p, in the line numbered *line.
 *   out  s->cell, s->n  valid until the next call; n is 0 for a blank line
 *        *next          where the next record begins
 *        *line          its number
 *   ret  CE_OK | CE_E_SYNTAX (quote never closed) | CE_E_LIMIT | CE_E_NOMEM */
ce_status ce_split(ce_splitter *s, const char *p, const char *end, const char **next, size_t *line,
                   ce_error *err);

/* Walk the cells of one line without undoing quotes, for a first look: the cell that begins at *p,
 * trimmed, quotes around it left out. False when the line has no more; start with *p at its begin.
 */
bool ce_peek_cell(const char **p, const char *line_end, char delimiter, ce_span *cell);

/* Without blanks (tabs, no-break spaces included) at both ends. */
ce_span ce_trim(ce_span s);

#endif
