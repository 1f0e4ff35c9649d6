/* SPDX-License-Identifier: GPL-3.0-or-later
 * The model of the step fitted around it, and the constructions on the model's lines. */
#ifndef CE_TRANSITION_MODELLED_H
#define CE_TRANSITION_MODELLED_H

#include "transition/windows.h"

/* The model as fitted, and the work spent on it. */
typedef struct {
    ce_model model;
    size_t work; /* iterations spent                                                            */
    ce_cells cells;
    ce_design design;
} ce_modelled;

/* Fit the model over a range, from one history after the other until one does. The result is owned by
 * *f, also when this fails. CE_OK | CE_E_NOFIT | CE_E_NOMEM. */
ce_status ce_fit_histories(const ce_windowed *s, ce_window range, ce_modelled *f);
void ce_modelled_free(ce_modelled *f);
/* Mean share of the noise in what the cells may be off by: the misfit of a perfect model. */
double ce_expected_misfit(const ce_modelled *f);

/* The model's lines and constructions with their uncertainty, where it follows the curve; CE_E_NOFIT
 * where it does not: then the doubt that this casts on windows is left in out->u_window. */
ce_status ce_take_model(const ce_windowed *s, const ce_transition_options *o, ce_finding *out);

#endif
