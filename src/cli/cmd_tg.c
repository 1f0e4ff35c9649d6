/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/cli.h"
#include "cli/commands.h"
#include "cli/reading.h"

#include <chainend/series.h>

#include "output/tg.h"

#include <stdlib.h>

static const cli_command command = {
    .name = "tg",
    .operands = "RUN...",
    .summary = "Read the glass transition off each run: every construction, with its uncertainty, "
               "the step "
               "height, the windows used and every doubt.",
    .detail =
        "The last heating that spans a step is evaluated. RUN may be - for standard input. Exit "
        "status 1 means that some runs were refused; each is named on standard error.",
    .example = "chainend tg --take fictive second-heating.csv\n"
               "chainend tg --format json runs/*.csv > tg.json",
};

int cmd_tg(int argc, char **argv)
{
    cli_common common = {0};
    ce_run_options reading = ce_run_options_default();
    ce_transition_options how = ce_transition_options_default();
    ce_tg_result result = {.take = CE_HALF_STEP};
    const cli_option options[] = {
        CLI_COMMON_OPTIONS(&common),
        {.name = "take",
         .argument = "CONSTRUCTION",
         .help = "what counts as the Tg: half_step (default), midpoint, onset, inflection, end, "
                 "fictive",
         .kind = CLI_CALL,
         .to = &result.take,
         .call = cli_set_take},
        CLI_EVALUATION_OPTIONS(&how),
        CLI_READING_OPTIONS(&reading),
    };
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (first == argc) return cli_usage_error(&command, "no run file is named");

    result.n = (size_t)(argc - first);
    ce_evaluation *runs = calloc(result.n, sizeof *runs);
    if (runs == NULL) return XIT_FAILED;
    size_t refused = 0;
    for (size_t i = 0; i < result.n; i++) {
        if (ce_evaluate(argv[first + (int)i], &reading, &how, false, &runs[i]) == CE_OK) continue;
        refused++;
        cli_error(&command, &runs[i].error);
    }
    result.run = runs;
    status = refused == 0 ? XIT_OK : refused == result.n ? XIT_FAILED : XIT_PART;
    status = cli_deliver(&command, &common, ce_write_tg, &result, status);
    for (size_t i = 0; i < result.n; i++) ce_evaluation_free(&runs[i]);
    free(runs);
    return status;
}
