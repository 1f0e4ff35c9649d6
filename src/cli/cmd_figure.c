/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/answers.h"
#include "cli/calibration.h"
#include "cli/cli.h"
#include "cli/commands.h"
#include "cli/controls.h"
#include "cli/drawing.h"

#include "output/figure.h"
#include "output/file.h"
#include "output/gnuplot.h"

#include <stdlib.h>
#include <string.h>

static const cli_command command = {
    .name = "figure",
    .operands = "KIND FILE...",
    .summary = "Draw a figure: a gnuplot script with its data inside and, where gnuplot is "
               "installed, the picture.",
    .detail =
        "KIND is run (of a run file), overlay or contact (all runs of a series), calibration, "
        "residuals, influence, relations or range (of a calibration: a series or a record), or "
        "control (of a calibration, with series of controls). The script goes to standard output, "
        "or with -o to a file; --picture draws it too, as SVG, PNG or PDF by the ending of the "
        "name, --terminal in characters.",
    .example = "chainend figure run --picture run.svg -o run.gp second-heating.csv\n"
               "chainend figure contact --picture runs.pdf -o runs.gp series.csv\n"
               "chainend figure calibration --terminal calibration.json",
};

typedef struct {
    cli_calibrating calibrating;
    const char *script, *picture;
    bool quiet, terminal;
} arguments;

/* A finished script, in memory. */
typedef struct {
    char *text;
    size_t n;
    double height;
} script;

static int no_memory(void)
{
    fputs("chainend figure: out of memory\n", stderr);
    return XIT_FAILED;
}

/* ---- kinds of figures ----------------------------------------------------------------------- */

typedef struct {
    int n;
    char **path;
} files;

static int drawn(double height, int status)
{
    return height > 0.0 ? status : no_memory();
}

static int draw_run(const arguments *a, const files *f, FILE *to, double *height)
{
    ce_evaluation e;
    int status = XIT_FAILED;
    if (ce_evaluate(f->path[0], &a->calibrating.reading, &a->calibrating.how, true, &e) == CE_OK) {
        ce_construction take = a->calibrating.take;
        *height = ce_figure_run(&e, take == CE_CONSTRUCTIONS ? CE_HALF_STEP : take, to);
        status = drawn(*height, XIT_OK);
    } else
        cli_error(&command, &e.error);
    ce_evaluation_free(&e);
    return status;
}

static int draw_runs(const arguments *a, const files *f, FILE *to, double *height,
                     double (*draw)(const ce_figure_runs *, FILE *))
{
    ce_series series;
    int status = cli_read_series(&command, f->path[0], &a->calibrating, a->quiet, &series);
    if (status == XIT_FAILED) return status;
    cli_drawn_runs runs;
    if (cli_evaluate_again(&series, &a->calibrating, a->quiet, &runs) == CE_OK) {
        if (runs.shown.n == 0) {
            ce_error err = CE_ERROR_INIT;
            (void)ce_fail_at(&err, CE_E_ARG, f->path[0], 0, 0, "the series names no run files");
            cli_error(&command, &err);
            status = XIT_FAILED;
        } else {
            *height = draw(&runs.shown, to);
            status = drawn(*height, status);
        }
        cli_drawn_runs_free(&runs);
    } else
        status = no_memory();
    ce_series_free(&series);
    return status;
}

static int draw_overlay(const arguments *a, const files *f, FILE *to, double *height)
{
    return draw_runs(a, f, to, height, ce_figure_overlay);
}

static int draw_contact(const arguments *a, const files *f, FILE *to, double *height)
{
    return draw_runs(a, f, to, height, ce_figure_contact);
}

/* Figures of a calibration differ in one call. */
static int draw_of_calibration(const arguments *a, const files *f, FILE *to, double *height,
                               double (*draw)(const cli_calibration *, FILE *))
{
    cli_calibration c;
    int status = cli_calibrate(&command, f->path[0], &a->calibrating, a->quiet, &c);
    if (status == XIT_FAILED) return status;
    *height = draw(&c, to);
    cli_calibration_free(&c);
    return drawn(*height, status);
}

#define OF_CALIBRATION(kind)                                                                       \
    static int draw_##kind(const arguments *a, const files *f, FILE *to, double *height)           \
    {                                                                                              \
        return draw_of_calibration(a, f, to, height, cli_draw_##kind);                             \
    }
OF_CALIBRATION(calibration)
OF_CALIBRATION(residuals)
OF_CALIBRATION(influence)
OF_CALIBRATION(relations)
OF_CALIBRATION(range)

static int draw_control(const arguments *a, const files *f, FILE *to, double *height)
{
    cli_held held = {0};
    ce_error err = CE_ERROR_INIT;
    int status = cli_hold(&command, &a->calibrating, a->quiet, true, f->n, f->path, &held);
    ce_check check = {0};
    if (status != XIT_FAILED &&
        ce_check_calibration(&held.calibration.fit, held.controls.n, held.controls.item, 0.0,
                             &check, &err) == CE_OK) {
        const char **date = cli_chart_dates(&held.controls, &check);
        const ce_check_result result = {.check = &check,
                                        .control = held.controls.item,
                                        .date = date,
                                        .polymer = held.calibration.series.polymer};
        if (check.n_chart == 0)
            (void)ce_fail_at(&err, CE_E_ARG, f->path[f->n - 1], 0, 0,
                             "no run of a control has a date (YYYY-MM-DD)");
        else if (date != NULL)
            *height = ce_figure_control(&result, to);
        free((void *)date);
    }
    if (err.code != CE_OK) cli_error(&command, &err);
    if (!(*height > 0.0)) status = XIT_FAILED;
    ce_check_free(&check);
    cli_held_free(&held);
    return status;
}

static const struct {
    const char *name;
    int (*draw)(const arguments *a, const files *f, FILE *to, double *height);
} kinds[] = {{"run", draw_run},
             {"overlay", draw_overlay},
             {"contact", draw_contact},
             {"calibration", draw_calibration},
             {"residuals", draw_residuals},
             {"influence", draw_influence},
             {"relations", draw_relations},
             {"range", draw_range},
             {"control", draw_control}};

/* ---- delivery ------------------------------------------------------------------------------- */

static ce_status write_script(const void *what, FILE *to, ce_format format, bool colour)
{
    const script *s = what;
    (void)format;
    (void)colour;
    return fwrite(s->text, 1, s->n, to) == s->n ? CE_OK : CE_E_IO;
}

/* Without gnuplot the script is what there is; that is no failure. */
static int make_picture(const arguments *a, const script *s, ce_picture kind, const char *path,
                        int status)
{
    ce_error err = CE_ERROR_INIT;
    bool missing = false;
    (void)fflush(stdout);
    if (ce_render(s->text, s->n, s->height, kind, path, &missing, &err) == CE_OK) return status;
    if (!missing) {
        cli_error(&command, &err);
        return XIT_FAILED;
    }
    fprintf(
        stderr,
        "chainend figure: gnuplot is not installed, no picture was drawn; the first lines of %s "
        "say how to draw it\n",
        a->script == NULL ? "the script (-o FILE)" : a->script);
    return status;
}

static int run(const arguments *a, size_t kind, const files *f)
{
    script s = {0};
    FILE *to = open_memstream(&s.text, &s.n);
    if (to == NULL) return no_memory();
    int status = kinds[kind].draw(a, f, to, &s.height);
    if (fclose(to) != 0) status = no_memory();
    if (status != XIT_FAILED) {
        cli_common common = {.output = a->script, .quiet = a->quiet};
        if (a->script != NULL || (a->picture == NULL && !a->terminal))
            status = cli_deliver(&command, &common, write_script, &s, status);
        if (status != XIT_FAILED && a->picture != NULL)
            status = make_picture(a, &s, ce_picture_of(a->picture), a->picture, status);
        if (status != XIT_FAILED && a->terminal)
            status = make_picture(a, &s, CE_PICTURE_TERMINAL, NULL, status);
    }
    free(s.text);
    return status;
}

int cmd_figure(int argc, char **argv)
{
    arguments a = {.calibrating = cli_calibrating_default()};
    const cli_option options[] = {
        {.name = "output",
         .letter = 'o',
         .argument = "FILE",
         .help = "write the script to FILE instead of standard output",
         .kind = CLI_TEXT,
         .to = &a.script},
        {.name = "picture",
         .argument = "FILE",
         .help = "draw the picture too: FILE ends in .svg, .png or .pdf",
         .kind = CLI_TEXT,
         .to = &a.picture},
        {.name = "terminal",
         .help = "draw in characters, on standard output",
         .kind = CLI_FLAG,
         .to = &a.terminal},
        {.name = "quiet",
         .help = "no warnings and no progress on standard error",
         .kind = CLI_FLAG,
         .to = &a.quiet},
        CLI_FIT_OPTIONS(&a.calibrating),
        CLI_SERIES_OPTIONS(&a.calibrating),
    };
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (argc - first < 2)
        return cli_usage_error(&command, "a kind of figure and a file must be named");
    if (a.picture != NULL && ce_picture_of(a.picture) == CE_PICTURES)
        return cli_usage_error(&command, "--picture: '%s' does not end in .svg, .png or .pdf",
                               a.picture);
    const files f = {argc - first - 1, argv + first + 1};
    for (size_t k = 0; k < sizeof kinds / sizeof *kinds; k++) {
        if (strcmp(argv[first], kinds[k].name) != 0) continue;
        if (f.n > 1 && strcmp(kinds[k].name, "control") != 0)
            return cli_usage_error(&command, "a figure of the kind %s takes one file",
                                   kinds[k].name);
        return run(&a, k, &f);
    }
    return cli_usage_error(&command,
                           "'%s' is no kind of figure (run, overlay, contact, calibration, "
                           "residuals, influence, relations, range, control)",
                           argv[first]);
}
