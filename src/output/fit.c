/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/fit.h"

#include "base/quantity.h"
#include "output/json.h"
#include "output/number.h"
#include "output/series.h"
#include "output/sheet.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* ---- text --------------------------------------------------------------------------------- */

/* Temperatures get a Celsius twin; other parameters the digits of their uncertainty. */
static void put_parameter(FILE *to, const ce_fit *fit, size_t i)
{
    const ce_parameter *p = &fit->parameter[i];
    const char *unit = ce_relation_parameter_unit(fit->options.relation, i);
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM], d[CE_NUMBER_ROOM];
    int places = ce_decimals(p->u);
    fprintf(to, "  %-8s %12s %-8s u %s, %g %% interval %s to %s",
            ce_relation_parameter_name(fit->options.relation, i), ce_fixed(a, p->value, places),
            unit, ce_fixed(b, p->u, places), 100.0 * fit->options.level,
            ce_fixed(c, p->low, places), ce_fixed(d, p->high, places));
    if (strcmp(unit, "K") == 0)
        fprintf(to, "  (%s °C)", ce_fixed(a, ce_degC_from_K(p->value), places));
    fputc('\n', to);
}

static void put_verdict(const ce_fit_result *result, FILE *to)
{
    const ce_fit *fit = result->fit;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM];
    fprintf(to, "%s\nfitted to %zu standards (%zu runs)\n",
            ce_relation_formula(fit->options.relation), fit->n_points, fit->n_runs);
    char *polymer =
        ce_text_shown(result->polymer == NULL ? "polymer not stated" : result->polymer, 90);
    fprintf(to, "%s\nTg is ", polymer == NULL ? "" : polymer);
    free(polymer);
    ce_write_definition(result->construction, result->rate_K_min, result->history, to);
    fputs("\n\n", to);
    for (size_t i = 0; i < fit->p; i++) put_parameter(to, fit, i);
    if (isfinite(result->ceiling_tg_K))
        fprintf(
            to,
            "\nOne run of an unknown bounds Mn from above up to %s °C (Mn %s kg/mol); a higher Tg "
            "bounds it from below only.\n",
            ce_fixed(a, ce_degC_from_K(result->ceiling_tg_K), 1),
            ce_kg_mol(b, result->ceiling_mn_g_mol));
    else
        fputs("\nThe dependence on Mn is not significant: no Tg bounds Mn on both sides.\n", to);
}

static void put_point(ce_sheet *sheet, const ce_fit_point *p)
{
    char text[CE_NUMBER_ROOM];
    double u = 1.0 / sqrt(p->weight);
    int places = ce_decimals(isfinite(p->tg_u_K) ? p->tg_u_K : u);
    ce_sheet_text(sheet, p->name, 24);
    ce_sheet_cell(sheet, "%s", ce_kg_mol(text, p->molar.mn_g_mol));
    if (p->mn_u_g_mol > 0.0)
        ce_sheet_cell(sheet, "%s",
                      ce_significant(text, 100.0 * p->mn_u_g_mol / p->molar.mn_g_mol, 2));
    else
        ce_sheet_none(sheet);
    ce_sheet_cell(sheet, "%zu", p->n);
    ce_sheet_cell(sheet, "%s", ce_fixed(text, ce_degC_from_K(p->tg_K), places));
    ce_sheet_cell(sheet, "%s", ce_fixed(text, p->residual_K, places));
    ce_sheet_cell(sheet, "%s", ce_fixed(text, p->residual_K / u, 1));
    ce_sheet_cell(sheet, "%s", ce_fixed(text, p->leverage, 2));
    ce_sheet_cell(sheet, "%s", ce_fixed(text, p->influence, 2));
    bool first = true;
    char flags[160] = "";
    for (unsigned bit = 1u; bit != 0 && bit <= CE_POINT_LEVERAGE; bit <<= 1) {
        if ((p->flags & bit) == 0) continue;
        if (!first) strncat(flags, ", ", sizeof flags - strlen(flags) - 1);
        strncat(flags, ce_point_flag_text(bit), sizeof flags - strlen(flags) - 1);
        first = false;
    }
    ce_sheet_text(sheet, flags, 40);
}

static ce_status put_points(const ce_fit *fit, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"standard", "", CE_LEFT}, {"Mn", "kg/mol", CE_POINT}, {"u(Mn)", "%", CE_POINT},
        {"runs", "", CE_RIGHT},    {"Tg", "°C", CE_POINT},     {"off by", "K", CE_POINT},
        {"in u", "", CE_POINT},    {"leverage", "", CE_POINT}, {"influence", "", CE_POINT},
        {"remarks", "", CE_LEFT},
    };
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < fit->n_points; i++) put_point(&sheet, &fit->point[i]);
    fputc('\n', to);
    return ce_sheet_print(&sheet, to, 0, colour);
}

static void put_scatter(const ce_fit *fit, FILE *to)
{
    char a[CE_NUMBER_ROOM];
    fputc('\n', to);
    if (isfinite(fit->run_sd_K)) {
        fprintf(to, "scatter of one run   %s K, from %s", ce_significant(a, fit->run_sd_K, 2),
                ce_scatter_name(fit->options.scatter));
        if (isfinite(fit->run_nu)) fprintf(to, ", %.3g degrees of freedom", fit->run_nu);
        fputc('\n', to);
    }
    if (isfinite(fit->chi2))
        fprintf(to, "about the curve      weighted sum of squares %s for %.0f degrees of freedom\n",
                ce_significant(a, fit->chi2, 3), fit->dof);
    if (fit->excess_tau_K > 0.0)
        fprintf(to, "between samples      a further s.d. of %s K, carried by an unknown too\n",
                ce_significant(a, fit->excess_tau_K, 2));
    if (fit->excess_r > 0.0)
        fprintf(
            to,
            "certificates         u(Mn) of %s %% used, more than stated, as the scatter demands\n",
            ce_significant(a, 100.0 * fit->excess_r, 2));
    if (isfinite(fit->lack_of_fit_p)) {
        char b[CE_NUMBER_ROOM], text[400];
        (void)snprintf(text, sizeof text, "F %s, p %s: %s",
                       ce_significant(a, fit->lack_of_fit_F, 3),
                       ce_significant(b, fit->lack_of_fit_p, 2), ce_fit_lack_of_fit_meaning(fit));
        fputs("between-sample test  ", to);
        ce_text_wrap(to, text, 21, 21, CE_TEXT_WIDTH);
    }
    if (isfinite(fit->curvature_p))
        fprintf(to, "curvature            F %s, p %s (a further term in the weighted fit)\n",
                ce_significant(a, fit->curvature_F, 3),
                ce_significant((char[CE_NUMBER_ROOM]){0}, fit->curvature_p, 2));
}

static ce_status put_comparison(const ce_fit *fit, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"relation", "", CE_LEFT},
        {"Tg_inf", "°C", CE_POINT},
        {"AICc", "", CE_POINT},
        {"weight", "", CE_POINT},
        {"Mn at mid range", "kg/mol", CE_POINT},
    };
    size_t fitted = 0;
    for (size_t i = 0; i < fit->n_comparison; i++) fitted += fit->comparison[i].fitted;
    if (fitted < 2) return CE_OK;
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < fit->n_comparison; i++) {
        const ce_comparison *c = &fit->comparison[i];
        char text[CE_NUMBER_ROOM];
        if (!c->fitted) continue;
        ce_sheet_cell(&sheet, "%s", ce_relation_name(c->relation));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, ce_degC_from_K(c->tg_inf_K), 1));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, c->aicc, 1));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, c->weight, 3));
        ce_sheet_cell(&sheet, "%s", ce_kg_mol(text, c->mid_mn_g_mol));
    }
    fputs("\nother relations fitted to the same series\n", to);
    ce_status st = ce_sheet_print(&sheet, to, 0, colour);
    return st;
}

ce_status ce_write_fit_text(const ce_fit_result *result, FILE *to, bool colour)
{
    put_verdict(result, to);
    ce_status st = put_points(result->fit, to, colour);
    if (st != CE_OK) return st;
    put_scatter(result->fit, to);
    st = put_comparison(result->fit, to, colour);
    ce_remarks remarks = {.to = to, .heading = "remarks"};
    for (size_t i = 0; i < result->fit->warnings.n; i++)
        ce_remark(&remarks, NULL, result->fit->warnings.item[i].at.message);
    return st;
}

/* ---- CSV ---------------------------------------------------------------------------------- */

ce_status ce_write_fit_csv(const ce_fit_result *result, FILE *to)
{
    const ce_fit *fit = result->fit;
    ce_csv_heading(to,
                   "kind,name,unit,value,u,low,high,mn_g_mol,mn_u_g_mol,runs,tg_K,tg_u_K,fitted_K,"
                   "residual_K,leverage,influence");
    for (size_t i = 0; i < fit->p; i++) {
        const ce_parameter *p = &fit->parameter[i];
        ce_csv_text(to, true, "parameter");
        ce_csv_text(to, false, ce_relation_parameter_name(fit->options.relation, i));
        ce_csv_text(to, false, ce_relation_parameter_unit(fit->options.relation, i));
        ce_csv_number(to, false, p->value);
        ce_csv_number(to, false, p->u);
        ce_csv_number(to, false, p->low);
        ce_csv_number(to, false, p->high);
        for (int c = 0; c < 9; c++) ce_csv_text(to, false, NULL);
        ce_csv_end_row(to);
    }
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        ce_csv_text(to, true, "standard");
        ce_csv_text(to, false, p->name);
        for (int c = 0; c < 5; c++) ce_csv_text(to, false, NULL);
        ce_csv_number(to, false, p->molar.mn_g_mol);
        ce_csv_number(to, false, p->mn_u_g_mol);
        ce_csv_count(to, false, p->n);
        ce_csv_number(to, false, p->tg_K);
        ce_csv_number(to, false, p->tg_u_K);
        ce_csv_number(to, false, p->fitted_K);
        ce_csv_number(to, false, p->residual_K);
        ce_csv_number(to, false, p->leverage);
        ce_csv_number(to, false, p->influence);
        ce_csv_end_row(to);
    }
    return CE_OK;
}

/* ---- JSON --------------------------------------------------------------------------------- */

static void set_number(json_t *o, const char *key, double x)
{
    (void)json_object_set_new(o, key, ce_json_number(x));
}

static json_t *json_parameters(const ce_fit *fit)
{
    json_t *list = json_array();
    for (size_t i = 0; i < fit->p; i++) {
        const ce_parameter *p = &fit->parameter[i];
        json_t *o = json_object();
        (void)json_object_set_new(
            o, "name", json_string(ce_relation_parameter_name(fit->options.relation, i)));
        (void)json_object_set_new(
            o, "unit", json_string(ce_relation_parameter_unit(fit->options.relation, i)));
        set_number(o, "value", p->value);
        set_number(o, "u", p->u);
        set_number(o, "low", p->low);
        set_number(o, "high", p->high);
        set_number(o, "nu", p->nu);
        (void)json_array_append_new(list, o);
    }
    return list;
}

static json_t *json_covariance(const ce_fit *fit)
{
    json_t *rows = json_array();
    for (size_t i = 0; i < fit->p; i++) {
        json_t *row = json_array();
        for (size_t k = 0; k < fit->p; k++)
            (void)json_array_append_new(row, ce_json_number(fit->covariance[i * fit->p + k]));
        (void)json_array_append_new(rows, row);
    }
    return rows;
}

static json_t *json_points(const ce_fit *fit)
{
    json_t *list = json_array();
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        json_t *o = json_object(), *flags = json_array();
        (void)json_object_set_new(o, "sample", ce_json_text(p->name));
        set_number(o, "mn_g_mol", p->molar.mn_g_mol);
        set_number(o, "mn_u_g_mol", p->mn_u_g_mol);
        (void)json_object_set_new(o, "runs", json_integer((json_int_t)p->n));
        set_number(o, "tg_K", p->tg_K);
        set_number(o, "tg_u_K", p->tg_u_K);
        set_number(o, "fitted_K", p->fitted_K);
        set_number(o, "residual_K", p->residual_K);
        set_number(o, "leverage", p->leverage);
        set_number(o, "influence", p->influence);
        set_number(o, "deleted_t", p->deleted_t);
        set_number(o, "deleted_p", p->deleted_p);
        set_number(o, "shift_tg_inf_K", p->shift_tg_inf_K);
        set_number(o, "shift_k", p->shift_k);
        for (unsigned bit = 1u; bit <= CE_POINT_LEVERAGE; bit <<= 1)
            if ((p->flags & bit) != 0)
                (void)json_array_append_new(flags, json_string(ce_point_flag_text(bit)));
        (void)json_object_set_new(o, "flags", flags);
        (void)json_array_append_new(list, o);
    }
    return list;
}

static json_t *json_comparison(const ce_fit *fit)
{
    json_t *list = json_array();
    for (size_t i = 0; i < fit->n_comparison; i++) {
        const ce_comparison *c = &fit->comparison[i];
        if (!c->fitted) continue;
        (void)json_array_append_new(
            list, json_pack("{s:s,s:o,s:o,s:o,s:o,s:b}", "relation", ce_relation_name(c->relation),
                            "aicc", ce_json_number(c->aicc), "weight", ce_json_number(c->weight),
                            "tg_inf_K", ce_json_number(c->tg_inf_K), "mid_mn_g_mol",
                            ce_json_number(c->mid_mn_g_mol), "plausible", c->plausible));
    }
    return list;
}

static json_t *json_test(double F, double p)
{
    if (!isfinite(F)) return json_null();
    return json_pack("{s:o,s:o}", "F", ce_json_number(F), "p", ce_json_number(p));
}

ce_status ce_write_fit_json(const ce_fit_result *result, FILE *to)
{
    const ce_fit *fit = result->fit;
    json_t *o = json_object(), *warnings = json_array();
    (void)json_object_set_new(o, "schema", json_string("chainend.fit/1"));
    (void)json_object_set_new(o, "polymer", ce_json_text(result->polymer));
    (void)json_object_set_new(o, "construction",
                              json_string(ce_construction_name(result->construction)));
    set_number(o, "rate_K_min", result->rate_K_min);
    (void)json_object_set_new(o, "history", json_string(ce_history_name(result->history)));
    (void)json_object_set_new(o, "relation", json_string(ce_relation_name(fit->options.relation)));
    (void)json_object_set_new(o, "formula",
                              json_string(ce_relation_formula(fit->options.relation)));
    set_number(o, "level", fit->options.level);
    (void)json_object_set_new(o, "scatter", json_string(ce_scatter_name(fit->options.scatter)));
    (void)json_object_set_new(o, "parameters", json_parameters(fit));
    (void)json_object_set_new(o, "covariance", json_covariance(fit));
    set_number(o, "residual_sd_K", fit->residual_sd_K);
    set_number(o, "run_sd_K", fit->run_sd_K);
    set_number(o, "run_nu", fit->run_nu);
    set_number(o, "chi2", fit->chi2);
    set_number(o, "dof", fit->dof);
    set_number(o, "excess_tau_K", fit->excess_tau_K);
    set_number(o, "excess_r", fit->excess_r);
    (void)json_object_set_new(o, "lack_of_fit", json_test(fit->lack_of_fit_F, fit->lack_of_fit_p));
    (void)json_object_set_new(o, "curvature", json_test(fit->curvature_F, fit->curvature_p));
    (void)json_object_set_new(o, "samples", json_points(fit));
    (void)json_object_set_new(o, "comparison", json_comparison(fit));
    set_number(o, "ceiling_tg_K", result->ceiling_tg_K);
    set_number(o, "ceiling_mn_g_mol", result->ceiling_mn_g_mol);
    for (size_t i = 0; i < fit->warnings.n; i++)
        (void)json_array_append_new(warnings, ce_json_text(fit->warnings.item[i].at.message));
    (void)json_object_set_new(o, "warnings", warnings);
    return ce_json_write(o, to);
}
