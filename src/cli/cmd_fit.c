/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/answers.h"
#include "cli/cli.h"
#include "cli/commands.h"

#include "output/fit.h"

static const cli_command command = {
    .name = "fit",
    .operands = "SERIES",
    .summary = "Fit the relation between Tg and Mn to the standards of a series: parameters with "
               "their intervals, "
               "how every standard lies, and what the data cannot tell.",
    .detail = "Standards enter as sample means, with the uncertainty of their Mn and the scatter "
              "of their runs. "
              "Without repeats or stated uncertainties the scatter comes from the residuals, with "
              "a warning.",
    .example = "chainend fit --save calibration.json series.csv\n"
               "chainend fit --relation ueberreiter-kanig --level 0.99 --format json series.csv",
};

int cmd_fit(int argc, char **argv)
{
    cli_common common = {0};
    cli_calibrating c = cli_calibrating_default();
    const char *save = NULL;
    const cli_option options[] = {CLI_COMMON_OPTIONS(&common),
                                  {.name = "save",
                                   .argument = "FILE",
                                   .help = "save the calibration as a record, for estimate, check "
                                           "and plan",
                                   .kind = CLI_TEXT,
                                   .to = &save},
                                  CLI_FIT_OPTIONS(&c),
                                  CLI_SERIES_OPTIONS(&c)};
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (first + 1 != argc) return cli_usage_error(&command, "one series file must be named");
    cli_calibration calibration;
    status = cli_calibrate(&command, argv[first], &c, common.quiet, &calibration);
    if (status == XIT_FAILED) return status;
    ce_error err = CE_ERROR_INIT;
    if (save != NULL && cli_save(save, &calibration, &err) != CE_OK) {
        cli_error(&command, &err);
        cli_calibration_free(&calibration);
        return XIT_FAILED;
    }
    const ce_fit_result result = cli_fit_result(&calibration);
    status = cli_deliver(&command, &common, ce_write_fit, &result, status);
    cli_calibration_free(&calibration);
    return status;
}
