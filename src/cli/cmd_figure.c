/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/answers.h"
#include "cli/calibration.h"
#include "cli/cli.h"
#include "cli/commands.h"

#include "output/figure.h"
#include "output/file.h"
#include "output/gnuplot.h"

#include <stdlib.h>
#include <string.h>

static const cli_command command = {
    .name = "figure",
    .operands = "run RUN | calibration SERIES",
    .summary = "Draw a figure: a gnuplot script with its data inside and, where gnuplot is "
               "installed, the picture.",
    .detail =
        "The script goes to standard output, or with -o to a file; --picture draws it too, as SVG, "
        "PNG or PDF "
        "by the ending of the name. 'run' shows a run with its baselines, tangent and "
        "constructions; "
        "'calibration' Tg against Mn with its bands, the standards and the unknowns of the series.",
    .example = "chainend figure run --picture run.svg -o run.gp second-heating.csv\n"
               "chainend figure calibration --picture calibration.pdf -o calibration.gp series.csv",
};

typedef struct {
    cli_calibrating calibrating;
    const char *script, *picture;
    bool quiet;
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

static int draw_run(const arguments *a, const char *path, FILE *to, double *height)
{
    ce_evaluation e;
    int status = XIT_FAILED;
    if (ce_evaluate(path, &a->calibrating.reading, &a->calibrating.how, true, &e) == CE_OK) {
        ce_construction take = a->calibrating.take;
        *height = ce_figure_run(&e, take == CE_CONSTRUCTIONS ? CE_HALF_STEP : take, to);
        status = *height > 0.0 ? XIT_OK : no_memory();
    } else
        cli_error(&command, &e.error);
    ce_evaluation_free(&e);
    return status;
}

static int draw_calibration(const arguments *a, const char *path, FILE *to, double *height)
{
    cli_calibration c;
    int status = cli_calibrate(&command, path, &a->calibrating, a->quiet, &c);
    if (status == XIT_FAILED) return status;
    ce_estimate_result result;
    ce_answer *answers = cli_answer_unknowns(&c, &result);
    if (answers != NULL) *height = ce_figure_calibration(&result, to);
    if (answers == NULL || !(*height > 0.0)) status = no_memory();
    cli_answers_free(answers, result.n);
    cli_calibration_free(&c);
    return status;
}

static const struct {
    const char *name;
    int (*draw)(const arguments *a, const char *path, FILE *to, double *height);
} kinds[] = {{"run", draw_run}, {"calibration", draw_calibration}};

/* ---- delivery ------------------------------------------------------------------------------- */

static ce_status write_script(const void *what, FILE *to, ce_format format, bool colour)
{
    const script *s = what;
    (void)format;
    (void)colour;
    return fwrite(s->text, 1, s->n, to) == s->n ? CE_OK : CE_E_IO;
}

/* Without gnuplot the script is what there is; that is no failure. */
static int make_picture(const arguments *a, const script *s, int status)
{
    ce_error err = CE_ERROR_INIT;
    bool missing = false;
    if (ce_render(s->text, s->n, s->height, ce_picture_of(a->picture), a->picture, &missing,
                  &err) == CE_OK)
        return status;
    if (!missing) {
        cli_error(&command, &err);
        return XIT_FAILED;
    }
    fprintf(stderr,
            "chainend figure: gnuplot is not installed, no picture was drawn; where it is:\n"
            "  gnuplot -e \"set terminal pdfcairo size 8.5cm,%.2fcm font ',8'\" %s > figure.pdf\n",
            8.5 * s->height, a->script == NULL ? "SCRIPT" : a->script);
    return status;
}

static int run(const arguments *a, size_t kind, const char *path)
{
    script s = {0};
    FILE *to = open_memstream(&s.text, &s.n);
    if (to == NULL) return no_memory();
    int status = kinds[kind].draw(a, path, to, &s.height);
    if (fclose(to) != 0) status = no_memory();
    if (status != XIT_FAILED) {
        cli_common common = {.output = a->script, .quiet = a->quiet};
        if (a->script != NULL || a->picture == NULL)
            status = cli_deliver(&command, &common, write_script, &s, status);
        if (status != XIT_FAILED && a->picture != NULL) status = make_picture(a, &s, status);
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
    if (argc - first != 2)
        return cli_usage_error(&command, "a kind of figure and one file must be named");
    if (a.picture != NULL && ce_picture_of(a.picture) == CE_PICTURES)
        return cli_usage_error(&command, "--picture: '%s' does not end in .svg, .png or .pdf",
                               a.picture);
    for (size_t k = 0; k < sizeof kinds / sizeof *kinds; k++)
        if (strcmp(argv[first], kinds[k].name) == 0) return run(&a, k, argv[first + 1]);
    return cli_usage_error(&command, "'%s' is no kind of figure (run, calibration)", argv[first]);
}
