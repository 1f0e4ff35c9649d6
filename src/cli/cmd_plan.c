/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/calibration.h"
#include "cli/cli.h"
#include "cli/commands.h"

#include "output/plan.h"
#include "text/value.h"

#include <math.h>
#include <stdlib.h>

enum { MOST_TARGETS = 64 };

static const cli_command command = {
    .name = "plan",
    .operands = "CALIBRATION",
    .summary =
        "Which standards to add, and how many runs of them and of the unknown, so that Mn is "
        "known well enough where it matters.",
    .detail =
        "Step by step the measurement that gains most for its work. Says when the wish cannot "
        "be met, and what limits it.",
    .example = "chainend plan --at 20kg/mol --at 60kg/mol --want 15% calibration.json",
};

typedef struct {
    cli_common common;
    cli_calibrating calibrating;
    ce_plan_options plan;
    size_t n;
    double mn_g_mol[MOST_TARGETS];
} arguments;

static ce_status molar_mass(const char *value, double *to, ce_error *err)
{
    ce_status st =
        ce_parse_value(value, '.', CE_DIM_MOLAR_MASS, ce_unit_find("g/mol", 5), to, NULL, err);
    if (st == CE_OK && !(*to > 0.0))
        st = ce_fail(err, CE_E_DOMAIN, "'%.40s' is not above zero", value);
    return st;
}

static ce_status add_target(void *to, const char *value, ce_error *err)
{
    arguments *a = to;
    if (a->n == MOST_TARGETS)
        return ce_fail(err, CE_E_LIMIT, "more than %d molar masses", MOST_TARGETS);
    ce_status st = molar_mass(value, &a->mn_g_mol[a->n], err);
    if (st == CE_OK) a->n++;
    return st;
}

static ce_status set_range(void *to, const char *value, ce_error *err)
{
    ce_plan_options *o = to;
    ce_status st = ce_parse_range(value, '.', CE_DIM_MOLAR_MASS, ce_unit_find("g/mol", 5),
                                  &o->low_g_mol, &o->high_g_mol, err);
    if (st == CE_OK && !(o->low_g_mol > 0.0))
        st = ce_fail(err, CE_E_DOMAIN, "'%.40s' does not begin above zero", value);
    return st;
}

static int run(const arguments *a, const char *path)
{
    cli_calibration c;
    int status = cli_calibrate(&command, path, &a->calibrating, a->common.quiet, &c);
    if (status == XIT_FAILED) return status;
    ce_plan plan;
    ce_error err = CE_ERROR_INIT;
    if (ce_plan_make(&c.fit, a->n, a->mn_g_mol, &a->plan, &plan, &err) == CE_OK) {
        const ce_plan_result result = {&plan, &c.fit, a->plan, c.series.polymer};
        if (status == XIT_OK && !plan.met) status = XIT_PART;
        status = cli_deliver(&command, &a->common, ce_write_plan, &result, status);
        ce_plan_free(&plan);
    } else {
        cli_error(&command, &err);
        status = XIT_FAILED;
    }
    cli_calibration_free(&c);
    return status;
}

int cmd_plan(int argc, char **argv)
{
    arguments a = {.calibrating = cli_calibrating_default(), .plan = ce_plan_options_default()};
    const cli_option options[] = {
        CLI_COMMON_OPTIONS(&a.common),
        {.name = "at",
         .argument = "MN",
         .help = "a molar mass that matters, e.g. 20kg/mol (g/mol where no unit stands); may be "
                 "given several times",
         .kind = CLI_CALL,
         .to = &a,
         .call = add_target},
        {.name = "want",
         .argument = "SHARE",
         .help = "wanted half-width of the interval over Mn, e.g. 10%",
         .kind = CLI_CALL,
         .to = &a.plan.want,
         .call = cli_set_share},
        {.name = "new-mn-u",
         .argument = "SHARE",
         .help = "relative standard uncertainty of certificates of new standards (default 5%)",
         .kind = CLI_CALL,
         .to = &a.plan.mn_u_rel,
         .call = cli_set_share},
        {.name = "within",
         .argument = "LOW:HIGH",
         .help = "new standards are to be had between these, e.g. 2:500kg/mol (default: as the "
                 "present ones)",
         .kind = CLI_CALL,
         .to = &a.plan,
         .call = set_range},
        {.name = "runs",
         .argument = "N",
         .help = "runs of each new standard (default 3)",
         .kind = CLI_COUNT,
         .to = &a.plan.runs_per_standard,
         .low = 1,
         .high = 100},
        {.name = "unknown-runs",
         .argument = "N",
         .help = "runs of an unknown now (default 1)",
         .kind = CLI_COUNT,
         .to = &a.plan.unknown_runs,
         .low = 1,
         .high = 1000},
        {.name = "most-unknown-runs",
         .argument = "N",
         .help = "runs of an unknown at most (default 12)",
         .kind = CLI_COUNT,
         .to = &a.plan.most_unknown_runs,
         .low = 1,
         .high = 1000},
        {.name = "standard-cost",
         .argument = "RUNS",
         .help = "work of a new standard besides its runs, in runs (default 5)",
         .kind = CLI_NUMBER,
         .to = &a.plan.standard_cost,
         .low = -1e-300,
         .high = 1e6},
        CLI_FIT_OPTIONS(&a.calibrating),
        CLI_SERIES_OPTIONS(&a.calibrating),
    };
    int first, status;
    if (!cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first,
                   &status))
        return status;
    if (first + 1 != argc) return cli_usage_error(&command, "one calibration must be named");
    if (a.n == 0) return cli_usage_error(&command, "--at: which molar masses matter?");
    if (isnan(a.plan.want)) return cli_usage_error(&command, "--want: how well must Mn be known?");
    if (a.plan.most_unknown_runs < a.plan.unknown_runs)
        a.plan.most_unknown_runs = a.plan.unknown_runs;
    return run(&a, argv[first]);
}
