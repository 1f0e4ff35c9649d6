/* SPDX-License-Identifier: GPL-3.0-or-later
 * Control samples of series files, ready to be held against a calibration. */
#ifndef CE_CLI_CONTROLS_H
#define CE_CLI_CONTROLS_H

#include "cli/calibration.h"

typedef struct {
    size_t n;
    ce_control *item;   /* owned; names and readings are borrowed from the series */
    double **day;       /* owned, one array a control                             */
    const char ***date; /* owned arrays of borrowed texts, as the files have them  */
} cli_controls;

/* Add the controls of a series; rows of other roles and rows that are not used are left alone. CE_OK or
 * CE_E_NOMEM. */
ce_status cli_add_controls(cli_controls *controls, const ce_series *series);
void cli_controls_free(cli_controls *controls);

/* Days since 1970-01-01 of a date YYYY-MM-DD; NaN for anything else. */
double cli_day(const char *date);

/* The text of the date of every point of a chart; the caller's to free(). NULL when out of memory. */
const char **cli_chart_dates(const cli_controls *controls, const ce_check *check);

/* A calibration with the control samples it is held against, and the series they came from. */
typedef struct {
    cli_calibration calibration;
    size_t n;
    ce_series *series;
    cli_controls controls;
    bool differs; /* measured in another way, and allowed                             */
} cli_held;

/* path[0] is a calibration, the others series with controls; without others the calibration's own are
 * taken. despite allows another rate or history. Told on standard error what is wrong. XIT_OK, XIT_PART
 * or XIT_FAILED; to be released with cli_held_free() in any case. */
int cli_hold(const cli_command *command, const cli_calibrating *how, bool quiet, bool despite,
             int n, char **path, cli_held *held);
void cli_held_free(cli_held *held);

#endif
