/* SPDX-License-Identifier: GPL-3.0-or-later
 * The steps of reading a run, in the order they are taken: layout, columns, rows, behaviour,
 * points, units. Each fails with the position and the reason in r->err. */
#ifndef CE_RUN_READER_H
#define CE_RUN_READER_H

#include "run/run_internal.h"
#include "run/words.h"
#include "text/dialect.h"
#include "text/header.h"
#include "text/load.h"
#include "text/split.h"

#include <stdint.h>

#define CE_NOWHERE    SIZE_MAX
#define CE_MAX_GROUPS ((size_t)64)
/* A run needs at least so many points. */
#define CE_MIN_POINTS ((size_t)5)

typedef struct {
    char title[CE_HEADER_NAME]; /* the header cell as written, perhaps shortened              */
    ce_header head;
    ce_meaning role;
    ce_sign sign;  /* what the cell says about the heat flow                     */
    int direction; /* of the programme: +1 heating, -1 cooling, 0 not said       */
} ce_run_column;

/* Columns that belong together; CE_NOWHERE = no such column. */
typedef struct {
    size_t time, temperature, signal;
} ce_group;

/* Rows from this one on stand in the lines from this one on. */
typedef struct {
    size_t row, line;
} ce_stretch;
typedef struct {
    ce_stretch *item;
    size_t n;
} ce_line_map;

typedef enum { CE_BREAK_BLANK, CE_BREAK_TEXT, CE_BREAK_HEADER } ce_break_kind;
typedef struct {
    size_t row, line; /* first row behind the break; line of the break itself */
    ce_break_kind kind;
} ce_break;

/* The numbers of the table: value[c] is NULL for columns not kept, NaN for an empty cell. */
typedef struct {
    double **value;
    size_t n, room;
    ce_line_map lines;
    ce_break *gap;
    size_t n_gaps;
} ce_rows;

typedef struct {
    const ce_run_options *o;
    ce_error *err;
    bool plain_rows; /* scan plain rows directly                            */
    ce_run *run;
    ce_text text;
    ce_dialect dialect;
    ce_splitter split;

    const char *data; /* first row of numbers                                */
    size_t data_line, header_line, units_line;
    size_t n_columns;
    ce_run_column *column;
    bool trailing; /* rows end in a delimiter that opens no column        */

    ce_sign sign; /* said by the preamble                                */
    size_t sign_line;
    double rate_K_min; /* declared by the preamble; NaN                       */
    size_t rate_line;
    size_t mass_line;       /* that states the mass                                */
    size_t other_mass_line; /* ... that states another; 0                          */
    size_t other_rate_line; /* ... that declares another rate; 0                   */

    ce_group group[CE_MAX_GROUPS];
    size_t n_groups;
    size_t segment; /* column of segment numbers        */
    ce_origin time_origin, temperature_origin, signal_origin;
    bool behave; /* some column must be told by its behaviour           */

    ce_rows rows;
    const ce_unit *time_unit, *temperature_unit, *signal_unit;
    ce_line_map point_lines; /* of the points of the run                        */
    size_t *start;           /* points where a new segment must begin           */
    size_t n_starts;
} ce_reader;

ce_status ce_reader_fail(ce_reader *r, ce_status st, size_t line, size_t column, const char *fmt,
                         ...) CE_PRINTF(5, 6);
ce_status ce_reader_no_memory(ce_reader *r);
#define CE_TRY(call)                                                                               \
    do {                                                                                           \
        ce_status ce_try_status_ = (call);                                                         \
        if (ce_try_status_ != CE_OK) return ce_try_status_;                                        \
    } while (0)

/* Where the table is, what stands above it, what its columns are called. */
ce_status ce_reader_layout(ce_reader *r);
/* Cut a line into the cells of the header; false when it has another number of cells. room: as many
 * as n_columns. */
bool ce_reader_header_cells(const ce_reader *r, const char *p, const char *line_end,
                            ce_span *cells);
/* What a line above, between or below the rows says: "key: value", words for the sign. */
ce_status ce_reader_entry(ce_reader *r, const char *p, const char *end, size_t line);
/* Which columns are used, as far as header and options say. */
ce_status ce_reader_columns(ce_reader *r);
/* All rows. */
ce_status ce_reader_rows(ce_reader *r);
/* Which columns are used, from what is in them. */
ce_status ce_reader_behaviour(ce_reader *r);
/* Units of the columns used, guessed where nothing says them. */
ce_status ce_reader_units(ce_reader *r);
/* Rows into points of the run, in internal units; rows are given up. */
ce_status ce_reader_points(ce_reader *r);
/* Segments, and what time, temperature and declared rate say about each other. */
ce_status ce_reader_programme(ce_reader *r);
/* Mass, sign, and the facts. */
ce_status ce_reader_signal(ce_reader *r);
ce_status ce_reader_facts(ce_reader *r);

/* Line maps: add a row that stands in a line (CE_E_NOMEM or CE_OK); look a row up. */
ce_status ce_lines_add(ce_line_map *map, size_t row, size_t line);
size_t ce_lines_find(const ce_line_map *map, size_t row);

#endif
