/* SPDX-License-Identifier: GPL-3.0-or-later
 * Internal to the room: estimates of prepared unknowns and their budgets. */
#ifndef CE_ESTIMATE_BUDGET_H
#define CE_ESTIMATE_BUDGET_H

#include "estimate/law.h"

/* ce_estimate_mn() of a prepared unknown. */
ce_status ce_estimate_law(const ce_law *law, ce_estimate *e, ce_error *err);

/* Shares of the variance of reading minus curve at the estimate, largest first. */
void ce_budget_fill(const ce_law *law, const ce_held *held, ce_estimate *e);

#endif
