/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/inspect.h"

#include "base/quantity.h"
#include "output/json.h"
#include "output/number.h"
#include "output/sheet.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>

/* ---- text --------------------------------------------------------------------------------- */

static const char *origin_words(const ce_fact *fact, char *room, size_t n)
{
    if (fact->origin == CE_ORIGIN_STATED && fact->line > 0)
        (void)snprintf(room, n, "line %zu", fact->line);
    else if (fact->origin == CE_ORIGIN_GUESSED && fact->overrule != NULL)
        (void)snprintf(room, n, "guessed; overrule with %s", fact->overrule);
    else if (fact->origin == CE_ORIGIN_DEFAULT && fact->overrule != NULL)
        (void)snprintf(room, n, "not stated; say it with %s", fact->overrule);
    else
        (void)snprintf(room, n, "%s",
                       fact->origin == CE_ORIGIN_STATED ? "" : ce_origin_name(fact->origin));
    return room;
}

static ce_status put_facts(const ce_run *run, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"understood", "", CE_LEFT}, {"as", "", CE_LEFT}, {"from", "", CE_LEFT}};
    ce_sheet sheet;
    size_t n;
    const ce_fact *fact = ce_run_facts(run, &n);
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < n; i++) {
        char room[80];
        ce_sheet_text(&sheet, fact[i].key, 28);
        ce_sheet_text(&sheet, fact[i].value, 36);
        ce_sheet_text(&sheet, origin_words(&fact[i], room, sizeof room), 0);
    }
    return ce_sheet_print(&sheet, to, 2, colour);
}

static ce_status put_segments(const ce_run *run, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"segment", "", CE_RIGHT},     {"kind", "", CE_LEFT},    {"rate", "K/min", CE_POINT},
        {"spread", "K/min", CE_POINT}, {"from", "°C", CE_POINT}, {"to", "°C", CE_POINT},
        {"points", "", CE_RIGHT},      {"line", "", CE_RIGHT}};
    ce_sheet sheet;
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    const double *T = ce_run_temperature_K(run);
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < n; i++) {
        char text[CE_NUMBER_ROOM];
        ce_sheet_cell(&sheet, "%zu", s[i].index);
        ce_sheet_cell(&sheet, "%s %zu", ce_segment_kind_name(s[i].kind), s[i].nth_of_kind);
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, s[i].rate_K_min, 2));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, s[i].rate_sd_K_min, 2));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, ce_degC_from_K(T[s[i].first]), 1));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, ce_degC_from_K(T[s[i].first + s[i].n - 1]), 1));
        ce_sheet_cell(&sheet, "%zu", s[i].n);
        ce_sheet_cell(&sheet, "%zu", s[i].line);
    }
    fputc('\n', to);
    return ce_sheet_print(&sheet, to, 2, colour);
}

static ce_status put_run(const ce_inspected *file, FILE *to, bool colour)
{
    const ce_run *run = file->run;
    size_t n_segments, n_facts, guessed = 0;
    (void)ce_run_segments(run, &n_segments);
    const ce_fact *fact = ce_run_facts(run, &n_facts);
    for (size_t i = 0; i < n_facts; i++) guessed += fact[i].origin == CE_ORIGIN_GUESSED;
    char *name = ce_text_shown(file->path, 60);
    fprintf(to, "%s: %zu points in %zu segment%s, ", name == NULL ? "?" : name, ce_run_size(run),
            n_segments, n_segments == 1 ? "" : "s");
    free(name);
    if (guessed == 0)
        fputs("nothing guessed\n", to);
    else
        fprintf(to, "%zu thing%s guessed\n", guessed, guessed == 1 ? "" : "s");
    ce_status st = put_facts(run, to, colour);
    if (st == CE_OK) st = put_segments(run, to, colour);
    const ce_messages *m = ce_run_messages(run);
    for (size_t i = 0; m != NULL && i < m->n; i++) {
        if (i == 0) fputc('\n', to);
        fputs("  ", to);
        if (m->item[i].at.line > 0) fprintf(to, "line %zu: ", m->item[i].at.line);
        fprintf(to, "%s\n", m->item[i].at.message);
    }
    return st;
}

ce_status ce_write_inspect_text(const ce_inspect_result *result, FILE *to, bool colour)
{
    bool first = true;
    for (size_t i = 0; i < result->n; i++) {
        if (result->file[i].run == NULL) continue;
        if (!first) fputc('\n', to);
        first = false;
        ce_status st = put_run(&result->file[i], to, colour);
        if (st != CE_OK) return st;
    }
    return CE_OK;
}

/* ---- CSV: one line a segment ---------------------------------------------------------------- */

ce_status ce_write_inspect_csv(const ce_inspect_result *result, FILE *to)
{
    ce_csv_heading(
        to, "run,status,message,points,signal_unit,mass_g,segment,kind,nth,first,n,rate_K_min,"
            "rate_sd_K_min,low_K,high_K,line");
    for (size_t i = 0; i < result->n; i++) {
        const ce_inspected *file = &result->file[i];
        size_t n = 0;
        const ce_segment *s = file->run == NULL ? NULL : ce_run_segments(file->run, &n);
        for (size_t k = 0; k < (n > 0 ? n : 1); k++) {
            ce_csv_text(to, true, file->path);
            ce_csv_text(to, false, file->run != NULL ? "ok" : "refused");
            ce_csv_text(to, false, file->run != NULL ? NULL : file->error.message);
            if (n == 0) {
                for (int c = 0; c < 13; c++) ce_csv_text(to, false, NULL);
            } else {
                ce_csv_count(to, false, ce_run_size(file->run));
                ce_csv_text(to, false, ce_signal_unit(ce_run_signal_kind(file->run)));
                ce_csv_number(to, false, ce_run_mass_g(file->run));
                ce_csv_count(to, false, s[k].index);
                ce_csv_text(to, false, ce_segment_kind_name(s[k].kind));
                ce_csv_count(to, false, s[k].nth_of_kind);
                ce_csv_count(to, false, s[k].first);
                ce_csv_count(to, false, s[k].n);
                ce_csv_number(to, false, s[k].rate_K_min);
                ce_csv_number(to, false, s[k].rate_sd_K_min);
                ce_csv_number(to, false, s[k].low_K);
                ce_csv_number(to, false, s[k].high_K);
                ce_csv_count(to, false, s[k].line);
            }
            ce_csv_end_row(to);
        }
    }
    return CE_OK;
}

/* ---- JSON --------------------------------------------------------------------------------- */

static json_t *json_facts(const ce_run *run)
{
    json_t *list = json_array();
    size_t n;
    const ce_fact *f = ce_run_facts(run, &n);
    for (size_t i = 0; i < n; i++)
        (void)json_array_append_new(
            list, json_pack("{s:o,s:o,s:s,s:o,s:o}", "key", ce_json_text(f[i].key), "value",
                            ce_json_text(f[i].value), "origin", ce_origin_name(f[i].origin),
                            "overrule", ce_json_text(f[i].overrule), "line",
                            f[i].line > 0 ? json_integer((json_int_t)f[i].line) : json_null()));
    return list;
}

static json_t *json_segments(const ce_run *run)
{
    json_t *list = json_array();
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    for (size_t i = 0; i < n; i++)
        (void)json_array_append_new(
            list, json_pack("{s:I,s:s,s:I,s:I,s:I,s:o,s:o,s:o,s:o,s:I}", "index",
                            (json_int_t)s[i].index, "kind", ce_segment_kind_name(s[i].kind),
                            "nth_of_kind", (json_int_t)s[i].nth_of_kind, "first",
                            (json_int_t)s[i].first, "n", (json_int_t)s[i].n, "rate_K_min",
                            ce_json_number(s[i].rate_K_min), "rate_sd_K_min",
                            ce_json_number(s[i].rate_sd_K_min), "low_K", ce_json_number(s[i].low_K),
                            "high_K", ce_json_number(s[i].high_K), "line", (json_int_t)s[i].line));
    return list;
}

static json_t *json_messages(const ce_run *run)
{
    json_t *list = json_array();
    const ce_messages *m = ce_run_messages(run);
    for (size_t i = 0; m != NULL && i < m->n; i++)
        (void)json_array_append_new(list,
                                    json_pack("{s:I,s:o}", "line", (json_int_t)m->item[i].at.line,
                                              "message", ce_json_text(m->item[i].at.message)));
    return list;
}

static json_t *json_file(const ce_inspected *file)
{
    const ce_run *run = file->run;
    json_t *o = json_pack("{s:o,s:s,s:o}", "run", ce_json_text(file->path), "status",
                          run != NULL ? "ok" : "refused", "message",
                          ce_json_text(run != NULL ? NULL : file->error.message));
    if (run == NULL) {
        (void)json_object_set_new(o, "line", json_integer((json_int_t)file->error.line));
        (void)json_object_set_new(o, "column", json_integer((json_int_t)file->error.column));
        return o;
    }
    (void)json_object_set_new(o, "points", json_integer((json_int_t)ce_run_size(run)));
    (void)json_object_set_new(o, "signal_unit",
                              json_string(ce_signal_unit(ce_run_signal_kind(run))));
    (void)json_object_set_new(o, "mass_g", ce_json_number(ce_run_mass_g(run)));
    (void)json_object_set_new(o, "sign_origin",
                              json_string(ce_origin_name(ce_run_sign_origin(run))));
    (void)json_object_set_new(o, "facts", json_facts(run));
    (void)json_object_set_new(o, "segments", json_segments(run));
    (void)json_object_set_new(o, "messages", json_messages(run));
    return o;
}

ce_status ce_write_inspect_json(const ce_inspect_result *result, FILE *to)
{
    json_t *list = json_array();
    for (size_t i = 0; i < result->n; i++)
        (void)json_array_append_new(list, json_file(&result->file[i]));
    return ce_json_write(json_pack("{s:s,s:o}", "schema", "chainend.inspect/1", "runs", list), to);
}
