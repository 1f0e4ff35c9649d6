/* SPDX-License-Identifier: GPL-3.0-or-later
 * Options that say how run files are read and evaluated, shared by every command that takes runs.
 */
#ifndef CE_CLI_READING_H
#define CE_CLI_READING_H

#include <chainend/run.h>
#include <chainend/transition.h>

#include "cli/cli.h"

ce_status cli_set_delimiter(void *to, const char *value, ce_error *err);
ce_status cli_set_decimal(void *to, const char *value, ce_error *err);
ce_status cli_set_sign(void *to, const char *value, ce_error *err);
ce_status cli_set_mass(void *to, const char *value, ce_error *err);
ce_status cli_set_rate(void *to, const char *value, ce_error *err);
ce_status cli_set_window(void *to, const char *value, ce_error *err);
ce_status cli_set_take(void *to, const char *value, ce_error *err);

/* clang-format off */
/* r: ce_run_options * */
#define CLI_READING_OPTIONS(r)                                                                                          \
    {.name = "encoding", .argument = "NAME", .help = "character encoding of the run files, e.g. UTF-16LE",              \
     .kind = CLI_TEXT, .to = &(r)->encoding},                                                                           \
    {.name = "delimiter", .argument = "CHAR", .help = "comma, semicolon, tab, pipe or blank",                           \
     .kind = CLI_CALL, .to = &(r)->delimiter, .call = cli_set_delimiter},                                               \
    {.name = "decimal", .argument = "CHAR", .help = "decimal mark: point or comma",                                     \
     .kind = CLI_CALL, .to = &(r)->decimal, .call = cli_set_decimal},                                                   \
    {.name = "time-column", .argument = "COLUMN", .help = "header name or number of the time column; none",             \
     .kind = CLI_TEXT, .to = &(r)->time_column},                                                                        \
    {.name = "temperature-column", .argument = "COLUMN", .help = "header name or number of the temperature column",     \
     .kind = CLI_TEXT, .to = &(r)->temperature_column},                                                                 \
    {.name = "signal-column", .argument = "COLUMN", .help = "header name or number of the heat-flow column",            \
     .kind = CLI_TEXT, .to = &(r)->signal_column},                                                                      \
    {.name = "time-unit", .argument = "UNIT", .help = "s, min or h, whatever the file says",                            \
     .kind = CLI_TEXT, .to = &(r)->time_unit},                                                                          \
    {.name = "temperature-unit", .argument = "UNIT", .help = "°C, K or °F, whatever the file says",                     \
     .kind = CLI_TEXT, .to = &(r)->temperature_unit},                                                                   \
    {.name = "signal-unit", .argument = "UNIT", .help = "mW, W/g, J/(g K) ..., whatever the file says",                 \
     .kind = CLI_TEXT, .to = &(r)->signal_unit},                                                                        \
    {.name = "sign", .argument = "SIGN", .help = "endo-up or exo-up, whatever the file says",                           \
     .kind = CLI_CALL, .to = &(r)->sign, .call = cli_set_sign},                                                         \
    {.name = "mass", .argument = "MASS", .help = "sample mass, e.g. 10.2mg (mg where no unit stands)",                  \
     .kind = CLI_CALL, .to = &(r)->mass_g, .call = cli_set_mass},                                                       \
    {.name = "rate", .argument = "RATE", .help = "rate of runs without a time column, e.g. 10K/min",                    \
     .kind = CLI_CALL, .to = &(r)->rate_K_min, .call = cli_set_rate}

/* e: ce_transition_options * */
#define CLI_EVALUATION_OPTIONS(e)                                                                                       \
    {.name = "segment", .argument = "N", .help = "evaluate segment N (default: the last heating that spans a step)",    \
     .kind = CLI_COUNT, .to = &(e)->segment, .low = 1, .high = 1000},                                                   \
    {.name = "glass-window", .argument = "A:B", .help = "fit the glassy line from A to B (°C where no unit stands)",    \
     .kind = CLI_CALL, .to = &(e)->glass, .call = cli_set_window},                                                      \
    {.name = "liquid-window", .argument = "A:B", .help = "fit the liquid line from A to B",                             \
     .kind = CLI_CALL, .to = &(e)->liquid, .call = cli_set_window}
/* clang-format on */

#endif
