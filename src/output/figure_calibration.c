/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/figure.h"

#include "base/quantity.h"
#include "output/gnuplot.h"

#include <math.h>

#define HEIGHT 1.45
#define GRID   160

typedef struct {
    double low_mn, high_mn; /* drawn, g/mol */
} extent;

static extent extent_of(const ce_estimate_result *r)
{
    extent x = {(double)INFINITY, 0.0};
    for (size_t i = 0; i < r->fit->n_points; i++) {
        x.low_mn = fmin(x.low_mn, r->fit->point[i].molar.mn_g_mol);
        x.high_mn = fmax(x.high_mn, r->fit->point[i].molar.mn_g_mol);
    }
    x.low_mn /= 1.25;
    x.high_mn *= 2.0;
    return x;
}

/* Linear chains; the bands are those of the mean curve and of one run of a new sample. */
static void put_band(FILE *to, const ce_estimate_result *r, const char *name, extent x,
                     bool reciprocal)
{
    fprintf(to,
            "# Mn kg/mol, 1/Mn mol/kg, Tg °C, confidence low and high, prediction low and "
            "high\n$%s << EOD\n",
            name);
    for (int i = 0; i <= GRID; i++) {
        double f = (double)i / GRID;
        double mn = reciprocal ? 1.0 / (1.0 / x.high_mn + f * (1.0 / x.low_mn - 1.0 / x.high_mn))
                               : x.low_mn * pow(x.high_mn / x.low_mn, f);
        if (reciprocal && i == 0) mn = (double)INFINITY; /* the asymptote belongs to this panel */
        ce_molar molar = {.mn_g_mol = mn, .mw_g_mol = mn, .chain_ends = 2.0};
        ce_band band;
        if (ce_fit_band(r->fit, &molar, 0.0, 1, 0.0, &band) != CE_OK) continue;
        ce_plot_number(to, mn / 1000.0);
        ce_plot_number(to, 1000.0 / mn);
        const double T[] = {band.tg_K, band.mean_low_K, band.mean_high_K, band.new_low_K,
                            band.new_high_K};
        for (size_t k = 0; k < sizeof T / sizeof *T; k++) ce_plot_number(to, ce_degC_from_K(T[k]));
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
}

static void put_standards(FILE *to, const ce_estimate_result *r)
{
    fputs("# standards: Mn kg/mol, u; 1/Mn mol/kg, u; Tg °C, u\n$standards << EOD\n", to);
    for (size_t i = 0; i < r->fit->n_points; i++) {
        const ce_fit_point *p = &r->fit->point[i];
        double mn = p->molar.mn_g_mol / 1000.0, u = p->mn_u_g_mol / 1000.0;
        ce_plot_number(to, mn);
        ce_plot_number(to, u);
        ce_plot_number(to, 1.0 / mn);
        ce_plot_number(to, u / (mn * mn));
        ce_plot_number(to, ce_degC_from_K(p->tg_K));
        ce_plot_number(to, isfinite(p->tg_u_K) ? p->tg_u_K : 0.0);
        fputc('\n', to);
    }
    fputs("EOD\n\n", to);
}

/* An interval open upwards is drawn to the edge; above the plateau there is nothing to draw. */
static size_t put_unknowns(FILE *to, const ce_estimate_result *r, extent x)
{
    size_t drawn = 0;
    fputs("# unknowns: Tg °C; Mn kg/mol, low, high; 1/Mn mol/kg, low, high\n$unknowns << EOD\n",
          to);
    for (size_t i = 0; i < r->n; i++) {
        const ce_answer *a = &r->answer[i];
        if (a->status != CE_OK || a->tg_of_mn || a->mn.bound == CE_ABOVE_PLATEAU ||
            a->mn.bound == CE_UNDETERMINED)
            continue;
        const ce_estimate *e = &a->mn;
        double high = isfinite(e->high_g_mol) ? e->high_g_mol : (double)INFINITY;
        bool on = isfinite(e->mn_g_mol) && e->mn_g_mol < x.high_mn;
        ce_plot_number(to, ce_degC_from_K(e->tg_K));
        ce_plot_number(to, on ? e->mn_g_mol / 1000.0 : (double)NAN);
        ce_plot_number(to, e->low_g_mol / 1000.0);
        ce_plot_number(to, fmin(high, x.high_mn) / 1000.0);
        ce_plot_number(to, isfinite(e->mn_g_mol) ? 1000.0 / e->mn_g_mol : (double)NAN);
        ce_plot_number(to, 1000.0 / e->low_g_mol);
        ce_plot_number(to, isfinite(high) ? 1000.0 / high : 0.0);
        fprintf(to, "# answer %zu\n", i + 1);
        drawn++;
    }
    fputs("EOD\n\n", to);
    return drawn;
}

/* Columns of one panel's abscissa in the data blocks above. */
typedef struct {
    const char *band;
    int band_x, standard_x, standard_u, unknown_x, unknown_low, unknown_high;
} panel;

static void put_panel(FILE *to, const panel *p, bool unknowns)
{
    fprintf(to,
            "plot $%s using %d:6:7 with filledcurves fillcolor rgb '#ececec' title 'one run of a "
            "new sample', \\\n"
            "     $%s using %d:4:5 with filledcurves fillcolor rgb '#c4cfdf' title 'curve', \\\n"
            "     $%s using %d:3 with lines linestyle 2 notitle, \\\n"
            "     $standards using %d:5:%d:6 with xyerrorbars linestyle 1 title 'standards'",
            p->band, p->band_x, p->band, p->band_x, p->band, p->band_x, p->standard_x,
            p->standard_u);
    if (unknowns)
        fprintf(to,
                ", \\\n     $unknowns using %d:1:($%d-$%d):(0) with vectors nohead linestyle 6 "
                "title 'unknowns', \\\n"
                "     $unknowns using %d:1 with points linestyle 6 notitle",
                p->unknown_low, p->unknown_high, p->unknown_low, p->unknown_x);
    fputs("\n\n", to);
}

double ce_figure_calibration(const ce_estimate_result *r, FILE *to)
{
    extent x = extent_of(r);
    ce_plot_begin(to, "calibration", r->polymer == NULL ? "Tg against Mn" : r->polymer, HEIGHT);
    put_band(to, r, "band_log", x, false);
    put_band(to, r, "band_reciprocal", x, true);
    put_standards(to, r);
    bool unknowns = put_unknowns(to, r, x) > 0;
    fputs("set ylabel ", to);
    char text[120];
    (void)snprintf(text, sizeof text, "Tg (%s) / °C", ce_construction_name(r->construction));
    ce_plot_text(to, text, 0);
    fputs(" noenhanced\nset multiplot layout 2,1\nunset key\nset logscale x\n", to);
    fprintf(to, "set xlabel 'Mn / (kg/mol)'\nset xrange [%.6g:%.6g]\n", x.low_mn / 1000.0,
            x.high_mn / 1000.0);
    if (isfinite(r->ceiling_mn_g_mol)) {
        fprintf(to,
                "set arrow 1 from %.6g, graph 0 to %.6g, graph 1 nohead linecolor rgb '#808080' "
                "dashtype (2,4)\n"
                "set label 1 'ceiling' at %.6g, graph 0.04 rotate by 90 left offset -0.6,0 "
                "noenhanced\n",
                r->ceiling_mn_g_mol / 1000.0, r->ceiling_mn_g_mol / 1000.0,
                r->ceiling_mn_g_mol / 1000.0);
    }
    put_panel(to, &(panel){"band_log", 1, 1, 2, 2, 3, 4}, unknowns);
    fputs("unset arrow 1\nunset label 1\nset key inside top right noreverse Right maxcols 1\nunset "
          "logscale "
          "x\nset xlabel '1/Mn / (mol/kg)'\n",
          to);
    fprintf(to, "set xrange [%.6g:%.6g]\n", -0.02 * 1000.0 / x.low_mn, 1000.0 / x.low_mn);
    put_panel(to, &(panel){"band_reciprocal", 2, 3, 4, 5, 6, 7}, unknowns);
    fputs("unset multiplot\n", to);
    return HEIGHT;
}
