/* SPDX-License-Identifier: GPL-3.0-or-later
 * A series: the table of samples with their runs or Tg values and their molar masses. */
#ifndef CHAINEND_SERIES_H
#define CHAINEND_SERIES_H

#include <chainend/base.h>
#include <chainend/run.h>
#include <chainend/transition.h>

#ifdef __cplusplus
extern "C" {
#endif

/* ---- one run, evaluated ------------------------------------------------------------------- */

typedef struct {
    char *path;       /* owned                                                        */
    ce_status status; /* CE_OK, or why there is no transition: error says it          */
    ce_error error;
    ce_run *run;          /* owned; NULL when unreadable or not kept                      */
    ce_transitions found; /* empty unless CE_OK                                           */
} ce_evaluation;

/* ce_evaluate - read a run, settle its sign, find its transitions.
 *   in   path, reading, how   NULL = defaults
 *        keep_run             keep the run itself (figures need it)
 *   out  evaluation           to be released with ce_evaluation_free(), also on failure
 *   ret  CE_OK, or evaluation->status, with evaluation->error set */
CE_API ce_status ce_evaluate(const char *path, const ce_run_options *reading,
                             const ce_transition_options *how, bool keep_run,
                             ce_evaluation *evaluation);
CE_API void ce_evaluation_free(ce_evaluation *evaluation);

/* ---- the series file ---------------------------------------------------------------------- */

typedef enum { CE_STANDARD, CE_UNKNOWN, CE_CONTROL, CE_LEFT_OUT } ce_role;
CE_API const char *ce_role_name(ce_role role); /* "standard", "unknown", "control", "left-out" */

typedef enum { CE_HISTORY_UNSTATED, CE_HISTORY_ERASED, CE_HISTORY_AS_RECEIVED } ce_history;
CE_API const char *ce_history_name(ce_history history); /* "unstated", "erased", "as received" */

#define CE_MAX_SERIES_ROWS ((size_t)10000)

/* One row: one measurement. Absent numbers are NaN; strings are owned by the series. */
typedef struct {
    size_t line;
    char *sample;
    ce_role role;
    char *run;           /* path as the file says; NULL = a bare Tg                         */
    char *path;          /* the same, found from where the series file is                   */
    double tg_K, tg_u_K; /* stated, or read off the run; tg_u_K of a run is its reading's   */
    double mn_g_mol, mn_u_g_mol, mw_g_mol, dispersity, chain_ends;
    double rate_K_min; /* stated, or of the evaluated segment                             */
    size_t segment;    /* 0 = choose                                                      */
    double mass_g;
    ce_window glass, liquid;
    char *date, *note;
    /* after ce_series_evaluate() */
    bool used;          /* goes into its sample's mean                                     */
    char *reason;       /* why not, in words; NULL when used                               */
    double reduced_K;   /* what ce_fit_reduce_rates() took off tg_K; 0 = as measured       */
    ce_reading reading; /* of the construction taken; value NaN for a bare Tg              */
    size_t heating;     /* nth heating of its file; 0 for a bare Tg                        */
    size_t n_flags;
    ce_flag flags[CE_MAX_FLAGS];
} ce_series_row;

/* Rows with one sample name, in order of first appearance. */
typedef struct {
    char *name; /* owned                                                           */
    ce_role role;
    size_t n_rows, *row; /* indices into the rows, owned                                    */
    size_t n_used;
    double *tg_K;        /* of the n_used used rows, owned                                  */
    double *tg_u_K;      /* their stated uncertainties; NaN where not stated, as for runs    */
    double rate_decades; /* mean log10(rate/reference) of the used rows; 0 unless reduced   */
    double reading_u_K;  /* r.m.s. uncertainty of the readings off runs; NaN for bare Tg      */
    double mean_K, sd_K; /* of the used rows; sd NaN below two                              */
    double mn_g_mol, mn_u_g_mol, mw_g_mol, chain_ends; /* NaN where not given; ends default 2 */
} ce_sample;

typedef struct {
    char *path; /* as given                                                        */
    char *polymer, *scope, *temperature_correction; /* NULL = not stated                      */
    ce_construction construction;
    bool construction_stated;
    double rate_K_min; /* NaN = not stated                                                */
    /* Heating rate all Tg are to be reduced to, K/min; NaN (default) = rows at another rate than
     * the series are left out. Set by the file's setting reduce_to, or before evaluating. */
    double reduce_to_K_min;
    double rate_slope_K_decade, rate_slope_u_K, rate_slope_nu; /* as reduced; NaN = not reduced   */
    ce_history history;
    size_t segment;         /* for all rows; 0 = choose                                        */
    double mn_common_u_rel; /* NaN = not stated                                                */
    double level;           /* NaN = not stated                                                */
    size_t n_rows, n_samples;
    ce_series_row *row;
    ce_sample *sample;
    double run_sd_K,
        run_nu; /* pooled repeatability of the used standards; NaN, 0 without repeats */
} ce_series;

/* ce_series_read - read and check a series file; every fault is reported at once.
 *   in   path      file name, or "-": then run paths are relative to the working folder
 *   out  series    to be released with ce_series_free(); emptied on failure
 *        messages  faults, warnings and notes with their lines; may be NULL
 *   ret  CE_OK | CE_E_IO | CE_E_SYNTAX | CE_E_DOMAIN (messages name each) | CE_E_NOMEM
 *   A row with a fault of its own (Mn = 0, unknown role) is dropped, named in messages, and CE_OK
 * is returned as long as a row is left. */
CE_API ce_status ce_series_read(const char *path, ce_series *series, ce_messages *messages,
                                ce_error *err);
/* The same from memory; run paths are relative to the folder of name. */
CE_API ce_status ce_series_read_memory(const void *bytes, size_t n, const char *name,
                                       ce_series *series, ce_messages *messages, ce_error *err);

/* Called before each run is evaluated: the i-th of n. */
typedef void (*ce_progress)(void *context, size_t i, size_t n, const char *path);

/* ce_series_evaluate - evaluate every run of a series and gather rows into samples.
 *   in   reading, how   defaults for the runs; what a row says for itself wins
 *   out  messages       runs refused (CE_ERROR), doubts (CE_WARNING)
 *   ret  CE_OK | CE_E_NOMEM | CE_E_DOMAIN (stated rates differ and none to reduce to is given).
 * A refused run stays in the table with used = false and a reason. */
CE_API ce_status ce_series_evaluate(ce_series *series, const ce_run_options *reading,
                                    const ce_transition_options *how, ce_progress progress,
                                    void *context, ce_messages *messages, ce_error *err);
/* ce_series_evaluate_run - evaluate the run of one row again, as ce_series_evaluate() did, and keep its
 * curve (figures need it).
 *   ret  as ce_evaluate(); CE_E_ARG when the row has no run */
CE_API ce_status ce_series_evaluate_run(const ce_series *series, size_t row,
                                        const ce_run_options *reading,
                                        const ce_transition_options *how,
                                        ce_evaluation *evaluation);

/* Means and scatter of the samples and the repeatability, anew from the rows as they stand.
 * CE_OK or CE_E_NOMEM. */
CE_API ce_status ce_series_average(ce_series *series);
CE_API void ce_series_free(ce_series *series);

#ifdef __cplusplus
}
#endif
#endif
