/* SPDX-License-Identifier: GPL-3.0-or-later
 * Synthetic DSC runs and series whose truth is known: a glass with structural relaxation (Tool,
 * Narayanaswamy, Moynihan) taken through any temperature programme, seen by an instrument.
 *
 * Equations, numerical scheme and sources: chainend-methods(7), SIMULATION. */
#ifndef CHAINEND_SIMULATE_H
#define CHAINEND_SIMULATE_H

#include <chainend/base.h>
#include <chainend/run.h>
#include <chainend/series.h>
#include <chainend/transition.h>

#include <stdbool.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

/* One glass. Relaxation time tau = exp(ln_a + x h/T + (1 - x) h/Tf), s; relaxation function
 * exp(-xi^beta). Heat capacities are straight lines, J/(g K):
 *   glass   cp_glass + slope_glass (T - ref_K)
 *   liquid  that of the glass + step + slope_step (T - ref_K) */
typedef struct {
    double ln_a;                  /* ln(A/s)                                                  */
    double h_K;                   /* activation enthalpy over R, K, > 0                       */
    double x;                     /* non-linearity, 0 < x <= 1                                */
    double beta;                  /* stretching exponent, 0 < beta <= 1                       */
    double ref_K;                 /* where the heat-capacity lines are anchored, K            */
    double cp_glass, slope_glass; /* J/(g K), J/(g K^2)                                       */
    double step, slope_step;      /* J/(g K) > 0, J/(g K^2)                                   */
    double share;                 /* mass fraction of this glass, 0 < share <= 1              */
} ce_glass;

/* A published parameter set. */
typedef struct {
    const char *name;     /* "pvac", "ps", "pmma", ...                                       */
    const char *material; /* "poly(vinyl acetate)"                                           */
    double ln_a, h_K, x, beta;
    const char *source;    /* publication                                                     */
    const char *certainty; /* how sure the numbers are                                        */
} ce_glass_set;
/* The published sets; *n of them. Static storage. */
CE_API const ce_glass_set *ce_glass_sets(size_t *n);
/* By name, case-insensitive; NULL when there is none. */
CE_API const ce_glass_set *ce_glass_set_find(const char *name);

/* Temperature where the equilibrium relaxation time is tau_s: T = h/(ln tau - ln A), K. */
CE_API double ce_glass_temperature(const ce_glass *glass, double tau_s);
/* Move a glass to another temperature by moment of ln A alone: afterwards tau(to_K) is what
 * tau(from_K) was, h, x and beta unchanged; the heat-capacity lines move along (ref_K). */
CE_API void ce_glass_move(ce_glass *glass, double from_K, double to_K);

/* One ramp or hold. */
typedef struct {
    bool hold;
    double to_K;       /* ramp: where it ends, K                                             */
    double rate_K_min; /* ramp: magnitude, > 0; the direction follows from to_K              */
    double hold_s;     /* hold: duration, s, > 0                                             */
    bool unrecorded;   /* not written to the run                                             */
} ce_programme_step;

typedef struct {
    double start_K;
    size_t n;
    const ce_programme_step *step; /* borrowed                                               */
    /* What happened before the start, when the start is not in the liquid: the glass was cooled
     * from equilibrium at prior_rate_K_min, and aged on the way for prior_age_s at prior_age_K. */
    double prior_rate_K_min; /* default 10                                                   */
    double prior_age_K, prior_age_s; /* default none (0 s)                                   */
} ce_programme;

/* A first-order event on heating besides the glass transition: a Gaussian in temperature. */
typedef struct {
    double centre_K, sd_K;
    double enthalpy_J_g; /* > 0 melting (endothermic), < 0 cold crystallisation              */
} ce_peak;

/* What the instrument adds. Powers in mW, of the whole sample. */
typedef struct {
    double mass_g;                  /* sample mass, g                            (default 0.010) */
    double interval_s;              /* time between recorded points              (default 0.6)   */
    double noise_mW;                /* standard deviation of one point           (default 0)     */
    double noise_time_s;            /* correlation time of the noise; 0 = white  (default 0)     */
    double temperature_noise_K;     /* standard deviation of a recorded T        (default 0)     */
    double temperature_offset_K;    /* recorded T minus true T                   (default 0)     */
    double offset_mW, drift_mW_min; /* signal zero and its drift over run time  (default 0)   */
    double transient_mW;            /* at the start of each heating, endothermic; minus that at the
                                    start of each cooling; decays exponentially (default 0)  */
    double transient_s;             /* its time constant                         (default 15)    */
    double lag_s;                   /* thermal lag, first-order, same both ways  (default 0)     */
} ce_instrument;

typedef enum {
    CE_RELAX_RECURSIVE, /* sum of exponentials, linear cost (default)                        */
    CE_RELAX_DIRECT     /* superposition sum as published, quadratic cost                    */
} ce_relax_scheme;

#define CE_MAX_GLASSES 2
#define CE_MAX_PEAKS   8
typedef struct {
    size_t n_glasses; /* 1, or 2 for a blend                                                  */
    ce_glass glass[CE_MAX_GLASSES];
    ce_programme programme;
    size_t n_peaks;
    ce_peak peak[CE_MAX_PEAKS];
    ce_instrument instrument;
    uint64_t seed;          /* of the noise                               (default 1)         */
    double max_step_K;      /* temperature step of the integration        (default 0.1)       */
    ce_relax_scheme scheme; /* default CE_RELAX_RECURSIVE                                     */
} ce_simulation_config;
/* Defaults as stated; one glass without relaxation parameters, an empty programme. */
CE_API ce_simulation_config ce_simulation_config_default(void);

/* The truth about one ramp that runs through a transition: of the noise-free curve with its lag,
 * against the exact baselines with theirs, as a reader of the file would find it, so the
 * temperature offset is in; the start-up transient and the peaks are not. The definitions are those
 * of ce_construction. Of a blend, each glass against its own part of the curve. */
typedef struct {
    ce_segment_kind kind;
    size_t segment, nth_of_kind;   /* 1-based, of the recorded segments                        */
    size_t glass;                  /* 0 or 1                                                   */
    double rate_K_min;             /* negative on cooling                                      */
    double tg_K[CE_CONSTRUCTIONS]; /* fictive: the model's own; NaN = not on this ramp       */
    double fictive_area_K;         /* from equal areas under the simulated curve, lag removed  */
    double half_step_sample_K;     /* without lag and offset                                   */
    double step_J_gK;              /* at the half-step, of the whole sample's mass             */
    double peak, peak_K;           /* largest normalised heat capacity and where               */
} ce_ramp_truth;

typedef struct ce_simulation ce_simulation; /* opaque, immutable                             */

/* ce_simulate_run - simulate one run.
 *   in   config
 *   out  simulation  the caller's, to be freed with ce_simulation_free(); NULL unless CE_OK
 *   ret  CE_OK | CE_E_DOMAIN (impossible value, the message names it as the command-line option
 *        does) | CE_E_LIMIT | CE_E_NOMEM */
CE_API ce_status ce_simulate_run(const ce_simulation_config *config, ce_simulation **simulation,
                                 ce_error *err);
CE_API void ce_simulation_free(ce_simulation *simulation); /* NULL allowed */

/* Recorded points; arrays are borrowed. The signal is the power of the whole sample, mW, endo up.
 */
CE_API size_t ce_simulation_size(const ce_simulation *simulation);
CE_API const double *ce_simulation_time_s(const ce_simulation *simulation);
CE_API const double *ce_simulation_temperature_K(const ce_simulation *simulation);
CE_API const double *ce_simulation_signal_mW(const ce_simulation *simulation);
/* Fictive temperature at each point, K (of glass 0 or 1); NULL when there is no such glass. */
CE_API const double *ce_simulation_fictive_K(const ce_simulation *simulation, size_t glass);
CE_API const ce_ramp_truth *ce_simulation_truth(const ce_simulation *simulation, size_t *n);
CE_API const ce_simulation_config *ce_simulation_get_config(const ce_simulation *simulation);

/* How a run is written. Start from ce_layout_default(). */
typedef enum {
    CE_HEAD_PARENTHESES, /* Name (unit)  */
    CE_HEAD_BRACKETS,    /* Name [unit]  */
    CE_HEAD_SLASH,       /* Name / unit  */
    CE_HEAD_BARE,        /* Name unit; blanks in the name become underscores */
    CE_HEAD_UNIT_ROW,    /* names, then a row of units */
    CE_HEAD_NONE         /* numbers only */
} ce_head_style;
typedef enum { CE_LANGUAGE_EN, CE_LANGUAGE_DE } ce_language;
typedef struct {
    char delimiter;               /* ',' ';' '\t' '|' or ' ' (aligned blanks)  (default ',')   */
    char decimal;                 /* '.' or ','                                (default '.')   */
    const char *encoding;         /* iconv name, or "UTF-8-BOM"                (default UTF-8) */
    const char *time_unit;        /* "s" or "min"                              (default s)     */
    const char *temperature_unit; /* "°C" or "K"                               (default °C)    */
    const char *signal_unit;      /* "mW", "W/g" or "J/(g K)"                  (default W/g)   */
    bool exo_up;                  /* write the signal upside down              (default false) */
    bool state_sign;              /* name the sign in the header               (default true)  */
    ce_head_style head;           /* default CE_HEAD_PARENTHESES                               */
    ce_language language;         /* of header and preamble                    (default EN)    */
    bool preamble;                /* lines about the sample above the table    (default false) */
    bool crlf;                    /* line ends                                 (default false) */
    bool last_heating_only; /* leave out what was recorded before it, and count time from there
                               (default false)                                               */
} ce_layout;
CE_API ce_layout ce_layout_default(void);
/* Ready-made layouts "comma", "semicolon", "tab", "blanks"; false when there is no such name. */
CE_API bool ce_layout_find(const char *name, ce_layout *layout);

/* ce_simulation_write - the run as a file's bytes.
 *   in   layout  NULL = default;  sample  name for the preamble, UTF-8, NULL = none
 *   out  bytes, n  the caller's to free(); NULL unless CE_OK
 *   ret  CE_OK | CE_E_ARG (unknown unit, encoding; delimiter equals decimal mark) | CE_E_NOMEM */
CE_API ce_status ce_simulation_write(const ce_simulation *simulation, const ce_layout *layout,
                                     const char *sample, char **bytes, size_t *n, ce_error *err);
/* The truth as JSON text, schema "chainend.simulate-run/1", newline at the end; the caller's to
 * free(). */
CE_API ce_status ce_simulation_truth_json(const ce_simulation *simulation, char **json,
                                          ce_error *err);

/* Tg, K, at a number-average molar mass, g/mol. */
typedef double (*ce_tg_of_mn)(double mn_g_mol, const void *context);

typedef struct {
    const char *name; /* borrowed during the call                                            */
    ce_role role;
    double mn_g_mol; /* true number-average molar mass, > 0                                  */
    size_t runs;     /* repeats, >= 1                                                        */
} ce_sample_plan;

typedef struct {
    size_t n;
    const ce_sample_plan *sample;
    ce_tg_of_mn relation;
    const void *relation_context;
    ce_construction anchor; /* what the relation's Tg is: CE_HALF_STEP (default) or CE_FICTIVE   */
    double mn_u_rel;        /* relative standard uncertainty of a certificate     (default 0)    */
    double mn_common_u_rel; /* the same, one error shared by all certificates     (default 0)    */
    double run_sd_K;        /* run-to-run scatter of Tg                           (default 0)    */
    double sample_sd_K;     /* sample-to-sample scatter of Tg                     (default 0)    */
    double mass_spread;     /* half-width of the spread of sample masses, relative (default 0)   */
    bool whole_runs;        /* simulate runs, not bare Tg values                  (default false) */
    /* Of whole runs: glass[0] gives all but its position, the programme is shifted by the distance
     * of the sample's Tg from programme_tg_K, rounded to 5 K (0 = not shifted). */
    ce_simulation_config run;
    double programme_tg_K;
    uint64_t seed;  /* default 1                                                                  */
    size_t threads; /* default 1; the result does not depend on it                               */
} ce_series_plan;
CE_API ce_series_plan ce_series_plan_default(void);

typedef struct {
    double tg_K;    /* bare reading, or the truth of the anchor as recorded in this run           */
    double error_K; /* its run-to-run part                                                       */
    ce_simulation *simulation; /* NULL for bare values; owned                                     */
} ce_simulated_reading;
typedef struct {
    const char *name; /* owned copy                                                               */
    ce_role role;
    double mn_g_mol, mn_certified_g_mol; /* NaN certified for unknowns                            */
    double tg_relation_K;                /* of the relation at the true Mn                        */
    double tg_K;                         /* of this sample: with its sample-to-sample part        */
    double ln_a;                         /* of the glass that has it; NaN for bare values         */
    size_t n;
    ce_simulated_reading *reading;
} ce_simulated_sample;
typedef struct {
    size_t n;
    ce_simulated_sample *sample;
} ce_simulated_series;

/* ce_simulate_series - standards, unknowns and controls of a series, with certificates and repeats.
 *   Certified Mn = true Mn (1 + common)(1 + own), normal errors. For whole runs, ln A of each sample
 *   is found by root finding so that the anchor on the last heating of the run, as the instrument
 *   sees it without noise and offset, equals the sample's Tg within 1e-5 K; h, x, beta and the step
 *   height stay. Run-to-run scatter enters as an offset of the recorded temperature.
 *   out  series  the caller's, to be emptied with ce_simulated_series_free(); empty unless CE_OK
 *   ret  CE_OK | CE_E_DOMAIN | CE_E_NOFIT (no position of the glass gives the Tg under this
 *        programme) | CE_E_NOMEM */
CE_API ce_status ce_simulate_series(const ce_series_plan *plan, ce_simulated_series *series,
                                    ce_error *err);
CE_API void ce_simulated_series_free(ce_simulated_series *series);

/* What a series file and its truth say besides the numbers. Borrowed; UTF-8, one line each. */
typedef struct {
    const char *polymer, *scope; /* settings lines; NULL = none                              */
    const char *relation;        /* name of the relation                                     */
    size_t n_parameters;
    const char *const *parameter_name; /* JSON keys, e.g. "Tg_inf_K", "K_K_g_mol"              */
    const double *parameter;
    const char *const *run_file; /* of every reading in order, or NULL for bare Tg values    */
} ce_series_words;
/* The series file (CSV, as series(5) has it), and the truth as JSON text, schema
 * "chainend.simulate-series/1"; both the caller's to free(). Parameters are those of the plan that
 * made the series. */
CE_API ce_status ce_simulated_series_table(const ce_series_plan *plan,
                                           const ce_simulated_series *series,
                                           const ce_series_words *words, char **text,
                                           ce_error *err);
CE_API ce_status ce_simulated_series_json(const ce_series_plan *plan,
                                          const ce_simulated_series *series,
                                          const ce_series_words *words, char **json, ce_error *err);

#ifdef __cplusplus
}
#endif
#endif
