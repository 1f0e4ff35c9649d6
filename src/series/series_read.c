/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "series/series_internal.h"

#include "text/number.h"
#include "text/value.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

const char *ce_role_name(ce_role role)
{
    static const char *const names[] = {"standard", "unknown", "control", "left-out"};
    return role <= CE_LEFT_OUT ? names[role] : "unknown role";
}

const char *ce_history_name(ce_history history)
{
    static const char *const names[] = {"unstated", "erased", "as received"};
    return history <= CE_HISTORY_AS_RECEIVED ? names[history] : "unknown history";
}

/* ---- settings ----------------------------------------------------------------------------- */

static ce_status set_text(char **to, const char *value)
{
    free(*to);
    *to = value[0] == '\0' ? NULL : strdup(value);
    return value[0] != '\0' && *to == NULL ? CE_E_NOMEM : CE_OK;
}

static ce_status set_polymer(ce_series *s, const char *value, ce_error *err)
{
    (void)err;
    return set_text(&s->polymer, value);
}

static ce_status set_scope(ce_series *s, const char *value, ce_error *err)
{
    (void)err;
    return set_text(&s->scope, value);
}

static ce_status set_correction(ce_series *s, const char *value, ce_error *err)
{
    (void)err;
    return set_text(&s->temperature_correction, value);
}

static ce_status set_construction(ce_series *s, const char *value, ce_error *err)
{
    ce_construction c = ce_construction_find(value);
    if (c == CE_CONSTRUCTIONS)
        return ce_fail(
            err, CE_E_SYNTAX,
            "construction '%.40s' is none of half_step, midpoint, onset, inflection, end, "
            "fictive",
            value);
    s->construction = c;
    s->construction_stated = true;
    return CE_OK;
}

static ce_status positive_rate(double *to, const char *value, ce_error *err)
{
    double rate;
    ce_status st = ce_parse_value(value, '.', CE_DIM_RATE, NULL, &rate, NULL, err);
    if (st != CE_OK) return st;
    if (!(rate > 0.0)) return ce_fail(err, CE_E_DOMAIN, "rate '%.40s' is not above zero", value);
    *to = rate;
    return CE_OK;
}

static ce_status set_rate(ce_series *s, const char *value, ce_error *err)
{
    return positive_rate(&s->rate_K_min, value, err);
}

static ce_status set_reduce_to(ce_series *s, const char *value, ce_error *err)
{
    return positive_rate(&s->reduce_to_K_min, value, err);
}

static ce_status set_history(ce_series *s, const char *value, ce_error *err)
{
    if (strcasecmp(value, "erased") == 0)
        s->history = CE_HISTORY_ERASED;
    else if (strcasecmp(value, "as received") == 0)
        s->history = CE_HISTORY_AS_RECEIVED;
    else
        return ce_fail(err, CE_E_SYNTAX, "history '%.40s' is neither 'erased' nor 'as received'",
                       value);
    return CE_OK;
}

static ce_status set_segment(ce_series *s, const char *value, ce_error *err)
{
    double x;
    if (!ce_parse_number(value, strlen(value), '.', &x) || !(x >= 1.0 && x <= 1000.0) ||
        x != floor(x))
        return ce_fail(err, CE_E_SYNTAX, "segment '%.40s' is not a whole number from 1 on", value);
    s->segment = (size_t)x;
    return CE_OK;
}

static ce_status set_common_u(ce_series *s, const char *value, ce_error *err)
{
    ce_status st =
        ce_parse_value(value, '.', CE_DIM_FRACTION, NULL, &s->mn_common_u_rel, NULL, err);
    if (st == CE_OK && !(s->mn_common_u_rel >= 0.0 && s->mn_common_u_rel < 1.0)) {
        s->mn_common_u_rel = (double)NAN;
        st = ce_fail(err, CE_E_DOMAIN, "mn_common_u '%.40s' must lie between 0 and 100 %%", value);
    }
    return st;
}

static ce_status set_level(ce_series *s, const char *value, ce_error *err)
{
    double x;
    const ce_unit *unit = NULL;
    const ce_unit *one = ce_unit_find("1", 1);
    ce_status st = ce_parse_value(value, '.', CE_DIM_FRACTION, one, &x, &unit, err);
    if (st != CE_OK) return st;
    if (!(x > 0.0 && x < 1.0))
        return ce_fail(err, CE_E_DOMAIN, "level '%.40s' must lie between 0 and 1", value);
    s->level = x;
    return CE_OK;
}

static const struct {
    const char *key;
    ce_status (*set)(ce_series *series, const char *value, ce_error *err);
} settings[] = {
    {"polymer", set_polymer},           {"scope", set_scope},
    {"construction", set_construction}, {"rate", set_rate},
    {"reduce_to", set_reduce_to},       {"history", set_history},
    {"segment", set_segment},           {"temperature_correction", set_correction},
    {"mn_common_u", set_common_u},      {"level", set_level},
};

/* Settings compare like column names: case, blanks, '_' and '-' do not count. */
static bool same_key(const char *a, const char *b)
{
    for (;;) {
        while (*a != '\0' && strchr(" _-", *a) != NULL) a++;
        while (*b != '\0' && strchr(" _-", *b) != NULL) b++;
        if (strncasecmp(a, b, 1) != 0) return false;
        if (*a == '\0') return true;
        a++;
        b++;
    }
}

static ce_status read_settings(const ce_table *table, ce_series *series, ce_messages *messages,
                               bool *faulty)
{
    for (size_t i = 0; i < table->n_settings; i++) {
        const ce_setting *setting = &table->setting[i];
        size_t k = 0, n = sizeof settings / sizeof *settings;
        while (k < n && !same_key(settings[k].key, setting->key)) k++;
        ce_error e = CE_ERROR_INIT;
        ce_status st = CE_OK;
        if (k < n) st = settings[k].set(series, setting->value, &e);
        if (st == CE_E_NOMEM) return st;
        if (st != CE_OK) *faulty = true;
        if ((st != CE_OK && ce_messages_say(messages, CE_ERROR, table->name, setting->line, 0, "%s",
                                            e.message) != CE_OK) ||
            (k == n && ce_messages_say(messages, CE_NOTE, table->name, setting->line, 0,
                                       "'%.40s' is not a setting of a series: read as a remark",
                                       setting->key) != CE_OK))
            return CE_E_NOMEM;
    }
    return CE_OK;
}

/* ---- samples ------------------------------------------------------------------------------ */

static ce_status add_to_sample(ce_series *series, size_t row)
{
    const char *name = series->row[row].sample;
    size_t k = 0;
    while (k < series->n_samples && strcmp(series->sample[k].name, name) != 0) k++;
    ce_sample *s = &series->sample[k];
    if (k == series->n_samples) {
        *s = (ce_sample){.name = strdup(name), .role = series->row[row].role};
        series->n_samples++;
        if (s->name == NULL) return CE_E_NOMEM;
    }
    if ((s->n_rows & (s->n_rows - 1)) == 0) { /* 0, 1, 2, 4, 8 ...: full */
        size_t *p = reallocarray(s->row, s->n_rows == 0 ? 1 : 2 * s->n_rows, sizeof *p);
        if (p == NULL) return CE_E_NOMEM;
        s->row = p;
    }
    s->row[s->n_rows++] = row;
    return CE_OK;
}

/* What a sample is, its first row says that is not left out. */
static const ce_series_row *describe(const ce_series *series, ce_sample *s)
{
    const ce_series_row *first = NULL;
    for (size_t i = 0; i < s->n_rows && first == NULL; i++)
        if (series->row[s->row[i]].role != CE_LEFT_OUT) first = &series->row[s->row[i]];
    if (first == NULL) first = &series->row[s->row[0]];
    s->role = first->role;
    s->mn_g_mol = first->mn_g_mol;
    s->mn_u_g_mol = first->mn_u_g_mol;
    s->mw_g_mol = first->mw_g_mol;
    s->chain_ends = isnan(first->chain_ends) ? 2.0 : first->chain_ends;
    return first;
}

ce_status ce_series_group(ce_series *series)
{
    series->sample = calloc(series->n_rows > 0 ? series->n_rows : 1, sizeof *series->sample);
    if (series->sample == NULL) return CE_E_NOMEM;
    ce_status st = CE_OK;
    for (size_t i = 0; i < series->n_rows && st == CE_OK; i++) st = add_to_sample(series, i);
    for (size_t k = 0; k < series->n_samples && st == CE_OK; k++)
        (void)describe(series, &series->sample[k]);
    return st;
}

static bool differ(double a, double b)
{
    return !(isnan(a) && isnan(b)) && !(fabs(a - b) <= 1e-9 * fabs(a));
}

/* Repeats of one sample must agree about what the sample is. A left-out row keeps out of it. */
static ce_status check_sample(const ce_series *series, ce_sample *s, ce_messages *messages,
                              bool *faulty)
{
    const ce_series_row *first = describe(series, s);
    for (size_t i = 0; i < s->n_rows; i++) {
        const ce_series_row *row = &series->row[s->row[i]];
        if (row->role == CE_LEFT_OUT) continue;
        const char *what = row->role != first->role                     ? "role"
                           : differ(row->mn_g_mol, first->mn_g_mol)     ? "mn"
                           : differ(row->mn_u_g_mol, first->mn_u_g_mol) ? "mn_u"
                           : differ(row->mw_g_mol, first->mw_g_mol)     ? "mw or dispersity"
                           : differ(row->chain_ends, first->chain_ends) ? "chain_ends"
                                                                        : NULL;
        if (what == NULL) continue;
        *faulty = true;
        if (ce_messages_say(messages, CE_ERROR, series->path, row->line, 0,
                            "sample '%.60s' has another %s here than in line %zu: repeats of one "
                            "sample share it",
                            row->sample, what, first->line) != CE_OK)
            return CE_E_NOMEM;
    }
    return CE_OK;
}

/* One measurement counted twice would make the interval too narrow. */
static ce_status check_duplicates(const ce_series *series, ce_messages *messages, bool *faulty)
{
    for (size_t i = 0; i < series->n_rows; i++)
        for (size_t k = 0; k < i; k++) {
            const ce_series_row *a = &series->row[i], *b = &series->row[k];
            if (a->run == NULL || b->run == NULL || strcmp(a->run, b->run) != 0 ||
                a->segment != b->segment)
                continue;
            *faulty = true;
            if (ce_messages_say(messages, CE_ERROR, series->path, a->line, 0,
                                "run '%.80s' stands already in line %zu", a->run, b->line) != CE_OK)
                return CE_E_NOMEM;
        }
    return CE_OK;
}

static ce_status check_definition(ce_series *series, ce_messages *messages, bool *faulty)
{
    bool bare = false, runs = false;
    for (size_t i = 0; i < series->n_rows; i++) {
        bare = bare || series->row[i].run == NULL;
        runs = runs || series->row[i].run != NULL;
    }
    if (!bare || series->construction_stated) return CE_OK;
    if (runs) {
        *faulty = true;
        return ce_messages_say(
            messages, CE_ERROR, series->path, 0, 0,
            "the series mixes runs with Tg values of unstated definition: add a line "
            "'# construction: half_step' (or another) above the table");
    }
    return ce_messages_say(messages, CE_WARNING, series->path, 0, 0,
                           "the series does not say which construction its Tg values are: "
                           "taken as half_step");
}

/* ---- the whole ---------------------------------------------------------------------------- */

/* Run paths are relative to where the series file is. */
char *ce_series_resolve(const char *series_path, const char *run)
{
    const char *slash = strrchr(series_path, '/');
    if (run[0] == '/' || slash == NULL || strcmp(series_path, "-") == 0) return strdup(run);
    char *path = NULL;
    int n = asprintf(&path, "%.*s%s", (int)(slash - series_path + 1), series_path, run);
    return n < 0 ? NULL : path;
}

static ce_status read_rows(const ce_table *table, const ce_series_columns *columns,
                           ce_series *series, ce_messages *messages, bool *faulty, ce_error *err)
{
    if (table->n_rows > CE_MAX_SERIES_ROWS)
        return ce_fail_at(err, CE_E_LIMIT, table->name, 0, 0, "a series has at most %zu rows",
                          CE_MAX_SERIES_ROWS);
    series->row = calloc(table->n_rows > 0 ? table->n_rows : 1, sizeof *series->row);
    if (series->row == NULL) return CE_E_NOMEM;
    for (size_t i = 0; i < table->n_rows; i++) {
        ce_series_row *row = &series->row[series->n_rows];
        ce_status st = ce_series_read_row(table, columns, i, row, messages);
        if (st == CE_E_NOMEM) return st;
        if (st != CE_OK) {
            *faulty = true;
            continue;
        }
        series->n_rows++;
        if (row->run != NULL && (row->path = ce_series_resolve(series->path, row->run)) == NULL)
            return CE_E_NOMEM;
    }
    return CE_OK;
}

static ce_status gather(ce_series *series, ce_messages *messages, bool *faulty)
{
    ce_status st = ce_series_group(series);
    for (size_t k = 0; k < series->n_samples && st == CE_OK; k++)
        st = check_sample(series, &series->sample[k], messages, faulty);
    if (st == CE_OK) st = check_duplicates(series, messages, faulty);
    if (st == CE_OK) st = check_definition(series, messages, faulty);
    return st;
}

/* A fault of the whole series stops it; a fault of one row costs the row only. */
static ce_status read_table(const ce_table *table, ce_series *series, ce_messages *messages,
                            ce_error *err)
{
    bool bad_setting = false, bad_row = false, bad_whole = false;
    ce_series_columns columns;
    ce_status st = read_settings(table, series, messages, &bad_setting);
    if (st == CE_OK) st = ce_series_map_columns(table, &columns, messages, err);
    if (st != CE_OK) return st == CE_E_NOMEM ? ce_fail(err, st, "out of memory") : st;
    if (columns.at[COL_SAMPLE] >= table->n_columns)
        return ce_fail_at(
            err, CE_E_SYNTAX, table->name, table->column[0].line, 0,
            "there is no column 'sample': a series file has at least the columns sample, "
            "mn and either run or tg");
    if (columns.at[COL_RUN] >= table->n_columns && columns.at[COL_TG] >= table->n_columns)
        return ce_fail_at(err, CE_E_SYNTAX, table->name, table->column[0].line, 0,
                          "there is neither a column 'run' nor a column 'tg'");
    st = read_rows(table, &columns, series, messages, &bad_row, err);
    if (st == CE_OK) st = gather(series, messages, &bad_whole);
    if (st != CE_OK) return ce_fail(err, st, "%s", ce_status_text(st));
    if (bad_setting || bad_whole)
        return ce_fail_at(err, CE_E_DOMAIN, table->name, 0, 0,
                          "the series cannot be used until what is named above is mended");
    if (series->n_rows == 0)
        return ce_fail_at(err, CE_E_DOMAIN, table->name, 0, 0,
                          "no usable row is left in the series");
    return CE_OK;
}

static ce_status finish(ce_status st, const ce_table *table, const char *name, ce_series *series,
                        ce_messages *messages, ce_error *err)
{
    if (st == CE_OK) {
        series->path = strdup(name);
        st = series->path == NULL ? ce_fail(err, CE_E_NOMEM, "out of memory")
                                  : read_table(table, series, messages, err);
    }
    if (st != CE_OK) ce_series_free(series);
    return st;
}

void ce_series_clear(ce_series *series)
{
    *series = (ce_series){.construction = CE_HALF_STEP,
                          .rate_K_min = (double)NAN,
                          .reduce_to_K_min = (double)NAN,
                          .rate_slope_K_decade = (double)NAN,
                          .rate_slope_u_K = (double)NAN,
                          .rate_slope_nu = (double)NAN,
                          .mn_common_u_rel = (double)NAN,
                          .level = (double)NAN,
                          .run_sd_K = (double)NAN};
}

ce_status ce_series_read(const char *path, ce_series *series, ce_messages *messages, ce_error *err)
{
    ce_table table;
    ce_series_clear(series);
    ce_status st = ce_table_read(path, NULL, &table, err);
    st = finish(st, &table, path, series, messages, err);
    ce_table_free(&table);
    return st;
}

ce_status ce_series_read_memory(const void *bytes, size_t n, const char *name, ce_series *series,
                                ce_messages *messages, ce_error *err)
{
    ce_table table;
    ce_series_clear(series);
    ce_status st = ce_table_read_memory(bytes, n, name, NULL, &table, err);
    st = finish(st, &table, name, series, messages, err);
    ce_table_free(&table);
    return st;
}

void ce_series_free(ce_series *series)
{
    if (series == NULL) return;
    for (size_t i = 0; i < series->n_rows; i++) ce_series_row_clear(&series->row[i]);
    for (size_t k = 0; k < series->n_samples; k++) {
        free(series->sample[k].name);
        free(series->sample[k].row);
        free(series->sample[k].tg_K);
        free(series->sample[k].tg_u_K);
    }
    free(series->row);
    free(series->sample);
    free(series->path);
    free(series->polymer);
    free(series->scope);
    free(series->temperature_correction);
    ce_series_clear(series);
}
