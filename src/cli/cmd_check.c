/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/calibration.h"
#include "cli/cli.h"
#include "cli/commands.h"
#include "cli/controls.h"

#include "output/check.h"

#include <math.h>
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

static int judge(const arguments *a, const cli_held *b, const char *path, int status)
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
    cli_held b = {0};
    status = cli_hold(&command, &a.calibrating, a.common.quiet, a.despite, argc - first,
                      argv + first, &b);
    if (status != XIT_FAILED)
        status = judge(&a, &b, argv[argc - first == 1 ? first : first + 1], status);
    cli_held_free(&b);
    return status;
}
