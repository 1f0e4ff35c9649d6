/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/controls.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

/* Days from civil, proleptic Gregorian calendar (ISO 8601). */
double cli_day(const char *date)
{
    static const int before[] = {0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334};
    static const int length[] = {31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};
    static const char form[] = "dddd-dd-dd";
    if (date == NULL || strlen(date) != sizeof form - 1) return (double)NAN;
    for (size_t i = 0; form[i] != '\0'; i++)
        if (form[i] == 'd' ? date[i] < '0' || date[i] > '9' : date[i] != form[i])
            return (double)NAN;
    const int y = (int)strtol(date, NULL, 10), m = (int)strtol(date + 5, NULL, 10),
              d = (int)strtol(date + 8, NULL, 10);
    if (m < 1 || m > 12 || d < 1 || d > length[m - 1]) return (double)NAN;
    const bool leap = (y % 4 == 0 && y % 100 != 0) || y % 400 == 0;
    if (m == 2 && d == 29 && !leap) return (double)NAN;
    const int past = (y - 1) / 4 - (y - 1) / 100 + (y - 1) / 400;
    return 365.0 * (y - 1) + past + before[m - 1] + (m > 2 && leap ? 1 : 0) + d - 719163.0;
}

static ce_status add(cli_controls *controls, const ce_series *series, const ce_sample *s)
{
    const size_t n = controls->n;
    ce_control *item = reallocarray(controls->item, n + 1, sizeof *item);
    if (item != NULL) controls->item = item;
    double **day = reallocarray(controls->day, n + 1, sizeof *day);
    if (day != NULL) controls->day = day;
    const char ***date = reallocarray(controls->date, n + 1, sizeof *date);
    if (date != NULL) controls->date = date;
    if (item == NULL || day == NULL || date == NULL) return CE_E_NOMEM;
    day[n] = calloc(s->n_used, sizeof **day);
    date[n] = calloc(s->n_used, sizeof **date);
    controls->n++;
    if (day[n] == NULL || date[n] == NULL) return CE_E_NOMEM;
    size_t k = 0;
    for (size_t i = 0; i < s->n_rows; i++) { /* as the readings of the sample are gathered */
        const ce_series_row *row = &series->row[s->row[i]];
        if (!row->used) continue;
        day[n][k] = cli_day(row->date);
        date[n][k++] = row->date;
    }
    item[n] = (ce_control){.name = s->name,
                           .molar = {s->mn_g_mol, s->mw_g_mol, s->chain_ends},
                           .mn_u_g_mol = s->mn_u_g_mol,
                           .n = s->n_used,
                           .tg_K = s->tg_K,
                           .day = day[n]};
    return CE_OK;
}

ce_status cli_add_controls(cli_controls *controls, const ce_series *series)
{
    ce_status st = CE_OK;
    for (size_t i = 0; i < series->n_samples && st == CE_OK; i++)
        if (series->sample[i].role == CE_CONTROL && series->sample[i].n_used > 0)
            st = add(controls, series, &series->sample[i]);
    return st;
}

void cli_controls_free(cli_controls *controls)
{
    for (size_t i = 0; i < controls->n; i++) {
        free(controls->day[i]);
        free((void *)controls->date[i]);
    }
    free(controls->item);
    free(controls->day);
    free((void *)controls->date);
    *controls = (cli_controls){0};
}

const char **cli_chart_dates(const cli_controls *controls, const ce_check *check)
{
    const char **out = calloc(check->n_chart + 1, sizeof *out);
    for (size_t i = 0; out != NULL && i < check->n_chart; i++) {
        const ce_chart_point *p = &check->chart[i];
        for (size_t k = 0; k < controls->item[p->control].n; k++)
            if (controls->day[p->control][k] == p->day) out[i] = controls->date[p->control][k];
    }
    return out;
}

/* ---- against a calibration ---------------------------------------------------------------- */

/* Measured in another way: refused, or allowed by --despite. */
CE_PRINTF(4, 5)
static bool refused(const cli_command *command, bool despite, const char *path, const char *fmt,
                    ...)
{
    ce_error err = CE_ERROR_INIT;
    char text[200];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    if (despite) return false;
    (void)ce_fail_at(&err, CE_E_REFUSED, path, 0, 0,
                     "%s; --despite overrules, and marks the result", text);
    cli_error(command, &err);
    return true;
}

static bool agrees(const cli_command *command, bool despite, const cli_calibration *c,
                   const ce_series *s, bool *differs)
{
    const double rate = s->rate_K_min, want = c->series.rate_K_min;
    if (!isnan(rate) && !isnan(want) && fabs(rate / want - 1.0) > 0.05) {
        *differs = true;
        if (refused(command, despite, s->path,
                    "measured at %.3g K/min, the calibration at %.3g K/min", rate, want))
            return false;
    }
    if (s->history != CE_HISTORY_UNSTATED && c->series.history != CE_HISTORY_UNSTATED &&
        s->history != c->series.history) {
        *differs = true;
        if (refused(command, despite, s->path, "its history is %s, the calibration's %s",
                    ce_history_name(s->history), ce_history_name(c->series.history)))
            return false;
    }
    return true;
}

int cli_hold(const cli_command *command, const cli_calibrating *calibrating, bool quiet,
             bool despite, int argc, char **argv, cli_held *b)
{
    cli_calibrating how = *calibrating;
    int status = cli_calibrate(command, argv[0], &how, quiet, &b->calibration);
    if (status == XIT_FAILED) return status;
    b->series = calloc((size_t)argc, sizeof *b->series);
    if (b->series == NULL) return XIT_FAILED;
    how.expect = b->calibration.series.construction;
    if (isnan(how.how.glass.low_K)) how.how.glass = b->calibration.glass;
    if (isnan(how.how.liquid.low_K)) how.how.liquid = b->calibration.liquid;
    if (how.how.segment == 0) how.how.segment = b->calibration.series.segment;
    for (int i = 1; i < argc; i++) {
        const int read = cli_read_series(command, argv[i], &how, quiet, &b->series[b->n]);
        if (read == XIT_FAILED) return read;
        if (read == XIT_PART) status = XIT_PART;
        if (!agrees(command, despite, &b->calibration, &b->series[b->n++], &b->differs))
            return XIT_FAILED;
    }
    ce_status st = CE_OK;
    for (size_t i = 0; i < b->n && st == CE_OK; i++)
        st = cli_add_controls(&b->controls, &b->series[i]);
    if (argc == 1) st = cli_add_controls(&b->controls, &b->calibration.series);
    return st == CE_OK ? status : XIT_FAILED;
}

void cli_held_free(cli_held *held)
{
    cli_controls_free(&held->controls);
    for (size_t i = 0; i < held->n; i++) ce_series_free(&held->series[i]);
    free(held->series);
    cli_calibration_free(&held->calibration);
}
