/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/run.h>

#include "run/run_internal.h"
#include "run/segments.h"
#include "run/words.h"
#include "text/dialect.h"
#include "text/header.h"
#include "text/load.h"
#include "text/number.h"
#include "text/split.h"

#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { TIME, TEMPERATURE, SIGNAL, ROLES };

typedef struct {
    ce_run *run;
    const ce_run_options *o;
    const ce_text *text;
    ce_dialect dialect;
    ce_splitter split;
    ce_error *err;
    /* header */
    ce_header *column;
    size_t n_columns, header_line;
    size_t at[ROLES];
    const ce_unit *unit[ROLES];
    ce_sign sign;
    size_t sign_line;
    /* data */
    size_t room, n;
    double *value[ROLES];
    size_t *line; /* of each point */
} reader;

static ce_status fail(reader *r, ce_status st, size_t line, size_t column, const char *what)
{
    return ce_fail_at(r->err, st, r->run->name, line, column, "%s", what);
}

/* ---- header ------------------------------------------------------------------------------- */

static ce_status set_columns(reader *r, size_t line)
{
    free(r->column);
    r->column = calloc(r->split.n, sizeof *r->column);
    if (r->column == NULL) return fail(r, CE_E_NOMEM, 0, 0, "out of memory");
    r->n_columns = r->split.n;
    r->header_line = line;
    for (size_t i = 0; i < r->n_columns; i++) {
        char clean[CE_HEADER_NAME];
        ce_sign sign = ce_sign_of(r->split.cell[i].at, clean, sizeof clean);
        if (sign != CE_SIGN_AUTO) {
            r->sign = sign;
            r->sign_line = line;
        }
        ce_header_split(clean, strlen(clean), &r->column[i]);
    }
    return CE_OK;
}

static bool set_units(reader *r)
{
    size_t filled = 0;
    for (size_t i = 0; i < r->split.n; i++) {
        const ce_unit *u;
        if (r->split.cell[i].n == 0) continue;
        if (!ce_header_is_unit(r->split.cell[i], &u)) return false;
        filled++;
    }
    for (size_t i = 0; filled > 0 && i < r->split.n && i < r->n_columns; i++) {
        const ce_unit *u = NULL;
        if (r->split.cell[i].n == 0 || !ce_header_is_unit(r->split.cell[i], &u)) continue;
        r->column[i].unit = u;
        (void)snprintf(r->column[i].unit_text, sizeof r->column[i].unit_text, "%.*s",
                       (int)(r->split.cell[i].n < 60 ? r->split.cell[i].n : 60),
                       r->split.cell[i].at);
    }
    return filled > 0;
}

static void find_roles(reader *r)
{
    for (size_t k = 0; k < ROLES; k++) r->at[k] = SIZE_MAX;
    for (size_t i = 0; i < r->n_columns; i++) {
        ce_meaning m = ce_meaning_of(r->column[i].name, r->column[i].unit);
        size_t k = m == CE_MEANS_TIME                                       ? TIME
                   : m == CE_MEANS_TEMPERATURE                              ? TEMPERATURE
                   : m == CE_MEANS_HEAT_FLOW || m == CE_MEANS_HEAT_CAPACITY ? SIGNAL
                                                                            : ROLES;
        if (k < ROLES && r->at[k] == SIZE_MAX) r->at[k] = i;
    }
}

/* A column the caller names: by its header name, or by its number from 1. "none" leaves the time out. */
static ce_status take_column(reader *r, size_t k, const char *wanted, const char *option)
{
    if (wanted == NULL) return CE_OK;
    r->at[k] = SIZE_MAX;
    if (k == TIME && strcmp(wanted, "none") == 0) return CE_OK;
    for (size_t i = 0; i < r->n_columns && r->at[k] == SIZE_MAX; i++)
        if (ce_same_name(r->column[i].name, wanted)) r->at[k] = i;
    double x;
    if (r->at[k] == SIZE_MAX && ce_parse_number(wanted, strlen(wanted), '.', &x) && x >= 1.0 &&
        x <= (double)r->n_columns && x == floor(x))
        r->at[k] = (size_t)x - 1;
    if (r->at[k] != SIZE_MAX) return CE_OK;
    return ce_fail_at(r->err, CE_E_ARG, r->run->name, r->header_line, 0,
                      "--%s-column: there is no column '%.60s' (the header names %zu)", option,
                      wanted, r->n_columns);
}

static ce_status check_role(reader *r, size_t k, const char *what, const char *option, bool needed)
{
    if (r->at[k] == SIZE_MAX) {
        if (!needed) return CE_OK;
        return ce_fail_at(r->err, CE_E_SYNTAX, r->run->name, r->header_line, 0,
                          "no column holds the %s: name it in the header, or with --%s-column",
                          what, option);
    }
    const ce_header *c = &r->column[r->at[k]];
    const char *given = k == TIME          ? r->o->time_unit
                        : k == TEMPERATURE ? r->o->temperature_unit
                                           : r->o->signal_unit;
    r->unit[k] = given != NULL ? ce_unit_find(given, strlen(given)) : c->unit;
    if (r->unit[k] == NULL)
        return ce_fail_at(
            r->err, CE_E_SYNTAX, r->run->name, r->header_line, r->at[k] + 1,
            c->unit_text[0] == '\0' && given == NULL
                ? "column '%.60s' has no unit: say it with --%s-unit"
                : "column '%.60s' has a unit that is not known: say it with --%s-unit",
            c->name, option);
    return ce_run_set_fact(r->run,
                           k == TIME          ? "time column"
                           : k == TEMPERATURE ? "temperature column"
                                              : "signal column",
                           (k == TIME          ? r->o->time_column
                            : k == TEMPERATURE ? r->o->temperature_column
                                               : r->o->signal_column) != NULL
                               ? CE_ORIGIN_OPTION
                               : CE_ORIGIN_STATED,
                           r->header_line,
                           k == TIME          ? "--time-column"
                           : k == TEMPERATURE ? "--temperature-column"
                                              : "--signal-column",
                           "%zu '%s', %s", r->at[k] + 1, c->name, r->unit[k]->name);
}

/* ---- preamble ----------------------------------------------------------------------------- */

static ce_status read_preamble_line(reader *r, const char *p, const char *end, size_t line)
{
    while (p < end && (*p == '#' || *p == ' ')) p++;
    char text[400];
    (void)snprintf(text, sizeof text, "%.*s", (int)(end - p < 399 ? end - p : 399), p);
    ce_sign sign = ce_sign_of(text, NULL, 0);
    if (sign != CE_SIGN_AUTO) {
        r->sign = sign;
        r->sign_line = line;
    }
    char *mark = strpbrk(text, r->dialect.delimiter == ' ' ? ":=" : ":=;\t,|");
    if (mark == NULL) return CE_OK;
    char *value = mark + 1 + strspn(mark + 1, " \t");
    *mark = '\0';
    if (ce_run_add_entry(r->run, text, strlen(text), value, strlen(value), line) != CE_OK)
        return fail(r, CE_E_NOMEM, 0, 0, "out of memory");
    if (ce_key_of(text) != CE_KEY_MASS || !isnan(r->run->mass_g)) return CE_OK;
    size_t n = strspn(value, "0123456789.,");
    double x;
    const ce_unit *u = NULL;
    char *unit = value + n + strspn(value + n, "; \t|,");
    char *unit_end = unit + strcspn(unit, ";\t|,");
    *unit_end = '\0';
    while (n > 0 && (value[n - 1] == ',')) n--;
    if (ce_parse_number(value, n, r->dialect.decimal, &x) && x > 0.0)
        u = ce_unit_find(unit, strlen(unit));
    if (u == NULL || u->dimension != CE_DIM_MASS) return CE_OK;
    r->run->mass_g = ce_to_internal(u, x);
    return ce_run_set_fact(r->run, "sample mass", CE_ORIGIN_STATED, line, "--mass", "%.4g mg",
                           1000.0 * r->run->mass_g);
}

/* ---- data --------------------------------------------------------------------------------- */

static ce_status grow(reader *r)
{
    if (r->n < r->room) return CE_OK;
    if (r->n >= CE_MAX_POINTS) return fail(r, CE_E_LIMIT, 0, 0, "too many points");
    size_t want = r->room == 0 ? 1024 : 2 * r->room;
    for (size_t k = 0; k < ROLES; k++) {
        double *p = reallocarray(r->value[k], want, sizeof *p);
        if (p == NULL) return fail(r, CE_E_NOMEM, 0, 0, "out of memory");
        r->value[k] = p;
    }
    size_t *l = reallocarray(r->line, want, sizeof *l);
    if (l == NULL) return fail(r, CE_E_NOMEM, 0, 0, "out of memory");
    r->line = l;
    r->room = want;
    return CE_OK;
}

static ce_status read_row(reader *r, size_t line)
{
    ce_status st = grow(r);
    for (size_t k = 0; k < ROLES && st == CE_OK; k++) {
        if (r->at[k] == SIZE_MAX) continue;
        double x;
        if (r->at[k] >= r->split.n || r->split.cell[r->at[k]].n == 0)
            return ce_fail_at(r->err, CE_E_SYNTAX, r->run->name, line, r->at[k] + 1,
                              "the row has no value for column '%.60s'", r->column[r->at[k]].name);
        ce_span c = r->split.cell[r->at[k]];
        if (!ce_parse_number(c.at, c.n, r->dialect.decimal, &x))
            return ce_fail_at(r->err, CE_E_SYNTAX, r->run->name, line, r->at[k] + 1,
                              "cannot read '%.*s' as a number", (int)(c.n < 40 ? c.n : 40), c.at);
        r->value[k][r->n] = ce_to_internal(r->unit[k], x);
    }
    if (st == CE_OK) r->line[r->n++] = line;
    return st;
}

static ce_status settle_columns(reader *r)
{
    if (r->column == NULL)
        return fail(r, CE_E_SYNTAX, 1, 0,
                    "no header line names the columns: say them with --temperature-column, "
                    "--signal-column and --time-column");
    find_roles(r);
    ce_status st = take_column(r, TIME, r->o->time_column, "time");
    if (st == CE_OK) st = take_column(r, TEMPERATURE, r->o->temperature_column, "temperature");
    if (st == CE_OK) st = take_column(r, SIGNAL, r->o->signal_column, "signal");
    if (st == CE_OK) st = check_role(r, TEMPERATURE, "temperature", "temperature", true);
    if (st == CE_OK) st = check_role(r, SIGNAL, "heat flow", "signal", true);
    if (st == CE_OK) st = check_role(r, TIME, "time", "time", isnan(r->o->rate_K_min));
    return st;
}

static ce_status read_lines(reader *r)
{
    size_t line = 1, data = 0;
    for (const char *p = r->text->begin; p < r->text->end;) {
        size_t here = line;
        const char *begin = p, *end = ce_line_end(p, r->text->end);
        ce_row_kind look = ce_row_look(p, end, r->dialect.delimiter, r->dialect.decimal, NULL);
        const char *q = begin;
        while (q < end && (*q == '#' || *q == ' ')) q++;
        ce_status st = ce_split(&r->split, q, r->text->end, &p, &line, r->err);
        if (st != CE_OK) return st;
        if (look == CE_ROW_BLANK || r->split.n == 0) continue;
        if (look == CE_ROW_NUMBERS || (data > 0 && look == CE_ROW_PART)) {
            if (data == 0) st = settle_columns(r);
            if (st == CE_OK) st = read_row(r, here);
            data++;
        } else if (data > 0)
            st = fail(r, CE_E_SYNTAX, here, 1, "text among the rows of numbers");
        else if (r->column == NULL || !set_units(r)) {
            st = read_preamble_line(r, begin, end, here);
            if (st == CE_OK && r->split.n >= 2) st = set_columns(r, here);
        }
        if (st != CE_OK) return st;
    }
    return data >= 10 ? CE_OK
                      : fail(r, CE_E_SYNTAX, line, 0,
                             data == 0 ? "the file holds no rows of numbers"
                                       : "the file holds fewer than 10 rows of numbers");
}

/* A filler before the first measurement: 0 °C, no heat flow, then the start of the programme. */
static void drop_filler(reader *r)
{
    if (r->n < 3 || r->value[SIGNAL][0] != 0.0 ||
        fabs(r->value[TEMPERATURE][1] - r->value[TEMPERATURE][0]) < 10.0 ||
        fabs(r->value[TEMPERATURE][2] - r->value[TEMPERATURE][1]) > 1.0)
        return;
    for (size_t k = 0; k < ROLES; k++)
        memmove(r->value[k], r->value[k] + 1, (r->n - 1) * sizeof(double));
    memmove(r->line, r->line + 1, (r->n - 1) * sizeof *r->line);
    r->n--;
    (void)ce_run_warn(r->run, CE_NOTE, r->line[0] - 1, 0, "first row is a filler: left out");
}

static ce_status hand_over(reader *r)
{
    ce_run *run = r->run;
    if (!isnan(r->o->mass_g)) run->mass_g = r->o->mass_g;
    ce_sign sign = r->o->sign != CE_SIGN_AUTO ? r->o->sign : r->sign;
    run->sign_origin = r->o->sign != CE_SIGN_AUTO ? CE_ORIGIN_OPTION
                       : r->sign != CE_SIGN_AUTO  ? CE_ORIGIN_STATED
                                                  : CE_ORIGIN_DEFAULT;
    run->kind = r->unit[SIGNAL]->dimension == CE_DIM_HEAT_CAPACITY    ? CE_SIGNAL_HEAT_CAPACITY
                : r->unit[SIGNAL]->dimension == CE_DIM_SPECIFIC_POWER ? CE_SIGNAL_SPECIFIC_POWER
                                                                      : CE_SIGNAL_POWER;
    double scale = sign == CE_SIGN_EXO_UP ? -1.0 : 1.0;
    run->flipped = scale < 0.0;
    if (run->kind == CE_SIGNAL_POWER && !isnan(run->mass_g)) {
        scale *= 1e-3 / run->mass_g;
        run->kind = CE_SIGNAL_SPECIFIC_POWER;
    }
    for (size_t i = 0; i < r->n; i++) r->value[SIGNAL][i] *= scale;
    run->n = r->n;
    run->temperature_K = r->value[TEMPERATURE];
    run->signal = r->value[SIGNAL];
    r->value[TEMPERATURE] = r->value[SIGNAL] = NULL;
    if (r->at[TIME] != SIZE_MAX) {
        run->time_s = r->value[TIME];
        r->value[TIME] = NULL;
    }
    ce_status st = ce_run_set_fact(run, "sign of heat flow", run->sign_origin, r->sign_line,
                                   "--sign", "%s", scale < 0.0 ? "exo up" : "endo up");
    if (st == CE_OK) st = ce_run_find_segments(run, NULL, 0, r->o->rate_K_min, r->err);
    for (size_t i = 0; i < run->n_segments; i++)
        run->segment[i].line = r->line[run->segment[i].first];
    return st;
}

ce_status ce_run_read_as(const void *bytes, size_t n, const char *name,
                         const ce_run_options *options, bool plain_rows, ce_run **run,
                         ce_error *err)
{
    (void)plain_rows;
    ce_run_options o = options != NULL ? *options : ce_run_options_default();
    *run = NULL;
    ce_bytes b = {malloc(n + 1), n};
    if (b.data == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    if (n > 0) memcpy(b.data, bytes, n);
    b.data[n] = '\0';
    ce_text text;
    ce_status st = ce_text_decode(&b, name, o.encoding, &text, err);
    if (st != CE_OK) return st;
    reader r = {.run = ce_run_new(name), .o = &o, .text = &text, .err = err};
    if (r.run == NULL) {
        ce_text_free(&text);
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    }
    r.dialect = ce_sniff_numbers(&text, o.delimiter, o.decimal);
    ce_splitter_init(&r.split, name, r.dialect.delimiter);
    if (r.dialect.rows == 0) st = fail(&r, CE_E_SYNTAX, 1, 0, "the file holds no rows of numbers");
    (void)ce_run_set_fact(r.run, "encoding", CE_ORIGIN_GUESSED, 0, "--encoding", "%s",
                          text.encoding);
    (void)ce_run_set_fact(r.run, "delimiter", CE_ORIGIN_GUESSED, 0, "--delimiter", "%s",
                          ce_delimiter_name(r.dialect.delimiter));
    (void)ce_run_set_fact(r.run, "decimal mark", CE_ORIGIN_GUESSED, 0, "--decimal", "%s",
                          ce_decimal_name(r.dialect.decimal));
    if (st == CE_OK) st = read_lines(&r);
    if (st == CE_OK) {
        drop_filler(&r);
        st = hand_over(&r);
    }
    for (size_t k = 0; k < ROLES; k++) free(r.value[k]);
    free(r.line);
    free(r.column);
    ce_splitter_free(&r.split);
    ce_text_free(&text);
    if (st == CE_OK)
        *run = r.run;
    else
        ce_run_free(r.run);
    return st;
}

ce_status ce_run_read_memory(const void *bytes, size_t n, const char *name,
                             const ce_run_options *options, ce_run **run, ce_error *err)
{
    return ce_run_read_as(bytes, n, name, options, true, run, err);
}

ce_status ce_run_read(const char *path, const ce_run_options *options, ce_run **run, ce_error *err)
{
    *run = NULL;
    ce_bytes b = {0};
    ce_status st = ce_bytes_load(
        path, options != NULL ? options->max_bytes : ce_run_options_default().max_bytes, &b, err);
    if (st == CE_OK) st = ce_run_read_as(b.data, b.n, path, options, true, run, err);
    free(b.data);
    return st;
}
