/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/check.h"

#include "output/json.h"
#include "output/number.h"
#include "output/series.h"
#include "output/sheet.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>

/* ---- text --------------------------------------------------------------------------------- */

static void put_verdict(const ce_check_result *result, FILE *to)
{
    const ce_check *k = result->check;
    fprintf(to, "The calibration %s: %zu control%s, %g %% in all\n",
            k->holds ? "holds" : "does not hold", k->n, k->n == 1 ? "" : "s", 100.0 * k->level);
    ce_write_polymer(result->polymer, 96, to);
    fputs("\nTg is ", to);
    ce_write_definition(result->construction, result->rate_K_min, result->history, to);
    fputs("\n\n", to);
}

static ce_status put_controls(const ce_check_result *result, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"control", "", CE_LEFT}, {"Mn", "kg/mol", CE_POINT},   {"runs", "", CE_RIGHT},
        {"Tg", "°C", CE_POINT},   {"expected", "°C", CE_POINT}, {"difference", "K", CE_POINT},
        {"u", "K", CE_POINT},     {"normalised", "", CE_POINT}, {"p", "", CE_POINT},
        {"verdict", "", CE_LEFT},
    };
    const ce_check *k = result->check;
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < k->n; i++) {
        const ce_control_result *r = &k->item[i];
        const int places = ce_decimals(r->u_K);
        char text[CE_NUMBER_ROOM];
        ce_sheet_text(&sheet, result->control[i].name, 24);
        ce_sheet_cell(&sheet, "%s", ce_kg_mol(text, result->control[i].molar.mn_g_mol));
        ce_sheet_cell(&sheet, "%zu", r->n);
        ce_sheet_cell(&sheet, "%s", ce_celsius(text, r->tg_K, r->u_K));
        ce_sheet_cell(&sheet, "%s", ce_celsius(text, r->expected_K, r->u_K));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, r->difference_K, places));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, r->u_K, places));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, r->normalised, 2));
        ce_sheet_cell(&sheet, "%s", ce_significant(text, r->p, 2));
        ce_sheet_cell(&sheet, "%s%s", r->p < k->limit_p ? "off" : "agrees",
                      r->scattered ? ", scattered" : "");
    }
    return ce_sheet_print(&sheet, to, 0, colour);
}

static void put_together(const ce_check *k, FILE *to)
{
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM];
    fputc('\n', to);
    if (k->n > 1)
        fprintf(to, "common shift    %s K, u %s K, p %s\n",
                ce_fixed(a, k->shift_K, ce_decimals(k->shift_u_K)),
                ce_fixed(b, k->shift_u_K, ce_decimals(k->shift_u_K)),
                ce_significant(c, k->shift_p, 2));
    if (!isnan(k->drift_p))
        fprintf(to, "drift           %s K a year, u %s K, p %s\n",
                ce_fixed(a, k->drift_K_year, ce_decimals(k->drift_u_K_year)),
                ce_fixed(b, k->drift_u_K_year, ce_decimals(k->drift_u_K_year)),
                ce_significant(c, k->drift_p, 2));
    fprintf(to, "limit of p      %s, so that all together err in %g %% (Bonferroni)\n",
            ce_significant(a, k->limit_p, 2), 100.0 * (1.0 - k->level));
}

static ce_status put_chart(const ce_check_result *result, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"date", "", CE_LEFT},  {"control", "", CE_LEFT}, {"difference", "K", CE_POINT},
        {"in u", "", CE_POINT}, {"", "", CE_LEFT},
    };
    const ce_check *k = result->check;
    if (k->n_chart == 0) return CE_OK;
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < k->n_chart; i++) {
        const ce_chart_point *p = &k->chart[i];
        char text[CE_NUMBER_ROOM];
        ce_sheet_text(&sheet, result->date[i], 16);
        ce_sheet_text(&sheet, result->control[p->control].name, 24);
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->difference_K, 2));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->z, 1));
        ce_sheet_cell(&sheet, "%s", p->action ? "action" : p->warning ? "warning" : "");
    }
    fputs("\ncontrol chart: single runs; warning beyond 2 u, action beyond 3 u or at the second of "
          "three beyond 2 u\n",
          to);
    return ce_sheet_print(&sheet, to, 0, colour);
}

ce_status ce_write_check_text(const ce_check_result *result, FILE *to, bool colour)
{
    put_verdict(result, to);
    ce_status st = put_controls(result, to, colour);
    if (st != CE_OK) return st;
    put_together(result->check, to);
    st = put_chart(result, to, colour);
    if (!result->check->holds)
        fputs(
            "\nFind out what changed (temperature scale, pans, purge, sample) and calibrate again "
            "before\nestimating from it.\n",
            to);
    if (result->despite)
        fputs("\nMeasured in another way than the calibration, allowed by --despite.\n", to);
    return st;
}

/* ---- CSV and JSON ------------------------------------------------------------------------- */

ce_status ce_write_check_csv(const ce_check_result *result, FILE *to)
{
    ce_csv_heading(to, "control,mn_g_mol,mn_u_g_mol,runs,tg_K,expected_K,difference_K,u_K,nu,"
                       "normalised,p,own_sd_K,agrees,holds");
    for (size_t i = 0; i < result->check->n; i++) {
        const ce_control_result *r = &result->check->item[i];
        const ce_control *c = &result->control[i];
        ce_csv_text(to, true, c->name);
        ce_csv_number(to, false, c->molar.mn_g_mol);
        ce_csv_number(to, false, c->mn_u_g_mol);
        ce_csv_count(to, false, r->n);
        const double v[] = {r->tg_K,       r->expected_K, r->difference_K, r->u_K, r->nu,
                            r->normalised, r->p,          r->own_sd_K};
        for (size_t k = 0; k < sizeof v / sizeof *v; k++) ce_csv_number(to, false, v[k]);
        ce_csv_text(to, false, r->p < result->check->limit_p ? "no" : "yes");
        ce_csv_text(to, false, result->check->holds ? "yes" : "no");
        ce_csv_end_row(to);
    }
    return CE_OK;
}

static json_t *json_controls(const ce_check_result *result)
{
    json_t *list = json_array();
    for (size_t i = 0; i < result->check->n; i++) {
        const ce_control_result *r = &result->check->item[i];
        const ce_control *c = &result->control[i];
        (void)json_array_append_new(
            list, json_pack("{s:o,s:o,s:o,s:I,s:o,s:o,s:o,s:o,s:o,s:o,s:o,s:o,s:b,s:b}", "control",
                            ce_json_text(c->name), "mn_g_mol", ce_json_number(c->molar.mn_g_mol),
                            "mn_u_g_mol", ce_json_number(c->mn_u_g_mol), "runs", (json_int_t)r->n,
                            "tg_K", ce_json_number(r->tg_K), "expected_K",
                            ce_json_number(r->expected_K), "difference_K",
                            ce_json_number(r->difference_K), "u_K", ce_json_number(r->u_K), "nu",
                            ce_json_number(r->nu), "normalised", ce_json_number(r->normalised), "p",
                            ce_json_number(r->p), "own_sd_K", ce_json_number(r->own_sd_K),
                            "scattered", r->scattered, "agrees", !(r->p < result->check->limit_p)));
    }
    return list;
}

static json_t *json_chart(const ce_check_result *result)
{
    json_t *list = json_array();
    for (size_t i = 0; i < result->check->n_chart; i++) {
        const ce_chart_point *p = &result->check->chart[i];
        (void)json_array_append_new(
            list, json_pack("{s:o,s:o,s:o,s:o,s:b,s:b}", "date", ce_json_text(result->date[i]),
                            "control", ce_json_text(result->control[p->control].name),
                            "difference_K", ce_json_number(p->difference_K), "z",
                            ce_json_number(p->z), "warning", p->warning, "action", p->action));
    }
    return list;
}

static json_t *json_trend(double value, double u, double p, const char *key, const char *key_u)
{
    if (isnan(p)) return json_null();
    return json_pack("{s:o,s:o,s:o}", key, ce_json_number(value), key_u, ce_json_number(u), "p",
                     ce_json_number(p));
}

ce_status ce_write_check_json(const ce_check_result *result, FILE *to)
{
    const ce_check *k = result->check;
    return ce_json_write(
        json_pack(
            "{s:s,s:b,s:o,s:o,s:o,s:s,s:o,s:s,s:b,s:o,s:o,s:o,s:o}", "schema", "chainend.check/1",
            "holds", k->holds, "level", ce_json_number(k->level), "limit_p",
            ce_json_number(k->limit_p), "polymer", ce_json_text(result->polymer), "construction",
            ce_construction_name(result->construction), "rate_K_min",
            ce_json_number(result->rate_K_min), "history", ce_history_name(result->history),
            "despite", result->despite, "controls", json_controls(result), "shift",
            json_trend(k->shift_K, k->shift_u_K, k->n > 1 ? k->shift_p : (double)NAN, "value_K",
                       "u_K"),
            "drift",
            json_trend(k->drift_K_year, k->drift_u_K_year, k->drift_p, "value_K_year", "u_K_year"),
            "chart", json_chart(result)),
        to);
}
