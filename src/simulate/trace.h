/* SPDX-License-Identifier: GPL-3.0-or-later
 * The sample on its way through the programme: temperatures and fictive temperatures on a fine grid
 * of nodes, and the heat flow that follows. No instrument yet. */
#ifndef CE_SIMULATE_TRACE_H
#define CE_SIMULATE_TRACE_H

#include "simulate/relax.h"

/* One ramp or hold: nodes first .. last, both included; neighbours share a node. */
typedef struct {
    size_t first, last;
    double rate_K_s; /* 0 in a hold                                          */
    bool recorded;
    size_t index, nth_of_kind; /* 1-based among the recorded ones; 0 = unrecorded      */
    ce_segment_kind kind;
} ce_stretch;

typedef struct {
    size_t n, room;
    double *t_s, *t_K;
    bool *tick; /* a point of the run is recorded at this node  */
    double *tf_K[CE_MAX_GLASSES];
    size_t n_stretches;
    ce_stretch *stretch;
} ce_trace;

/* Lay out the nodes of the programme: at the instrument's ticks, and between them at most
 * max_step_K apart. CE_OK | CE_E_LIMIT | CE_E_NOMEM. */
ce_status ce_trace_plan(const ce_simulation_config *config, ce_trace *trace, ce_error *err);
/* Fill tf_K[glass] for this glass; relax is reused between calls, *relax NULL at first, the caller's
 * to free. */
ce_status ce_trace_relax(const ce_simulation_config *config, size_t glass, ce_trace *trace,
                         ce_relax **relax, ce_error *err);
void ce_trace_free(ce_trace *trace);

/* Specific heat flow (W/g) of one glass at the nodes of a stretch, into flow[0 .. last - first]. */
void ce_trace_flow(const ce_trace *trace, const ce_glass *glass, size_t which,
                   const ce_stretch *stretch, double *flow);

/* Heat-capacity lines, J/(g K), of the glass itself (without its share). */
static inline double ce_glass_cp(const ce_glass *g, double t_K)
{
    return g->cp_glass + g->slope_glass * (t_K - g->ref_K);
}
static inline double ce_glass_step(const ce_glass *g, double t_K)
{
    return g->step + g->slope_step * (t_K - g->ref_K);
}

#endif
