/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/figure.h"

#include "base/quantity.h"
#include "output/gnuplot.h"
#include "output/number.h"
#include "output/text.h"

#include <math.h>
#include <string.h>

#define HEIGHT     1.25
#define MOST_DRAWN 2000 /* points: more than a column has dots */

static double line_at(const ce_line *line, double kelvin)
{
    return line->at_ref + line->slope * (kelvin - line->ref_K);
}

static void put_curve(FILE *to, const ce_run *run, const ce_segment *s, const ce_transition *t)
{
    const double *T = ce_run_temperature_K(run), *y = ce_run_signal(run);
    size_t step = 1 + s->n / MOST_DRAWN;
    fputs("# temperature °C, heat flow, heat flow minus glassy line\n$curve << EOD\n", to);
    for (size_t i = s->first; i < s->first + s->n; i += step) {
        ce_plot_number(to, ce_degC_from_K(T[i]));
        ce_plot_number(to, y[i]);
        ce_plot_number(to, y[i] - line_at(&t->glass_line, T[i]));
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
}

/* A straight line needs its two ends only. */
static void put_line(FILE *to, const char *name, const ce_line *line, double from_K, double to_K)
{
    fprintf(to, "$%s << EOD\n", name);
    for (int i = 0; i < 2; i++) {
        double T = i == 0 ? from_K : to_K;
        ce_plot_number(to, ce_degC_from_K(T));
        ce_plot_number(to, line_at(line, T));
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
}

/* Where each construction stands on the drawing: fictive temperature has no place on the curve and gets the
 * abscissa only. */
static double height_of(const ce_transition *t, ce_construction c, double T)
{
    double g = line_at(&t->glass_line, T), l = line_at(&t->liquid_line, T);
    switch (c) {
    case CE_ONSET:
        return g;
    case CE_END:
        return l;
    case CE_HALF_STEP:
        return 0.5 * (g + l);
    case CE_MIDPOINT:
        return 0.5 * (line_at(&t->glass_line, t->tg[CE_ONSET].value_K) +
                      line_at(&t->liquid_line, t->tg[CE_END].value_K));
    case CE_INFLECTION:
        return line_at(&t->tangent, T);
    case CE_FICTIVE:
    case CE_CONSTRUCTIONS:
        break;
    }
    return g;
}

static void put_marks(FILE *to, const ce_transition *t)
{
    fputs("# constructions: temperature °C, heat flow, u in K\n$marks << EOD\n", to);
    for (ce_construction c = 0; c < CE_CONSTRUCTIONS; c++) {
        if (!isfinite(t->tg[c].value_K)) continue;
        ce_plot_number(to, ce_degC_from_K(t->tg[c].value_K));
        ce_plot_number(to, height_of(t, c, t->tg[c].value_K));
        ce_plot_number(to, t->tg[c].u_K);
        fprintf(to, "# %s\n", ce_construction_name(c));
    }
    fputs("EOD\n\n", to);
}

/* The start-up would squeeze the step into a corner: the axis fits the curve from the glassy window on. */
static void put_ranges(FILE *to, const ce_run *run, const ce_segment *s, const ce_transition *t)
{
    const double *T = ce_run_temperature_K(run), *y = ce_run_signal(run);
    double low = (double)INFINITY, high = -(double)INFINITY;
    for (size_t i = s->first; i < s->first + s->n; i++) {
        if (T[i] < t->glass.low_K || T[i] > t->liquid.high_K) continue;
        low = fmin(low, y[i]);
        high = fmax(high, y[i]);
    }
    double pad = high - low;
    fputs("set xrange [", to);
    ce_plot_number(to, ce_degC_from_K(fmax(s->low_K, t->glass.low_K - 25.0)));
    fputs(":", to);
    ce_plot_number(to, ce_degC_from_K(fmin(s->high_K, t->liquid.high_K + 25.0)));
    fputs("]\nset yrange [", to);
    ce_plot_number(to, low - 0.9 * pad);
    fputs(":", to);
    ce_plot_number(to, high + 0.25 * pad);
    fputs("]\n", to);
}

static void put_window(FILE *to, int object, const ce_window *w)
{
    fprintf(to, "set object %d rectangle from ", object);
    ce_plot_number(to, ce_degC_from_K(w->low_K));
    fputs(", graph 0 to ", to);
    ce_plot_number(to, ce_degC_from_K(w->high_K));
    fputs(", graph 1 behind fillcolor rgb '#eeeeee' fillstyle solid noborder\n", to);
}

/* The list of readings stands where a heating curve leaves room: lower right. */
static void put_readings(FILE *to, const ce_transition *t, ce_construction take)
{
    static const ce_construction order[] = {CE_ONSET,      CE_MIDPOINT, CE_HALF_STEP,
                                            CE_INFLECTION, CE_END,      CE_FICTIVE};
    double at = 0.05 + 0.075 * (CE_CONSTRUCTIONS - 1);
    for (size_t i = 0; i < CE_CONSTRUCTIONS; i++, at -= 0.075) {
        const ce_reading *r = &t->tg[order[i]];
        char a[CE_NUMBER_ROOM], b[CE_NUMBER_ROOM], text[160];
        (void)snprintf(text, sizeof text, "%s%s %s ± %s °C", order[i] == take ? "Tg: " : "",
                       ce_construction_name(order[i]), ce_celsius(a, r->value_K, r->u_K),
                       ce_fixed(b, r->u_K, ce_decimals(r->u_K)));
        fputs("set label ", to);
        ce_plot_text(to, text, 0);
        fprintf(to, " at graph 0.97, graph %.3f right noenhanced%s\n", at,
                order[i] == take ? " textcolor rgb '#b8400f'" : "");
    }
}

/* The next of 1, 2, 5, 10, 20 ... at or above x > 0. */
static double round_up(double x)
{
    static const double steps[] = {1.0, 2.0, 5.0, 10.0};
    const double unit = pow(10.0, floor(log10(x)));
    for (size_t i = 0; i < 3; i++)
        if (x <= steps[i] * unit) return steps[i] * unit;
    return 10.0 * unit;
}

/* What the curve leaves over beside its lines, within the windows: noise, and what is not noise. Returns
 * the size of the axis, % of the step. */
static double put_residuals(FILE *to, const ce_run *run, const ce_segment *s,
                            const ce_transition *t)
{
    const double *T = ce_run_temperature_K(run), *y = ce_run_signal(run);
    const ce_window *window[] = {&t->glass, &t->liquid};
    const ce_line *line[] = {&t->glass_line, &t->liquid_line};
    const double half = t->tg[CE_HALF_STEP].value_K;
    const double height = fabs(line_at(&t->liquid_line, half) - line_at(&t->glass_line, half));
    size_t step = 1 + s->n / MOST_DRAWN;
    double most = 0.0;
    fputs("# temperature °C, heat flow minus line of its window in % of the step\n$residuals << "
          "EOD\n",
          to);
    for (int w = 0; w < 2; w++) {
        for (size_t i = s->first; i < s->first + s->n; i += step) {
            if (T[i] < window[w]->low_K || T[i] > window[w]->high_K) continue;
            const double off = 100.0 * (y[i] - line_at(line[w], T[i])) / height;
            most = fmax(most, fabs(off));
            ce_plot_number(to, ce_degC_from_K(T[i]));
            ce_plot_number(to, off);
            fputc('\n', to);
        }
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
    return most > 0.0 && isfinite(most) ? round_up(most) : 1.0;
}

double ce_figure_run(const ce_evaluation *e, ce_construction take, FILE *to)
{
    const ce_transition *t = &e->found.item[0];
    const ce_segment *s = &e->found.segment;
    char rate[CE_NUMBER_ROOM], title[400];
    const char *slash = strrchr(e->path, '/');
    (void)snprintf(title, sizeof title, "%.300s, %s %zu at %s K/min",
                   slash == NULL ? e->path : slash + 1, ce_segment_kind_name(s->kind),
                   s->nth_of_kind, ce_fixed(rate, fabs(s->rate_K_min), 1));
    ce_plot_begin(to, "run", title, HEIGHT);
    put_curve(to, e->run, s, t);
    double lo = t->glass.low_K, hi = t->liquid.high_K;
    double end = t->tg[CE_END].value_K, onset = t->tg[CE_ONSET].value_K,
           reach = 0.1 * (end - onset);
    put_line(to, "glassy", &t->glass_line, lo, hi);
    put_line(to, "liquid", &t->liquid_line, lo, hi);
    if (isfinite(reach)) put_line(to, "tangent", &t->tangent, onset - reach, end + reach);
    put_marks(to, t);
    const double most = put_residuals(to, e->run, s, t);
    put_window(to, 1, &t->glass);
    put_window(to, 2, &t->liquid);
    fputs("set title ", to);
    ce_plot_text(to, title, 44);
    fprintf(to, " noenhanced\nset xlabel 'temperature / °C'\nset ylabel '%s / (%s)'\n",
            ce_run_signal_kind(e->run) == CE_SIGNAL_HEAT_CAPACITY ? "specific heat capacity"
                                                                  : "heat flow, endothermic up",
            ce_signal_unit(ce_run_signal_kind(e->run)));
    put_ranges(to, e->run, s, t);
    put_readings(to, t, take);
    fputs("set key below maxrows 2 samplen 1.5 width -2\nset lmargin 9\nset multiplot\n"
          "set origin 0,0.24\nset size 1,0.76\n"
          "plot $curve using 1:2 with lines linestyle 1 title 'measured', \\\n"
          "     $glassy using 1:2 with lines linestyle 3 title 'glassy line', \\\n"
          "     $liquid using 1:2 with lines linestyle 4 title 'liquid line', \\\n",
          to);
    if (isfinite(reach))
        fputs("     $tangent using 1:2 with lines linestyle 2 title 'steepest tangent', \\\n", to);
    fputs("     $marks using 1:2 with points linestyle 6 title 'constructions'\n"
          "unset title\nunset key\nunset label\nset origin 0,0\nset size 1,0.25\nset xlabel ''\n"
          "set ylabel '% of step'\nset xzeroaxis linestyle 5\n",
          to);
    fprintf(to,
            "set yrange [%g:%g]\nset ytics (%g, 0, %g)\n"
            "plot $residuals using 1:2 with lines linestyle 1 linewidth 0.6 notitle\n"
            "unset multiplot\n",
            -1.1 * most, 1.1 * most, -most, most);
    return HEIGHT;
}
