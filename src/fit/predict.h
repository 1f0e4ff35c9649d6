/* SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CE_FIT_PREDICT_H
#define CE_FIT_PREDICT_H

#include <chainend/fit.h>

/* g' M g, M row-major p x p. */
double ce_quadratic_form(size_t p, const double *matrix, const double *g);
/* The parameters' values alone. */
void ce_fit_theta(const ce_fit *fit, double theta[CE_MAX_PARAMETERS]);

#endif
