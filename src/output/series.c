/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/series.h"

#include "base/quantity.h"
#include "output/json.h"
#include "output/number.h"
#include "output/sheet.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>

void ce_write_definition(ce_construction construction, double rate_K_min, ce_history history,
                         FILE *to)
{
    char text[CE_NUMBER_ROOM];
    fputs(ce_construction_name(construction), to);
    if (isnan(rate_K_min))
        fputs(", rate not stated", to);
    else
        fprintf(to, " at %s K/min", ce_significant(text, rate_K_min, 3));
    if (history == CE_HISTORY_UNSTATED)
        fputs(", thermal history not stated", to);
    else
        fprintf(to, ", history %s", ce_history_name(history));
}

void ce_write_polymer(const char *polymer, size_t columns, FILE *to)
{
    char *text = ce_text_shown(polymer == NULL ? "polymer not stated" : polymer, columns);
    fputs(text == NULL ? "" : text, to);
    free(text);
}

void ce_write_rate_reduction(const ce_series *series, FILE *to)
{
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM];
    if (isnan(series->rate_slope_K_decade)) return;
    const int places = ce_decimals(series->rate_slope_u_K);
    fprintf(to,
            "heating rate: all Tg reduced to %s K/min by %s K per decade, u %s K, %.0f degrees of "
            "freedom\n",
            ce_significant(a, series->reduce_to_K_min, 3),
            ce_fixed(b, series->rate_slope_K_decade, places),
            ce_fixed(c, series->rate_slope_u_K, places), series->rate_slope_nu);
}

/* ---- text --------------------------------------------------------------------------------- */

static double uncertainty_of(const ce_series *series, const ce_sample *s)
{
    if (!isnan(series->run_sd_K)) return series->run_sd_K / sqrt((double)s->n_used);
    if (s->n_used != 1) return (double)NAN;
    return isnan(s->tg_u_K[0]) ? s->reading_u_K : s->tg_u_K[0];
}

static void put_sample(ce_sheet *sheet, const ce_series *series, const ce_sample *s)
{
    char text[CE_NUMBER_ROOM];
    double u = uncertainty_of(series, s);
    ce_sheet_text(sheet, s->name, 24);
    ce_sheet_cell(sheet, "%s", ce_role_name(s->role));
    ce_sheet_cell(sheet, "%s", ce_kg_mol(text, s->mn_g_mol));
    if (isnan(s->mn_u_g_mol) || isnan(s->mn_g_mol))
        ce_sheet_none(sheet);
    else
        ce_sheet_cell(sheet, "%s", ce_significant(text, 100.0 * s->mn_u_g_mol / s->mn_g_mol, 2));
    ce_sheet_cell(sheet, s->n_used == s->n_rows ? "%zu" : "%zu of %zu", s->n_used, s->n_rows);
    ce_sheet_cell(sheet, "%s", ce_celsius(text, s->mean_K, isnan(u) ? 0.1 : u));
    if (isnan(u))
        ce_sheet_none(sheet);
    else
        ce_sheet_cell(sheet, "%s", ce_fixed(text, u, ce_decimals(u)));
    ce_sheet_cell(sheet, "%s", ce_fixed(text, s->sd_K, isnan(u) ? 2 : ce_decimals(u)));
}

static void put_remarks(const ce_series *series, FILE *to)
{
    ce_remarks remarks = {.to = to, .heading = "remarks"};
    for (size_t i = 0; i < series->n_rows; i++) {
        const ce_series_row *row = &series->row[i];
        const char *name = row->run == NULL ? row->sample : row->run;
        char text[400];
        if (!row->used) {
            (void)snprintf(text, sizeof text, "left out: %s",
                           row->reason == NULL ? "" : row->reason);
            ce_remark(&remarks, name, text);
        }
        for (size_t f = 0; f < row->n_flags; f++) {
            ce_flag_text(&row->flags[f], text, sizeof text);
            ce_remark(&remarks, name, text);
        }
    }
}

ce_status ce_write_series_text(const ce_series *series, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"sample", "", CE_LEFT},  {"role", "", CE_LEFT},   {"Mn", "kg/mol", CE_POINT},
        {"u(Mn)", "%", CE_POINT}, {"runs", "", CE_RIGHT},  {"mean Tg", "°C", CE_POINT},
        {"u", "K", CE_POINT},     {"s.d.", "K", CE_POINT},
    };
    size_t standards = 0, runs = 0;
    for (size_t k = 0; k < series->n_samples; k++) {
        standards += series->sample[k].role == CE_STANDARD && series->sample[k].n_used > 0;
        runs += series->sample[k].n_used;
    }
    fprintf(to, "%zu standard%s to fit, %zu sample%s and %zu measurement%s in all\n", standards,
            standards == 1 ? "" : "s", series->n_samples, series->n_samples == 1 ? "" : "s", runs,
            runs == 1 ? "" : "s");
    ce_write_polymer(series->polymer, 96, to);
    fputs("\nTg is ", to);
    ce_write_definition(series->construction, series->rate_K_min, series->history, to);
    fputs("\n\n", to);
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t k = 0; k < series->n_samples; k++) put_sample(&sheet, series, &series->sample[k]);
    ce_status st = ce_sheet_print(&sheet, to, 0, colour);
    if (st != CE_OK) return st;
    char a[CE_NUMBER_ROOM];
    if (series->run_nu > 0.0)
        fprintf(to,
                "\nrepeatability: s.d. of one run %s K, pooled over the standards, %.0f degrees of "
                "freedom\n",
                ce_significant(a, series->run_sd_K, 2), series->run_nu);
    else
        fputs("\nrepeatability: not known, no standard has repeats\n", to);
    ce_write_rate_reduction(series, to);
    put_remarks(series, to);
    return CE_OK;
}

/* ---- CSV ---------------------------------------------------------------------------------- */

ce_status ce_write_series_csv(const ce_series *series, FILE *to)
{
    ce_csv_heading(to, "line,sample,role,mn_g_mol,mn_u_g_mol,mw_g_mol,chain_ends,run,tg_K,tg_u_K,"
                       "construction,rate_K_min,segment,heating,used,reason,date,note,reduced_K");
    for (size_t i = 0; i < series->n_rows; i++) {
        const ce_series_row *r = &series->row[i];
        ce_csv_count(to, true, r->line);
        ce_csv_text(to, false, r->sample);
        ce_csv_text(to, false, ce_role_name(r->role));
        ce_csv_number(to, false, r->mn_g_mol);
        ce_csv_number(to, false, r->mn_u_g_mol);
        ce_csv_number(to, false, r->mw_g_mol);
        ce_csv_number(to, false, isnan(r->chain_ends) ? 2.0 : r->chain_ends);
        ce_csv_text(to, false, r->run);
        ce_csv_number(to, false, r->tg_K);
        ce_csv_number(to, false, r->tg_u_K);
        ce_csv_text(to, false, ce_construction_name(series->construction));
        ce_csv_number(to, false, isnan(r->rate_K_min) ? series->rate_K_min : r->rate_K_min);
        if (r->segment > 0)
            ce_csv_count(to, false, r->segment);
        else
            ce_csv_text(to, false, NULL);
        if (r->heating > 0)
            ce_csv_count(to, false, r->heating);
        else
            ce_csv_text(to, false, NULL);
        ce_csv_text(to, false, r->used ? "yes" : "no");
        ce_csv_text(to, false, r->reason);
        ce_csv_text(to, false, r->date);
        ce_csv_text(to, false, r->note);
        ce_csv_number(to, false, r->reduced_K);
        ce_csv_end_row(to);
    }
    return CE_OK;
}

/* ---- JSON --------------------------------------------------------------------------------- */

static json_t *json_count_or_null(size_t n)
{
    return n > 0 ? json_integer((json_int_t)n) : json_null();
}

static json_t *json_row(const ce_series_row *r)
{
    json_t *flags = json_array();
    for (size_t f = 0; f < r->n_flags; f++) {
        char text[256];
        ce_flag_text(&r->flags[f], text, sizeof text);
        (void)json_array_append_new(flags, json_string(text));
    }
    return json_pack(
        "{s:I,s:o,s:o,s:o,s:o,s:o,s:o,s:b,s:o,s:o,s:o,s:o,s:o}", "line", (json_int_t)r->line, "run",
        ce_json_text(r->run), "tg_K", ce_json_number(r->tg_K), "tg_u_K", ce_json_number(r->tg_u_K),
        "rate_K_min", ce_json_number(r->rate_K_min), "segment", json_count_or_null(r->segment),
        "heating_number", json_count_or_null(r->heating), "used", r->used, "reason",
        ce_json_text(r->reason), "date", ce_json_text(r->date), "note", ce_json_text(r->note),
        "reduced_K", ce_json_number(r->reduced_K), "flags", flags);
}

static json_t *json_sample(const ce_series *series, const ce_sample *s)
{
    json_t *rows = json_array();
    for (size_t i = 0; i < s->n_rows; i++)
        (void)json_array_append_new(rows, json_row(&series->row[s->row[i]]));
    return json_pack("{s:o,s:s,s:o,s:o,s:o,s:o,s:I,s:o,s:o,s:o}", "sample", ce_json_text(s->name),
                     "role", ce_role_name(s->role), "mn_g_mol", ce_json_number(s->mn_g_mol),
                     "mn_u_g_mol", ce_json_number(s->mn_u_g_mol), "mw_g_mol",
                     ce_json_number(s->mw_g_mol), "chain_ends", ce_json_number(s->chain_ends),
                     "n_used", (json_int_t)s->n_used, "mean_tg_K", ce_json_number(s->mean_K),
                     "sd_K", ce_json_number(s->sd_K), "rows", rows);
}

json_t *ce_json_rate_reduction(const ce_series *series)
{
    if (isnan(series->rate_slope_K_decade)) return json_null();
    return json_pack("{s:o,s:o,s:o,s:o}", "to_K_min", ce_json_number(series->reduce_to_K_min),
                     "slope_K_decade", ce_json_number(series->rate_slope_K_decade), "u_K_decade",
                     ce_json_number(series->rate_slope_u_K), "nu",
                     ce_json_number(series->rate_slope_nu));
}

ce_status ce_write_series_json(const ce_series *series, FILE *to)
{
    json_t *samples = json_array();
    for (size_t k = 0; k < series->n_samples; k++)
        (void)json_array_append_new(samples, json_sample(series, &series->sample[k]));
    return ce_json_write(
        json_pack("{s:s,s:o,s:o,s:s,s:o,s:s,s:o,s:o,s:o,s:o}", "schema", "chainend.series/1",
                  "polymer", ce_json_text(series->polymer), "scope", ce_json_text(series->scope),
                  "construction", ce_construction_name(series->construction), "rate_K_min",
                  ce_json_number(series->rate_K_min), "history", ce_history_name(series->history),
                  "run_sd_K", ce_json_number(series->run_sd_K), "run_nu",
                  ce_json_number(series->run_nu), "rate_reduction", ce_json_rate_reduction(series),
                  "samples", samples),
        to);
}
