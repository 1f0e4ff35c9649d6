/* SPDX-License-Identifier: GPL-3.0-or-later
 * The temperature programme of a run, found in its time and temperature. */
#ifndef CE_RUN_SEGMENTS_H
#define CE_RUN_SEGMENTS_H

#include "run/run_internal.h"

/* Find the segments of run->temperature_K over run->time_s (or over the row number when it is
 * NULL; rate_K_min then gives the size of the rate, NaN = not known). start: sorted first points of
 * n_starts stretches that belong to segments of their own; point 0 is implied. Lines are left 0.
 * CE_OK | CE_E_LIMIT | CE_E_NOMEM */
ce_status ce_run_find_segments(ce_run *run, const size_t *start, size_t n_starts, double rate_K_min,
                               ce_error *err);

#endif
