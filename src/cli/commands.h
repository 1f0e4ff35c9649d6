/* SPDX-License-Identifier: GPL-3.0-or-later
 * The commands: one table for dispatch, for help and for the tests. A line each: name, what it
 * does. */
#ifndef CE_CLI_COMMANDS_H
#define CE_CLI_COMMANDS_H

#define CLI_COMMANDS(X)                                                                            \
    X(inspect, "what the reader found in each run file")                                           \
    X(tg, "the glass transition of each run, every construction")                                  \
    X(series, "evaluate a series, show the pairs of Mn and Tg")                                    \
    X(fit, "fit the Tg-Mn relation, with intervals and diagnostics")                               \
    X(estimate, "Mn from Tg, Tg from Mn, with an interval")                                        \
    X(check, "does a calibration still hold? control samples measured again")                      \
    X(plan, "which standards and runs would narrow Mn most where it matters")                      \
    X(figure, "a gnuplot script with its data inside, and the picture")                            \
    X(report, "one self-contained HTML page that says everything")                                 \
    X(simulate, "synthetic runs and series with known truth")

#define X(name, summary) int cmd_##name(int argc, char **argv);
CLI_COMMANDS(X)
#undef X

#endif
