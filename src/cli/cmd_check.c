/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/calibration.h"
#include "cli/cli.h"
#include "cli/commands.h"
#include "cli/controls.h"

#include "output/check.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>

static const cli_command command = {
    .name = "check",
    .operands = "CALIBRATION [SERIES...]",
    .summary = "Does a calibration still hold? Control samples measured again, each with its "
               "normalised error, together, and over time.",
    .detail = "Controls are the samples with the role 'control' and a certified Mn in the SERIES "
              "files, or, when none is named, in the calibration itself. Runs are evaluated as the "
              "calibration was. With dates (YYYY-MM-DD) a control chart and the drift are shown. "
              "Exit status 1 when the calibration does not hold.",
    .example = "chainend check calibration.json controls.csv",
};

typedef struct {
    cli_common common;
    cli_calibrating calibrating;
    bool despite;
} arguments;

/* Measured in another way: refused, or allowed by --despite. */
CE_PRINTF(3, 4)
static bool refused(const arguments *a, const char *path, const char *fmt, ...)
{
    ce_error err = CE_ERROR_INIT;
    char text[200];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    if (a->despite) return false;
    (void)ce_fail_at(&err, CE_E_REFUSED, path, 0, 0,
                     "%s; --despite overrules, and marks the result", text);
    cli_error(&command, &err);
    return true;
}

static bool agrees(const arguments *a, const cli_calibration *c, const ce_series *s, bool *differs)
{
    const double rate = s->rate_K_min, want = c->series.rate_K_min;
    if (!isnan(rate) && !isnan(want) && fabs(rate / want - 1.0) > 0.05) {
        *differs = true;
        if (refused(a, s->path, "measured at %.3g K/min, the calibration at %.3g K/min", rate,
                    want))
            return false;
    }
    if (s->history != CE_HISTORY_UNSTATED && c->series.history != CE_HISTORY_UNSTATED &&
        s->history != c->series.history) {
        *differs = true;
        if (refused(a, s->path, "its history is %s, the calibration's %s",
                    ce_history_name(s->history), ce_history_name(c->series.history)))
            return false;
    }
    return true;
}

/* Everything the check rests on. */
typedef struct {
    cli_calibration calibration;
    size_t n;
    ce_series *series;
    cli_controls controls;
    bool differs;
} basis;

static int gather(const arguments *a, int argc, char **argv, basis *b)
{
    cli_calibrating how = a->calibrating;
    int status = cli_calibrate(&command, argv[0], &how, a->common.quiet, &b->calibration);
    if (status == XIT_FAILED) return status;
    b->series = calloc((size_t)argc, sizeof *b->series);
    if (b->series == NULL) return XIT_FAILED;
    how.expect = b->calibration.series.construction;
    if (isnan(how.how.glass.low_K)) how.how.glass = b->calibration.glass;
    if (isnan(how.how.liquid.low_K)) how.how.liquid = b->calibration.liquid;
    if (how.how.segment == 0) how.how.segment = b->calibration.series.segment;
    for (int i = 1; i < argc; i++) {
        const int read =
            cli_read_series(&command, argv[i], &how, a->common.quiet, &b->series[b->n]);
        if (read == XIT_FAILED) return read;
        if (read == XIT_PART) status = XIT_PART;
        if (!agrees(a, &b->calibration, &b->series[b->n++], &b->differs)) return XIT_FAILED;
    }
    ce_status st = CE_OK;
    for (size_t i = 0; i < b->n && st == CE_OK; i++)
        st = cli_add_controls(&b->controls, &b->series[i]);
    if (argc == 1) st = cli_add_controls(&b->controls, &b->calibration.series);
    return st == CE_OK ? status : XIT_FAILED;
}

static int judge(const arguments *a, const basis *b, const char *path, int status)
{
    ce_error err = CE_ERROR_INIT;
    ce_check check;
    if (b->controls.n == 0)
        (void)ce_fail_at(&err, CE_E_ARG, path, 0, 0,
                         "there is no control sample: give rows the role 'control' and an Mn");
    else
        (void)ce_check_calibration(&b->calibration.fit, b->controls.n, b->controls.item, 0.0,
                                   &check, &err);
    if (err.code != CE_OK) {
        cli_error(&command, &err);
        return XIT_FAILED;
    }
    const char **date = cli_chart_dates(&b->controls, &check);
    const ce_check_result result = {.check = &check,
                                    .control = b->controls.item,
                                    .date = date,
                                    .polymer = b->calibration.series.polymer,
                                    .construction = b->calibration.series.construction,
                                    .rate_K_min = b->calibration.series.rate_K_min,
                                    .history = b->calibration.series.history,
                                    .despite = a->despite && b->differs};
    if (status == XIT_OK && !check.holds) status = XIT_PART;
    status = date == NULL ? XIT_FAILED
                          : cli_deliver(&command, &a->common, ce_write_check, &result, status);
    free((void *)date);
    ce_check_free(&check);
    return status;
}

int cmd_check(int argc, char **argv)
{
    arguments a = {.calibrating = cli_calibrating_default()};
    const cli_option options[] = {
        CLI_COMMON_OPTIONS(&a.common),
        {.name = "despite",
         .help = "check although the controls were measured in another way than the calibration",
         .kind = CLI_FLAG,
         .to = &a.despite},
        CLI_FIT_OPTIONS(&a.calibrating),
        CLI_SERIES_OPTIONS(&a.calibrating),
    };
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (first == argc) return cli_usage_error(&command, "no calibration is named");
    basis b = {0};
    status = gather(&a, argc - first, argv + first, &b);
    if (status != XIT_FAILED)
        status = judge(&a, &b, argv[argc - first == 1 ? first : first + 1], status);
    cli_controls_free(&b.controls);
    for (size_t i = 0; i < b.n; i++) ce_series_free(&b.series[i]);
    free(b.series);
    cli_calibration_free(&b.calibration);
    return status;
}
