/* SPDX-License-Identifier: GPL-3.0-or-later
 * Columns without a name, told by what is in them: time never goes back, temperature moves
 * steadily, the signal is what remains. */
#include "run/reader.h"

#include "base/order.h"

#include <math.h>
#include <stdlib.h>

#define SAMPLES    ((size_t)4096)
#define COLDEST    (-273.15) /* no unit of temperature has lower values, but Fahrenheit       */
#define HOTTEST    2000.0
#define STEADINESS 3.0 /* temperature moves so much more steadily than the signal          */

typedef struct {
    size_t column;
    size_t n; /* values                                                          */
    double first, low, high;
    bool rises;      /* never goes back, and goes forward                               */
    double unsteady; /* spread of the steps over their median size                      */
} behaviour;

static behaviour watch(const ce_rows *rows, size_t column, double *step)
{
    const double *x = rows->value[column];
    behaviour b = {.column = column, .rises = true, .low = HUGE_VAL, .high = -HUGE_VAL};
    double last = (double)NAN;
    size_t stride = rows->n / SAMPLES + 1, steps = 0;
    for (size_t i = 0; i < rows->n; i++) {
        if (isnan(x[i])) continue;
        if (b.n++ == 0) b.first = x[i];
        b.low = fmin(b.low, x[i]);
        b.high = fmax(b.high, x[i]);
        if (x[i] < last) b.rises = false;
        if (i % stride == 0 && !isnan(last)) step[steps++] = fabs(x[i] - last);
        last = x[i];
    }
    b.rises = b.rises && b.n > 1 && b.high > b.low;
    double size = ce_median(step, steps), spread = ce_mad(step, steps);
    b.unsteady = size > 0.0 ? spread / size : HUGE_VAL;
    return b;
}

static bool looks_like_temperature(const behaviour *b)
{
    return b->low >= COLDEST && b->high <= HOTTEST && b->high - b->low >= 2.0;
}

/* Of the columns that only rise, the one that begins at nothing. */
static size_t find_time(const behaviour *b, size_t n)
{
    size_t rising = 0, only = n, zero = 0, from_zero = n;
    for (size_t i = 0; i < n; i++) {
        if (!b[i].rises) continue;
        rising++;
        only = i;
        if (fabs(b[i].first) <= 0.01 * (b[i].high - b[i].low)) {
            zero++;
            from_zero = i;
        }
    }
    return rising == 1 && n > 2 ? only : zero == 1 ? from_zero : n;
}

static ce_status cannot_tell(ce_reader *r, const char *what, const char *option)
{
    return ce_reader_fail(r, CE_E_SYNTAX, r->header_line != 0 ? r->header_line : r->data_line, 0,
                          "no column holds the %s by %s, and the values leave it open: give "
                          "--%s-column",
                          what, r->header_line != 0 ? "its name" : "a name (there is no header)",
                          option);
}

static void take_out(behaviour *b, size_t *n, size_t i)
{
    for (--*n; i < *n; i++) b[i] = b[i + 1];
}

/* Columns that can be anything: no role yet, not constant, not empty. */
static size_t open_columns(const ce_reader *r, behaviour *b, double *step)
{
    const ce_group *g = &r->group[0];
    size_t n = 0;
    for (size_t c = 0; c < r->n_columns; c++) {
        if (c == g->time || c == g->temperature || c == g->signal ||
            r->column[c].role != CE_MEANS_UNKNOWN)
            continue;
        b[n] = watch(&r->rows, c, step);
        if (2 * b[n].n > r->rows.n && b[n].high > b[n].low) n++;
    }
    return n;
}

static ce_status settle(ce_reader *r, behaviour *b, size_t n)
{
    ce_group *g = &r->group[0];
    size_t wanted = (size_t)(g->temperature == CE_NOWHERE) + (size_t)(g->signal == CE_NOWHERE);
    if (g->time == CE_NOWHERE && r->time_origin != CE_ORIGIN_OPTION && n > wanted) {
        size_t i = find_time(b, n);
        if (i == n) return cannot_tell(r, "time", "time");
        g->time = b[i].column;
        r->time_origin = CE_ORIGIN_GUESSED;
        take_out(b, &n, i);
    }
    if (g->temperature == CE_NOWHERE) {
        size_t best = n, second = n;
        for (size_t i = 0; i < n; i++) {
            if (best == n || b[i].unsteady < b[best].unsteady)
                second = best, best = i;
            else if (second == n || b[i].unsteady < b[second].unsteady)
                second = i;
        }
        bool clear = best < n && looks_like_temperature(&b[best]) &&
                     (second == n || b[second].unsteady > STEADINESS * b[best].unsteady ||
                      !looks_like_temperature(&b[second]));
        if (!clear) return cannot_tell(r, "temperature", "temperature");
        g->temperature = b[best].column;
        r->temperature_origin = CE_ORIGIN_GUESSED;
        take_out(b, &n, best);
    }
    if (g->signal == CE_NOWHERE) {
        if (n != 1) return cannot_tell(r, "heat flow", "signal");
        g->signal = b[0].column;
        r->signal_origin = CE_ORIGIN_GUESSED;
    }
    return CE_OK;
}

ce_status ce_reader_behaviour(ce_reader *r)
{
    if (!r->behave) return CE_OK;
    behaviour *b = reallocarray(NULL, r->n_columns, sizeof *b);
    double *step = reallocarray(NULL, 2 * SAMPLES, sizeof *step);
    ce_status st =
        b == NULL || step == NULL ? ce_reader_no_memory(r) : settle(r, b, open_columns(r, b, step));
    free(step);
    free(b);
    return st;
}
