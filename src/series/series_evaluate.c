/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "series/series_internal.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* A rate may differ from the series' by so much: 0.02 decades, some 0.06 K of Tg. */
#define RATE_TOLERANCE 0.05

/* Keep a row out, with the reason in the table and in the messages. */
CE_PRINTF(4, 5)
static ce_status leave_out(const ce_series *series, ce_series_row *row, ce_messages *messages,
                           const char *fmt, ...)
{
    char *reason = NULL;
    va_list ap;
    va_start(ap, fmt);
    int n = vasprintf(&reason, fmt, ap);
    va_end(ap);
    row->used = false;
    free(row->reason);
    row->reason = n < 0 ? NULL : reason;
    if (row->reason == NULL) return CE_E_NOMEM;
    ce_severity severity = row->role == CE_LEFT_OUT ? CE_NOTE : CE_ERROR; /* nobody counted on it */
    return ce_messages_say(messages, severity, series->path, row->line, 0,
                           "sample '%.60s' left out: %s", row->sample, row->reason);
}

static ce_run_options reading_of(const ce_series_row *row, const ce_run_options *reading)
{
    ce_run_options o = reading != NULL ? *reading : ce_run_options_default();
    if (!isnan(row->mass_g)) o.mass_g = row->mass_g;
    if (!isnan(row->rate_K_min)) o.rate_K_min = row->rate_K_min;
    return o;
}

static ce_transition_options how_of(const ce_series *series, const ce_series_row *row,
                                    const ce_transition_options *how)
{
    ce_transition_options o = how != NULL ? *how : ce_transition_options_default();
    if (row->segment > 0)
        o.segment = row->segment;
    else if (o.segment == 0)
        o.segment = series->segment;
    /* "as received" means the first heating, whatever the file holds after it */
    if (o.segment == 0 && series->history == CE_HISTORY_AS_RECEIVED) o.heating = 1;
    if (!isnan(row->glass.low_K)) o.glass = row->glass;
    if (!isnan(row->liquid.low_K)) o.liquid = row->liquid;
    return o;
}

static bool has_flag(const ce_transition *t, ce_flag_code code)
{
    for (size_t f = 0; f < t->n_flags; f++)
        if (t->flags[f].code == code) return true;
    return false;
}

/* Heatings in the file of a run. */
static size_t heatings_in(const ce_run *run)
{
    size_t n, heatings = 0;
    const ce_segment *segment = ce_run_segments(run, &n);
    for (size_t i = 0; i < n; i++) heatings += segment[i].kind == CE_HEATING;
    return heatings;
}

/* A file that holds nothing but the heating after erasure has no other heating to offer: there the
 * history is the user's word. */
static void drop_first_heating_flag(ce_series_row *row)
{
    size_t kept = 0;
    for (size_t f = 0; f < row->n_flags; f++)
        if (row->flags[f].code != CE_FLAG_FIRST_HEATING) row->flags[kept++] = row->flags[f];
    row->n_flags = kept;
}

static double reference_rate(const ce_series *series)
{
    return isnan(series->reduce_to_K_min) ? series->rate_K_min : series->reduce_to_K_min;
}

/* A series does not mix rates unless it is told to reduce them. Rates that rows state are judged all
 * at once, before anything is evaluated. */
static ce_status check_stated_rates(ce_series *series, ce_messages *messages, ce_error *err)
{
    const double asked = reference_rate(series);
    double want = asked;
    bool mixed = false;
    for (size_t i = 0; i < series->n_rows; i++) {
        const ce_series_row *row = &series->row[i];
        if (row->role == CE_LEFT_OUT || isnan(row->rate_K_min)) continue;
        if (isnan(want)) want = row->rate_K_min; /* the first sets it */
        if (!isnan(series->reduce_to_K_min) || fabs(row->rate_K_min / want - 1.0) <= RATE_TOLERANCE)
            continue;
        mixed = true;
        if (ce_messages_say(messages, CE_ERROR, series->path, row->line, 0,
                            "this row was measured at %g K/min, the series at %g K/min: leave it "
                            "out, split the series, or have all reduced to one rate "
                            "(--reduce-to)",
                            row->rate_K_min, want) != CE_OK)
            return CE_E_NOMEM;
    }
    if (mixed)
        return ce_fail_at(err, CE_E_DOMAIN, series->path, 0, 0,
                          "the series cannot be used until what is named above is mended");
    series->rate_K_min = want;
    return CE_OK;
}

/* What was measured another way than the series says must not be averaged with the rest. */
static ce_status check_agreement(ce_series *series, ce_series_row *row, const ce_evaluation *e,
                                 ce_messages *messages)
{
    const ce_segment *s = &e->found.segment;
    double rate = fabs(s->rate_K_min);
    if (isnan(series->rate_K_min)) series->rate_K_min = rate; /* the first run sets it */
    if (isnan(series->reduce_to_K_min) && fabs(rate / series->rate_K_min - 1.0) > RATE_TOLERANCE)
        return leave_out(series, row, messages, "measured at %.3g K/min, the series at %.3g K/min",
                         rate, series->rate_K_min);
    if (series->history == CE_HISTORY_ERASED && heatings_in(e->run) > 1 &&
        has_flag(&e->found.item[0], CE_FLAG_FIRST_HEATING))
        return leave_out(series, row, messages,
                         "first heating evaluated, but the history of the series is erased");
    if (series->history == CE_HISTORY_AS_RECEIVED && s->kind == CE_HEATING && s->nth_of_kind > 1)
        return leave_out(series, row, messages,
                         "heating %zu evaluated, but the series is as received", s->nth_of_kind);
    return CE_OK;
}

static ce_status take_transition(ce_series *series, ce_series_row *row, const ce_evaluation *e,
                                 ce_messages *messages)
{
    const ce_transition *t = &e->found.item[0];
    row->segment = e->found.segment.index;
    row->heating = e->found.segment.kind == CE_HEATING ? e->found.segment.nth_of_kind : 0;
    row->rate_K_min = fabs(e->found.segment.rate_K_min);
    row->reading = t->tg[series->construction];
    row->n_flags = t->n_flags;
    memcpy(row->flags, t->flags, sizeof row->flags);
    if (series->history != CE_HISTORY_UNSTATED) drop_first_heating_flag(row);
    if (isnan(row->reading.value_K))
        return leave_out(series, row, messages, "this run has no %s",
                         ce_construction_name(series->construction));
    row->tg_K = row->reading.value_K;
    row->tg_u_K = row->reading.u_K;
    row->used = row->role != CE_LEFT_OUT;
    return check_agreement(series, row, e, messages);
}

ce_status ce_series_evaluate_run(const ce_series *series, size_t row, const ce_run_options *reading,
                                 const ce_transition_options *how, ce_evaluation *evaluation)
{
    const ce_series_row *r = &series->row[row];
    *evaluation = (ce_evaluation){.status = CE_E_ARG};
    if (r->path == NULL) return CE_E_ARG;
    const ce_run_options run_options = reading_of(r, reading);
    ce_transition_options options = how_of(series, r, how);
    return ce_evaluate(r->path, &run_options, &options, true, evaluation);
}

static ce_status evaluate_row(ce_series *series, ce_series_row *row, const ce_run_options *reading,
                              const ce_transition_options *how, ce_messages *messages)
{
    if (row->run == NULL) {
        row->used = row->role != CE_LEFT_OUT;
        return CE_OK;
    }
    ce_evaluation e;
    ce_status st = ce_series_evaluate_run(series, (size_t)(row - series->row), reading, how, &e);
    if (st == CE_OK)
        st = take_transition(series, row, &e, messages);
    else if (st != CE_E_NOMEM) {
        if (e.error.line > 0)
            st = leave_out(series, row, messages, "%s:%zu:%zu: %s", e.error.file, e.error.line,
                           e.error.column, e.error.message);
        else
            st = leave_out(series, row, messages, "%s: %s", e.error.file, e.error.message);
    }
    ce_evaluation_free(&e);
    return st;
}

static ce_status say_left_out(ce_series_row *row)
{
    if (row->role != CE_LEFT_OUT || row->reason != NULL) return CE_OK;
    row->reason = strdup(row->note != NULL ? row->note : "marked left-out in the series file");
    return row->reason == NULL ? CE_E_NOMEM : CE_OK;
}

/* ---- samples ------------------------------------------------------------------------------ */

static ce_status average(const ce_series *series, ce_sample *s)
{
    s->tg_K = calloc(s->n_rows, sizeof *s->tg_K);
    s->tg_u_K = calloc(s->n_rows, sizeof *s->tg_u_K);
    if (s->tg_K == NULL || s->tg_u_K == NULL) return CE_E_NOMEM;
    double sum = 0.0, squares = 0.0, readings = 0.0, decades = 0.0;
    const bool reduced = !isnan(series->rate_slope_K_decade);
    for (size_t i = 0; i < s->n_rows; i++) {
        const ce_series_row *row = &series->row[s->row[i]];
        if (!row->used) continue;
        s->tg_K[s->n_used] = row->tg_K;
        /* what a reading says of itself is not the scatter of repeated runs: only stated ones count */
        s->tg_u_K[s->n_used++] = row->run == NULL ? row->tg_u_K : (double)NAN;
        sum += row->tg_K;
        if (reduced && !isnan(row->rate_K_min))
            decades += log10(row->rate_K_min / series->rate_K_min);
        readings += row->run == NULL ? (double)NAN : row->tg_u_K * row->tg_u_K;
    }
    s->mean_K = s->n_used > 0 ? sum / (double)s->n_used : (double)NAN;
    s->rate_decades = s->n_used > 0 ? decades / (double)s->n_used : 0.0;
    s->reading_u_K = s->n_used > 0 ? sqrt(readings / (double)s->n_used) : (double)NAN;
    for (size_t i = 0; i < s->n_used; i++)
        squares += (s->tg_K[i] - s->mean_K) * (s->tg_K[i] - s->mean_K);
    s->sd_K = s->n_used > 1 ? sqrt(squares / (double)(s->n_used - 1)) : (double)NAN;
    return CE_OK;
}

/* Repeatability: within-sample variance pooled over the standards (ISO 5725-2, from memory). */
static void pool(ce_series *series)
{
    double squares = 0.0;
    series->run_nu = 0.0;
    for (size_t k = 0; k < series->n_samples; k++) {
        const ce_sample *s = &series->sample[k];
        if (s->role != CE_STANDARD || s->n_used < 2) continue;
        squares += s->sd_K * s->sd_K * (double)(s->n_used - 1);
        series->run_nu += (double)(s->n_used - 1);
    }
    series->run_sd_K = series->run_nu > 0.0 ? sqrt(squares / series->run_nu) : (double)NAN;
}

ce_status ce_series_average(ce_series *series)
{
    for (size_t k = 0; k < series->n_samples; k++) {
        ce_sample *s = &series->sample[k];
        free(s->tg_K);
        free(s->tg_u_K);
        s->tg_K = s->tg_u_K = NULL;
        s->n_used = 0;
        if (average(series, s) != CE_OK) return CE_E_NOMEM;
    }
    pool(series);
    return CE_OK;
}

ce_status ce_series_evaluate(ce_series *series, const ce_run_options *reading,
                             const ce_transition_options *how, ce_progress progress, void *context,
                             ce_messages *messages, ce_error *err)
{
    ce_status st = check_stated_rates(series, messages, err);
    if (st == CE_E_DOMAIN) return st;
    for (size_t i = 0; i < series->n_rows && st == CE_OK; i++) {
        ce_series_row *row = &series->row[i];
        if (progress != NULL) progress(context, i + 1, series->n_rows, row->run);
        st = evaluate_row(series, row, reading, how, messages);
        if (st == CE_OK) st = say_left_out(row);
    }
    if (st == CE_OK) st = ce_series_average(series);
    return st == CE_OK ? CE_OK : ce_fail(err, st, "%s", ce_status_text(st));
}
