/* SPDX-License-Identifier: GPL-3.0-or-later
 * A calibration checked with controls, written out. JSON schema chainend.check/1. */
#ifndef CE_OUTPUT_CHECK_H
#define CE_OUTPUT_CHECK_H

#include <chainend/estimate.h>
#include <chainend/series.h>

#include "output/document.h"

typedef struct {
    const ce_check *check;
    const ce_control *control; /* as many as the check has                       */
    const char *const *date;   /* of every point of the chart, as the file has it */
    const char *polymer;
    ce_construction construction;
    double rate_K_min;
    ce_history history;
    bool despite; /* a mismatch with the calibration was overruled   */
} ce_check_result;

CE_DOCUMENT(check, ce_check_result)

#endif
