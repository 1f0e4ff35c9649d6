/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/plan.h"

#include "base/quantity.h"
#include "output/json.h"
#include "output/number.h"
#include "output/series.h"
#include "output/sheet.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>

static const char *const kinds[] = {[CE_PLAN_UNKNOWN_RUN] = "unknown run",
                                    [CE_PLAN_STANDARD_RUN] = "standard run",
                                    [CE_PLAN_NEW_STANDARD] = "new standard"};

static const char *percent(char out[CE_NUMBER_ROOM], double share)
{
    return ce_significant(out, 100.0 * share, 2);
}

/* ---- text --------------------------------------------------------------------------------- */

static void put_verdict(const ce_plan_result *result, FILE *to)
{
    const ce_plan *p = result->plan;
    const ce_plan_target *limit = &p->target[p->limiting];
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM], text[500];
    double cost = 0.0;
    for (size_t i = 0; i < p->n_steps; i++) cost += p->step[i].cost;
    if (p->met && p->n_steps == 0)
        (void)snprintf(text, sizeof text,
                       "Nothing is needed: the calibration gives ±%s %% already.",
                       percent(a, p->want));
    else if (p->met)
        (void)snprintf(
            text, sizeof text,
            "±%s %% can be had with %zu step%s (as much work as %.0f runs), and %zu run%s of "
            "the unknown.",
            percent(a, p->want), p->n_steps, p->n_steps == 1 ? "" : "s", cost, p->unknown_runs,
            p->unknown_runs == 1 ? "" : "s");
    else if (limit->floor > p->want)
        (void)snprintf(
            text, sizeof text,
            "±%s %% cannot be met: at %s kg/mol even %zu runs of the unknown against a perfect "
            "calibration would leave ±%s %%. There the curve is too flat for the scatter of a run.",
            percent(a, p->want), ce_kg_mol(b, limit->mn_g_mol), result->options.most_unknown_runs,
            percent(c, limit->floor));
    else
        (void)snprintf(
            text, sizeof text,
            "±%s %% is not met by %zu steps: at %s kg/mol ±%s %% is left, and what could be "
            "added gains little.",
            percent(a, p->want), p->n_steps, ce_kg_mol(b, limit->mn_g_mol),
            percent(c, limit->then));
    ce_text_wrap(to, text, 0, 0, CE_TEXT_WIDTH);
    ce_write_polymer(result->polymer, 96, to);
    fputs("\n\n", to);
}

static ce_status put_targets(const ce_plan *p, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"where it matters", "kg/mol", CE_POINT},
        {"Tg", "°C", CE_POINT},
        {"now", "± %", CE_POINT},
        {"after the plan", "± %", CE_POINT},
        {"at best", "± %", CE_POINT},
    };
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < p->n_targets; i++) {
        const ce_plan_target *t = &p->target[i];
        char text[CE_NUMBER_ROOM];
        ce_sheet_cell(&sheet, "%s", ce_kg_mol(text, t->mn_g_mol));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, ce_degC_from_K(t->tg_K), 1));
        ce_sheet_cell(&sheet, "%s", percent(text, t->now));
        ce_sheet_cell(&sheet, "%s", percent(text, t->then));
        ce_sheet_cell(&sheet, "%s", percent(text, t->floor));
    }
    return ce_sheet_print(&sheet, to, 0, colour);
}

static void put_what(ce_sheet *sheet, const ce_plan_result *result, const ce_plan_step *s,
                     size_t times)
{
    char mn[CE_NUMBER_ROOM], u[CE_NUMBER_ROOM];
    if (s->kind == CE_PLAN_UNKNOWN_RUN)
        ce_sheet_cell(sheet, "%zu more run%s of the unknown", times, times == 1 ? "" : "s");
    else if (s->kind == CE_PLAN_STANDARD_RUN)
        ce_sheet_cell(sheet, "%zu more run%s of %.24s (%s kg/mol)", times, times == 1 ? "" : "s",
                      result->fit->point[s->point].name, ce_kg_mol(mn, s->mn_g_mol));
    else
        ce_sheet_cell(sheet, "%zu new standard%s near %s kg/mol, u(Mn) %s %%, %zu runs%s", times,
                      times == 1 ? "" : "s", ce_kg_mol(mn, s->mn_g_mol),
                      percent(u, result->options.mn_u_rel), result->options.runs_per_standard,
                      times == 1 ? "" : " each");
}

static bool alike(const ce_plan_step *a, const ce_plan_step *b)
{
    if (a->kind != b->kind) return false;
    if (a->kind == CE_PLAN_STANDARD_RUN) return a->point == b->point;
    return a->kind == CE_PLAN_UNKNOWN_RUN || fabs(log(a->mn_g_mol / b->mn_g_mol)) < 1e-9;
}

/* Successive steps of one kind stand in one line. */
static ce_status put_steps(const ce_plan_result *result, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"then", "", CE_LEFT}, {"work", "runs", CE_POINT}, {"worst", "± %", CE_POINT}};
    const ce_plan *p = result->plan;
    if (p->n_steps == 0) return CE_OK;
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0, k; i < p->n_steps; i = k) {
        double cost = 0.0;
        char text[CE_NUMBER_ROOM];
        for (k = i; k < p->n_steps && alike(&p->step[i], &p->step[k]); k++) cost += p->step[k].cost;
        put_what(&sheet, result, &p->step[i], k - i);
        ce_sheet_cell(&sheet, "%.0f", cost);
        ce_sheet_cell(&sheet, "%s", percent(text, p->step[k - 1].worst));
    }
    fputs("\nin the order that gains most for its work\n", to);
    return ce_sheet_print(&sheet, to, 0, colour);
}

ce_status ce_write_plan_text(const ce_plan_result *result, FILE *to, bool colour)
{
    char a[CE_NUMBER_ROOM];
    put_verdict(result, to);
    ce_status st = put_targets(result->plan, to, colour);
    if (st == CE_OK) st = put_steps(result, to, colour);
    fprintf(
        to,
        "\nHalf-widths of the %g %% interval over Mn, first order. A new standard counts %s runs "
        "besides its\nown; its certificate must be independent of the others. V-optimal steps, "
        "see chainend-methods(7).\n",
        100.0 * result->plan->level, ce_significant(a, result->options.standard_cost, 2));
    return st;
}

/* ---- CSV and JSON ------------------------------------------------------------------------- */

ce_status ce_write_plan_csv(const ce_plan_result *result, FILE *to)
{
    const ce_plan *p = result->plan;
    ce_csv_heading(to, "step,what,standard,mn_g_mol,cost_runs,worst_half_width,mean_square");
    for (size_t i = 0; i < p->n_steps; i++) {
        const ce_plan_step *s = &p->step[i];
        ce_csv_count(to, true, i + 1);
        ce_csv_text(to, false, kinds[s->kind]);
        ce_csv_text(to, false,
                    s->kind == CE_PLAN_STANDARD_RUN ? result->fit->point[s->point].name : NULL);
        ce_csv_number(to, false, s->mn_g_mol);
        ce_csv_number(to, false, s->cost);
        ce_csv_number(to, false, s->worst);
        ce_csv_number(to, false, s->mean_square);
        ce_csv_end_row(to);
    }
    return CE_OK;
}

ce_status ce_write_plan_json(const ce_plan_result *result, FILE *to)
{
    const ce_plan *p = result->plan;
    json_t *targets = json_array(), *steps = json_array();
    for (size_t i = 0; i < p->n_targets; i++) {
        const ce_plan_target *t = &p->target[i];
        (void)json_array_append_new(
            targets, json_pack("{s:o,s:o,s:o,s:o,s:o}", "mn_g_mol", ce_json_number(t->mn_g_mol),
                               "tg_K", ce_json_number(t->tg_K), "now", ce_json_number(t->now),
                               "then", ce_json_number(t->then), "floor", ce_json_number(t->floor)));
    }
    for (size_t i = 0; i < p->n_steps; i++) {
        const ce_plan_step *s = &p->step[i];
        (void)json_array_append_new(
            steps, json_pack("{s:s,s:o,s:o,s:o,s:o,s:o}", "what", kinds[s->kind], "standard",
                             ce_json_text(s->kind == CE_PLAN_STANDARD_RUN
                                              ? result->fit->point[s->point].name
                                              : NULL),
                             "mn_g_mol", ce_json_number(s->mn_g_mol), "cost_runs",
                             ce_json_number(s->cost), "worst_half_width", ce_json_number(s->worst),
                             "mean_square", ce_json_number(s->mean_square)));
    }
    return ce_json_write(
        json_pack("{s:s,s:b,s:b,s:o,s:o,s:s,s:I,s:o,s:o}", "schema", "chainend.plan/1", "met",
                  p->met, "reachable", p->reachable, "want", ce_json_number(p->want), "level",
                  ce_json_number(p->level), "criterion", "V-optimal", "unknown_runs",
                  (json_int_t)p->unknown_runs, "targets", targets, "steps", steps),
        to);
}
