/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/report.h"

#include "base/quantity.h"
#include "output/html.h"
#include "output/number.h"
#include "output/series.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char style[] =
    ":root{color-scheme:light dark;--ink:#1c1c1c;--paper:#fff;--soft:#5a5a5a;--line:#c9c9c9;"
    "--mark:#9a3309}\n"
    "@media (prefers-color-scheme:dark){:root{--ink:#e8e6e3;--paper:#17181a;--soft:#a9a7a3;"
    "--line:#4a4b4d;--mark:#ff9d73}}\n"
    "body{font:16px/1.5 Georgia,'Times New Roman',serif;color:var(--ink);background:var(--paper);"
    "max-width:46rem;margin:0 auto;padding:1.5rem 1rem}\n"
    "h1{font-size:1.5rem;line-height:1.25;margin:0 0 .3rem}h2{font-size:1.12rem;margin:2rem 0 "
    ".5rem;border-top:1px solid var(--line);padding-top:.8rem}\n"
    "p{margin:.5rem 0}.soft{color:var(--soft)}.verdict{font-size:1.08rem}.mark{color:var(--mark)}\n"
    "ul{margin:.4rem 0;padding-left:1.3rem}li{margin:.2rem 0}\n"
    ".scroll{overflow-x:auto}table{border-collapse:collapse;font-size:.86rem;margin:.8rem 0;"
    "font-variant-numeric:tabular-nums}\n"
    "caption{text-align:left;color:var(--soft);padding-bottom:.3rem}th,td{padding:.16rem .55rem;"
    "text-align:right;vertical-align:top}\n"
    "th:first-child,td.words{text-align:left}thead th{border-bottom:1px solid "
    "var(--ink);font-weight:normal}thead span{color:var(--soft)}\n"
    "tbody th{font-weight:normal}tbody tr+tr>*{border-top:1px solid var(--line)}\n"
    "figure{margin:1.2rem 0}figure img{display:block;max-width:100%;height:auto;background:#fff}"
    "figcaption{color:var(--soft);font-size:.9rem;margin-top:.3rem}\n"
    "code{font:0.72rem/1.4 ui-monospace,monospace;overflow-wrap:anywhere}\n"
    "@page{size:A4;margin:16mm}\n"
    "@media "
    "print{:root{--ink:#000;--paper:#fff;--soft:#444;--line:#bbb;--mark:#7a2806}body{font-size:"
    "10.5pt;max-width:none;padding:0}h2{break-after:avoid}figure,tr{break-inside:avoid}"
    "figure img{max-height:98mm;width:auto}.scroll{"
    "overflow:"
    "visible}}\n";

/* ---- verdict ------------------------------------------------------------------------------ */

static void put_unknown(FILE *to, const ce_answer *a)
{
    const ce_estimate *e = &a->mn;
    char m[CE_NUMBER_ROOM], l[CE_NUMBER_ROOM], h[CE_NUMBER_ROOM];
    fputs("<li><strong>", to);
    ce_html_text(to, ce_answer_label(a), 40);
    fputs("</strong>: ", to);
    if (a->status != CE_OK)
        ce_html_printf(to, "no answer, %s", a->error.message);
    else if (e->bound == CE_TWO_SIDED && (e->flags & CE_EST_HIGH_ABSURD) == 0)
        ce_html_printf(to, "Mn = %s kg/mol, %g %% interval %s to %s kg/mol",
                       ce_kg_mol(m, e->mn_g_mol), 100.0 * e->level, ce_kg_mol(l, e->low_g_mol),
                       ce_kg_mol(h, e->high_g_mol));
    else if (e->bound == CE_TWO_SIDED || e->bound == CE_LOWER_ONLY)
        ce_html_printf(to, "Mn > %s kg/mol (%g %%); its Tg cannot be told from the plateau",
                       ce_kg_mol(l, e->low_g_mol), 100.0 * e->level);
    else if (e->bound == CE_ABOVE_PLATEAU)
        ce_html_printf(to, "no finite Mn (%g %%): its Tg lies above the plateau", 100.0 * e->level);
    else
        fputs("not determined: the slope of the calibration is not significant", to);
    fputs("</li>\n", to);
}

static void put_definition(FILE *to, const ce_series *s)
{
    char *text = NULL;
    size_t n = 0;
    FILE *memory = open_memstream(&text, &n);
    if (memory == NULL) return;
    ce_write_definition(s->construction, s->rate_K_min, s->history, memory);
    (void)fclose(memory);
    ce_html_text(to, text, 0);
    free(text);
}

static void put_verdict(FILE *to, const ce_report *r)
{
    const ce_fit *fit = r->fit.fit;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM];
    fputs("<h1>Molar mass from the glass transition of ", to);
    ce_html_text(to, r->series->polymer == NULL ? "a polymer not stated" : r->series->polymer, 160);
    fputs("</h1>\n<p class=\"soft\">Tg is ", to);
    put_definition(to, r->series);
    if (r->series->scope != NULL) {
        fputs("; scope: ", to);
        ce_html_text(to, r->series->scope, 300);
    }
    fputs("</p>\n<p class=\"verdict\">", to);
    const ce_parameter *t = &fit->parameter[0], *k = &fit->parameter[1];
    ce_html_printf(to, "%s, with Tg_inf = %s °C (u %s K)",
                   ce_relation_formula(fit->options.relation), ce_celsius(a, t->value, t->u),
                   ce_fixed(b, t->u, ce_decimals(t->u)));
    ce_html_printf(to, " and %s = %s %s", ce_relation_parameter_name(fit->options.relation, 1),
                   ce_fixed(a, k->value, ce_decimals(k->u)),
                   ce_relation_parameter_unit(fit->options.relation, 1));
    ce_html_printf(to, " (u %s), from %zu standards and %zu runs. ",
                   ce_fixed(a, k->u, ce_decimals(k->u)), fit->n_points, fit->n_runs);
    if (isfinite(r->fit.ceiling_tg_K))
        ce_html_printf(to,
                       "One run of an unknown bounds its Mn from above up to %s °C, which is %s "
                       "kg/mol.",
                       ce_celsius(a, r->fit.ceiling_tg_K, 0.1),
                       ce_kg_mol(b, r->fit.ceiling_mn_g_mol));
    else
        fputs(
            "<span class=\"mark\">The dependence on Mn is not significant: no Tg bounds Mn on both "
            "sides.</span>",
            to);
    fputs("</p>\n", to);
    if (r->check != NULL)
        fprintf(to, "<p%s>The calibration %s against its control samples.</p>\n",
                r->check->check->holds ? "" : " class=\"mark\"",
                r->check->check->holds ? "holds" : "does not hold");
    if (r->unknowns.n > 0) {
        fputs("<ul>\n", to);
        for (size_t i = 0; i < r->unknowns.n; i++) put_unknown(to, &r->unknowns.answer[i]);
        fputs("</ul>\n", to);
    }
}

static void put_cautions(FILE *to)
{
    fputs("<h2>Cautions</h2>\n<ul>\n"
          "<li>A molar mass read off a Tg is an estimate, for this polymer, these end groups, this "
          "tacticity and this thermal history only.</li>\n"
          "<li>Residual solvent, plasticiser, crystallinity and ageing move a Tg as molar mass "
          "does.</li>\n"
          "<li>Calorimetry has hot surfaces, sealed pans that may burst and decomposition gases: "
          "follow "
          "the laboratory’s rules and local codes, and defer to people qualified for them.</li>\n"
          "</ul>\n",
          to);
}

/* ---- figures ------------------------------------------------------------------------------ */

static ce_status put_figures(FILE *to, const ce_report *r)
{
    ce_status st = CE_OK;
    fputs("<h2>Figures</h2>\n", to);
    if (r->no_figures != NULL) {
        fputs("<p class=\"mark\">", to);
        ce_html_text(to, r->no_figures, 400);
        fputs("</p>\n", to);
    }
    for (size_t i = 0; i < r->n_figures && st == CE_OK; i++) {
        const ce_report_figure *f = &r->figure[i];
        if (f->svg == NULL) continue;
        fputs("<figure>", to);
        st = ce_html_picture(to, f->svg, f->n, f->alt);
        fputs("<figcaption>", to);
        ce_html_text(to, f->caption, 0);
        fputs("</figcaption></figure>\n", to);
    }
    return st;
}

/* ---- tables ------------------------------------------------------------------------------- */

static void put_unknowns(FILE *to, const ce_report *r)
{
    if (r->unknowns.n == 0) return;
    fputs("<h2>Unknowns</h2>\n", to);
    ce_html_table_begin(to, "Mn of each unknown",
                        "unknown|readings|Tg~°C|u~K|Mn~kg/mol|from~kg/mol|to~kg/mol|limits");
    for (size_t i = 0; i < r->unknowns.n; i++) {
        const ce_answer *a = &r->unknowns.answer[i];
        const ce_estimate *e = &a->mn;
        char t[CE_NUMBER_ROOM];
        if (a->status != CE_OK) continue;
        ce_html_row_begin(to, ce_answer_label(a));
        ce_html_cell(to, "%zu", a->readings);
        ce_html_cell(to, "%s", ce_celsius(t, e->tg_K, e->u_K));
        ce_html_cell(to, "%s", ce_fixed(t, e->u_K, ce_decimals(e->u_K)));
        ce_html_cell(to, "%s", ce_kg_mol(t, e->bound == CE_TWO_SIDED ? e->mn_g_mol : (double)NAN));
        ce_html_cell(to, "%s", ce_kg_mol(t, e->low_g_mol));
        ce_html_cell(
            to, "%s%s", (e->flags & CE_EST_HIGH_ABSURD) != 0 ? "> " : "",
            ce_kg_mol(t, (e->flags & CE_EST_HIGH_ABSURD) != 0 ? e->cap_g_mol : e->high_g_mol));
        ce_html_cell(to, "%s", ce_bound_name(e->bound));
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
}

static void put_budget(FILE *to, const ce_report *r)
{
    if (r->unknowns.n == 0) return;
    fputs("<h2>Where the uncertainty comes from</h2>\n", to);
    ce_html_table_begin(to, "Shares of the variance of reading minus curve, % (GUM)",
                        "unknown|largest|second|third");
    for (size_t i = 0; i < r->unknowns.n; i++) {
        const ce_answer *a = &r->unknowns.answer[i];
        if (a->status != CE_OK) continue;
        ce_html_row_begin(to, ce_answer_label(a));
        for (size_t k = 0; k < 3; k++)
            if (k < a->mn.n_shares)
                ce_html_cell(to, "%s %.0f", a->mn.share[k].source, 100.0 * a->mn.share[k].share);
            else
                ce_html_cell(to, "-");
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
    fputs("<ul>\n", to);
    for (size_t i = 0; i < r->unknowns.n; i++) {
        const ce_answer *a = &r->unknowns.answer[i];
        if (a->status != CE_OK || a->hint[0] == '\0') continue;
        fputs("<li>", to);
        ce_html_printf(to, "%.60s: %s", ce_answer_label(a), a->hint);
        fputs("</li>\n", to);
    }
    fputs("</ul>\n", to);
}

static void put_pairs(FILE *to, const ce_report *r)
{
    const ce_fit *fit = r->fit.fit;
    fputs("<h2>Standards</h2>\n", to);
    ce_html_table_begin(
        to, "Pairs of Mn and Tg as fitted",
        "standard|Mn~kg/mol|u(Mn)~%|runs|Tg~°C|u~K|off the curve~K|in u|leverage|Cook’s "
        "distance");
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        const double u = 1.0 / sqrt(p->weight);
        const int places = ce_decimals(isfinite(p->tg_u_K) ? p->tg_u_K : u);
        char t[CE_NUMBER_ROOM];
        ce_html_row_begin(to, p->name);
        ce_html_cell(to, "%s", ce_kg_mol(t, p->molar.mn_g_mol));
        ce_html_cell(to, "%s",
                     p->mn_u_g_mol > 0.0
                         ? ce_significant(t, 100.0 * p->mn_u_g_mol / p->molar.mn_g_mol, 2)
                         : "-");
        ce_html_cell(to, "%zu", p->n);
        ce_html_cell(to, "%s", ce_fixed(t, ce_degC_from_K(p->tg_K), places));
        ce_html_cell(to, "%s", ce_fixed(t, p->tg_u_K, places));
        ce_html_cell(to, "%s", ce_fixed(t, p->residual_K, places));
        ce_html_cell(to, "%s", ce_fixed(t, p->residual_K / u, 1));
        ce_html_cell(to, "%s", ce_fixed(t, p->leverage, 2));
        ce_html_cell(to, "%s", ce_fixed(t, p->influence, 2));
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
}

static void put_rows(FILE *to, const ce_report *r)
{
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM];
    fputs("<h2>Measurements</h2>\n", to);
    ce_html_table_begin(to, "Every row of the series, used or not",
                        "sample|role|run|Tg~°C|u of the reading~K|remarks");
    for (size_t i = 0; i < r->series->n_rows; i++) {
        const ce_series_row *row = &r->series->row[i];
        const double u = isnan(row->tg_u_K) ? 0.1 : row->tg_u_K;
        ce_html_row_begin(to, row->sample);
        ce_html_cell(to, "%s", ce_role_name(row->role));
        ce_html_cell(to, "%.60s", row->run == NULL ? "-" : row->run);
        ce_html_cell(to, "%s", ce_celsius(a, row->tg_K, u));
        ce_html_cell(to, "%s", isnan(row->tg_u_K) ? "-" : ce_fixed(b, row->tg_u_K, ce_decimals(u)));
        fputs("<td class=\"words\">", to);
        if (!row->used)
            ce_html_printf(to, "left out: %.200s ", row->reason == NULL ? "" : row->reason);
        for (size_t f = 0; f < row->n_flags; f++)
            ce_html_printf(to, "%s%s", f > 0 ? ", " : "", ce_flag_name(row->flags[f].code));
        fputs("</td>", to);
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
}

static void put_parameters(FILE *to, const ce_report *r)
{
    const ce_fit *fit = r->fit.fit;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], c[CE_NUMBER_ROOM], d[CE_NUMBER_ROOM];
    fputs("<h2>Parameters</h2>\n", to);
    ce_html_table_begin(to, "Parameters with their intervals",
                        "parameter|unit|value|u|from|to|dof");
    for (size_t i = 0; i < fit->p; i++) {
        const ce_parameter *p = &fit->parameter[i];
        const int places = ce_decimals(p->u);
        ce_html_row_begin(to, ce_relation_parameter_name(fit->options.relation, i));
        ce_html_cell(to, "%s", ce_relation_parameter_unit(fit->options.relation, i));
        ce_html_cell(to, "%s", ce_fixed(a, p->value, places));
        ce_html_cell(to, "%s", ce_fixed(b, p->u, places));
        ce_html_cell(to, "%s", ce_fixed(c, p->low, places));
        ce_html_cell(to, "%s", ce_fixed(d, p->high, places));
        ce_html_cell(to, "%s", p->nu < 1e4 ? ce_significant(a, p->nu, 3) : "unlimited");
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
    if (fit->p == 2) {
        fputs("<p>", to);
        ce_html_printf(
            to, "Correlation of the two: %s. ",
            ce_fixed(a, fit->covariance[1] / sqrt(fit->covariance[0] * fit->covariance[3]), 3));
        ce_html_printf(to, "Scatter of one run: %s K, from %s. ",
                       ce_significant(b, fit->run_sd_K, 2), ce_scatter_name(fit->options.scatter));
        ce_html_printf(to, "Weighted sum of squares %s for %.0f degrees of freedom.",
                       ce_significant(c, fit->chi2, 3), fit->dof);
        fputs("</p>\n", to);
    }
}

static void put_range(FILE *to, const ce_report *r)
{
    if (r->fit.n_range == 0) return;
    fputs("<h2>Working range</h2>\n", to);
    ce_html_table_begin(to, "What one run of an unknown would get",
                        "Mn~kg/mol|Tg~°C|from~kg/mol|to~kg/mol|half-width~%");
    for (size_t i = 0; i < r->fit.n_range; i++) {
        const ce_range_row *x = &r->fit.range[i];
        const bool closed = x->bound == CE_TWO_SIDED &&
                            x->high_g_mol < 10.0 * r->fit.range[r->fit.n_range - 1].mn_g_mol;
        char t[CE_NUMBER_ROOM];
        ce_html_row_begin(to, ce_kg_mol(t, x->mn_g_mol));
        ce_html_cell(to, "%s", ce_celsius(t, x->tg_K, 0.1));
        ce_html_cell(to, "%s", ce_kg_mol(t, x->low_g_mol));
        ce_html_cell(to, "%s", closed ? ce_kg_mol(t, x->high_g_mol) : "open");
        ce_html_cell(to, "%s", closed ? ce_significant(t, 100.0 * x->relative, 2) : "-");
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
}

static void put_diagnostics(FILE *to, const ce_report *r)
{
    const ce_fit *fit = r->fit.fit;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM];
    fputs("<h2>What the data say, and what they cannot</h2>\n<ul>\n", to);
    for (size_t i = 0; i < fit->warnings.n; i++) {
        fputs("<li>", to);
        ce_html_text(to, fit->warnings.item[i].at.message, 0);
        fputs("</li>\n", to);
    }
    if (isfinite(fit->lack_of_fit_p)) {
        fputs("<li>", to);
        ce_html_printf(to, "Between samples: F %s, p %s, %s",
                       ce_significant(a, fit->lack_of_fit_F, 3),
                       ce_significant(b, fit->lack_of_fit_p, 2), ce_fit_lack_of_fit_meaning(fit));
        fputs("</li>\n", to);
    }
    if (isfinite(fit->curvature_p)) {
        fputs("<li>", to);
        ce_html_printf(to, "Curvature beyond the relation: F %s, p %s",
                       ce_significant(a, fit->curvature_F, 3),
                       ce_significant(b, fit->curvature_p, 2));
        fputs("</li>\n", to);
    }
    fputs("</ul>\n", to);
    ce_html_table_begin(to, "Other relations fitted to the same standards",
                        "relation|Tg_inf~°C|AICc|weight|Mn at mid range~kg/mol");
    for (size_t i = 0; i < fit->n_comparison; i++) {
        const ce_comparison *c = &fit->comparison[i];
        if (!c->fitted) continue;
        ce_html_row_begin(to, ce_relation_name(c->relation));
        ce_html_cell(to, "%s", ce_fixed(a, ce_degC_from_K(c->tg_inf_K), 1));
        ce_html_cell(to, "%s", ce_fixed(a, c->aicc, 1));
        ce_html_cell(to, "%s", ce_fixed(a, c->weight, 3));
        ce_html_cell(to, "%s", ce_kg_mol(a, c->mid_mn_g_mol));
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
}

static void put_check(FILE *to, const ce_report *r)
{
    if (r->check == NULL) return;
    const ce_check *k = r->check->check;
    fputs("<h2>Control samples</h2>\n", to);
    ce_html_table_begin(to, "Measured again against the calibration",
                        "control|runs|Tg~°C|expected~°C|difference~K|u~K|normalised|verdict");
    for (size_t i = 0; i < k->n; i++) {
        const ce_control_result *x = &k->item[i];
        char t[CE_NUMBER_ROOM];
        const int places = ce_decimals(x->u_K);
        ce_html_row_begin(to, r->check->control[i].name);
        ce_html_cell(to, "%zu", x->n);
        ce_html_cell(to, "%s", ce_celsius(t, x->tg_K, x->u_K));
        ce_html_cell(to, "%s", ce_celsius(t, x->expected_K, x->u_K));
        ce_html_cell(to, "%s", ce_fixed(t, x->difference_K, places));
        ce_html_cell(to, "%s", ce_fixed(t, x->u_K, places));
        ce_html_cell(to, "%s", ce_fixed(t, x->normalised, 2));
        ce_html_cell(to, "%s", x->p < k->limit_p ? "off" : "agrees");
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
}

/* ---- provenance and method ---------------------------------------------------------------- */

static void put_provenance(FILE *to, const ce_report *r)
{
    const ce_fit_options *o = &r->fit.fit->options;
    char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM];
    fputs("<h2>Provenance</h2>\n<p>", to);
    for (size_t i = 0; i < r->n_versions; i++)
        ce_html_printf(to, "%s%s %s", i > 0 ? ", " : "Computed by ", r->version[i][0],
                       r->version[i][1]);
    ce_html_printf(
        to,
        ". Settings: relation %s, level %s, scatter from %s, excess %s, common uncertainty of "
        "Mn %s %%.",
        ce_relation_name(o->relation), ce_significant(a, o->level, 3), ce_scatter_name(o->scatter),
        ce_excess_name(o->excess), ce_significant(b, 100.0 * o->mn_common_u_rel, 2));
    fputs("</p>\n", to);
    if (r->n_files == 0) {
        fputs("<p>The input files are named in the calibration record.</p>\n", to);
        return;
    }
    ce_html_table_begin(to, "Input files", "file|bytes|SHA-256");
    for (size_t i = 0; i < r->n_files; i++) {
        ce_html_row_begin(to, r->file[i].path);
        ce_html_cell(to, "%zu", r->file[i].bytes);
        fputs("<td><code>", to);
        ce_html_text(to, r->file[i].sha256, 0);
        fputs("</code></td>", to);
        ce_html_row_end(to);
    }
    ce_html_table_end(to);
}

static void put_method(FILE *to, const ce_report *r)
{
    fputs("<h2>Method</h2>\n<p>", to);
    ce_html_printf(to, "Relation: %s. Source: %s.",
                   ce_relation_formula(r->fit.fit->options.relation),
                   ce_relation_source(r->fit.fit->options.relation));
    fputs("</p>\n<p>Each Tg is read off straight lines below and above the step (ISO 11357-2, ASTM "
          "E1356; "
          "fictive temperature after Moynihan et al., J. Am. Ceram. Soc. 59 (1976) 12). Standards "
          "enter as "
          "sample means with the uncertainty of their Mn, which repeats of a sample share (York et "
          "al., Am. "
          "J. Phys. 72 (2004) 367); intervals are Student’s with Welch–Satterthwaite degrees of "
          "freedom. Mn of a Tg is the set of molar masses the reading is compatible with (Fieller, "
          "J. R. "
          "Stat. Soc. B 16 (1954) 175), uncertainty after JCGM 100:2008. All of it is described in "
          "chainend-methods(7).</p>\n",
          to);
}

ce_status ce_write_report(const ce_report *r, FILE *to)
{
    fputs("<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
          "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n<title>",
          to);
    ce_html_printf(to, "Mn from Tg: %.120s",
                   r->series->polymer == NULL ? "polymer not stated" : r->series->polymer);
    fprintf(to, "</title>\n<style>\n%s</style>\n</head>\n<body>\n<main>\n", style);
    put_verdict(to, r);
    put_cautions(to);
    ce_status st = put_figures(to, r);
    put_unknowns(to, r);
    put_budget(to, r);
    put_pairs(to, r);
    put_parameters(to, r);
    put_range(to, r);
    put_diagnostics(to, r);
    put_check(to, r);
    put_rows(to, r);
    put_method(to, r);
    put_provenance(to, r);
    fputs("</main>\n</body>\n</html>\n", to);
    return st;
}
