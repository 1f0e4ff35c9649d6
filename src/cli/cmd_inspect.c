/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/cli.h"
#include "cli/commands.h"
#include "cli/reading.h"

#include "output/inspect.h"

#include <stdlib.h>

static const cli_command command = {
    .name = "inspect",
    .operands = "RUN...",
    .summary =
        "Show what the reader understood of each run file: encoding, delimiter, decimal mark, "
        "columns "
        "and units, sign of heat flow, mass, programme segments with their rates, anything odd.",
    .detail = "What was guessed is marked, with the option that overrules it.",
    .example = "chainend inspect export.txt\n"
               "chainend inspect --decimal comma --format json export.txt",
};

int cmd_inspect(int argc, char **argv)
{
    cli_common common = {0};
    ce_run_options reading = ce_run_options_default();
    const cli_option options[] = {CLI_COMMON_OPTIONS(&common), CLI_READING_OPTIONS(&reading)};
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (first == argc) return cli_usage_error(&command, "no run file is named");

    ce_inspect_result result = {.n = (size_t)(argc - first)};
    ce_inspected *file = calloc(result.n, sizeof *file);
    if (file == NULL) return XIT_FAILED;
    size_t refused = 0;
    for (size_t i = 0; i < result.n; i++) {
        ce_inspected *f = &file[i];
        f->path = argv[first + (int)i];
        f->error = (ce_error)CE_ERROR_INIT;
        f->status = ce_run_read(f->path, &reading, &f->run, &f->error);
        /* no transition, no sign to settle: that is for tg to complain about */
        if (f->status == CE_OK) (void)ce_run_settle_sign(f->run, NULL);
        if (f->status == CE_OK) continue;
        refused++;
        cli_error(&command, &f->error);
    }
    result.file = file;
    status = refused == 0 ? XIT_OK : refused == result.n ? XIT_FAILED : XIT_PART;
    status = cli_deliver(&command, &common, ce_write_inspect, &result, status);
    for (size_t i = 0; i < result.n; i++) ce_run_free(file[i].run);
    free(file);
    return status;
}
