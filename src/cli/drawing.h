/* SPDX-License-Identifier: GPL-3.0-or-later
 * Figures from calibrations and series, for the commands that draw. */
#ifndef CE_CLI_DRAWING_H
#define CE_CLI_DRAWING_H

#include "cli/calibration.h"
#include "output/figure.h"

/* Every run of a series evaluated again, with its curve. */
typedef struct {
    ce_evaluation *evaluation; /* owned */
    ce_figure_item *item;      /* owned */
    ce_figure_runs shown;
} cli_drawn_runs;
/* Rows without a run are left out; refused runs are kept with their reason. CE_OK or CE_E_NOMEM. */
ce_status cli_evaluate_again(const ce_series *series, const cli_calibrating *how, bool quiet,
                             cli_drawn_runs *runs);
void cli_drawn_runs_free(cli_drawn_runs *runs);

/* One script each; the height of the figure, 0 when out of memory. */
double cli_draw_calibration(const cli_calibration *c, FILE *to);
double cli_draw_residuals(const cli_calibration *c, FILE *to);
double cli_draw_influence(const cli_calibration *c, FILE *to);
double cli_draw_relations(const cli_calibration *c, FILE *to);
double cli_draw_range(const cli_calibration *c, FILE *to);

#endif
