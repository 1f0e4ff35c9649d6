/* SPDX-License-Identifier: GPL-3.0-or-later
 * What a run is made of. Other rooms use chainend/run.h; the transition room also ce_run_flip(). */
#ifndef CE_RUN_INTERNAL_H
#define CE_RUN_INTERNAL_H

#include <chainend/run.h>

typedef struct {
    char *key, *value;
    size_t line;
} ce_entry;

struct ce_run {
    char *name;
    size_t n;
    double *time_s, *temperature_K, *signal;
    ce_signal kind;
    double mass_g;
    bool flipped; /* signal is the negative of what the file has                 */
    ce_origin sign_origin;
    ce_segment *segment;
    size_t n_segments;
    ce_fact *fact;
    size_t n_facts;
    ce_entry *entry; /* preamble                                                  */
    size_t n_entries;
    ce_messages messages;
};

/* Turn the signal upside down because the caller has found out that its sign was taken the wrong
 * way; the origin becomes CE_ORIGIN_GUESSED, the fact about the sign follows, and why ("step of the
 * glass transition") is added to it. Does nothing but renew the fact when flip is false. CE_OK |
 * CE_E_ARG (the sign is stated or given: not to be doubted) | CE_E_NOMEM, run unchanged then. */
ce_status ce_run_flip(ce_run *run, bool flip, const char *why, ce_error *err);

/* A new run with a name and nothing else; NULL when out of memory. */
ce_run *ce_run_new(const char *name);
/* Set the fact of that key, or add it. Control bytes become '?'. CE_OK | CE_E_NOMEM */
ce_status ce_run_set_fact(ce_run *run, const char *key, ce_origin origin, size_t line,
                          const char *overrule, const char *fmt, ...) CE_PRINTF(6, 7);
ce_status ce_run_add_entry(ce_run *run, const char *key, size_t key_len, const char *value,
                           size_t value_len, size_t line);
/* A warning or note with a position; memory shortage is reported as CE_E_NOMEM. */
ce_status ce_run_warn(ce_run *run, ce_severity severity, size_t line, size_t column,
                      const char *fmt, ...) CE_PRINTF(5, 6);

/* Reading for tests: plain_rows false sends every row through libcsv. */
ce_status ce_run_read_as(const void *bytes, size_t n, const char *name,
                         const ce_run_options *options, bool plain_rows, ce_run **run,
                         ce_error *err);

#endif
