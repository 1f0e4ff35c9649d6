/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "series/series_internal.h"

#include "text/number.h"
#include "text/value.h"

#include <math.h>
#include <stdarg.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

/* What each column holds. A wanted unit has no default where a wrong guess would be a wrong result:
 * 371 may be kelvin or degrees Celsius, 2000 may be g/mol or kg/mol. */
static const struct {
    const char *name;
    ce_dimension dimension, other; /* other: a second dimension that is taken       */
    const char *assumed;           /* unit when none stands; NULL = one must stand  */
    const char *hint;
} rules[COLUMNS] = {
    [COL_SAMPLE] = {"sample", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
    [COL_ROLE] = {"role", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
    [COL_RUN] = {"run", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
    [COL_TG] = {"tg", CE_DIM_TEMPERATURE, CE_DIM_TEMPERATURE, NULL, "'tg (K)' or 'tg (°C)'"},
    [COL_TG_U] = {"tg_u", CE_DIM_TEMPERATURE, CE_DIM_TEMPERATURE, "K", "'tg_u (K)'"},
    [COL_MN] = {"mn", CE_DIM_MOLAR_MASS, CE_DIM_MOLAR_MASS, NULL, "'mn (g/mol)' or 'mn (kg/mol)'"},
    [COL_MN_U] = {"mn_u", CE_DIM_MOLAR_MASS, CE_DIM_FRACTION, NULL, "'mn_u (%)' or 'mn_u (g/mol)'"},
    [COL_MW] = {"mw", CE_DIM_MOLAR_MASS, CE_DIM_MOLAR_MASS, NULL, "'mw (g/mol)' or 'mw (kg/mol)'"},
    [COL_DISPERSITY] = {"dispersity", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
    [COL_CHAIN_ENDS] = {"chain_ends", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
    [COL_RATE] = {"rate", CE_DIM_RATE, CE_DIM_RATE, "K/min", "'rate (K/min)'"},
    [COL_SEGMENT] = {"segment", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
    [COL_MASS] = {"mass", CE_DIM_MASS, CE_DIM_MASS, NULL, "'mass (mg)'"},
    [COL_GLASS_WINDOW] = {"glass_window", CE_DIM_TEMPERATURE, CE_DIM_TEMPERATURE, NULL,
                          "'glass_window (°C)' or 'glass_window (K)'"},
    [COL_LIQUID_WINDOW] = {"liquid_window", CE_DIM_TEMPERATURE, CE_DIM_TEMPERATURE, NULL,
                           "'liquid_window (°C)' or 'liquid_window (K)'"},
    [COL_DATE] = {"date", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
    [COL_NOTE] = {"note", CE_DIM_NONE, CE_DIM_NONE, NULL, NULL},
};

/* ---- columns ------------------------------------------------------------------------------ */

static ce_status check_unit(const ce_table *table, size_t at, ce_series_column c,
                            const ce_unit **unit, ce_error *err)
{
    const ce_column *column = &table->column[at];
    *unit = column->unit;
    if (rules[c].dimension == CE_DIM_NONE) {
        *unit = NULL;
        return CE_OK;
    }
    if (column->unit_text[0] == '\0' && rules[c].assumed != NULL) {
        *unit = ce_unit_find(rules[c].assumed, strlen(rules[c].assumed));
        return CE_OK;
    }
    if (column->unit_text[0] == '\0')
        return ce_fail_at(err, CE_E_SYNTAX, table->name, column->line, column->column,
                          "column '%s' has no unit: write %s", rules[c].name, rules[c].hint);
    if (*unit == NULL ||
        ((*unit)->dimension != rules[c].dimension && (*unit)->dimension != rules[c].other))
        return ce_fail_at(err, CE_E_SYNTAX, table->name, column->line, column->column,
                          "'%s' is not a unit for column '%s': write %s", column->unit_text,
                          rules[c].name, rules[c].hint);
    return CE_OK;
}

static bool is_known(const ce_series_columns *columns, size_t at)
{
    for (size_t c = 0; c < COLUMNS; c++)
        if (columns->at[c] == at) return true;
    return false;
}

ce_status ce_series_map_columns(const ce_table *table, ce_series_columns *columns,
                                ce_messages *messages, ce_error *err)
{
    ce_status st = CE_OK;
    for (size_t c = 0; c < COLUMNS; c++) {
        ce_error e = CE_ERROR_INIT;
        size_t at = ce_table_find(table, rules[c].name, 0);
        columns->at[c] = at < table->n_columns ? at : SIZE_MAX;
        columns->unit[c] = NULL;
        if (columns->at[c] == SIZE_MAX) continue;
        size_t twice = ce_table_find(table, rules[c].name, at + 1);
        ce_status one = check_unit(table, at, (ce_series_column)c, &columns->unit[c], &e);
        if (one == CE_OK && twice < table->n_columns)
            one =
                ce_fail_at(&e, CE_E_SYNTAX, table->name, table->column[twice].line,
                           table->column[twice].column, "column '%s' stands twice", rules[c].name);
        if (one == CE_OK) continue;
        if (st == CE_OK && err != NULL)
            *err = e; /* the first; the others are told beside it */
        else if (ce_messages_add(messages, CE_ERROR, &e) != CE_OK)
            return CE_E_NOMEM;
        st = one;
    }
    for (size_t i = 0; i < table->n_columns; i++)
        if (!is_known(columns, i) && table->column[i].name[0] != '\0' &&
            ce_messages_say(
                messages, CE_NOTE, table->name, table->column[i].line, table->column[i].column,
                "column '%.60s' is not one of a series: ignored", table->column[i].name) != CE_OK)
            return CE_E_NOMEM;
    return st;
}

/* ---- one row ------------------------------------------------------------------------------ */

typedef struct {
    const ce_table *table;
    const ce_series_columns *columns;
    size_t i; /* row */
    ce_messages *messages;
    bool faulty, no_memory;
} reader;

static const ce_cell *cell_of(const reader *r, ce_series_column c)
{
    static const ce_cell none = {.text = ""};
    return r->columns->at[c] == SIZE_MAX ? &none : ce_table_cell(r->table, r->i, r->columns->at[c]);
}

CE_PRINTF(3, 4)
static void fault(reader *r, const ce_cell *cell, const char *fmt, ...)
{
    char text[300];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    r->faulty = true;
    size_t line = cell->line > 0 ? cell->line : ce_table_cell(r->table, r->i, 0)->line;
    if (ce_messages_say(r->messages, CE_ERROR, r->table->name, line, cell->column, "%s", text) !=
        CE_OK)
        r->no_memory = true;
}

static char *text_of(reader *r, ce_series_column c)
{
    const ce_cell *cell = cell_of(r, c);
    if (cell->text[0] == '\0') return NULL;
    char *copy = strdup(cell->text);
    if (copy == NULL) r->no_memory = true;
    return copy;
}

/* NaN when the cell is empty. A u of temperatures converts without the offset of the scale. */
static double number_of(reader *r, ce_series_column c)
{
    const ce_cell *cell = cell_of(r, c);
    if (cell->text[0] == '\0') return (double)NAN;
    double x;
    ce_error e = CE_ERROR_INIT;
    if (ce_cell_number(r->table, cell, &x, &e) != CE_OK) {
        r->faulty = true;
        if (ce_messages_add(r->messages, CE_ERROR, &e) != CE_OK) r->no_memory = true;
        return (double)NAN;
    }
    const ce_unit *unit = r->columns->unit[c];
    if (unit == NULL) return x;
    return c == COL_TG_U ? x * unit->factor : ce_to_internal(unit, x);
}

static double positive_of(reader *r, ce_series_column c)
{
    double x = number_of(r, c);
    if (isnan(x) || x > 0.0) return x;
    fault(r, cell_of(r, c), "%s is %s: it must be above zero", rules[c].name, cell_of(r, c)->text);
    return (double)NAN;
}

static size_t count_of(reader *r, ce_series_column c)
{
    double x = number_of(r, c);
    if (isnan(x)) return 0;
    if (x >= 1.0 && x <= 1000.0 && x == floor(x)) return (size_t)x;
    fault(r, cell_of(r, c), "%s is %s: it must be a whole number from 1 on", rules[c].name,
          cell_of(r, c)->text);
    return 0;
}

static ce_window window_of(reader *r, ce_series_column c)
{
    ce_window w = {(double)NAN, (double)NAN};
    const ce_cell *cell = cell_of(r, c);
    ce_error e = CE_ERROR_INIT;
    if (cell->text[0] != '\0' &&
        ce_parse_range(cell->text, r->table->decimal, CE_DIM_TEMPERATURE, r->columns->unit[c],
                       &w.low_K, &w.high_K, &e) != CE_OK)
        fault(r, cell, "%s", e.message);
    return w;
}

static double mn_u_of(reader *r, double mn)
{
    double u = number_of(r, COL_MN_U);
    if (isnan(u)) return u;
    if (u < 0.0) {
        fault(r, cell_of(r, COL_MN_U), "mn_u is %s: an uncertainty is not negative",
              cell_of(r, COL_MN_U)->text);
        return (double)NAN;
    }
    return r->columns->unit[COL_MN_U]->dimension == CE_DIM_FRACTION ? u * mn : u;
}

static void read_masses(reader *r, ce_series_row *row)
{
    row->mn_g_mol = positive_of(r, COL_MN);
    row->mn_u_g_mol = mn_u_of(r, row->mn_g_mol);
    row->mw_g_mol = positive_of(r, COL_MW);
    row->dispersity = positive_of(r, COL_DISPERSITY);
    row->chain_ends = number_of(r, COL_CHAIN_ENDS);
    if (row->chain_ends < 0.0)
        fault(r, cell_of(r, COL_CHAIN_ENDS), "chain_ends is %s: it must not be negative",
              cell_of(r, COL_CHAIN_ENDS)->text);
    if (row->dispersity < 1.0)
        fault(r, cell_of(r, COL_DISPERSITY), "dispersity is %s: Mw/Mn cannot be below 1",
              cell_of(r, COL_DISPERSITY)->text);
    if (row->mw_g_mol < row->mn_g_mol)
        fault(r, cell_of(r, COL_MW), "Mn is larger than Mw: are the columns exchanged?");
    double both = row->mw_g_mol / row->mn_g_mol / row->dispersity;
    if (fabs(both - 1.0) > 0.02)
        fault(r, cell_of(r, COL_DISPERSITY),
              "dispersity does not agree with mw and mn (Mw/Mn = %.4g)",
              row->mw_g_mol / row->mn_g_mol);
    if (isnan(row->mw_g_mol)) row->mw_g_mol = row->mn_g_mol * row->dispersity;
}

static void read_role(reader *r, ce_series_row *row)
{
    const ce_cell *cell = cell_of(r, COL_ROLE);
    row->role = isnan(row->mn_g_mol) ? CE_UNKNOWN : CE_STANDARD;
    if (cell->text[0] != '\0') {
        ce_role role = CE_STANDARD;
        while (role <= CE_LEFT_OUT && strcasecmp(cell->text, ce_role_name(role)) != 0) role++;
        if (role > CE_LEFT_OUT)
            fault(r, cell, "role '%.40s' is none of standard, unknown, control, left-out",
                  cell->text);
        else
            row->role = role;
    }
    const ce_cell *mn = cell_of(r, COL_MN);
    if ((row->role == CE_STANDARD || row->role == CE_CONTROL) && mn->text[0] == '\0')
        fault(r, mn, "%s '%.60s' has no Mn: give one, or make it an unknown",
              ce_role_name(row->role), row->sample == NULL ? "" : row->sample);
}

static void read_measurement(reader *r, ce_series_row *row)
{
    row->run = text_of(r, COL_RUN);
    row->tg_K = number_of(r, COL_TG);
    row->tg_u_K = positive_of(r, COL_TG_U);
    const ce_cell *tg = cell_of(r, COL_TG);
    if (!isnan(row->tg_K) && !(row->tg_K > 0.0))
        fault(r, tg, "tg is %s: below absolute zero", tg->text);
    if (row->run != NULL && tg->text[0] != '\0')
        fault(r, tg, "the row has a run and a tg: give one of the two");
    if (row->run == NULL && tg->text[0] == '\0')
        fault(r, cell_of(r, COL_RUN), "the row has neither a run nor a tg");
}

ce_status ce_series_read_row(const ce_table *table, const ce_series_columns *columns, size_t i,
                             ce_series_row *row, ce_messages *messages)
{
    reader r = {.table = table, .columns = columns, .i = i, .messages = messages};
    *row = (ce_series_row){.line = ce_table_cell(table, i, 0)->line};
    row->sample = text_of(&r, COL_SAMPLE);
    if (row->sample == NULL && !r.no_memory)
        fault(&r, cell_of(&r, COL_SAMPLE), "the row names no sample");
    read_masses(&r, row);
    read_role(&r, row);
    read_measurement(&r, row);
    row->rate_K_min = positive_of(&r, COL_RATE);
    row->segment = count_of(&r, COL_SEGMENT);
    row->mass_g = positive_of(&r, COL_MASS);
    row->glass = window_of(&r, COL_GLASS_WINDOW);
    row->liquid = window_of(&r, COL_LIQUID_WINDOW);
    row->date = text_of(&r, COL_DATE);
    row->note = text_of(&r, COL_NOTE);
    row->reading.value_K = (double)NAN;
    if (!r.faulty && !r.no_memory) return CE_OK;
    ce_series_row_clear(row);
    return r.no_memory ? CE_E_NOMEM : CE_E_SYNTAX;
}

void ce_series_row_clear(ce_series_row *row)
{
    free(row->sample);
    free(row->run);
    free(row->path);
    free(row->date);
    free(row->note);
    free(row->reason);
    *row = (ce_series_row){0};
}
