/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/drawing.h"

#include "cli/answers.h"
#include "cli/progress.h"

#include <stdlib.h>

ce_status cli_evaluate_again(const ce_series *series, const cli_calibrating *how, bool quiet,
                             cli_drawn_runs *runs)
{
    *runs = (cli_drawn_runs){calloc(series->n_rows + 1, sizeof *runs->evaluation),
                             calloc(series->n_rows + 1, sizeof *runs->item),
                             {.polymer = series->polymer, .take = series->construction}};
    if (runs->evaluation == NULL || runs->item == NULL) {
        cli_drawn_runs_free(runs);
        return CE_E_NOMEM;
    }
    cli_progress progress = cli_progress_begin("curves", quiet);
    for (size_t i = 0; i < series->n_rows; i++) {
        const ce_series_row *row = &series->row[i];
        if (row->path == NULL) continue;
        ce_evaluation *e = &runs->evaluation[runs->shown.n];
        cli_progress_step(&progress, i + 1, series->n_rows, row->run);
        (void)ce_series_evaluate_run(series, i, &how->reading, &how->how, e);
        runs->item[runs->shown.n++] = (ce_figure_item){row->sample, row->run, row->mn_g_mol, e};
    }
    cli_progress_end(&progress);
    runs->shown.item = runs->item;
    return CE_OK;
}

void cli_drawn_runs_free(cli_drawn_runs *runs)
{
    for (size_t i = 0; i < runs->shown.n; i++) ce_evaluation_free(&runs->evaluation[i]);
    free(runs->evaluation);
    free(runs->item);
    *runs = (cli_drawn_runs){0};
}

double cli_draw_calibration(const cli_calibration *c, FILE *to)
{
    ce_estimate_result result;
    ce_answer *answers = cli_answer_unknowns(c, &result);
    const double height = answers == NULL ? 0.0 : ce_figure_calibration(&result, to);
    cli_answers_free(answers, result.n);
    return height;
}

double cli_draw_residuals(const cli_calibration *c, FILE *to)
{
    return ce_figure_residuals(&c->fit, c->series.polymer, to);
}

double cli_draw_influence(const cli_calibration *c, FILE *to)
{
    return ce_figure_influence(&c->fit, c->series.polymer, to);
}

double cli_draw_range(const cli_calibration *c, FILE *to)
{
    return ce_figure_range(&c->fit, c->series.polymer, to);
}

/* Each relation fitted to the same standards in the same way; those that cannot be stay empty. */
double cli_draw_relations(const cli_calibration *c, FILE *to)
{
    ce_fit fits[CE_RELATIONS] = {0};
    for (size_t r = 0; r < CE_RELATIONS; r++) {
        ce_fit_options o = c->fit.options;
        o.relation = (ce_relation)r;
        o.compare = o.diagnose = false;
        o.resamples = 0;
        (void)ce_fit_series(&c->series, &o, &fits[r], NULL);
    }
    const double height = ce_figure_relations(&c->fit, fits, c->series.polymer, to);
    for (size_t r = 0; r < CE_RELATIONS; r++) ce_fit_free(&fits[r]);
    return height;
}
