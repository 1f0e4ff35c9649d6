/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/calibration.h"
#include "cli/cli.h"
#include "cli/commands.h"

#include "output/series.h"

static const cli_command command = {
    .name = "series",
    .operands = "SERIES",
    .summary = "Evaluate all runs of a series and show the pairs of Mn and Tg that will be fitted, "
               "with what was "
               "left out and why.",
    .detail = "Everything wrong with the series file is told at once, each with its line.",
    .example = "chainend series series.csv\n"
               "chainend series --take fictive --format csv -o pairs.csv series.csv",
};

int cmd_series(int argc, char **argv)
{
    cli_common common = {0};
    cli_calibrating c = cli_calibrating_default();
    const cli_option options[] = {CLI_COMMON_OPTIONS(&common), CLI_SERIES_OPTIONS(&c)};
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (first + 1 != argc) return cli_usage_error(&command, "one series file must be named");
    ce_series series;
    status = cli_read_series(&command, argv[first], &c, common.quiet, &series);
    if (status == XIT_FAILED) return status;
    status = cli_deliver(&command, &common, ce_write_series, &series, status);
    ce_series_free(&series);
    return status;
}
