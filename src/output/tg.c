/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/tg.h"

#include "base/quantity.h"
#include "output/json.h"
#include "output/number.h"
#include "output/sheet.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* The order people read them in: up the curve, fictive last. */
static const ce_construction order[CE_CONSTRUCTIONS] = {CE_ONSET,      CE_MIDPOINT, CE_HALF_STEP,
                                                        CE_INFLECTION, CE_END,      CE_FICTIVE};

static size_t count_ok(const ce_tg_result *result)
{
    size_t ok = 0;
    for (size_t i = 0; i < result->n; i++) ok += result->run[i].status == CE_OK;
    return ok;
}

/* ---- text --------------------------------------------------------------------------------- */

/* Of many runs a line has room for these beside the one that is taken; CSV and JSON have all. */
static bool in_line(ce_construction c, ce_construction take)
{
    return c != take && c != CE_MIDPOINT && c != CE_INFLECTION;
}

static void put_value(ce_sheet *table, const ce_reading *r)
{
    char text[CE_NUMBER_ROOM];
    /* a hundredth of a kelvin is enough where many stand side by side */
    ce_sheet_cell(table, "%s", ce_celsius(text, r->value_K, fmax(r->u_K, 0.1)));
}

static void put_step(ce_sheet *table, const ce_transition *t)
{
    char text[CE_NUMBER_ROOM];
    ce_sheet_cell(table, "%s", ce_fixed(text, t->step_height, ce_decimals(t->step_height_u)));
}

/* File names differ at their end; what comes before the last folders is noise. */
static const char *short_name(const char *path)
{
    const char *p = path + strlen(path);
    int slashes = 0;
    while (p > path && !(p[-1] == '/' && ++slashes == 1)) p--;
    return p;
}

static void put_run_row(ce_sheet *table, const ce_evaluation *e, const ce_transition *t,
                        ce_construction take)
{
    char text[CE_NUMBER_ROOM];
    const ce_reading *r = &t->tg[take];
    ce_sheet_text(table, short_name(e->path), 24);
    ce_sheet_cell(table, "%s %zu", ce_segment_kind_name(e->found.segment.kind),
                  e->found.segment.nth_of_kind);
    ce_sheet_cell(table, "%s", ce_fixed(text, e->found.segment.rate_K_min, 1));
    put_value(table, r);
    ce_sheet_cell(table, "%s", ce_fixed(text, r->u_K, ce_decimals(r->u_K)));
    for (size_t c = 0; c < CE_CONSTRUCTIONS; c++)
        if (in_line(order[c], take)) put_value(table, &t->tg[order[c]]);
    put_step(table, t);
    if (t->n_flags > 0)
        ce_sheet_cell(table, "%zu", t->n_flags);
    else
        ce_sheet_text(table, "", 0);
}

static const char *step_unit(const ce_tg_result *result)
{
    const char *unit = NULL;
    for (size_t i = 0; i < result->n; i++)
        for (size_t k = 0; k < result->run[i].found.n; k++) {
            const char *u = result->run[i].found.item[k].step_unit;
            if (unit != NULL && strcmp(unit, u) != 0) return "(mixed)";
            unit = u;
        }
    return unit == NULL ? "" : unit;
}

static ce_status put_many(const ce_tg_result *result, FILE *to, bool colour)
{
    enum { N = 6 + CE_CONSTRUCTIONS };
    ce_sheet_column column[N] = {{"run", "", CE_LEFT},
                                 {"segment", "", CE_LEFT},
                                 {"rate", "K/min", CE_RIGHT},
                                 {"Tg", "°C", CE_POINT},
                                 {"u", "K", CE_POINT}};
    size_t n = 5;
    for (size_t c = 0; c < CE_CONSTRUCTIONS; c++)
        if (in_line(order[c], result->take))
            column[n++] = (ce_sheet_column){ce_construction_name(order[c]), "°C", CE_POINT};
    column[n++] = (ce_sheet_column){"step", step_unit(result), CE_POINT};
    column[n++] = (ce_sheet_column){"flags", "", CE_RIGHT};
    ce_sheet table;
    ce_sheet_begin(&table, column, n);
    for (size_t i = 0; i < result->n; i++)
        for (size_t k = 0; k < result->run[i].found.n; k++)
            put_run_row(&table, &result->run[i], &result->run[i].found.item[k], result->take);
    return ce_sheet_print(&table, to, 0, colour);
}

static void put_flags(const ce_tg_result *result, FILE *to)
{
    ce_remarks remarks = {.to = to, .heading = "flags"};
    for (size_t i = 0; i < result->n; i++)
        for (size_t k = 0; k < result->run[i].found.n; k++)
            for (size_t f = 0; f < result->run[i].found.item[k].n_flags; f++) {
                char text[256];
                ce_flag_text(&result->run[i].found.item[k].flags[f], text, sizeof text);
                ce_remark(&remarks, result->n > 1 ? short_name(result->run[i].path) : NULL, text);
            }
}

static ce_status put_one(const ce_tg_result *result, const ce_transition *t, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"construction", "", CE_LEFT},  {"Tg", "°C", CE_POINT},           {"u", "K", CE_POINT},
        {"of it noise", "K", CE_POINT}, {"of it windows", "K", CE_POINT}, {"", "", CE_LEFT}};
    ce_sheet table;
    ce_sheet_begin(&table, column, sizeof column / sizeof *column);
    for (size_t c = 0; c < CE_CONSTRUCTIONS; c++) {
        const ce_reading *r = &t->tg[order[c]];
        char text[CE_NUMBER_ROOM];
        int d = ce_decimals(r->u_K);
        ce_sheet_cell(&table, "%s", ce_construction_name(order[c]));
        put_value(&table, r);
        ce_sheet_cell(&table, "%s", ce_fixed(text, r->u_K, d));
        ce_sheet_cell(&table, "%s", ce_fixed(text, r->u_noise_K, d));
        ce_sheet_cell(&table, "%s", ce_fixed(text, r->u_window_K, d));
        ce_sheet_cell(&table, "%s", order[c] == result->take ? "taken as the Tg" : "");
    }
    ce_status st = ce_sheet_print(&table, to, 2, colour);
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM], d[CE_NUMBER_ROOM];
    int places = ce_decimals(t->step_height_u);
    fprintf(to, "\n  step height     %s %s, u %s\n", ce_fixed(a, t->step_height, places),
            t->step_unit, ce_fixed(b, t->step_height_u, places));
    fprintf(to, "  width           %s K, u %s (end minus onset)\n",
            ce_fixed(a, t->width_K, ce_decimals(t->width_u_K)),
            ce_fixed(b, t->width_u_K, ce_decimals(t->width_u_K)));
    fprintf(to, "  glassy line     %s to %s °C\n  liquid line     %s to %s °C%s\n",
            ce_fixed(a, ce_degC_from_K(t->glass.low_K), 1),
            ce_fixed(b, ce_degC_from_K(t->glass.high_K), 1),
            ce_fixed(c, ce_degC_from_K(t->liquid.low_K), 1),
            ce_fixed(d, ce_degC_from_K(t->liquid.high_K), 1),
            t->windows_given ? " (windows as given)"
                             : (t->model_lines ? " (lines from the step model)" : ""));
    return st;
}

static ce_status put_single(const ce_tg_result *result, FILE *to, bool colour)
{
    const ce_evaluation *e = &result->run[0];
    const ce_segment *s = &e->found.segment;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM];
    const ce_reading *r = &e->found.item[0].tg[result->take];
    char *name = ce_text_shown(e->path, 70);
    fprintf(to, "Tg = %s °C, u = %s K (%s, %s %zu at %s K/min)\n%s\n",
            ce_celsius(a, r->value_K, r->u_K), ce_fixed(b, r->u_K, ce_decimals(r->u_K)),
            ce_construction_name(result->take), ce_segment_kind_name(s->kind), s->nth_of_kind,
            ce_fixed(c, fabs(s->rate_K_min), 2), name == NULL ? "" : name);
    free(name);
    ce_status st = CE_OK;
    for (size_t k = 0; k < e->found.n && st == CE_OK; k++) {
        fputc('\n', to);
        if (e->found.n > 1) fprintf(to, "%s step\n", k == 0 ? "strongest" : "further");
        st = put_one(result, &e->found.item[k], to, colour);
    }
    return st;
}

ce_status ce_write_tg_text(const ce_tg_result *result, FILE *to, bool colour)
{
    size_t ok = count_ok(result);
    ce_status st = CE_OK;
    if (result->n == 1 && ok == 1)
        st = put_single(result, to, colour);
    else {
        fprintf(to, "Tg (%s) of %zu of %zu runs\n", ce_construction_name(result->take), ok,
                result->n);
        if (ok > 0) {
            fputc('\n', to);
            st = put_many(result, to, colour);
        }
    }
    if (st == CE_OK) put_flags(result, to);
    return st;
}

/* ---- CSV ---------------------------------------------------------------------------------- */

static void put_csv_transition(FILE *to, const ce_evaluation *e, size_t k, ce_construction take)
{
    const ce_transition *t = &e->found.item[k];
    ce_csv_count(to, false, k + 1);
    ce_csv_count(to, false, e->found.segment.index);
    ce_csv_text(to, false, ce_segment_kind_name(e->found.segment.kind));
    ce_csv_count(to, false, e->found.segment.nth_of_kind);
    ce_csv_number(to, false, e->found.segment.rate_K_min);
    ce_csv_text(to, false, ce_construction_name(take));
    ce_csv_number(to, false, t->tg[take].value_K);
    ce_csv_number(to, false, t->tg[take].u_K);
    for (size_t c = 0; c < CE_CONSTRUCTIONS; c++) {
        ce_csv_number(to, false, t->tg[order[c]].value_K);
        ce_csv_number(to, false, t->tg[order[c]].u_K);
    }
    ce_csv_number(to, false, t->step_height);
    ce_csv_number(to, false, t->step_height_u);
    ce_csv_text(to, false, t->step_unit);
    ce_csv_number(to, false, t->width_K);
    ce_csv_number(to, false, t->glass.low_K);
    ce_csv_number(to, false, t->glass.high_K);
    ce_csv_number(to, false, t->liquid.low_K);
    ce_csv_number(to, false, t->liquid.high_K);
    char names[512] = "";
    for (size_t f = 0; f < t->n_flags; f++) {
        if (f > 0) strncat(names, "; ", sizeof names - strlen(names) - 1);
        strncat(names, ce_flag_name(t->flags[f].code), sizeof names - strlen(names) - 1);
    }
    ce_csv_text(to, false, names);
}

ce_status ce_write_tg_csv(const ce_tg_result *result, FILE *to)
{
    ce_csv_heading(to,
                   "run,status,message,transition,segment,kind,nth,rate_K_min,construction,tg_K,"
                   "tg_u_K,onset_K,onset_u_K,midpoint_K,midpoint_u_K,half_step_K,half_step_u_K,"
                   "inflection_K,inflection_u_K,end_K,end_u_K,fictive_K,fictive_u_K,step_height,"
                   "step_height_u,step_unit,width_K,glass_low_K,glass_high_K,liquid_low_K,"
                   "liquid_high_K,flags");
    for (size_t i = 0; i < result->n; i++) {
        const ce_evaluation *e = &result->run[i];
        for (size_t k = 0; k < (e->status == CE_OK ? e->found.n : 1); k++) {
            ce_csv_text(to, true, e->path);
            ce_csv_text(to, false, e->status == CE_OK ? "ok" : "refused");
            ce_csv_text(to, false, e->status == CE_OK ? NULL : e->error.message);
            if (e->status == CE_OK)
                put_csv_transition(to, e, k, result->take);
            else
                for (size_t c = 0; c < 29; c++) ce_csv_text(to, false, NULL);
            ce_csv_end_row(to);
        }
    }
    return CE_OK;
}

/* ---- JSON --------------------------------------------------------------------------------- */

static json_t *json_reading(const ce_reading *r)
{
    return json_pack("{s:o,s:o,s:o,s:o}", "value_K", ce_json_number(r->value_K), "u_K",
                     ce_json_number(r->u_K), "u_noise_K", ce_json_number(r->u_noise_K),
                     "u_window_K", ce_json_number(r->u_window_K));
}

static json_t *json_flags(const ce_transition *t, bool with_numbers)
{
    json_t *list = json_array();
    for (size_t f = 0; f < t->n_flags; f++) {
        char text[256];
        ce_flag_text(&t->flags[f], text, sizeof text);
        json_t *item = with_numbers ? json_pack("{s:s,s:o}", "flag", ce_flag_name(t->flags[f].code),
                                                "number", ce_json_number(t->flags[f].number))
                                    : ce_json_text(text);
        (void)json_array_append_new(list, item);
    }
    return list;
}

static json_t *json_transition(const ce_transition *t)
{
    json_t *o = json_object();
    for (size_t c = 0; c < CE_CONSTRUCTIONS; c++)
        (void)json_object_set_new(o, ce_construction_name(order[c]),
                                  json_reading(&t->tg[order[c]]));
    (void)json_object_set_new(o, "step_height",
                              json_pack("{s:o,s:o,s:s}", "value", ce_json_number(t->step_height),
                                        "u", ce_json_number(t->step_height_u), "unit",
                                        t->step_unit));
    (void)json_object_set_new(o, "width_K", ce_json_number(t->width_K));
    (void)json_object_set_new(o, "width_u_K", ce_json_number(t->width_u_K));
    (void)json_object_set_new(
        o, "glass_window_K",
        json_pack("[o,o]", ce_json_number(t->glass.low_K), ce_json_number(t->glass.high_K)));
    (void)json_object_set_new(
        o, "liquid_window_K",
        json_pack("[o,o]", ce_json_number(t->liquid.low_K), ce_json_number(t->liquid.high_K)));
    (void)json_object_set_new(o, "lines",
                              json_string(t->windows_given ? "given windows"
                                          : t->model_lines ? "step model"
                                                           : "windows"));
    (void)json_object_set_new(o, "noise_sd", ce_json_number(t->noise_sd));
    (void)json_object_set_new(o, "overshoot", ce_json_number(t->overshoot));
    (void)json_object_set_new(o, "flags", json_flags(t, false));
    (void)json_object_set_new(o, "flag_numbers", json_flags(t, true));
    return o;
}

static json_t *json_run(const ce_evaluation *e)
{
    bool ok = e->status == CE_OK;
    json_t *transitions = json_array();
    for (size_t k = 0; k < e->found.n; k++)
        (void)json_array_append_new(transitions, json_transition(&e->found.item[k]));
    const ce_segment *s = &e->found.segment;
    json_t *segment = json_null();
    if (ok)
        segment = json_pack("{s:I,s:s,s:o,s:o}", "index", (json_int_t)s->index, "kind",
                            ce_segment_kind_name(s->kind), "rate_K_min",
                            ce_json_number(s->rate_K_min), "heating_number",
                            s->kind == CE_HEATING ? json_integer((json_int_t)s->nth_of_kind)
                                                  : json_null());
    return json_pack("{s:o,s:s,s:o,s:o,s:o}", "run", ce_json_text(e->path), "status",
                     ok ? "ok" : "refused", "message", ce_json_text(ok ? NULL : e->error.message),
                     "segment", segment, "transitions", transitions);
}

ce_status ce_write_tg_json(const ce_tg_result *result, FILE *to)
{
    json_t *runs = json_array();
    for (size_t i = 0; i < result->n; i++)
        (void)json_array_append_new(runs, json_run(&result->run[i]));
    return ce_json_write(json_pack("{s:s,s:s,s:o}", "schema", "chainend.tg/1", "construction",
                                   ce_construction_name(result->take), "runs", runs),
                         to);
}
