/* SPDX-License-Identifier: GPL-3.0-or-later
 * Progress of long work on standard error, on a terminal only. */
#ifndef CE_CLI_PROGRESS_H
#define CE_CLI_PROGRESS_H

#include <stdbool.h>
#include <stddef.h>

typedef struct {
    const char *what; /* "runs" */
    bool on, shown;
    double begun_s, last_s;
} cli_progress;

cli_progress cli_progress_begin(const char *what, bool quiet);
/* context is a cli_progress *: a ce_progress. Shows count, rate and time left, at most ten times a second and
 * only when the work has lasted half a second. */
void cli_progress_step(void *context, size_t i, size_t n, const char *item);
/* Wipes the line. */
void cli_progress_end(cli_progress *progress);

#endif
