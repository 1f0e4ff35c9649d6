/* SPDX-License-Identifier: GPL-3.0-or-later
 * From a place on a curve to a transition: windows, lines, constructions, uncertainty. */
#ifndef CE_TRANSITION_EVALUATE_H
#define CE_TRANSITION_EVALUATE_H

#include "transition/construct.h"
#include "transition/locate.h"

/* Everything known about one transition, in the curve's orientation and unit. */
typedef struct {
    ce_window glass, liquid; /* where the baselines rest                                        */
    ce_window range;         /* fitted by the model                                             */
    ce_lines lines;
    ce_points points;
    double u_noise[CE_CONSTRUCTIONS], u_window[CE_CONSTRUCTIONS];
    double step_u, width_u;
    double noise;         /* of a recorded point                                             */
    double hook;          /* start-up at the first point of the glass window, in steps       */
    double bend;          /* the larger sag of a window, in steps                            */
    double points_within; /* recorded points between onset and end                           */
    double event_K;       /* distance of the next event from the end; NaN = none             */
    double missing_K;     /* baseline that the run lacks; 0 = none                           */
    double shoulder_K;    /* near half of the height; 0 = none                               */
    double rough;         /* what the better description leaves over, r.m.s. in steps        */
    double unlike;        /* what the model of one glass leaves over where it was not taken     */
    double strength;      /* of the evidence: height over all that is left unexplained       */
    bool model;
    bool part; /* of a wider place that is made up of two                                       */
} ce_finding;

/* Windows NaN = choose; edge: no data beyond (neighbouring transitions). CE_OK | CE_E_REFUSED |
 * CE_E_NOMEM, with a message. */
ce_status ce_read_step(const ce_curve *curve, const ce_place *place, ce_window edge,
                       const ce_transition_options *options, ce_finding *finding, ce_error *err);

#endif
