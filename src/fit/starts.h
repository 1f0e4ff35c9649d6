/* SPDX-License-Identifier: GPL-3.0-or-later
 * Start values for the relations. */
#ifndef CE_FIT_STARTS_H
#define CE_FIT_STARTS_H

#include "fit/model.h"

/* Weighted straight line of transform(y) (NULL: y itself) in the model's abscissa. The weights are
 * those of the Tg alone in a first pass, and with the certificates' share in a second. */
bool ce_start_line(const ce_model *model, size_t n, const ce_eiv_point *point,
                   double (*transform)(double), double *a, double *b);
size_t ce_starts_log_plateau(const ce_model *self, size_t n, const ce_eiv_point *point,
                             double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS]);
size_t ce_starts_log_three(const ce_model *self, size_t n, const ce_eiv_point *point,
                           double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS]);

#endif
