/* SPDX-License-Identifier: GPL-3.0-or-later
 * Estimates of Mn and of Tg, written out. JSON schema chainend.estimate/1. */
#ifndef CE_OUTPUT_ESTIMATE_H
#define CE_OUTPUT_ESTIMATE_H

#include <chainend/estimate.h>
#include <chainend/series.h>

#include "output/document.h"

/* One answer: Mn of a Tg, or Tg of an Mn. */
typedef struct {
    char *name;      /* owned by the caller                                            */
    bool from_runs;  /* name is the path of a run file                                 */
    size_t readings; /* of the unknown; runs assumed of a new sample when tg_of_mn     */
    bool tg_of_mn;
    ce_status status; /* not CE_OK: refused, error says why                            */
    ce_error error;
    ce_estimate mn;
    ce_tg_estimate tg;
    char hint[400]; /* what to attack first; may be ""                                */
    bool despite;   /* a mismatch with the calibration was overruled                   */
    ce_monte_carlo monte_carlo; /* trials 0 = not asked for                            */
} ce_answer;

typedef struct {
    size_t n;
    const ce_answer *answer;
    const ce_fit *fit;
    ce_construction construction;
    double rate_K_min;
    ce_history history;
    const char *polymer, *scope;
    bool ascii;                            /* no other characters in the ruler               */
    bool celsius_assumed;                  /* a reading came without a unit                  */
    double ceiling_tg_K, ceiling_mn_g_mol; /* one run of an unknown                          */
} ce_estimate_result;

/* What an answer is called in text: of a path the last part. */
const char *ce_answer_label(const ce_answer *answer);

CE_DOCUMENT(estimate, ce_estimate_result)

#endif
