/* SPDX-License-Identifier: GPL-3.0-or-later
 * Finding the steps of a curve, before anything is fitted to them. */
#ifndef CE_TRANSITION_LOCATE_H
#define CE_TRANSITION_LOCATE_H

#include "transition/step.h"

/* The step lies between low_K and high_K; score is its height over what the lines beside it leave
 * unexplained. */
typedef struct {
    double low_K, high_K, step, score;
    bool part; /* of a wider place that is made up of two                                       */
} ce_place;

#define CE_LEAST_SCORE 3.0
/* The first of a segment, K: the programme turns there and the signal has not settled. */
#define CE_START_UP_K 3.0

/* ce_locate - up to room places, best first, none overlapping another.
 *   in   plausible   a step larger than this counts less (the signal's unit; HUGE_VAL = any)
 *   out  found       their number; detectable: the smallest step that would have been found
 *   ret  CE_OK (found may be 0) | CE_E_NOMEM */
ce_status ce_locate(const ce_curve *curve, double plausible, ce_place *place, size_t room,
                    size_t *found, double *detectable);

#endif
