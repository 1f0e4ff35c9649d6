/* SPDX-License-Identifier: GPL-3.0-or-later
 * What every gnuplot script of ours has in common: safe text, data inside, one look. */
#ifndef CE_OUTPUT_GNUPLOT_H
#define CE_OUTPUT_GNUPLOT_H

#include <chainend/base.h>

#include <stddef.h>
#include <stdio.h>

/* A string literal that gnuplot takes as plain text whatever stands in it: single-quoted, quotes made typographic,
 * control characters and direction marks replaced, cut to columns (0 = any length). To be used with the
 * keyword noenhanced. */
void ce_plot_text(FILE *to, const char *s, size_t columns);
/* One number of a data line, with a blank behind it; "NaN" when not finite. */
void ce_plot_number(FILE *to, double x);

/* Comment block and look: fonts, line types 1-6, tics, grid. title says what the figure shows, kind is the
 * word of the command line; height in units of the width of 85 mm (a journal's single column). */
void ce_plot_begin(FILE *to, const char *kind, const char *title, double height);
/* The same for a figure of two columns' width, whose height is in units of that; its script says so in a line
 * that ce_render() goes by. */
void ce_plot_begin_wide(FILE *to, const char *kind, const char *title, double height);
#define CE_PLOT_WIDE "\n# Made for the width of two columns.\n"

/* The look, used the same way in every figure. Line types: 1 measured (black), 2 fitted (blue), 3 glassy
 * line (brown, dashed), 4 liquid line (green, dash-dotted), 5 bands (grey), 6 unknown (vermilion). */
enum { CE_LT_MEASURED = 1, CE_LT_FITTED, CE_LT_GLASS, CE_LT_LIQUID, CE_LT_BAND, CE_LT_UNKNOWN };

typedef enum {
    CE_PICTURE_SVG,
    CE_PICTURE_PNG,
    CE_PICTURE_PDF,
    CE_PICTURES,
    CE_PICTURE_TERMINAL /* characters, on standard output */
} ce_picture;
/* By the ending of a file name; CE_PICTURES when it is none of .svg, .png, .pdf. */
ce_picture ce_picture_of(const char *path);

/* ce_render - draw a script with the gnuplot of this machine.
 *   in   script    whole text, n bytes
 *        height    as given to ce_plot_begin()
 *        path      where the picture goes, written whole or not at all; NULL for
 *                  CE_PICTURE_TERMINAL
 *   ret  CE_OK | CE_E_IO (no gnuplot: *missing is true; gnuplot failed: err has its first words) */
ce_status ce_render(const char *script, size_t n, double height, ce_picture kind, const char *path,
                    _Bool *missing, ce_error *err);

/* The same into memory; *bytes is the caller's to free(). */
ce_status ce_render_memory(const char *script, size_t n, double height, ce_picture kind,
                           char **bytes, size_t *n_bytes, _Bool *missing, ce_error *err);

#endif
