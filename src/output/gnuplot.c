/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/gnuplot.h"

#include "output/number.h"
#include "output/text.h"

#include <chainend/version.h>

#include <math.h>
#include <stdlib.h>
#include <string.h>

void ce_plot_text(FILE *to, const char *s, size_t columns)
{
    char *clean = ce_text_shown(s, columns);
    (void)fputc('\'', to);
    for (const char *p = clean == NULL ? "" : clean; *p != '\0'; p++) {
        /* gnuplot 5.4 stumbles over doubled quotes at the ends of a string: the typographic one is drawn alike */
        if (*p == '\'')
            (void)fputs("\xE2\x80\x99", to);
        else
            (void)fputc(*p, to);
    }
    (void)fputc('\'', to);
    free(clean);
}

void ce_plot_number(FILE *to, double x)
{
    char text[CE_NUMBER_ROOM];
    (void)snprintf(text, sizeof text, "%.8g", x);
    fprintf(to, "%s ", isfinite(x) ? text : "NaN");
}

static void begin(FILE *to, const char *kind, const char *title, double columns, double height)
{
    char *clean = ce_text_shown(title, 200);
    fprintf(to,
            "# %s\n"
            "# Figure '%s' of chainend %s. The data are inside; edit what you like.\n"
            "# To draw it:  gnuplot -e \"set terminal pdfcairo size %.1fcm,%.2fcm font ',8'\" "
            "THIS_FILE > figure.pdf%s\n",
            clean == NULL ? "" : clean, kind, CE_VERSION_TEXT, 8.5 * columns,
            8.5 * columns * height, columns > 1.0 ? CE_PLOT_WIDE : "");
    free(clean);
    fputs("\n"
          "set encoding utf8\n"
          "set termoption noenhanced\n"
          "set border 31 linewidth 0.6 linecolor rgb '#404040'\n"
          "set tics nomirror scale 0.6 textcolor rgb '#202020'\n"
          "set key below samplen 2 spacing 1.1 textcolor rgb '#202020' noenhanced Left reverse\n"
          "set style line 1 linecolor rgb '#000000' linewidth 1.0 pointtype 7 pointsize 0.45\n"
          "set style line 2 linecolor rgb '#1f4e8c' linewidth 1.4\n"
          "set style line 3 linecolor rgb '#8c5a1f' linewidth 1.0 dashtype (8,4)\n"
          "set style line 4 linecolor rgb '#2f7d4f' linewidth 1.0 dashtype (8,3,2,3)\n"
          "set style line 5 linecolor rgb '#d5d5d5' linewidth 0.8\n"
          "set style line 6 linecolor rgb '#b8400f' linewidth 1.2 pointtype 12 pointsize 0.7\n\n",
          to);
}

void ce_plot_begin(FILE *to, const char *kind, const char *title, double height)
{
    begin(to, kind, title, 1.0, height);
}

void ce_plot_begin_wide(FILE *to, const char *kind, const char *title, double height)
{
    begin(to, kind, title, 2.0, height);
}

ce_picture ce_picture_of(const char *path)
{
    static const char *const endings[CE_PICTURES] = {".svg", ".png", ".pdf"};
    size_t n = strlen(path);
    for (int i = 0; i < CE_PICTURES; i++)
        if (n > 4 && strcmp(path + n - 4, endings[i]) == 0) return (ce_picture)i;
    return CE_PICTURES;
}
