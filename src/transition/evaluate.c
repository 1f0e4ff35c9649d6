/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/evaluate.h"

#include "transition/modelled.h"
#include "transition/windows.h"

#include <stdlib.h>
#include <string.h>

static const double straight_glass_K = 60.0; /* a glass line is no line over much more            */
static const double least_baseline_K = 10.0; /* beside the step, else the run cuts it off       */

/* What lies around the step: points in it, baseline that is missing, the next event. */
static void survey(const ce_windowed *s, ce_finding *out)
{
    const ce_curve *c = s->curve;
    double on = out->points.at[CE_ONSET], end = out->points.at[CE_END];
    if (!isfinite(on)) on = out->points.low_K;
    if (!isfinite(end)) end = out->points.high_K;
    const double first = c->T[0], last = c->T[c->n - 1];
    const size_t b = ce_curve_index(c, fmax(end, out->points.high_K));
    for (size_t i = ce_curve_index(c, fmin(on, out->points.low_K)); i < b; i++)
        out->points_within += c->w[i];
    out->missing_K =
        fmax(fmax(least_baseline_K - (last - end), least_baseline_K - (on - first)), 0.0);
    out->event_K = out->range.high_K < last - 4.0 ? out->range.high_K - end : (double)NAN;
}

static void doubt_shoulder(ce_finding *out)
{
    const double doubt = ce_shoulder_doubt(&out->points);
    out->u_window[CE_HALF_STEP] = hypot(out->u_window[CE_HALF_STEP], doubt);
    out->shoulder_K = doubt > 0.0 ? out->points.shoulder_K : 0.0;
    for (ce_construction k = CE_ONSET; k < CE_CONSTRUCTIONS; k++)
        out->u_window[k] = hypot(out->u_window[k], ce_tangent_doubt(&out->points, k));
}

ce_status ce_read_step(const ce_curve *curve, const ce_place *place, ce_window edge,
                       const ce_transition_options *o, ce_finding *out, ce_error *err)
{
    ce_tracing *t = malloc(sizeof *t);
    memset(out, 0, sizeof *out);
    if (t == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    ce_windowed s = {.curve = curve, .edge = edge, .t = t};
    ce_status st = ce_settle_windows(&s, place, o, err);
    if (st == CE_OK) {
        const double tolerance = fmax(0.08 * s.p.step, 4.0 * curve->noise);
        out->range.low_K = fmax(fmax(edge.low_K, curve->T[0] + 1.0),
                                s.glass.high_K - fmax(straight_glass_K, 5.0 * s.width));
        out->range.high_K = ce_reach(curve, s.liquid.low_K, s.liquid.high_K,
                                     fmin(edge.high_K, curve->T[curve->n - 1] - 1.5), tolerance);
        out->noise = curve->noise;
        const bool given = !isnan(o->glass.low_K) || !isnan(o->liquid.low_K);
        st = given || ce_windows_straight(&s) ? CE_E_NOFIT : ce_take_model(&s, o, out);
        if (st == CE_E_NOMEM)
            (void)ce_fail(err, st, "out of memory");
        else {
            if (st != CE_OK) ce_take_windows(&s, o, out);
            st = CE_OK;
            out->glass = s.glass;
            out->liquid = s.liquid;
            out->bend = ce_windows_sag(&s);
            survey(&s, out);
            doubt_shoulder(out);
            out->part = place->part;
            out->strength = place->score / fmax(1.0, out->rough / 0.01);
        }
    }
    free(t);
    return st;
}
