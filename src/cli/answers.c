/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/answers.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

cli_answering cli_answering_default(void)
{
    return (cli_answering){.trials = ce_monte_carlo_options_default()};
}

void cli_answer(const cli_calibration *c, const cli_answering *how, const ce_unknown *unknown,
                ce_answer *answer)
{
    if (answer->status != CE_OK) return;
    answer->status = ce_estimate_mn(&c->fit, unknown, 0.0, &answer->mn, &answer->error);
    if (answer->status == CE_OK)
        (void)ce_estimate_hint(&c->fit, unknown, &answer->mn, answer->hint, sizeof answer->hint);
    if (answer->status == CE_OK && how->monte_carlo)
        answer->status = ce_monte_carlo_mn(&c->fit, unknown, 0.0, &how->trials,
                                           &answer->monte_carlo, &answer->error);
}

static bool same_or_absent(const double *u, size_t n)
{
    for (size_t i = 1; i < n; i++)
        if (u[i] != u[0] && !(isnan(u[i]) && isnan(u[0]))) return false;
    return true;
}

void cli_answer_sample(const cli_calibration *c, const cli_answering *how, const ce_sample *s,
                       ce_answer *answer)
{
    *answer = (ce_answer){.name = strdup(s->name), .readings = s->n_used, .error = CE_ERROR_INIT};
    if (s->n_used == 0) {
        answer->status =
            ce_fail_at(&answer->error, CE_E_REFUSED, c->series.path, c->series.row[s->row[0]].line,
                       0, "unknown '%.60s' has no usable reading", s->name);
        return;
    }
    ce_unknown unknown = ce_unknown_default();
    unknown.n = s->n_used;
    unknown.tg_K = s->tg_K;
    unknown.mw_over_mn = c->series.row[s->row[0]].dispersity;
    unknown.chain_ends = s->chain_ends;
    unknown.reading_u_K = s->reading_u_K;
    unknown.rate_decades = s->rate_decades;
    if (same_or_absent(s->tg_u_K, s->n_used)) unknown.tg_u_K = s->tg_u_K[0];
    cli_answer(c, how, &unknown, answer);
}

size_t cli_count_unknowns(const ce_series *series)
{
    size_t n = 0;
    for (size_t k = 0; k < series->n_samples; k++) n += series->sample[k].role == CE_UNKNOWN;
    return n;
}

ce_fit_result cli_fit_result(const cli_calibration *c)
{
    return (ce_fit_result){.fit = &c->fit,
                           .construction = c->series.construction,
                           .rate_K_min = c->series.rate_K_min,
                           .history = c->series.history,
                           .n_range = c->n_range,
                           .range = c->range,
                           .series = &c->series,
                           .polymer = c->series.polymer,
                           .ceiling_tg_K = c->ceiling_tg_K,
                           .ceiling_mn_g_mol = c->ceiling_mn_g_mol};
}

ce_estimate_result cli_estimate_result(const cli_calibration *c, const ce_answer *answer, size_t n)
{
    return (ce_estimate_result){.n = n,
                                .answer = answer,
                                .fit = &c->fit,
                                .construction = c->series.construction,
                                .rate_K_min = c->series.rate_K_min,
                                .history = c->series.history,
                                .polymer = c->series.polymer,
                                .scope = c->series.scope,
                                .ceiling_tg_K = c->ceiling_tg_K,
                                .ceiling_mn_g_mol = c->ceiling_mn_g_mol};
}

ce_answer *cli_answer_unknowns(const cli_calibration *c, ce_estimate_result *result)
{
    size_t n = cli_count_unknowns(&c->series), k = 0;
    const cli_answering how = cli_answering_default();
    ce_answer *answer = calloc(n > 0 ? n : 1, sizeof *answer);
    for (size_t i = 0; answer != NULL && i < c->series.n_samples; i++)
        if (c->series.sample[i].role == CE_UNKNOWN)
            cli_answer_sample(c, &how, &c->series.sample[i], &answer[k++]);
    *result = cli_estimate_result(c, answer, answer == NULL ? 0 : n);
    return answer;
}

void cli_answers_free(ce_answer *answer, size_t n)
{
    for (size_t i = 0; answer != NULL && i < n; i++) free(answer[i].name);
    free(answer);
}
