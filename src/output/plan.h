/* SPDX-License-Identifier: GPL-3.0-or-later
 * A plan of further measurements, written out. JSON schema chainend.plan/1. */
#ifndef CE_OUTPUT_PLAN_H
#define CE_OUTPUT_PLAN_H

#include <chainend/estimate.h>

#include "output/document.h"

typedef struct {
    const ce_plan *plan;
    const ce_fit *fit;
    ce_plan_options options;
    const char *polymer;
} ce_plan_result;

CE_DOCUMENT(plan, ce_plan_result)

#endif
