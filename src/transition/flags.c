/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/flags.h"

#include <math.h>

void ce_add_flag(ce_transition *t, ce_flag_code code, double number)
{
    if (t->n_flags < CE_MAX_FLAGS) t->flags[t->n_flags++] = (ce_flag){code, number};
}

void ce_flag_finding(const ce_finding *f, ce_transition *t)
{
    if (t->overshoot > 1.0) ce_add_flag(t, CE_FLAG_OVERSHOOT, t->overshoot);
    if (f->shoulder_K > 0.0) ce_add_flag(t, CE_FLAG_SHOULDER, f->shoulder_K);
    if (f->points.step < 10.0 * f->noise)
        ce_add_flag(t, CE_FLAG_SMALL_STEP, f->points.step / f->noise);
    const double shorter =
        fmin(t->glass.high_K - t->glass.low_K, t->liquid.high_K - t->liquid.low_K);
    if (shorter < 8.0) ce_add_flag(t, CE_FLAG_SHORT_WINDOW, shorter);
    const double rough = fmax(f->rough, f->unlike);
    if (rough > 0.015) ce_add_flag(t, CE_FLAG_ROUGH, rough);
    if (f->bend > 0.012) ce_add_flag(t, CE_FLAG_CURVED_BASELINE, f->bend);
    if (f->hook > 0.02) ce_add_flag(t, CE_FLAG_TRANSIENT, f->hook);
    if (f->event_K < 25.0) ce_add_flag(t, CE_FLAG_PEAK_ADJACENT, f->event_K);
    if (f->missing_K > 0.0) ce_add_flag(t, CE_FLAG_CUT_OFF, f->missing_K);
    if (t->width_K > 25.0) ce_add_flag(t, CE_FLAG_WIDE, t->width_K);
    if (f->points_within < 8.0) ce_add_flag(t, CE_FLAG_SPARSE, f->points_within);
}
