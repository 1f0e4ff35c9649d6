/* SPDX-License-Identifier: GPL-3.0-or-later
 * Baselines on windows beside a step, and the constructions on them. */
#ifndef CE_TRANSITION_WINDOWS_H
#define CE_TRANSITION_WINDOWS_H

#include "transition/evaluate.h"
#include "transition/lines.h"

#include <math.h>

enum { CE_TRACE = 600 };

/* Room for one trace. */
typedef struct {
    double T[CE_TRACE], y[CE_TRACE], low[CE_TRACE], high[CE_TRACE];
    ce_trace trace;
} ce_tracing;

/* State of an evaluation by windows. */
typedef struct {
    const ce_curve *curve;
    ce_window edge;
    ce_window glass, liquid;
    ce_fitted_line g, l;
    ce_lines lines;
    ce_points p;
    double width, smooth_K;
    ce_tracing *t;
} ce_windowed;

/* What an area over the whole step is off by, K, when the lines beside it look perfect; from the tuning
 * half of tests/bench/transition_accuracy. */
extern const double ce_area_part_K;

static inline double ce_clamp(double v, double low, double high)
{
    return fmin(fmax(v, low), high);
}

/* Windows from the place, moved off the tails of the step as it is seen between them; not farther
 * than where the place was found straight, and not when the step falls apart over it. CE_OK |
 * CE_E_REFUSED, with a message. */
ce_status ce_settle_windows(ce_windowed *s, const ce_place *place, const ce_transition_options *o,
                            ce_error *err);
/* True when windows a step width farther off are straight to some hundred-thousandths of the step where
 * the noise lets that be seen: no tail of the step is in them, and nothing has to be extrapolated by
 * a model. They are taken then. */
bool ce_windows_straight(ce_windowed *s);
/* Curvature of the curve over the windows as far as it stands out of the noise, in steps. */
double ce_windows_sag(const ce_windowed *s);
/* The constructions on the windows' lines with their uncertainty. */
void ce_take_windows(const ce_windowed *s, const ce_transition_options *o, ce_finding *out);

#endif
