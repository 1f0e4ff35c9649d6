/* SPDX-License-Identifier: GPL-3.0-or-later
 * The glass transition of one segment: baselines, constructions, uncertainty, flags. */
#ifndef CHAINEND_TRANSITION_H
#define CHAINEND_TRANSITION_H

#include <chainend/base.h>
#include <chainend/run.h>

#ifdef __cplusplus
extern "C" {
#endif

/* The ways to read one temperature off the step. Definitions and sources: chainend-methods(7). */
typedef enum {
    CE_ONSET,      /* steepest tangent meets the glassy line                                   */
    CE_MIDPOINT,   /* halfway in heat flow between extrapolated onset and extrapolated end     */
    CE_HALF_STEP,  /* curve meets the line midway between the two extrapolated baselines       */
    CE_INFLECTION, /* steepest point of the step                                               */
    CE_END,        /* steepest tangent meets the liquid line                                   */
    CE_FICTIVE,    /* equal areas: limiting fictive temperature                                */
    CE_CONSTRUCTIONS
} ce_construction;
/* "onset", "midpoint", "half_step", "inflection", "end", "fictive". */
CE_API const char *ce_construction_name(ce_construction construction);
/* CE_CONSTRUCTIONS when there is no such name. */
CE_API ce_construction ce_construction_find(const char *name);

typedef struct {
    double value_K;    /* NaN = this construction does not exist here                       */
    double u_K;        /* combined standard uncertainty                                     */
    double u_noise_K;  /* its part from noise (autocorrelation allowed for)                 */
    double u_window_K; /* its part from the choice of baseline windows                      */
} ce_reading;

typedef struct {
    double low_K, high_K;
} ce_window;

/* Straight line y = at_ref + slope (T - ref_K), in the signal's unit. */
typedef struct {
    double ref_K, at_ref, slope;
} ce_line;

/* A named doubt with the number behind it. */
typedef enum {
    CE_FLAG_OVERSHOOT,    /* enthalpy recovery; number = height over the step height            */
    CE_FLAG_SMALL_STEP,   /* number = step height over noise sd                                 */
    CE_FLAG_SHORT_WINDOW, /* number = length of the shorter window, K                           */
    CE_FLAG_CURVED_BASELINE, /* number = curvature over the window in step heights */
    CE_FLAG_TRANSIENT,     /* start-up reaches into the window; number = its size in step heights */
    CE_FLAG_PEAK_ADJACENT, /* number = distance of the event from the end of the step, K         */
    CE_FLAG_CUT_OFF,       /* the run ends within the transition; number = missing K              */
    CE_FLAG_WIDE,          /* number = width, K                                                  */
    CE_FLAG_SPARSE,        /* number = points within the step                                    */
    CE_FLAG_FIRST_HEATING, /* number = nth heating used                                          */
    CE_FLAG_HEATINGS_DIFFER, /* number = first minus this heating, K */
    CE_FLAG_SIGN_GUESSED, /* heat-flow sign taken from the step                                 */
    CE_FLAG_STEP_IMPLAUSIBLE, /* step outside 0.15-0.65 J/(g K): number = step, J/(g K) */
    CE_FLAG_ROUGH,        /* number = what is left unexplained beyond the noise, step heights   */
    CE_FLAG_NOT_MONOTONE, /* number = steps back of the temperature in the segment            */
    CE_FLAG_NO_OVERLAP,   /* windows given by the user do not enclose a step                    */
    CE_FLAG_SHOULDER,     /* number = K over which the curve stays near half of its height      */
    CE_FLAGS
} ce_flag_code;
typedef struct {
    ce_flag_code code;
    double number;
} ce_flag;
#define CE_MAX_FLAGS 20
CE_API const char *ce_flag_name(ce_flag_code code); /* "overshoot", "small step", ... */
/* One plain sentence with the number, e.g. "overshoot: 1.4 times the step height; ...". */
CE_API void ce_flag_text(const ce_flag *flag, char *text, size_t room);

typedef struct {
    ce_reading tg[CE_CONSTRUCTIONS];
    double step_height, step_height_u; /* at the half-step; unit below */
    const char *step_unit;           /* "J/(g K)" when mass and rate are known, else "W/g", "mW" */
    double width_K, width_u_K;       /* extrapolated end minus extrapolated onset                */
    double noise_sd;                 /* per point, in the signal's unit                          */
    double overshoot;                /* height above the liquid line over the step height; >= 0  */
    ce_window glass, liquid;         /* where the baselines were fitted                          */
    ce_line glass_line, liquid_line; /* in the signal's unit, over temperature                   */
    ce_line tangent;                 /* at the inflection                                        */
    bool windows_given;              /* by the caller                                            */
    bool model_lines;                /* lines from the step model, not from windows alone        */
    size_t n_flags;
    ce_flag flags[CE_MAX_FLAGS];
} ce_transition;

typedef struct {
    ce_segment segment;
    size_t n;            /* >= 1, strongest first                                               */
    ce_transition *item; /* owned                                                               */
} ce_transitions;

typedef struct {
    size_t segment; /* 1-based segment; 0 = choose: the last heating that spans a transition */
    size_t heating; /* 1-based heating; 0 = any                                              */
    ce_window glass, liquid; /* NaN limits = choose */
    bool ensemble; /* window part of the uncertainty               (default true)           */
} ce_transition_options;
CE_API ce_transition_options ce_transition_options_default(void);

/* Decide the sign of heat flow of a run whose file does not state it, from the step itself (a glass
 * takes up heat on heating), and flip the run when needed. CE_OK also when the sign was known. */
CE_API ce_status ce_run_settle_sign(ce_run *run, ce_error *err);

/* ce_transition_find - the glass transitions of one segment of a run.
 *   in   run, options (NULL = defaults)
 *   out  found    strongest first, the caller's to free with ce_transitions_free(); emptied on
 * failure ret  CE_OK | CE_E_REFUSED (no step: the message says what size would have been seen; too
 * little curve; segment cut) | CE_E_ARG (no such segment) | CE_E_NOMEM */
CE_API ce_status ce_transition_find(const ce_run *run, const ce_transition_options *options,
                                    ce_transitions *found, ce_error *err);
CE_API void ce_transitions_free(ce_transitions *found);

#ifdef __cplusplus
}
#endif
#endif
