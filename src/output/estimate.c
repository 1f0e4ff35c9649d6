/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/estimate.h"

#include "base/quantity.h"
#include "output/json.h"
#include "output/number.h"
#include "output/ruler.h"
#include "output/series.h"
#include "output/sheet.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* ---- text --------------------------------------------------------------------------------- */

const char *ce_answer_label(const ce_answer *answer)
{
    const char *slash = answer->from_runs ? strrchr(answer->name, '/') : NULL;
    return slash == NULL ? answer->name : slash + 1;
}

/* An upper limit far above every standard is a number nobody should quote. */
static bool is_absurd(const ce_estimate *e)
{
    return (e->flags & CE_EST_HIGH_ABSURD) != 0;
}

static const char *high_text(char out[CE_NUMBER_ROOM], const ce_estimate *e)
{
    char cap[CE_NUMBER_ROOM];
    if (!is_absurd(e)) return ce_kg_mol(out, e->high_g_mol);
    (void)snprintf(out, CE_NUMBER_ROOM, "> %s", ce_kg_mol(cap, e->cap_g_mol));
    return out;
}

static void put_mn_verdict(FILE *to, const char *name, int width, const ce_estimate *e)
{
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM];
    double percent = 100.0 * e->level;
    fprintf(to, "%s%*s  ", name, width - (int)ce_text_columns(name), "");
    switch (e->bound) {
    case CE_TWO_SIDED:
        if (is_absurd(e))
            fprintf(to,
                    "Mn = %s kg/mol, %g %% interval %s kg/mol to more than 10 times the largest "
                    "standard\n",
                    ce_kg_mol(a, e->mn_g_mol), percent, ce_kg_mol(b, e->low_g_mol));
        else
            fprintf(to, "Mn = %s kg/mol, %g %% interval %s to %s kg/mol\n",
                    ce_kg_mol(a, e->mn_g_mol), percent, ce_kg_mol(b, e->low_g_mol),
                    ce_kg_mol(c, e->high_g_mol));
        break;
    case CE_LOWER_ONLY:
        fprintf(to,
                "Mn > %s kg/mol (%g %%): this Tg cannot be told from the plateau, no upper limit\n",
                ce_kg_mol(b, e->low_g_mol), percent);
        break;
    case CE_ABOVE_PLATEAU:
        fprintf(to, "no finite Mn (%g %%): this Tg lies above the plateau of the calibration\n",
                percent);
        break;
    case CE_UNDETERMINED:
        if (e->disjoint)
            fprintf(
                to,
                "not determined (%g %%): the slope is not significant; only Mn between %s and %s "
                "kg/mol is excluded\n",
                percent, ce_kg_mol(b, e->low_g_mol), high_text(c, e));
        else if (isfinite(e->high_g_mol))
            fprintf(
                to,
                "Mn < %s kg/mol (%g %%), not determined from below: the slope is not significant\n",
                ce_kg_mol(c, e->high_g_mol), percent);
        else
            fprintf(to, "not determined (%g %%): the slope of the calibration is not significant\n",
                    percent);
        break;
    }
}

static void put_tg_verdict(FILE *to, const char *name, int width, const ce_answer *answer)
{
    const ce_tg_estimate *e = &answer->tg;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM];
    fprintf(to, "%s%*s  ", name, width - (int)ce_text_columns(name), "");
    fprintf(to, "Tg = %s °C, %g %% interval %s to %s °C (a new sample, mean of %zu run%s)\n",
            ce_celsius(a, e->tg_K, e->u_K), 100.0 * e->level, ce_celsius(b, e->low_K, e->u_K),
            ce_celsius(c, e->high_K, e->u_K), answer->readings, answer->readings == 1 ? "" : "s");
}

static void put_mn_row(ce_sheet *sheet, const ce_answer *answer)
{
    const ce_estimate *e = &answer->mn;
    char text[CE_NUMBER_ROOM];
    ce_sheet_text(sheet, ce_answer_label(answer), 24);
    ce_sheet_cell(sheet, "%zu", answer->readings);
    ce_sheet_cell(sheet, "%s", ce_celsius(text, e->tg_K, e->u_K));
    ce_sheet_cell(sheet, "%s", ce_fixed(text, e->u_K, ce_decimals(e->u_K)));
    /* a point estimate that only a bound stands behind is not for quoting */
    ce_sheet_cell(sheet, "%s",
                  ce_kg_mol(text, e->bound == CE_TWO_SIDED ? e->mn_g_mol : (double)NAN));
    ce_sheet_cell(sheet, "%s", ce_kg_mol(text, e->low_g_mol));
    ce_sheet_cell(sheet, "%s", high_text(text, e));
    ce_sheet_cell(sheet, "%s", ce_bound_name(e->bound));
    if (e->n_shares > 0)
        ce_sheet_cell(sheet, "%s %.0f %%", e->share[0].source, 100.0 * e->share[0].share);
    else
        ce_sheet_none(sheet);
}

static ce_status put_mn_table(const ce_estimate_result *result, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"unknown", "", CE_LEFT},   {"readings", "", CE_RIGHT}, {"Tg", "°C", CE_POINT},
        {"u", "K", CE_POINT},       {"Mn", "kg/mol", CE_POINT}, {"from", "kg/mol", CE_POINT},
        {"to", "kg/mol", CE_POINT}, {"limits", "", CE_LEFT},    {"largest share", "", CE_LEFT},
    };
    ce_sheet sheet;
    size_t rows = 0;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < result->n; i++)
        if (result->answer[i].status == CE_OK && !result->answer[i].tg_of_mn) {
            put_mn_row(&sheet, &result->answer[i]);
            rows++;
        }
    if (rows > 0) fputc('\n', to);
    return rows > 0 ? ce_sheet_print(&sheet, to, 0, colour) : CE_OK;
}

/* The cross-check beside the interval it checks. */
static void put_monte_carlo(ce_remarks *remarks, const ce_answer *a)
{
    const ce_monte_carlo *m = &a->monte_carlo;
    char low[CE_NUMBER_ROOM], high[CE_NUMBER_ROOM], p[CE_NUMBER_ROOM], text[300];
    if (m->trials == 0) return;
    (void)snprintf(
        text, sizeof text,
        "Monte Carlo with %zu trials%s: %g %% interval %s to %s kg/mol; no finite Mn with "
        "probability %s",
        m->trials, m->settled ? "" : " (not settled)", 100.0 * m->level,
        ce_kg_mol(low, m->low_g_mol),
        isnan(m->high_g_mol) ? "no limit" : ce_kg_mol(high, m->high_g_mol),
        ce_significant(p, m->p_none, 2));
    ce_remark(remarks, ce_answer_label(a), text);
}

static void put_remarks(const ce_estimate_result *result, FILE *to)
{
    ce_remarks remarks = {.to = to, .heading = "remarks"};
    for (size_t i = 0; i < result->n; i++) {
        const ce_answer *a = &result->answer[i];
        if (a->status != CE_OK || a->tg_of_mn) continue;
        for (unsigned bit = 1u; bit <= CE_EST_CURVE_EXTENDED; bit <<= 1)
            if ((a->mn.flags & bit) != 0)
                ce_remark(&remarks, ce_answer_label(a), ce_estimate_flag_text(bit));
        if (a->despite)
            ce_remark(&remarks, ce_answer_label(a),
                      "measured in another way than the calibration, allowed by --despite");
        if (a->hint[0] != '\0') ce_remark(&remarks, ce_answer_label(a), a->hint);
        put_monte_carlo(&remarks, a);
    }
}

ce_status ce_write_estimate_text(const ce_estimate_result *result, FILE *to, bool colour)
{
    int width = 0;
    for (size_t i = 0; i < result->n; i++) {
        int n = (int)ce_text_columns(ce_answer_label(&result->answer[i]));
        if (n > width) width = n < 24 ? n : 24;
    }
    for (size_t i = 0; i < result->n; i++) {
        const ce_answer *a = &result->answer[i];
        if (a->status != CE_OK) continue;
        char *name = ce_text_shown(ce_answer_label(a), 24);
        if (name == NULL) return CE_E_NOMEM;
        if (a->tg_of_mn)
            put_tg_verdict(to, name, width, a);
        else
            put_mn_verdict(to, name, width, &a->mn);
        free(name);
    }
    ce_status st = ce_write_ruler(result, to, result->ascii);
    if (st == CE_OK) st = put_mn_table(result, to, colour);
    if (st != CE_OK) return st;
    put_remarks(result, to);
    fputs("\ncalibration  ", to);
    ce_write_polymer(result->polymer, 84, to);
    fprintf(to, "\n             %s\n             Tg is ",
            ce_relation_formula(result->fit->options.relation));
    ce_write_definition(result->construction, result->rate_K_min, result->history, to);
    fputc('\n', to);
    if (result->celsius_assumed) fputs("Readings without a unit were taken as °C.\n", to);
    fputs("Mn from a Tg is an estimate for this polymer, end group, tacticity and thermal history "
          "only.\n",
          to);
    return CE_OK;
}

/* ---- CSV ---------------------------------------------------------------------------------- */

ce_status ce_write_estimate_csv(const ce_estimate_result *result, FILE *to)
{
    ce_csv_heading(
        to, "name,asked,status,message,readings,level,tg_K,tg_u_K,mn_g_mol,low_g_mol,high_g_mol,"
            "bound,t,nu,mean_low_K,mean_high_K,low_K,high_K");
    for (size_t i = 0; i < result->n; i++) {
        const ce_answer *a = &result->answer[i];
        ce_csv_text(to, true, a->name);
        ce_csv_text(to, false, a->tg_of_mn ? "tg" : "mn");
        ce_csv_text(to, false, a->status == CE_OK ? "ok" : "refused");
        ce_csv_text(to, false, a->status == CE_OK ? NULL : a->error.message);
        ce_csv_count(to, false, a->readings);
        if (a->status != CE_OK)
            for (int c = 0; c < 13; c++) ce_csv_text(to, false, NULL);
        else if (a->tg_of_mn) {
            const double v[] = {a->tg.level, a->tg.tg_K, a->tg.u_K, a->tg.mn_g_mol};
            for (size_t c = 0; c < 4; c++) ce_csv_number(to, false, v[c]);
            for (int c = 0; c < 4; c++) ce_csv_text(to, false, NULL);
            ce_csv_number(to, false, a->tg.nu);
            ce_csv_number(to, false, a->tg.mean_low_K);
            ce_csv_number(to, false, a->tg.mean_high_K);
            ce_csv_number(to, false, a->tg.low_K);
            ce_csv_number(to, false, a->tg.high_K);
        } else {
            const double v[] = {a->mn.level,    a->mn.tg_K,      a->mn.u_K,
                                a->mn.mn_g_mol, a->mn.low_g_mol, a->mn.high_g_mol};
            for (size_t c = 0; c < 6; c++) ce_csv_number(to, false, v[c]);
            ce_csv_text(to, false, ce_bound_name(a->mn.bound));
            ce_csv_number(to, false, a->mn.t);
            ce_csv_number(to, false, a->mn.nu);
            for (int c = 0; c < 4; c++) ce_csv_text(to, false, NULL);
        }
        ce_csv_end_row(to);
    }
    return CE_OK;
}

/* ---- JSON --------------------------------------------------------------------------------- */

static json_t *json_budget(const ce_estimate *e)
{
    json_t *list = json_array();
    for (size_t i = 0; i < e->n_shares; i++)
        (void)json_array_append_new(list, json_pack("{s:s,s:o}", "source", e->share[i].source,
                                                    "share", ce_json_number(e->share[i].share)));
    return list;
}

static json_t *json_monte_carlo(const ce_monte_carlo *m)
{
    if (m->trials == 0) return json_null();
    return json_pack("{s:I,s:b,s:o,s:o,s:o,s:o}", "trials", (json_int_t)m->trials, "settled",
                     m->settled, "median_g_mol", ce_json_number(m->median_g_mol), "low_g_mol",
                     ce_json_number(m->low_g_mol), "high_g_mol", ce_json_number(m->high_g_mol),
                     "p_no_finite_mn", ce_json_number(m->p_none));
}

static json_t *json_mn(const ce_answer *a)
{
    const ce_estimate *e = &a->mn;
    json_t *flags = json_array();
    for (unsigned bit = 1u; bit <= CE_EST_CURVE_EXTENDED; bit <<= 1)
        if ((e->flags & bit) != 0)
            (void)json_array_append_new(flags, json_string(ce_estimate_flag_text(bit)));
    if (a->despite)
        (void)json_array_append_new(
            flags, json_string("measured in another way than the calibration, overruled"));
    return json_pack("{s:o,s:s,s:I,s:o,s:o,s:o,s:o,s:o,s:s,s:b,s:o,s:o,s:o,s:o,s:o,s:o}", "name",
                     ce_json_text(a->name), "status", "ok", "readings", (json_int_t)a->readings,
                     "tg_K", ce_json_number(e->tg_K), "tg_u_K", ce_json_number(e->u_K), "mn_g_mol",
                     ce_json_number(e->mn_g_mol), "low_g_mol", ce_json_number(e->low_g_mol),
                     "high_g_mol", ce_json_number(e->high_g_mol), "bound", ce_bound_name(e->bound),
                     "disjoint", e->disjoint, "t", ce_json_number(e->t), "nu",
                     ce_json_number(e->nu), "budget", json_budget(e), "hint",
                     ce_json_text(a->hint[0] == '\0' ? NULL : a->hint), "monte_carlo",
                     json_monte_carlo(&a->monte_carlo), "flags", flags);
}

static json_t *json_tg(const ce_answer *a)
{
    const ce_tg_estimate *e = &a->tg;
    return json_pack("{s:o,s:s,s:I,s:o,s:o,s:o,s:o,s:o,s:o,s:o,s:o,s:[]}", "name",
                     ce_json_text(a->name), "status", "ok", "readings", (json_int_t)a->readings,
                     "mn_g_mol", ce_json_number(e->mn_g_mol), "tg_K", ce_json_number(e->tg_K),
                     "tg_u_K", ce_json_number(e->u_K), "mean_low_K", ce_json_number(e->mean_low_K),
                     "mean_high_K", ce_json_number(e->mean_high_K), "low_K",
                     ce_json_number(e->low_K), "high_K", ce_json_number(e->high_K), "nu",
                     ce_json_number(e->nu), "flags");
}

ce_status ce_write_estimate_json(const ce_estimate_result *result, FILE *to)
{
    json_t *list = json_array();
    for (size_t i = 0; i < result->n; i++) {
        const ce_answer *a = &result->answer[i];
        json_t *o = a->status != CE_OK
                        ? json_pack("{s:o,s:s,s:o}", "name", ce_json_text(a->name), "status",
                                    "refused", "message", ce_json_text(a->error.message))
                    : a->tg_of_mn ? json_tg(a)
                                  : json_mn(a);
        (void)json_array_append_new(list, o);
    }
    return ce_json_write(
        json_pack("{s:s,s:o,s:s,s:s,s:o,s:s,s:o,s:o,s:o}", "schema", "chainend.estimate/1", "level",
                  ce_json_number(result->fit->options.level), "relation",
                  ce_relation_name(result->fit->options.relation), "construction",
                  ce_construction_name(result->construction), "rate_K_min",
                  ce_json_number(result->rate_K_min), "history", ce_history_name(result->history),
                  "ceiling_tg_K", ce_json_number(result->ceiling_tg_K), "ceiling_mn_g_mol",
                  ce_json_number(result->ceiling_mn_g_mol), "results", list),
        to);
}
