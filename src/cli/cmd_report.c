/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/answers.h"
#include "cli/cli.h"
#include "cli/commands.h"
#include "cli/controls.h"
#include "cli/drawing.h"

#include "output/gnuplot.h"
#include "output/report.h"

#include <chainend/version.h>

#include <gsl/gsl_version.h>
#include <jansson.h>
#include <stdlib.h>

static const cli_command command = {
    .name = "report",
    .operands = "CALIBRATION",
    .summary =
        "One self-contained HTML page: verdict, cautions, figures, tables, what the data cannot "
        "tell, provenance.",
    .detail =
        "CALIBRATION is a series file or a saved record. The page needs no network and no script, "
        "prints on A4, and is the same bytes for the same input. Figures need gnuplot; without it "
        "the page says so.",
    .example = "chainend report -o report.html series.csv",
};

typedef struct {
    cli_common common;
    cli_calibrating calibrating;
} arguments;

/* ---- figures ------------------------------------------------------------------------------ */

typedef struct {
    double (*draw)(const cli_calibration *c, FILE *to);
    const char *caption, *alt;
} planned;

static const planned figures[] = {
    {cli_draw_calibration,
     "The calibration: standards with their standard uncertainties, the curve with its confidence "
     "band, the "
     "band of one run of a new sample, the unknowns with their intervals, the ceiling.",
     "Tg against Mn on a logarithmic axis and against 1/Mn, with the fitted curve"},
    {cli_draw_range, "How well one run and three runs of an unknown tell Mn.",
     "Half-width of the interval of Mn against Mn, rising steeply towards the ceiling"},
    {cli_draw_residuals, "Residuals of the standards in units of their uncertainty.",
     "Residuals of the standards against Mn"},
    {cli_draw_influence, "What hangs on single standards.",
     "Leverage, Cook's distance and the shift of both parameters when a standard is left out"},
    {cli_draw_relations, "Other relations on the same standards.",
     "Differences of other relations from the chosen one against Mn"},
};
enum { FIGURES = sizeof figures / sizeof *figures };

/* The script into memory and through gnuplot; nothing drawn is no failure of the page. */
static ce_status draw(double height, char *script, size_t n, ce_report_figure *f,
                      const char **missing)
{
    ce_error err = CE_ERROR_INIT;
    bool none = false;
    if (!(height > 0.0)) return CE_E_NOMEM;
    ce_status st = ce_render_memory(script, n, height, CE_PICTURE_SVG, &f->svg, &f->n, &none, &err);
    if (st == CE_OK) return CE_OK;
    if (none)
        *missing = "The figures are missing: gnuplot is not installed where this page was made. "
                   "'chainend figure' writes their scripts.";
    else {
        *missing = "A figure is missing: gnuplot could not draw it.";
        cli_error(&command, &err);
    }
    return st == CE_E_NOMEM ? st : CE_OK;
}

static ce_status draw_one(const cli_calibration *c, const planned *p, ce_report_figure *f,
                          const char **missing)
{
    char *script = NULL;
    size_t n = 0;
    *f = (ce_report_figure){.caption = p->caption, .alt = p->alt};
    FILE *to = open_memstream(&script, &n);
    if (to == NULL) return CE_E_NOMEM;
    const double height = p->draw(c, to);
    ce_status st = fclose(to) == 0 ? draw(height, script, n, f, missing) : CE_E_NOMEM;
    free(script);
    return st;
}

/* Runs as a contact sheet, where the series has any. */
static ce_status draw_contact(const arguments *a, const cli_calibration *c, ce_report_figure *f,
                              const char **missing)
{
    cli_drawn_runs runs;
    *f = (ce_report_figure){.caption = "Every run with its windows and its Tg, from glassy to "
                                       "liquid line; flagged runs have a "
                                       "heavy frame.",
                            .alt = "Small multiples of all runs of the series"};
    ce_status st = cli_evaluate_again(&c->series, &a->calibrating, a->common.quiet, &runs);
    if (st != CE_OK) return st;
    if (runs.shown.n > 0) {
        char *script = NULL;
        size_t n = 0;
        FILE *to = open_memstream(&script, &n);
        const double height = to == NULL ? 0.0 : ce_figure_contact(&runs.shown, to);
        st = to != NULL && fclose(to) == 0 ? draw(height, script, n, f, missing) : CE_E_NOMEM;
        free(script);
    }
    cli_drawn_runs_free(&runs);
    return st;
}

/* ---- the page ----------------------------------------------------------------------------- */

typedef struct {
    ce_report report;
    ce_report_figure figure[FIGURES + 1];
} page;

static ce_status write_page(const void *what, FILE *to, ce_format format, bool colour)
{
    (void)format;
    (void)colour;
    return ce_write_report(what, to);
}

static ce_status draw_all(const arguments *a, const cli_calibration *c, page *p)
{
    ce_status st = CE_OK;
    for (size_t i = 0; i < FIGURES && st == CE_OK && p->report.no_figures == NULL; i++)
        st = draw_one(c, &figures[i], &p->figure[p->report.n_figures++], &p->report.no_figures);
    if (st == CE_OK && p->report.no_figures == NULL && !c->recorded)
        st = draw_contact(a, c, &p->figure[p->report.n_figures++], &p->report.no_figures);
    p->report.figure = p->figure;
    return st;
}

static int deliver(const arguments *a, const cli_calibration *c, page *p, int status)
{
    static const char *const versions[][2] = {
        {"chainend", CE_VERSION_TEXT}, {"GSL", GSL_VERSION}, {"jansson", JANSSON_VERSION}};
    ce_report *r = &p->report;
    r->series = &c->series;
    r->n_versions = sizeof versions / sizeof *versions;
    r->version = versions;
    r->fit = cli_fit_result(c);
    return cli_deliver(&command, &a->common, write_page, r, status);
}

/* Controls of the series itself, when there are any. */
static bool check_controls(const cli_calibration *c, cli_controls *controls, ce_check *check)
{
    return cli_add_controls(controls, &c->series) == CE_OK && controls->n > 0 &&
           ce_check_calibration(&c->fit, controls->n, controls->item, 0.0, check, NULL) == CE_OK;
}

static int run(const arguments *a, const char *path)
{
    cli_calibration c;
    int status = cli_calibrate(&command, path, &a->calibrating, a->common.quiet, &c);
    if (status == XIT_FAILED) return status;
    page p = {0};
    ce_checksum *file = NULL;
    ce_error err = CE_ERROR_INIT;
    ce_answer *answers = cli_answer_unknowns(&c, &p.report.unknowns);
    cli_controls controls = {0};
    ce_check check = {0};
    ce_check_result held = {.check = &check};
    if (check_controls(&c, &controls, &check)) {
        held.control = controls.item;
        p.report.check = &held;
    }
    ce_status st = answers == NULL ? ce_fail(&err, CE_E_NOMEM, "out of memory") : CE_OK;
    if (st == CE_OK && !c.recorded)
        st = ce_checksum_series(&c.series, &file, &p.report.n_files, &err);
    p.report.file = file;
    if (st == CE_OK && (st = draw_all(a, &c, &p)) != CE_OK)
        (void)ce_fail(&err, st, "%s", ce_status_text(st));
    if (st == CE_OK)
        status = deliver(a, &c, &p, status);
    else {
        cli_error(&command, &err);
        status = XIT_FAILED;
    }
    for (size_t i = 0; i <= FIGURES; i++) free(p.figure[i].svg);
    ce_checksums_free(file, p.report.n_files);
    ce_check_free(&check);
    cli_controls_free(&controls);
    cli_answers_free(answers, p.report.unknowns.n);
    cli_calibration_free(&c);
    return status;
}

int cmd_report(int argc, char **argv)
{
    arguments a = {.calibrating = cli_calibrating_default()};
    const cli_option options[] = {
        {.name = "output",
         .letter = 'o',
         .argument = "FILE",
         .help = "write the page to FILE, whole or not at all, instead of standard output",
         .kind = CLI_TEXT,
         .to = &a.common.output},
        {.name = "quiet",
         .help = "no warnings and no progress on standard error",
         .kind = CLI_FLAG,
         .to = &a.common.quiet},
        CLI_FIT_OPTIONS(&a.calibrating),
        CLI_SERIES_OPTIONS(&a.calibrating),
    };
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (first + 1 != argc) return cli_usage_error(&command, "one calibration must be named");
    return run(&a, argv[first]);
}
