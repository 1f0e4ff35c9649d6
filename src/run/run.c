/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/run.h>

#include "base/quantity.h"
#include "run/run_internal.h"
#include "run/segments.h"
#include "text/header.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

const char *ce_signal_unit(ce_signal signal)
{
    switch (signal) {
    case CE_SIGNAL_POWER:
        return "mW";
    case CE_SIGNAL_SPECIFIC_POWER:
        return "W/g";
    case CE_SIGNAL_HEAT_CAPACITY:
        return "J/(g K)";
    }
    return "unknown";
}

const char *ce_origin_name(ce_origin origin)
{
    switch (origin) {
    case CE_ORIGIN_STATED:
        return "stated";
    case CE_ORIGIN_OPTION:
        return "option";
    case CE_ORIGIN_GUESSED:
        return "guessed";
    case CE_ORIGIN_DEFAULT:
        return "default";
    }
    return "unknown";
}

const char *ce_segment_kind_name(ce_segment_kind kind)
{
    switch (kind) {
    case CE_HEATING:
        return "heating";
    case CE_COOLING:
        return "cooling";
    case CE_ISOTHERMAL:
        return "isothermal";
    }
    return "unknown";
}

ce_run_options ce_run_options_default(void)
{
    return (ce_run_options){.sign = CE_SIGN_AUTO,
                            .mass_g = (double)NAN,
                            .rate_K_min = (double)NAN,
                            .max_bytes = (size_t)2 << 30};
}

ce_run *ce_run_new(const char *name)
{
    ce_run *run = calloc(1, sizeof *run);
    if (run == NULL) return NULL;
    run->name = strdup(name);
    run->mass_g = (double)NAN;
    run->sign_origin = CE_ORIGIN_DEFAULT;
    if (run->name != NULL) return run;
    free(run);
    return NULL;
}

/* The key of a fact is a literal of ours; its value was allocated by us. */
static void free_value(const ce_fact *f)
{
    char *value;
    memcpy(&value, &f->value, sizeof value);
    free(value);
}

void ce_run_free(ce_run *run)
{
    if (run == NULL) return;
    for (size_t i = 0; i < run->n_facts; i++) free_value(&run->fact[i]);
    for (size_t i = 0; i < run->n_entries; i++) {
        free(run->entry[i].key);
        free(run->entry[i].value);
    }
    ce_messages_free(&run->messages);
    free(run->fact);
    free(run->entry);
    free(run->segment);
    free(run->time_s);
    free(run->temperature_K);
    free(run->signal);
    free(run->name);
    free(run);
}

static ce_fact *find_fact(ce_run *run, const char *key)
{
    for (size_t i = 0; i < run->n_facts; i++)
        if (strcmp(run->fact[i].key, key) == 0) return &run->fact[i];
    return NULL;
}

ce_status ce_run_set_fact(ce_run *run, const char *key, ce_origin origin, size_t line,
                          const char *overrule, const char *fmt, ...)
{
    char *value = NULL;
    va_list ap;
    va_start(ap, fmt);
    int n = vasprintf(&value, fmt, ap);
    va_end(ap);
    if (n < 0) return CE_E_NOMEM;
    for (char *p = value; *p != '\0'; p++)
        if ((unsigned char)*p < 0x20 || *p == 0x7f) *p = '?';
    ce_fact *f = find_fact(run, key);
    if (f == NULL) {
        f = reallocarray(run->fact, run->n_facts + 1, sizeof *f);
        if (f == NULL) {
            free(value);
            return CE_E_NOMEM;
        }
        run->fact = f;
        f += run->n_facts++;
        f->value = NULL;
    }
    free_value(f);
    *f = (ce_fact){key, value, overrule, origin, line};
    return CE_OK;
}

ce_status ce_run_add_entry(ce_run *run, const char *key, size_t key_len, const char *value,
                           size_t value_len, size_t line)
{
    ce_entry *e = reallocarray(run->entry, run->n_entries + 1, sizeof *e);
    if (e == NULL) return CE_E_NOMEM;
    run->entry = e;
    e += run->n_entries;
    *e = (ce_entry){strndup(key, key_len), strndup(value, value_len), line};
    run->n_entries++;
    return e->key == NULL || e->value == NULL ? CE_E_NOMEM : CE_OK;
}

ce_status ce_run_warn(ce_run *run, ce_severity severity, size_t line, size_t column,
                      const char *fmt, ...)
{
    char text[sizeof((ce_error *)NULL)->message];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    return ce_messages_say(&run->messages, severity, run->name, line, column, "%s", text);
}

ce_status ce_run_flip(ce_run *run, bool flip, const char *why, ce_error *err)
{
    if (run->sign_origin == CE_ORIGIN_STATED || run->sign_origin == CE_ORIGIN_OPTION)
        return ce_fail_at(err, CE_E_ARG, run->name, 0, 0, "the sign of heat flow is not a guess");
    bool flipped = run->flipped != flip;
    if (ce_run_set_fact(run, "sign of heat flow", CE_ORIGIN_GUESSED, 0, "--sign", "%s, from the %s",
                        flipped ? "exo up" : "endo up", why) != CE_OK)
        return ce_fail_at(err, CE_E_NOMEM, run->name, 0, 0, "out of memory");
    run->flipped = flipped;
    run->sign_origin = CE_ORIGIN_GUESSED;
    for (size_t i = 0; flip && i < run->n; i++) run->signal[i] = -run->signal[i];
    return CE_OK;
}

static double *copy_of(const double *x, size_t n)
{
    double *y = reallocarray(NULL, n, sizeof *y);
    if (y != NULL) memcpy(y, x, n * sizeof *y);
    return y;
}

static ce_status check_arrays(size_t n, const double *time_s, const double *temperature_K,
                              const double *signal, double rate_K_min, ce_error *err)
{
    if (n < 2 || temperature_K == NULL || signal == NULL)
        return ce_fail(err, CE_E_ARG, "a run needs at least two points of temperature and signal");
    if (n > CE_MAX_POINTS) return ce_fail(err, CE_E_LIMIT, "more than %zu points", CE_MAX_POINTS);
    if (time_s == NULL && !(fabs(rate_K_min) > 0.0 && isfinite(rate_K_min)))
        return ce_fail(err, CE_E_ARG, "a run without time needs a rate");
    for (size_t i = 0; i < n; i++) {
        if (!isfinite(temperature_K[i]) || !isfinite(signal[i]) ||
            (time_s != NULL && !isfinite(time_s[i])))
            return ce_fail(err, CE_E_DOMAIN, "point %zu is not finite", i + 1);
        if (temperature_K[i] < 0.0)
            return ce_fail(err, CE_E_DOMAIN, "point %zu is below 0 K", i + 1);
        if (time_s != NULL && i > 0 && time_s[i] < time_s[i - 1])
            return ce_fail(err, CE_E_DOMAIN, "time goes back at point %zu", i + 1);
    }
    return CE_OK;
}

ce_status ce_run_from_arrays(size_t n, const double *time_s, const double *temperature_K,
                             const double *signal, ce_signal kind, double mass_g, double rate_K_min,
                             ce_run **run, ce_error *err)
{
    *run = NULL;
    ce_status st = check_arrays(n, time_s, temperature_K, signal, rate_K_min, err);
    if (st != CE_OK) return st;
    if (!isnan(mass_g) && !(mass_g > 0.0 && isfinite(mass_g)))
        return ce_fail(err, CE_E_DOMAIN, "sample mass of %g g is not possible", mass_g);
    ce_run *r = ce_run_new("arrays");
    if (r != NULL) {
        r->n = n;
        r->kind = kind;
        r->mass_g = mass_g;
        r->sign_origin = CE_ORIGIN_OPTION;
        r->time_s = time_s == NULL ? NULL : copy_of(time_s, n);
        r->temperature_K = copy_of(temperature_K, n);
        r->signal = copy_of(signal, n);
        bool scaled = kind == CE_SIGNAL_POWER && !isnan(mass_g);
        for (size_t i = 0; scaled && r->signal != NULL && i < n; i++)
            r->signal[i] = r->signal[i] * 1e-3 / mass_g;
        if (scaled) r->kind = CE_SIGNAL_SPECIFIC_POWER;
    }
    if (r == NULL || r->temperature_K == NULL || r->signal == NULL ||
        (time_s != NULL && r->time_s == NULL))
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    if (st == CE_OK) st = ce_run_find_segments(r, NULL, 0, rate_K_min, err);
    if (st == CE_OK)
        *run = r;
    else
        ce_run_free(r);
    return st;
}

size_t ce_run_size(const ce_run *run)
{
    return run->n;
}

const char *ce_run_name(const ce_run *run)
{
    return run->name;
}

const double *ce_run_time_s(const ce_run *run)
{
    return run->time_s;
}

const double *ce_run_temperature_K(const ce_run *run)
{
    return run->temperature_K;
}

const double *ce_run_signal(const ce_run *run)
{
    return run->signal;
}

ce_signal ce_run_signal_kind(const ce_run *run)
{
    return run->kind;
}

double ce_run_mass_g(const ce_run *run)
{
    return run->mass_g;
}

ce_origin ce_run_sign_origin(const ce_run *run)
{
    return run->sign_origin;
}

const ce_segment *ce_run_segments(const ce_run *run, size_t *n)
{
    *n = run->n_segments;
    return run->segment;
}

const ce_fact *ce_run_facts(const ce_run *run, size_t *n)
{
    *n = run->n_facts;
    return run->fact;
}

const ce_messages *ce_run_messages(const ce_run *run)
{
    return &run->messages;
}

const char *ce_run_preamble(const ce_run *run, const char *key)
{
    for (size_t i = 0; i < run->n_entries; i++)
        if (ce_same_name(run->entry[i].key, key)) return run->entry[i].value;
    return NULL;
}
