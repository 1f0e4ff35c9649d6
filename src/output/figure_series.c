/* SPDX-License-Identifier: GPL-3.0-or-later
 * Many runs at a glance: overlay and contact sheet. */
#include "output/figure.h"

#include "base/quantity.h"
#include "output/gnuplot.h"
#include "output/number.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

enum { MOST_DRAWN = 240, COLUMNS = 5 };
static const double around_K = 45.0; /* drawn on each side of the Tg */

static bool is_read(const ce_figure_item *item)
{
    return item->evaluation->status == CE_OK && item->evaluation->found.n > 0 &&
           item->evaluation->run != NULL;
}

static const ce_transition *step_of(const ce_figure_item *item)
{
    return &item->evaluation->found.item[0];
}

static double between(const ce_transition *t, double T, double y)
{
    const double g = t->glass_line.at_ref + t->glass_line.slope * (T - t->glass_line.ref_K);
    const double l = t->liquid_line.at_ref + t->liquid_line.slope * (T - t->liquid_line.ref_K);
    return (y - g) / (l - g);
}

/* The curve from glassy line (0) to liquid line (1), with a shift upwards, near its step. */
static void put_curve(FILE *to, const ce_figure_item *item, size_t i, double shift)
{
    const ce_transition *t = step_of(item);
    const ce_segment *s = &item->evaluation->found.segment;
    const double *T = ce_run_temperature_K(item->evaluation->run);
    const double *y = ce_run_signal(item->evaluation->run);
    const double from = t->tg[CE_HALF_STEP].value_K - around_K;
    const double until = t->tg[CE_HALF_STEP].value_K + around_K;
    size_t inside = 0;
    for (size_t k = s->first; k < s->first + s->n; k++) inside += T[k] > from && T[k] < until;
    const size_t stride = 1 + inside / MOST_DRAWN;
    fprintf(to, "$run%zu << EOD\n", i + 1);
    for (size_t k = s->first, seen = 0; k < s->first + s->n; k++) {
        if (!(T[k] > from && T[k] < until) || seen++ % stride != 0) continue;
        ce_plot_number(to, ce_degC_from_K(T[k]));
        ce_plot_number(to, between(t, T[k], y[k]) + shift);
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
}

static const char *short_name(const char *path)
{
    const char *slash = strrchr(path, '/');
    return slash == NULL ? path : slash + 1;
}

/* ---- overlay ------------------------------------------------------------------------------ */

static int by_mn(const void *a, const void *b, void *context)
{
    const ce_figure_runs *runs = context;
    const size_t i = *(const size_t *)a, k = *(const size_t *)b;
    const double u = isnan(runs->item[i].mn_g_mol) ? HUGE_VAL : runs->item[i].mn_g_mol;
    const double v = isnan(runs->item[k].mn_g_mol) ? HUGE_VAL : runs->item[k].mn_g_mol;
    if (u != v) return u < v ? -1 : 1;
    return (i > k) - (i < k);
}

double ce_figure_overlay(const ce_figure_runs *runs, FILE *to)
{
    static const double apart = 0.45;
    size_t *order = calloc(runs->n + 1, sizeof *order), n = 0;
    if (order == NULL) return 0.0;
    for (size_t i = 0; i < runs->n; i++)
        if (is_read(&runs->item[i])) order[n++] = i;
    qsort_r(order, n, sizeof *order, by_mn, (void *)(uintptr_t)runs);
    const double height = fmin(2.6, 0.7 + 0.055 * (double)n);
    ce_plot_begin(to, "overlay", runs->polymer == NULL ? "all runs" : runs->polymer, height);
    fputs("# temperature °C, share of the step (0 glassy line, 1 liquid line) shifted upwards\n",
          to);
    for (size_t k = 0; k < n; k++) put_curve(to, &runs->item[order[k]], k, apart * (double)k);
    fputs("# Tg °C, height of its mark\n$tg << EOD\n", to);
    for (size_t k = 0; k < n; k++) {
        const ce_reading *r = &step_of(&runs->item[order[k]])->tg[runs->take];
        ce_plot_number(to, ce_degC_from_K(r->value_K));
        ce_plot_number(to, apart * (double)k + 0.5);
        fputc('\n', to);
    }
    fputs(
        "EOD\n\nset xlabel 'temperature / °C'\nset ylabel 'glassy line 0, liquid line 1; shifted'\n"
        "unset ytics\nset rmargin 14\nunset key\nset clip two\n",
        to);
    fprintf(to, "set yrange [-0.4:%.2f]\n", apart * (double)n + 1.6);
    for (size_t k = 0; k < n; k++) {
        const ce_figure_item *item = &runs->item[order[k]];
        char text[200], mn[CE_NUMBER_ROOM];
        if (k > 0 && strcmp(item->sample, runs->item[order[k - 1]].sample) == 0) continue;
        (void)snprintf(text, sizeof text, "%.100s%s%s", item->sample,
                       isnan(item->mn_g_mol) ? "" : "  ",
                       isnan(item->mn_g_mol) ? "" : ce_kg_mol(mn, item->mn_g_mol));
        fputs("set label ", to);
        ce_plot_text(to, text, 16);
        fprintf(to, " at graph 1.02, first %.3f left noenhanced\n", apart * (double)k + 1.0);
    }
    fputs("plot ", to);
    for (size_t k = 0; k < n; k++)
        fprintf(to, "$run%zu using 1:2 with lines linestyle %d notitle, \\\n     ", k + 1,
                isnan(runs->item[order[k]].mn_g_mol) ? CE_LT_UNKNOWN : CE_LT_MEASURED);
    fputs("$tg using 1:2 with points linestyle 2 pointtype 2 pointsize 0.6 notitle\n", to);
    free(order);
    return height;
}

/* ---- contact sheet ------------------------------------------------------------------------ */

static void put_title(FILE *to, const ce_figure_runs *runs, const ce_figure_item *item)
{
    char text[300], tg[CE_NUMBER_ROOM];
    if (is_read(item)) {
        const ce_transition *t = step_of(item);
        const ce_reading *r = &t->tg[runs->take];
        (void)snprintf(text, sizeof text, "%.60s  %s °C", short_name(item->run),
                       ce_celsius(tg, r->value_K, r->u_K));
    } else
        (void)snprintf(text, sizeof text, "%.60s  refused", short_name(item->run));
    fputs("set label 2 ", to);
    ce_plot_text(to, text, 24);
    fputs(" at graph 0.04, graph 0.91 left noenhanced\n", to);
}

/* Doubts that are not the same for every run of a file of one heating. */
static size_t doubts(const ce_transition *t)
{
    size_t n = 0;
    for (size_t i = 0; i < t->n_flags; i++) n += t->flags[i].code != CE_FLAG_FIRST_HEATING;
    return n;
}

static void put_panel(FILE *to, const ce_figure_runs *runs, size_t i)
{
    const ce_figure_item *item = &runs->item[i];
    put_title(to, runs, item);
    if (!is_read(item)) {
        fputs("set border 31 linewidth 1.6 linecolor rgb '#b8400f'\nset label 1 'refused' at graph "
              "0.5, graph 0.5 center textcolor rgb '#b8400f'\nset xrange [0:1]\nplot NaN notitle\n"
              "unset label\n",
              to);
        return;
    }
    const ce_transition *t = step_of(item);
    const double half = t->tg[CE_HALF_STEP].value_K;
    const size_t flagged = doubts(t);
    fprintf(to, "set border 31 linewidth %s linecolor rgb '%s'\n", flagged > 0 ? "1.6" : "0.5",
            flagged > 0 ? "#b8400f" : "#404040");
    fprintf(to, "set xrange [%.4f:%.4f]\n", ce_degC_from_K(half - around_K),
            ce_degC_from_K(half + around_K));
    const ce_window *window[] = {&t->glass, &t->liquid};
    for (int w = 0; w < 2; w++)
        fprintf(to,
                "set object %d rectangle from %.4f, graph 0 to %.4f, graph 1 behind fillcolor rgb "
                "'#e4e4e4' fillstyle solid noborder\n",
                w + 1, ce_degC_from_K(window[w]->low_K), ce_degC_from_K(window[w]->high_K));
    fprintf(to,
            "set arrow 1 from %.4f, graph 0 to %.4f, graph 1 nohead linestyle 2 linewidth 0.7\n",
            ce_degC_from_K(t->tg[runs->take].value_K), ce_degC_from_K(t->tg[runs->take].value_K));
    if (flagged > 0) {
        char text[80];
        (void)snprintf(text, sizeof text, "%zu flag%s: %.40s", flagged, flagged == 1 ? "" : "s",
                       ce_flag_name(t->flags[0].code));
        fputs("set label 1 ", to);
        ce_plot_text(to, text, 0);
        fputs(" at graph 0.04, graph 0.76 left textcolor rgb '#b8400f' noenhanced\n", to);
    }
    fprintf(to,
            "plot 0 with lines linestyle 3 linewidth 0.5 notitle, \\\n"
            "     1 with lines linestyle 4 linewidth 0.5 notitle, \\\n"
            "     $run%zu using 1:2 with lines linestyle 1 linewidth 0.6 notitle\n"
            "unset label\nunset arrow 1\nunset object 1\nunset object 2\n\n",
            i + 1);
}

double ce_figure_contact(const ce_figure_runs *runs, FILE *to)
{
    const size_t columns = runs->n < COLUMNS ? (runs->n > 0 ? runs->n : 1) : COLUMNS;
    const size_t rows = (runs->n + columns - 1) / columns;
    const double height = fmax(0.2, 0.17 * (double)rows * COLUMNS / (double)columns);
    ce_plot_begin_wide(to, "contact", runs->polymer == NULL ? "all runs" : runs->polymer, height);
    fputs("# temperature °C, share of the step (0 glassy line, 1 liquid line)\n", to);
    for (size_t i = 0; i < runs->n; i++)
        if (is_read(&runs->item[i])) put_curve(to, &runs->item[i], i, 0.0);
    fprintf(to,
            "unset key\nset yrange [-0.5:3.0]\nunset ytics\nset xtics 30 offset 0,0.4\n"
            "set multiplot layout %zu,%zu margins 0.01,0.99,%.4f,0.995 spacing 0.012,%.4f\n\n",
            rows, columns, 0.03 / height, 0.038 / height);
    for (size_t i = 0; i < runs->n; i++) put_panel(to, runs, i);
    fputs("unset multiplot\n", to);
    return height;
}
