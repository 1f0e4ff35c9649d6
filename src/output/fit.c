/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/fit.h"

#include "base/quantity.h"
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

/* Where the intervals come from, and what of them is shared by all standards. */
static void put_intervals(FILE *to, const ce_fit *fit)
{
    char a[CE_NUMBER_ROOM];
    if (ce_relation_linear(fit->options.relation)) {
        fputs("  intervals by Student t with", to);
        for (size_t i = 0; i < fit->p; i++) {
            if (isfinite(fit->parameter[i].nu) && fit->parameter[i].nu < 1e4)
                fprintf(to, "%s %.3g", i == 0 ? "" : " and", fit->parameter[i].nu);
            else
                fprintf(to, "%s unlimited", i == 0 ? "" : " and");
        }
        fputs(" degrees of freedom (Welch-Satterthwaite)\n", to);
    } else {
        fputs("  intervals by profile likelihood\n", to);
    }
    for (size_t i = 0; i < fit->p; i++)
        if (fit->parameter[i].u_common > 0.0)
            fprintf(to, "  of u(%s) %s %s is common to all standards\n",
                    ce_relation_parameter_name(fit->options.relation, i),
                    ce_significant(a, fit->parameter[i].u_common, 2),
                    ce_relation_parameter_unit(fit->options.relation, i));
}

static void put_verdict(const ce_fit_result *result, FILE *to)
{
    const ce_fit *fit = result->fit;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM];
    fprintf(to, "%s\nfitted to %zu standards (%zu runs)\n",
            ce_relation_formula(fit->options.relation), fit->n_points, fit->n_runs);
    ce_write_polymer(result->polymer, 96, to);
    fputs("\nTg is ", to);
    ce_write_definition(result->construction, result->rate_K_min, result->history, to);
    fputs("\n\n", to);
    for (size_t i = 0; i < fit->p; i++) put_parameter(to, fit, i);
    put_intervals(to, fit);
    if (isfinite(result->ceiling_tg_K)) {
        char text[300];
        (void)snprintf(
            text, sizeof text,
            "One run of an unknown bounds Mn from above up to %s °C (Mn %s kg/mol); a higher "
            "Tg bounds it from below only.",
            ce_fixed(a, ce_degC_from_K(result->ceiling_tg_K), 1),
            ce_kg_mol(b, result->ceiling_mn_g_mol));
        fputc('\n', to);
        ce_text_wrap(to, text, 0, 0, CE_TEXT_WIDTH);
    } else
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

/* What an unknown measured once would get, along the standards. */
static ce_status put_range(const ce_fit_result *result, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"Mn", "kg/mol", CE_POINT}, {"Tg", "°C", CE_POINT},        {"from", "kg/mol", CE_POINT},
        {"to", "kg/mol", CE_POINT}, {"half-width", "%", CE_POINT},
    };
    if (result->n_range == 0) return CE_OK;
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < result->n_range; i++) {
        const ce_range_row *r = &result->range[i];
        const double most = 10.0 * result->range[result->n_range - 1].mn_g_mol;
        char text[CE_NUMBER_ROOM];
        ce_sheet_cell(&sheet, "%s", ce_kg_mol(text, r->mn_g_mol));
        ce_sheet_cell(&sheet, "%s", ce_celsius(text, r->tg_K, 0.1));
        ce_sheet_cell(&sheet, "%s", ce_kg_mol(text, r->low_g_mol));
        ce_sheet_cell(&sheet, "%s", r->high_g_mol < most ? ce_kg_mol(text, r->high_g_mol) : "open");
        if (r->bound == CE_TWO_SIDED && r->high_g_mol < most)
            ce_sheet_cell(&sheet, "%s", ce_significant(text, 100.0 * r->relative, 2));
        else
            ce_sheet_none(&sheet);
    }
    fprintf(to, "\nworking range: what one run of an unknown would get (%g %% interval of Mn)\n",
            100.0 * result->fit->options.level);
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
    if (isfinite(fit->levene_p))
        fprintf(to, "equal scatter        Levene p %s, Bartlett p %s\n",
                ce_significant((char[CE_NUMBER_ROOM]){0}, fit->levene_p, 2),
                ce_significant((char[CE_NUMBER_ROOM]){0}, fit->bartlett_p, 2));
    if (isfinite(fit->curvature_p))
        fprintf(to, "curvature            F %s, p %s (a further term in the weighted fit)\n",
                ce_significant(a, fit->curvature_F, 3),
                ce_significant((char[CE_NUMBER_ROOM]){0}, fit->curvature_p, 2));
}

/* How much hangs on single standards: each left out once, and its weight in the robust fits. */
static ce_status put_sensitivity(const ce_fit *fit, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"without", "", CE_LEFT},
        {"Tg_inf shifts", "K", CE_POINT},
        {"by u", "", CE_POINT},
        {"K shifts", "%", CE_POINT},
        {"by u", "", CE_POINT},
        {"deleted t", "", CE_POINT},
        {"p", "", CE_POINT},
        {"Huber", "weight", CE_POINT},
        {"bisquare", "weight", CE_POINT},
    };
    if (fit->p != 2 || isnan(fit->huber[0])) return CE_OK;
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    const ce_parameter *a = &fit->parameter[0], *k = &fit->parameter[1];
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        char text[CE_NUMBER_ROOM];
        ce_sheet_text(&sheet, p->name, 24);
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->shift_tg_inf_K, ce_decimals(a->u)));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->shift_tg_inf_K / a->u, 1));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, 100.0 * p->shift_k / k->value, 1));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->shift_k / k->u, 1));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->deleted_t, 2));
        ce_sheet_cell(&sheet, "%s", ce_significant(text, p->deleted_p, 2));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->huber_weight, 2));
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, p->bisquare_weight, 2));
    }
    fputs("\nwhat hangs on single standards (p corrected for their number, after Bonferroni)\n",
          to);
    ce_status st = ce_sheet_print(&sheet, to, 0, colour);
    if (st != CE_OK) return st;
    char text[4][CE_NUMBER_ROOM];
    fprintf(
        to,
        "robust fits: Tg_inf %s °C and K %s (Huber), %s °C and %s (bisquare); a check, not used\n",
        ce_fixed(text[0], ce_degC_from_K(fit->huber[0]), ce_decimals(a->u)),
        ce_fixed(text[1], fit->huber[1], ce_decimals(k->u)),
        ce_fixed(text[2], ce_degC_from_K(fit->bisquare[0]), ce_decimals(a->u)),
        ce_fixed(text[3], fit->bisquare[1], ce_decimals(k->u)));
    return CE_OK;
}

static ce_status put_resampled(const ce_fit *fit, FILE *to, bool colour)
{
    static const ce_sheet_column column[] = {
        {"", "", CE_LEFT},      {"s.d.", "", CE_POINT},
        {"bias", "", CE_POINT}, {"percentiles", "", CE_POINT},
        {"", "", CE_POINT},     {"BCa", "", CE_POINT},
        {"", "", CE_POINT},
    };
    if (fit->n_resampled == 0) return CE_OK;
    ce_sheet sheet;
    ce_sheet_begin(&sheet, column, sizeof column / sizeof *column);
    for (size_t i = 0; i < fit->p; i++) {
        const ce_resampled *r = &fit->resampled[i];
        const int places = ce_decimals(fit->parameter[i].u);
        const double cell[] = {r->sd,      r->bias,    r->percentile_low, r->percentile_high,
                               r->bca_low, r->bca_high};
        char text[CE_NUMBER_ROOM];
        ce_sheet_cell(&sheet, "%s", ce_relation_parameter_name(fit->options.relation, i));
        for (size_t c = 0; c < sizeof cell / sizeof *cell; c++)
            ce_sheet_cell(&sheet, "%s", ce_fixed(text, cell[c], places));
    }
    fprintf(to,
            "\nwhole standards resampled %zu times (seed %llu); with few standards this says too "
            "little\n",
            fit->n_resampled, (unsigned long long)fit->options.seed);
    return ce_sheet_print(&sheet, to, 0, colour);
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
        ce_sheet_cell(&sheet, "%s", ce_fixed(text, isnan(c->aicc) ? (double)NAN : c->weight, 3));
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
    st = put_range(result, to, colour);
    if (st != CE_OK) return st;
    put_scatter(result->fit, to);
    if (result->series != NULL) ce_write_rate_reduction(result->series, to);
    st = put_sensitivity(result->fit, to, colour);
    if (st == CE_OK) st = put_resampled(result->fit, to, colour);
    if (st == CE_OK) st = put_comparison(result->fit, to, colour);
    ce_remarks remarks = {.to = to, .heading = "remarks"};
    for (size_t i = 0; i < result->fit->warnings.n; i++)
        ce_remark(&remarks, NULL, result->fit->warnings.item[i].at.message);
    return st;
}
