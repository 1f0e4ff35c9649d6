/* SPDX-License-Identifier: GPL-3.0-or-later
 * From a file named on the command line to an evaluated series and a fitted relation. */
#ifndef CE_CLI_CALIBRATION_H
#define CE_CLI_CALIBRATION_H

#include <chainend/estimate.h>
#include <chainend/fit.h>
#include <chainend/record.h>
#include <chainend/series.h>

#include "cli/cli.h"
#include "cli/reading.h"

/* Options that say how a series is evaluated and fitted. */
typedef struct {
    ce_run_options reading;
    ce_transition_options how;
    ce_construction take;   /* CE_CONSTRUCTIONS = as the series says */
    double reduce_to_K_min; /* NaN = as the series says */
    ce_fit_options fit;
    double level; /* NaN = as the series says, else the fit's default */
} cli_calibrating;

cli_calibrating cli_calibrating_default(void);
ce_status cli_set_relation(void *to, const char *value, ce_error *err);
ce_status cli_set_scatter(void *to, const char *value, ce_error *err);
/* A double: 0 <= share < 1, "5%" or "0.05". */
ce_status cli_set_share(void *to, const char *value, ce_error *err);
ce_status cli_set_excess(void *to, const char *value, ce_error *err);
ce_status cli_set_fit_seed(void *to, const char *value, ce_error *err);

/* clang-format off */
#define CLI_SERIES_OPTIONS(c)                                                                                           \
    {.name = "take", .argument = "CONSTRUCTION", .help = "what counts as the Tg, whatever the series says: half_step, " \
     "midpoint, onset, inflection, end, fictive", .kind = CLI_CALL, .to = &(c)->take, .call = cli_set_take},            \
    {.name = "reduce-to", .argument = "RATE", .help = "reduce all Tg to this heating rate by a common slope per decade, "    \
     "fitted within the samples, e.g. 10K/min", .kind = CLI_CALL, .to = &(c)->reduce_to_K_min, .call = cli_set_rate},   \
    CLI_EVALUATION_OPTIONS(&(c)->how), CLI_READING_OPTIONS(&(c)->reading)

#define CLI_FIT_OPTIONS(c)                                                                                              \
    {.name = "relation", .argument = "NAME", .help = "flory-fox (default), ueberreiter-kanig, odriscoll-sanayei, "      \
     "ogawa, log-plateau, log-three", .kind = CLI_CALL, .to = &(c)->fit.relation, .call = cli_set_relation},            \
    {.name = "level", .argument = "P", .help = "coverage of the intervals (default: the series', else 0.95)",           \
     .kind = CLI_NUMBER, .to = &(c)->level, .low = 0, .high = 1},                                                       \
    {.name = "scatter", .argument = "FROM", .help = "where the scatter of Tg comes from: repeats, stated or residuals " \
     "(default: repeats where the standards have them, else stated, else residuals with a warning)",                    \
     .kind = CLI_CALL, .to = &(c)->fit.scatter, .call = cli_set_scatter},                                               \
    {.name = "excess", .argument = "HOW", .help = "samples that scatter more than runs and certificates explain: auto " \
     "(default: tested), none, additive (in Tg) or multiplicative (in Mn)",                                             \
     .kind = CLI_CALL, .to = &(c)->fit.excess, .call = cli_set_excess},                                                 \
    {.name = "tg-common-u", .argument = "KELVIN", .help = "standard uncertainty of the temperature scale, common to "   \
     "all runs", .kind = CLI_NUMBER, .to = &(c)->fit.tg_common_u_K, .low = -1e-300, .high = 1e3},                       \
    {.name = "resamples", .argument = "N", .help = "resample whole samples N times, as a diagnostic (default 0)",       \
     .kind = CLI_COUNT, .to = &(c)->fit.resamples, .low = 0, .high = 1000000},                                          \
    {.name = "seed", .argument = "N", .help = "of the resampling (default 1)",                                          \
     .kind = CLI_CALL, .to = &(c)->fit.seed, .call = cli_set_fit_seed}
/* clang-format on */

/* Read and evaluate a series, telling its messages. Returns XIT_OK, XIT_PART (some rows were left out) or
 * XIT_FAILED (series is empty then). */
int cli_read_series(const cli_command *command, const char *path, const cli_calibrating *c,
                    bool quiet, ce_series *series);

#define CLI_RANGE_ROWS 10

/* A calibration: the fitted relation, with the series it came from, or a record of both. */
typedef struct {
    ce_series series;
    ce_fit fit;
    ce_window glass, liquid; /* given for all runs; NaN = none */
    bool recorded;           /* read from a record: nothing was evaluated or fitted now */
    double ceiling_tg_K, ceiling_mn_g_mol; /* one run of an unknown; NaN = none */
    size_t n_range;
    ce_range_row range[CLI_RANGE_ROWS]; /* working range along the standards, one run */
} cli_calibration;

/* Read, evaluate and fit a series file; or read a record, whose fit cannot be changed any more. As cli_read_series(); release with cli_calibration_free() unless XIT_FAILED. */
int cli_calibrate(const cli_command *command, const char *path, const cli_calibrating *c,
                  bool quiet, cli_calibration *calibration);
void cli_calibration_free(cli_calibration *calibration);

/* Write the record of a calibration, whole or not at all. CE_OK | CE_E_IO | CE_E_DOMAIN | CE_E_NOMEM. */
ce_status cli_save(const char *path, const cli_calibration *calibration, ce_error *err);

#endif
