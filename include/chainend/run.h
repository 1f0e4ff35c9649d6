/* SPDX-License-Identifier: GPL-3.0-or-later
 * A DSC run: one measurement file, read, with units, sign and programme segments. */
#ifndef CHAINEND_RUN_H
#define CHAINEND_RUN_H

#include <chainend/base.h>

#include <stdbool.h>
#include <stdio.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Limits, enforced before anything is allocated. */
#define CE_MAX_POINTS   ((size_t)20000000) /* points of one run                             */
#define CE_MAX_SEGMENTS ((size_t)1000)     /* programme segments of one run                 */

/* What the third column holds; values are always endothermic up. */
typedef enum {
    CE_SIGNAL_POWER,          /* heat flow, mW; the sample mass is not known    */
    CE_SIGNAL_SPECIFIC_POWER, /* heat flow per sample mass, W/g                 */
    CE_SIGNAL_HEAT_CAPACITY,  /* specific heat capacity, J/(g K)                */
    CE_SIGNAL_UNSTATED        /* heat flow in a unit the file does not state    */
} ce_signal;
/* "mW", "W/g", "J/(g K)" or "unit not stated". */
CE_API const char *ce_signal_unit(ce_signal signal);

typedef enum { CE_SIGN_AUTO, CE_SIGN_ENDO_UP, CE_SIGN_EXO_UP } ce_sign;

/* How the reader came to know a thing. */
typedef enum {
    CE_ORIGIN_STATED,  /* the file says so                               */
    CE_ORIGIN_OPTION,  /* the caller says so                             */
    CE_ORIGIN_GUESSED, /* from the behaviour of the data: may be wrong   */
    CE_ORIGIN_DEFAULT  /* neither stated nor to be guessed               */
} ce_origin;
CE_API const char *ce_origin_name(ce_origin origin); /* "stated", "option", "guessed", "default" */

/* One thing the reader understood. Strings are owned by the run. */
typedef struct {
    const char *key;   /* "encoding", "delimiter", "decimal mark", "temperature column", ...     */
    const char *value; /* UTF-8, control bytes replaced                                         */
    const char *overrule; /* the command-line option that says otherwise, "--decimal"; or NULL */
    ce_origin origin;
    size_t line; /* where the file says it; 0 = nowhere                                     */
} ce_fact;

typedef enum { CE_HEATING, CE_COOLING, CE_ISOTHERMAL } ce_segment_kind;
CE_API const char *
ce_segment_kind_name(ce_segment_kind kind); /* "heating", "cooling", "isothermal" */

/* One ramp or hold of the temperature programme: points [first, first + n) of the run. */
typedef struct {
    ce_segment_kind kind;
    size_t index;         /* 1-based, in programme order                                     */
    size_t nth_of_kind;   /* 1 = first heating, first cooling ...                            */
    size_t first, n;      /* points                                                          */
    double rate_K_min;    /* robust rate, negative on cooling; NaN when time is not known     */
    double rate_sd_K_min; /* robust spread of the local rate                                 */
    double low_K, high_K; /* temperatures spanned                                            */
    size_t line;          /* of its first point in the file                                  */
} ce_segment;

/* How to read; every member overrules a guess. Start from ce_run_options_default(). */
typedef struct {
    const char *encoding;    /* iconv name, or NULL = find out                               */
    char delimiter;          /* ',' ';' '\t' '|' ' ' (runs of blanks), 0 = find out          */
    char decimal;            /* '.' or ',', 0 = find out                                     */
    const char *time_column; /* header name or 1-based number, NULL = find out; "none" = none */
    const char *temperature_column; /* likewise */
    const char *signal_column;    /* likewise                                                     */
    const char *time_unit;        /* e.g. "min", NULL = as stated                                 */
    const char *temperature_unit; /* e.g. "°C"                                                    */
    const char *signal_unit;      /* e.g. "mW"                                                    */
    ce_sign sign;                 /* CE_SIGN_AUTO = as stated, else from the physics              */
    double mass_g;                /* sample mass, g; NaN = as stated                              */
    double rate_K_min;            /* for files without a time column; NaN = as stated             */
    size_t max_bytes;             /* refuse larger files                        (default 2 GiB)   */
} ce_run_options;
CE_API ce_run_options ce_run_options_default(void);

typedef struct ce_run ce_run; /* opaque; immutable once read, but for ce_run_settle_sign()     */

/* ce_run_read - read a run file.
 *   in   path     file name, or "-" for standard input
 *        options  NULL = defaults
 *   out  run      the run, the caller's to free; NULL unless CE_OK is returned
 *        err      what is wrong, with file, line and column
 *   ret  CE_OK | CE_E_IO | CE_E_SYNTAX | CE_E_LIMIT | CE_E_DOMAIN | CE_E_NOMEM */
CE_API ce_status ce_run_read(const char *path, const ce_run_options *options, ce_run **run,
                             ce_error *err);
/* The same from memory; name stands in messages. */
CE_API ce_status ce_run_read_memory(const void *bytes, size_t n, const char *name,
                                    const ce_run_options *options, ce_run **run, ce_error *err);
/* From arrays (copied): time_s may be NULL with rate_K_min given; temperature_K and signal n long,
 * n >= 2; mass_g may be NaN. For callers that have their own reader, and for the simulator. */
CE_API ce_status ce_run_from_arrays(size_t n, const double *time_s, const double *temperature_K,
                                    const double *signal, ce_signal kind, double mass_g,
                                    double rate_K_min, ce_run **run, ce_error *err);
CE_API void ce_run_free(ce_run *run); /* NULL allowed */

/* Borrowed: valid until ce_run_free(). Arrays have ce_run_size() elements, in file order. */
CE_API size_t ce_run_size(const ce_run *run);
CE_API const char *ce_run_name(const ce_run *run);     /* as the caller gave it        */
CE_API const double *ce_run_time_s(const ce_run *run); /* NULL when not known          */
CE_API const double *ce_run_temperature_K(const ce_run *run);
CE_API const double *ce_run_signal(const ce_run *run); /* endothermic up               */
CE_API ce_signal ce_run_signal_kind(const ce_run *run);
CE_API double ce_run_mass_g(const ce_run *run);         /* NaN when not known           */
CE_API ce_origin ce_run_sign_origin(const ce_run *run); /* how the sign is known        */
CE_API const ce_segment *ce_run_segments(const ce_run *run, size_t *n);
CE_API const ce_fact *ce_run_facts(const ce_run *run, size_t *n);
CE_API const ce_messages *ce_run_messages(const ce_run *run); /* warnings, with lines          */
/* Value of a preamble entry ("Sample", "Mass"), key compared without case; NULL when absent. */
CE_API const char *ce_run_preamble(const ce_run *run, const char *key);

#ifdef __cplusplus
}
#endif
#endif
