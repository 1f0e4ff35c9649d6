/* SPDX-License-Identifier: GPL-3.0-or-later
 * What a fit says of itself: residuals, influence, other relations, working range. */
#include "output/figure.h"

#include "base/quantity.h"
#include "output/gnuplot.h"
#include "output/number.h"

#include <math.h>
#include <string.h>

static const char *title_of(const char *polymer, const char *otherwise)
{
    return polymer == NULL ? otherwise : polymer;
}

static void span(const ce_fit *fit, double *low, double *high)
{
    *low = HUGE_VAL;
    *high = 0.0;
    for (size_t i = 0; i < fit->n_points; i++) {
        *low = fmin(*low, fit->point[i].molar.mn_g_mol);
        *high = fmax(*high, fit->point[i].molar.mn_g_mol);
    }
}

static void put_mn_axis(FILE *to, const ce_fit *fit)
{
    double low, high;
    span(fit, &low, &high);
    fprintf(to, "set logscale x\nset xlabel 'Mn / (kg/mol)'\nset xrange [%.6g:%.6g]\n",
            low / 1400.0, high * 1.4 / 1000.0);
}

/* ---- residuals ---------------------------------------------------------------------------- */

double ce_figure_residuals(const ce_fit *fit, const char *polymer, FILE *to)
{
    static const double height = 0.7;
    ce_plot_begin(to, "residuals", title_of(polymer, "residuals"), height);
    fputs("# Mn kg/mol, residual in units of its uncertainty, residual K\n$residuals << EOD\n", to);
    double most = 3.0;
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        const double z = p->residual_K * sqrt(p->weight);
        ce_plot_number(to, p->molar.mn_g_mol / 1000.0);
        ce_plot_number(to, z);
        ce_plot_number(to, p->residual_K);
        fputc('\n', to);
        most = fmax(most, 1.15 * fabs(z));
    }
    fputs("EOD\n\n", to);
    put_mn_axis(to, fit);
    fprintf(
        to,
        "set ylabel 'residual / its uncertainty'\nset yrange [%.3g:%.3g]\nunset key\n"
        "set object 1 rectangle from graph 0, first -2 to graph 1, first 2 behind fillcolor rgb "
        "'#eeeeee' fillstyle solid noborder\n",
        -most, most);
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        const double z = p->residual_K * sqrt(p->weight);
        fputs("set label ", to);
        ce_plot_text(to, p->name, 14);
        fprintf(to, " at %.6g,%.4g center offset 0,%s noenhanced\n", p->molar.mn_g_mol / 1000.0, z,
                z < 0.0 ? "-0.9" : "0.9");
    }
    fputs("plot 0 with lines linestyle 2 notitle, \\\n"
          "     $residuals using 1:2 with impulses linestyle 1 notitle, \\\n"
          "     $residuals using 1:2 with points linestyle 1 notitle\n",
          to);
    return height;
}

/* ---- influence ---------------------------------------------------------------------------- */

static void put_bars(FILE *to, const char *label, int column, const char *reference)
{
    fprintf(to,
            "set ylabel '%s'\nplot %s$influence using 0:%d with boxes fillcolor rgb '#1f4e8c' "
            "fillstyle solid 0.55 border linecolor rgb '#1f4e8c' notitle\n",
            label, reference, column);
}

double ce_figure_influence(const ce_fit *fit, const char *polymer, FILE *to)
{
    static const double height = 1.45;
    const ce_parameter *a = &fit->parameter[0], *k = &fit->parameter[1];
    ce_plot_begin(to, "influence", title_of(polymer, "influence"), height);
    fputs("# leverage, Cook's distance, shift of the first and second parameter over their u when "
          "left "
          "out\n$influence << EOD\n",
          to);
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        ce_plot_number(to, p->leverage);
        ce_plot_number(to, p->influence);
        ce_plot_number(to, p->shift_tg_inf_K / a->u);
        ce_plot_number(to, p->shift_k / k->u);
        fputc('\n', to);
    }
    fputs("EOD\n\nset boxwidth 0.6\nunset key\nset xtics rotate by -60 (", to);
    for (size_t i = 0; i < fit->n_points; i++) {
        if (i > 0) fputs(", ", to);
        ce_plot_text(to, fit->point[i].name, 14);
        fprintf(to, " %zu", i);
    }
    fprintf(to, ") noenhanced\nset xrange [-0.6:%.1f]\nset lmargin 11\nset multiplot layout 4,1\n",
            (double)fit->n_points - 0.4);
    fputs("set yrange [0:1]\nset ytics 0.5\n", to);
    put_bars(to, "leverage", 1, "");
    fputs("set yrange [0:*]\nset ytics auto\n", to);
    put_bars(to, "Cook’s distance", 2, "");
    fputs("set yrange [*:*]\n", to);
    put_bars(to, "shift of Tg_inf / u", 3, "0 with lines linestyle 5 notitle, ");
    char label[80];
    (void)snprintf(label, sizeof label, "shift of %s / u",
                   ce_relation_parameter_name(fit->options.relation, 1));
    put_bars(to, label, 4, "0 with lines linestyle 5 notitle, ");
    fputs("unset multiplot\n", to);
    return height;
}

/* ---- relations ---------------------------------------------------------------------------- */

enum { GRID = 120 };

static void put_difference(FILE *to, const ce_fit *fit, const ce_fit *other, size_t r, double low,
                           double high)
{
    fprintf(to, "# %s: Mn kg/mol, Tg minus that of the fit, K\n$relation%zu << EOD\n",
            ce_relation_name((ce_relation)r), r);
    for (int i = 0; i <= GRID; i++) {
        const double mn = low * pow(high / low, (double)i / GRID);
        const ce_molar m = {.mn_g_mol = mn, .mw_g_mol = mn, .chain_ends = 2.0};
        ce_prediction a, b;
        if (ce_fit_predict(fit, &m, &a) != CE_OK || ce_fit_predict(other, &m, &b) != CE_OK)
            continue;
        ce_plot_number(to, mn / 1000.0);
        ce_plot_number(to, b.tg_K - a.tg_K);
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
}

double ce_figure_relations(const ce_fit *fit, const ce_fit fits[CE_RELATIONS], const char *polymer,
                           FILE *to)
{
    static const double height = 0.85;
    static const char *const dash[CE_RELATIONS] = {"1",     "(8,4)",  "(8,3,2,3)",
                                                   "(2,3)", "(14,4)", "(4,4)"};
    double low, high;
    span(fit, &low, &high);
    ce_plot_begin(to, "relations", title_of(polymer, "relations"), height);
    for (size_t r = 0; r < CE_RELATIONS; r++)
        if (fits[r].p > 0 && r != (size_t)fit->options.relation)
            put_difference(to, fit, &fits[r], r, low / 1.25, high * 2.0);
    fputs("# standards: Mn kg/mol, u, Tg minus curve K, u\n$standards << EOD\n", to);
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *p = &fit->point[i];
        ce_plot_number(to, p->molar.mn_g_mol / 1000.0);
        ce_plot_number(to, p->residual_K);
        ce_plot_number(to, 1.0 / sqrt(p->weight));
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
    put_mn_axis(to, fit);
    fprintf(to, "set ylabel 'Tg minus %s / K'\nset key maxcols 2\n",
            ce_relation_name(fit->options.relation));
    fputs("plot 0 with lines linestyle 2 notitle, \\\n", to);
    for (size_t r = 0; r < CE_RELATIONS; r++)
        if (fits[r].p > 0 && r != (size_t)fit->options.relation)
            fprintf(to,
                    "     $relation%zu using 1:2 with lines linestyle 1 linewidth 1.2 dashtype %s "
                    "title '%s', \\\n",
                    r, dash[r], ce_relation_name((ce_relation)r));
    fputs("     $standards using 1:2:3 with yerrorbars linestyle 6 title 'standards'\n", to);
    return height;
}

/* ---- working range ------------------------------------------------------------------------ */

static void put_range_rows(FILE *to, const ce_fit *fit, size_t runs, double low, double high)
{
    fprintf(to, "# Mn kg/mol, half-width over Mn %%, %zu run%s of an unknown\n$runs%zu << EOD\n",
            runs, runs == 1 ? "" : "s", runs);
    for (int i = 0; i <= GRID; i++) {
        const double mn = low * pow(high / low, (double)i / GRID);
        ce_range_row row;
        if (ce_working_range(fit, runs, 0.0, 1, &mn, &row, NULL) != CE_OK ||
            row.bound != CE_TWO_SIDED)
            continue;
        ce_plot_number(to, mn / 1000.0);
        ce_plot_number(to, 100.0 * row.relative);
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
}

double ce_figure_range(const ce_fit *fit, const char *polymer, FILE *to)
{
    static const double height = 0.8;
    double low, high, tg, ceiling;
    span(fit, &low, &high);
    ce_plot_begin(to, "range", title_of(polymer, "working range"), height);
    put_range_rows(to, fit, 1, low / 1.25, high * 2.0);
    put_range_rows(to, fit, 3, low / 1.25, high * 2.0);
    fputs("# standards: Mn kg/mol\n$standards << EOD\n", to);
    for (size_t i = 0; i < fit->n_points; i++) {
        ce_plot_number(to, fit->point[i].molar.mn_g_mol / 1000.0);
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
    put_mn_axis(to, fit);
    fprintf(to,
            "set logscale y\nset yrange [1:200]\nset ylabel 'half-width of the %g %% interval / %% "
            "of Mn'\n",
            100.0 * fit->options.level);
    for (size_t k = 0; k < 2; k++) {
        if (ce_ceiling(fit, k == 0 ? 1 : 3, 0.0, &tg, &ceiling) != CE_OK) continue;
        fprintf(to,
                "set arrow from %.6g, graph 0 to %.6g, graph 1 nohead linecolor rgb '#808080' "
                "dashtype (2,4)\n",
                ceiling / 1000.0, ceiling / 1000.0);
        fprintf(to, "set label 'ceiling, %s' at %.6g, graph 0.04 rotate by 90 left offset -0.6,0\n",
                k == 0 ? "one run" : "three runs", ceiling / 1000.0);
    }
    fputs("plot $runs1 using 1:2 with lines linestyle 2 title 'one run', \\\n"
          "     $runs3 using 1:2 with lines linestyle 2 dashtype (8,4) title 'three runs', \\\n"
          "     $standards using 1:(1.15) with points linestyle 1 pointtype 8 title 'standards'\n",
          to);
    return height;
}

/* ---- control chart ------------------------------------------------------------------------ */

double ce_figure_control(const ce_check_result *result, FILE *to)
{
    static const double height = 0.75;
    const ce_check *k = result->check;
    double most = 4.0;
    ce_plot_begin(to, "control", title_of(result->polymer, "control chart"), height);
    fputs("# number, difference in units of its uncertainty, beyond a limit (0 no, 1 warning, 2 "
          "action)\n$chart << EOD\n",
          to);
    for (size_t i = 0; i < k->n_chart; i++) {
        fprintf(to, "%zu ", i + 1);
        ce_plot_number(to, k->chart[i].z);
        fprintf(to, "%d\n", k->chart[i].action ? 2 : k->chart[i].warning ? 1 : 0);
        most = fmax(most, 1.15 * fabs(k->chart[i].z));
    }
    fputs("EOD\n\nset xtics rotate by -60 (", to);
    const size_t stride = 1 + k->n_chart / 16;
    for (size_t i = 0; i < k->n_chart; i += stride) {
        if (i > 0) fputs(", ", to);
        ce_plot_text(to, result->date[i], 12);
        fprintf(to, " %zu", i + 1);
    }
    fprintf(
        to,
        ") noenhanced\nset xrange [0.4:%.1f]\nset yrange [%.3g:%.3g]\n"
        "set ylabel 'difference / its uncertainty'\nset key maxcols 3\n"
        "set object 1 rectangle from graph 0, first -2 to graph 1, first 2 behind fillcolor rgb "
        "'#eeeeee' fillstyle solid noborder\n"
        "plot 0 with lines linestyle 2 notitle, \\\n"
        "     2 with lines linestyle 3 title 'warning', -2 with lines linestyle 3 notitle, \\\n"
        "     3 with lines linestyle 6 title 'action', -3 with lines linestyle 6 notitle, \\\n"
        "     $chart using 1:2 with linespoints linestyle 1 notitle, \\\n"
        "     $chart using 1:($3>1?$2:NaN) with points linestyle 6 pointsize 1.4 notitle\n",
        (double)k->n_chart + 0.6, -most, most);
    return height;
}
