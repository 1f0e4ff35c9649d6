/* SPDX-License-Identifier: GPL-3.0-or-later
 * A fit for programs: CSV and JSON. */
#include "output/fit.h"

#include "output/json.h"
#include "output/series.h"
#include "output/sheet.h"

#include <math.h>

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
        set_number(o, "u_common", p->u_common);
        (void)json_array_append_new(list, o);
    }
    return list;
}

static json_t *json_runs(const ce_fit *fit)
{
    json_t *list = json_array();
    for (size_t i = 0; i < fit->n_runs; i++) {
        const ce_fit_run *r = &fit->run[i];
        (void)json_array_append_new(list, json_pack("{s:o,s:o,s:o,s:o,s:o,s:b}", "sample",
                                                    ce_json_text(fit->point[r->point].name), "tg_K",
                                                    ce_json_number(r->tg_K), "residual_K",
                                                    ce_json_number(r->residual_K), "deleted_t",
                                                    ce_json_number(r->deleted_t), "deleted_p",
                                                    ce_json_number(r->deleted_p), "outlying",
                                                    (r->flags & CE_POINT_OUTLYING) != 0));
    }
    return list;
}

static json_t *json_list(const double *x, size_t n)
{
    json_t *list = json_array();
    for (size_t i = 0; i < n; i++) (void)json_array_append_new(list, ce_json_number(x[i]));
    return list;
}

static json_t *json_robust(const double *theta, size_t p, double scale)
{
    return json_pack("{s:o,s:o}", "parameters", json_list(theta, p), "scale",
                     ce_json_number(scale));
}

static json_t *json_resampled(const ce_fit *fit)
{
    if (fit->n_resampled == 0) return json_null();
    json_t *list = json_array();
    for (size_t i = 0; i < fit->p; i++) {
        const ce_resampled *r = &fit->resampled[i];
        (void)json_array_append_new(
            list,
            json_pack("{s:o,s:o,s:o,s:o,s:o,s:o}", "sd", ce_json_number(r->sd), "bias",
                      ce_json_number(r->bias), "percentile_low", ce_json_number(r->percentile_low),
                      "percentile_high", ce_json_number(r->percentile_high), "bca_low",
                      ce_json_number(r->bca_low), "bca_high", ce_json_number(r->bca_high)));
    }
    return json_pack("{s:I,s:I,s:o}", "n", (json_int_t)fit->n_resampled, "seed",
                     (json_int_t)fit->options.seed, "parameters", list);
}

static json_t *json_excess(const ce_fit *fit)
{
    return json_pack("{s:s,s:o,s:o,s:o,s:o}", "model", ce_excess_name(fit->options.excess), "tau_K",
                     ce_json_number(fit->excess_tau_K), "r", ce_json_number(fit->excess_r), "nu",
                     ce_json_number(fit->excess_nu), "p", ce_json_number(fit->excess_p));
}

static json_t *json_spread(const ce_fit *fit)
{
    return json_pack("{s:o,s:o,s:o,s:o,s:o}", "tg_inf_low_K",
                     ce_json_number(fit->spread_tg_inf_low_K), "tg_inf_high_K",
                     ce_json_number(fit->spread_tg_inf_high_K), "mid_mn_g_mol",
                     ce_json_number(fit->mid_mn_g_mol), "mid_low_g_mol",
                     ce_json_number(fit->spread_mid_low_g_mol), "mid_high_g_mol",
                     ce_json_number(fit->spread_mid_high_g_mol));
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
        set_number(o, "huber_weight", p->huber_weight);
        set_number(o, "bisquare_weight", p->bisquare_weight);
        set_number(o, "mn_adjusted_g_mol", p->mn_adjusted);
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

static json_t *json_range(const ce_fit_result *result)
{
    json_t *list = json_array();
    for (size_t i = 0; i < result->n_range; i++) {
        const ce_range_row *r = &result->range[i];
        (void)json_array_append_new(
            list,
            json_pack("{s:o,s:o,s:o,s:o,s:s,s:o}", "mn_g_mol", ce_json_number(r->mn_g_mol), "tg_K",
                      ce_json_number(r->tg_K), "low_g_mol", ce_json_number(r->low_g_mol),
                      "high_g_mol", ce_json_number(r->high_g_mol), "bound", ce_bound_name(r->bound),
                      "relative_half_width", ce_json_number(r->relative)));
    }
    return list;
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
    (void)json_object_set_new(o, "source", json_string(ce_relation_source(fit->options.relation)));
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
    set_number(o, "bartlett_p", fit->bartlett_p);
    set_number(o, "levene_p", fit->levene_p);
    (void)json_object_set_new(o, "excess", json_excess(fit));
    (void)json_object_set_new(o, "rate_reduction",
                              result->series == NULL ? json_null()
                                                     : ce_json_rate_reduction(result->series));
    (void)json_object_set_new(o, "samples", json_points(fit));
    (void)json_object_set_new(o, "runs", json_runs(fit));
    (void)json_object_set_new(o, "huber", json_robust(fit->huber, fit->p, fit->huber_scale));
    (void)json_object_set_new(o, "bisquare",
                              json_robust(fit->bisquare, fit->p, fit->bisquare_scale));
    (void)json_object_set_new(o, "resampled", json_resampled(fit));
    (void)json_object_set_new(o, "comparison", json_comparison(fit));
    (void)json_object_set_new(o, "model_spread", json_spread(fit));
    set_number(o, "ceiling_tg_K", result->ceiling_tg_K);
    set_number(o, "ceiling_mn_g_mol", result->ceiling_mn_g_mol);
    (void)json_object_set_new(o, "working_range", json_range(result));
    for (size_t i = 0; i < fit->warnings.n; i++)
        (void)json_array_append_new(warnings, ce_json_text(fit->warnings.item[i].at.message));
    (void)json_object_set_new(o, "warnings", warnings);
    return ce_json_write(o, to);
}
