/* SPDX-License-Identifier: GPL-3.0-or-later
 * What a perfect reader finds on a noise-free ramp. */
#ifndef CE_SIMULATE_LANDMARKS_H
#define CE_SIMULATE_LANDMARKS_H

#include "simulate/trace.h"

/* First-order lag, dy/dt = (input - y)/lag: the output after dt_s in which the input goes straight
 * from in0 to in1, exact. lag_s 0 returns in1. */
double ce_lag_step(double y, double in0, double in1, double dt_s, double lag_s);

/* The instrument as far as it changes the noise-free landmarks. */
typedef struct {
    double lag_s;
    double drift_J_gK2; /* slope that the drift adds to the curve, per kelvin    */
} ce_view;

/* The truth of one glass on one ramp. *spans is false when the ramp does not run from glass to
 * liquid or back; truth is then untouched. CE_OK | CE_E_NOMEM. */
ce_status ce_landmarks(const ce_trace *trace, const ce_glass *glass, size_t which,
                       const ce_stretch *stretch, const ce_view *view, ce_ramp_truth *truth,
                       bool *spans, ce_error *err);

/* Equal areas (Moynihan et al., J. Am. Ceram. Soc. 59 (1976) 12, from memory): the temperature where
 * the integral of the step line up to high_K equals area (J/g). */
double ce_equal_areas(const ce_glass *glass, double high_K, double area_J_g);

#endif
