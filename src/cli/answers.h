/* SPDX-License-Identifier: GPL-3.0-or-later
 * Answers about unknowns, as estimate gives them and figures show them. */
#ifndef CE_CLI_ANSWERS_H
#define CE_CLI_ANSWERS_H

#include "cli/calibration.h"
#include "output/estimate.h"
#include "output/fit.h"

/* How unknowns are answered. */
typedef struct {
    bool monte_carlo;
    ce_monte_carlo_options trials;
} cli_answering;
cli_answering cli_answering_default(void);

/* Fill in Mn, interval and hint, unless answer->status is already a refusal. */
void cli_answer(const cli_calibration *c, const cli_answering *how, const ce_unknown *unknown,
                ce_answer *answer);
/* The answer for one sample of the series. */
void cli_answer_sample(const cli_calibration *c, const cli_answering *how, const ce_sample *s,
                       ce_answer *answer);
size_t cli_count_unknowns(const ce_series *series);
/* A calibration as it is shown; borrows from it. */
ce_fit_result cli_fit_result(const cli_calibration *c);
/* What surrounds n answers when they are shown. */
ce_estimate_result cli_estimate_result(const cli_calibration *c, const ce_answer *answer, size_t n);
/* Every unknown of the series; result->n of them. NULL when out of memory. */
ce_answer *cli_answer_unknowns(const cli_calibration *c, ce_estimate_result *result);
void cli_answers_free(ce_answer *answer, size_t n);

#endif
