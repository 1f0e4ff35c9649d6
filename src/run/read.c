/* SPDX-License-Identifier: GPL-3.0-or-later
 * A run file from its bytes to a run: the steps in order, sign and mass, and what was understood. */
#include "run/reader.h"

#include "base/order.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

ce_status ce_reader_fail(ce_reader *r, ce_status st, size_t line, size_t column, const char *fmt,
                         ...)
{
    char text[sizeof((ce_error *)NULL)->message];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    return ce_fail_at(r->err, st, r->run->name, line, column, "%s", text);
}

ce_status ce_reader_no_memory(ce_reader *r)
{
    return ce_reader_fail(r, CE_E_NOMEM, 0, 0, "out of memory");
}

/* ---- signal: mass and sign ------------------------------------------------------------------ */

#define PHYSICS_POINTS 2001

/* Median of the signal of a segment within [low, high]. */
static double level_within(const ce_run *run, const ce_segment *s, double low, double high,
                           double *scratch)
{
    size_t n = 0, stride = s->n / (PHYSICS_POINTS - 1) + 1;
    for (size_t i = s->first; i < s->first + s->n; i += stride)
        if (run->temperature_K[i] >= low && run->temperature_K[i] <= high)
            scratch[n++] = run->signal[i];
    return n < 5 ? (double)NAN : ce_median(scratch, n);
}

/* A sample takes up heat on heating and gives it off on cooling, so over the same temperatures the
 * heat flow of a heating lies above that of a cooling when endothermic is up. 1 endo up, -1 exo up,
 * 0 not to be told. Common practice. */
static int sign_from_physics(const ce_run *run)
{
    double scratch[PHYSICS_POINTS], vote = 0.0;
    if (run->kind == CE_SIGNAL_HEAT_CAPACITY) return 0;
    for (size_t i = 0; i < run->n_segments; i++)
        for (size_t k = 0; k < run->n_segments; k++) {
            const ce_segment *h = &run->segment[i], *c = &run->segment[k];
            if (h->kind != CE_HEATING || c->kind != CE_COOLING) continue;
            double low = fmax(h->low_K, c->low_K), high = fmin(h->high_K, c->high_K);
            double margin = 0.2 * (high - low);
            if (!(high - low > 10.0)) continue;
            double d = level_within(run, h, low + margin, high - margin, scratch) -
                       level_within(run, c, low + margin, high - margin, scratch);
            if (!isnan(d)) vote += d > 0.0 ? 1.0 : d < 0.0 ? -1.0 : 0.0;
        }
    return vote > 0.0 ? 1 : vote < 0.0 ? -1 : 0;
}

static const char *sign_words(ce_sign sign)
{
    return sign == CE_SIGN_EXO_UP ? "exo up" : "endo up";
}

static ce_status settle_sign(ce_reader *r)
{
    ce_run *run = r->run;
    const ce_group *g = &r->group[0];
    ce_sign header = r->column[g->signal].sign, sign = r->o->sign;
    size_t line = 0;
    const char *why = "";
    run->sign_origin = CE_ORIGIN_OPTION;
    if (sign == CE_SIGN_AUTO) {
        run->sign_origin = CE_ORIGIN_STATED;
        if (ce_sign_contradicts(r->column[g->signal].title))
            return ce_reader_fail(r, CE_E_SYNTAX, r->header_line, g->signal + 1,
                                  "the header says both of the sign of heat flow: give --sign");
        if (header != CE_SIGN_AUTO && r->sign != CE_SIGN_AUTO && header != r->sign)
            return ce_reader_fail(r, CE_E_SYNTAX, r->header_line, g->signal + 1,
                                  "the header says %s, line %zu says %s: give --sign",
                                  sign_words(header), r->sign_line, sign_words(r->sign));
        sign = header != CE_SIGN_AUTO ? header : r->sign;
        line = header != CE_SIGN_AUTO ? r->header_line : r->sign_line;
    }
    if (sign == CE_SIGN_AUTO && run->kind == CE_SIGNAL_HEAT_CAPACITY) {
        sign = CE_SIGN_ENDO_UP;
        line = r->units_line != 0 ? r->units_line : r->header_line;
        why = ", as every heat capacity";
    }
    if (sign == CE_SIGN_AUTO) {
        int physics = sign_from_physics(run);
        run->sign_origin = physics == 0 ? CE_ORIGIN_DEFAULT : CE_ORIGIN_GUESSED;
        sign = physics < 0 ? CE_SIGN_EXO_UP : CE_SIGN_ENDO_UP;
        why = physics == 0 ? ", assumed" : ", as heating and cooling differ";
    }
    run->flipped = sign == CE_SIGN_EXO_UP;
    for (size_t i = 0; run->flipped && i < run->n; i++) run->signal[i] = -run->signal[i];
    if (ce_run_set_fact(run, "sign of heat flow", run->sign_origin, line, "--sign", "%s%s",
                        sign_words(sign), why) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status scale_signal(ce_reader *r)
{
    ce_run *run = r->run;
    const ce_unit *u = r->signal_unit;
    run->kind = u == NULL                               ? CE_SIGNAL_UNSTATED
                : u->dimension == CE_DIM_HEAT_CAPACITY  ? CE_SIGNAL_HEAT_CAPACITY
                : u->dimension == CE_DIM_SPECIFIC_POWER ? CE_SIGNAL_SPECIFIC_POWER
                                                        : CE_SIGNAL_POWER;
    if (!isnan(r->o->mass_g)) {
        if (!(r->o->mass_g > 0.0 && isfinite(r->o->mass_g)))
            return ce_reader_fail(r, CE_E_ARG, 0, 0, "a sample mass of %g g is not possible",
                                  r->o->mass_g);
        run->mass_g = r->o->mass_g;
        if (ce_run_set_fact(run, "sample mass", CE_ORIGIN_OPTION, 0, "--mass", "%.6g mg",
                            1000.0 * run->mass_g) != CE_OK)
            return ce_reader_no_memory(r);
    }
    bool per_mass = run->kind == CE_SIGNAL_POWER && !isnan(run->mass_g);
    if (per_mass && r->other_mass_line > 0 && isnan(r->o->mass_g))
        return ce_reader_fail(r, CE_E_SYNTAX, r->other_mass_line, 0,
                              "another sample mass than in line %zu: give --mass", r->mass_line);
    for (size_t i = 0; u != NULL && i < run->n; i++) {
        double y = ce_to_internal(u, run->signal[i]);
        run->signal[i] = per_mass ? y * 1e-3 / run->mass_g : y;
    }
    for (size_t i = 0; i < run->n; i++)
        if (!(fabs(run->signal[i]) <= 1e12))
            return ce_reader_fail(r, CE_E_DOMAIN, ce_lines_find(&r->point_lines, i),
                                  r->group[0].signal + 1, "a heat flow of %g is not possible",
                                  run->signal[i]);
    if (per_mass) run->kind = CE_SIGNAL_SPECIFIC_POWER;
    if (u == NULL &&
        ce_run_warn(run, CE_WARNING, r->header_line, r->group[0].signal + 1,
                    "nothing says the unit of the heat flow: temperatures can be read, "
                    "step heights not; give --signal-unit") != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

ce_status ce_reader_signal(ce_reader *r)
{
    CE_TRY(scale_signal(r));
    return settle_sign(r);
}

/* ---- facts ---------------------------------------------------------------------------------- */

static const char *column_text(const ce_reader *r, size_t c, char *room, size_t n)
{
    if (r->column[c].title[0] != '\0')
        (void)snprintf(room, n, "%zu '%s'", c + 1, r->column[c].title);
    else
        (void)snprintf(room, n, "%zu", c + 1);
    return room;
}

typedef struct {
    const char *what, *column_option, *unit_key, *unit_option;
    size_t column;
    ce_origin origin;
    const ce_unit *unit;
    bool unit_given;
} used_column;

static ce_status column_facts(ce_reader *r, const used_column *u)
{
    char text[CE_HEADER_NAME + 40];
    if (u->column == CE_NOWHERE) {
        if (ce_run_set_fact(r->run, u->what,
                            u->origin == CE_ORIGIN_OPTION ? u->origin : CE_ORIGIN_DEFAULT, 0,
                            u->column_option, "none") != CE_OK)
            return ce_reader_no_memory(r);
        return CE_OK;
    }
    bool stated = r->column[u->column].head.unit != NULL;
    size_t unit_line = !stated || u->unit_given ? 0
                       : r->units_line != 0     ? r->units_line
                                                : r->header_line;
    ce_origin unit_origin = u->unit_given     ? CE_ORIGIN_OPTION
                            : stated          ? CE_ORIGIN_STATED
                            : u->unit != NULL ? CE_ORIGIN_GUESSED
                                              : CE_ORIGIN_DEFAULT;
    ce_origin origin = u->origin;
    /* The time column of which only the unit was guessed is a stated one. */
    if (origin == CE_ORIGIN_GUESSED && r->column[u->column].role != CE_MEANS_UNKNOWN)
        origin = CE_ORIGIN_STATED;
    if (ce_run_set_fact(r->run, u->what, origin, origin == CE_ORIGIN_STATED ? r->header_line : 0,
                        u->column_option, "%s",
                        column_text(r, u->column, text, sizeof text)) != CE_OK ||
        ce_run_set_fact(r->run, u->unit_key, unit_origin, unit_line, u->unit_option, "%s",
                        u->unit == NULL ? "not stated" : u->unit->name) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status dialect_facts(ce_reader *r)
{
    ce_run *run = r->run;
    const ce_run_options *o = r->o;
    ce_origin encoding = o->encoding != NULL ? CE_ORIGIN_OPTION
                         : r->text.guessed   ? CE_ORIGIN_GUESSED
                                             : CE_ORIGIN_STATED;
    ce_origin decimal = o->decimal != 0            ? CE_ORIGIN_OPTION
                        : r->dialect.decimal_known ? CE_ORIGIN_GUESSED
                                                   : CE_ORIGIN_DEFAULT;
    if (ce_run_set_fact(run, "encoding", encoding, 0, "--encoding", "%s%s", r->text.encoding,
                        r->text.mark ? " with byte order mark" : "") != CE_OK ||
        ce_run_set_fact(run, "delimiter", o->delimiter != 0 ? CE_ORIGIN_OPTION : CE_ORIGIN_GUESSED,
                        0, "--delimiter", "%s", ce_delimiter_name(r->dialect.delimiter)) != CE_OK ||
        ce_run_set_fact(run, "decimal mark", decimal, 0, "--decimal", "%s",
                        ce_decimal_name(r->dialect.decimal)) != CE_OK ||
        ce_run_set_fact(run, "header", r->header_line != 0 ? CE_ORIGIN_STATED : CE_ORIGIN_DEFAULT,
                        r->header_line, NULL, "%s",
                        r->header_line == 0  ? "none"
                        : r->units_line != 0 ? "names, units below"
                                             : "names") != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status layout_facts(ce_reader *r)
{
    ce_run *run = r->run;
    ce_status st = CE_OK;
    if (r->n_groups > 1)
        st = ce_run_set_fact(run, "layout", CE_ORIGIN_GUESSED, r->header_line,
                             "--temperature-column", "%zu segments side by side", r->n_groups);
    else if (r->segment != CE_NOWHERE)
        st = ce_run_set_fact(run, "layout", CE_ORIGIN_STATED, r->header_line, NULL,
                             "segments numbered in column %zu", r->segment + 1);
    else if (r->n_starts > 0)
        st = ce_run_set_fact(run, "layout", CE_ORIGIN_GUESSED, 0, NULL, "%zu tables stacked",
                             r->n_starts + 1);
    if (st == CE_OK && (!isnan(r->o->rate_K_min) || !isnan(r->rate_K_min))) {
        bool option = !isnan(r->o->rate_K_min);
        st = ce_run_set_fact(run, "declared rate", option ? CE_ORIGIN_OPTION : CE_ORIGIN_STATED,
                             option ? 0 : r->rate_line, "--rate", "%.6g K/min%s",
                             option ? r->o->rate_K_min : r->rate_K_min,
                             run->time_s == NULL ? "" : ", not used: the run has times");
    }
    for (size_t i = 0; st == CE_OK && i < run->n_entries; i++)
        if (ce_key_of(run->entry[i].key) == CE_KEY_SAMPLE && run->entry[i].value[0] != '\0')
            return ce_run_set_fact(run, "sample", CE_ORIGIN_STATED, run->entry[i].line, NULL, "%s",
                                   run->entry[i].value);
    return st;
}

ce_status ce_reader_facts(ce_reader *r)
{
    const ce_group *g = &r->group[0];
    const ce_run_options *o = r->o;
    const used_column used[] = {
        {"time column", "--time-column", "time unit", "--time-unit", g->time, r->time_origin,
         r->time_unit, o->time_unit != NULL},
        {"temperature column", "--temperature-column", "temperature unit", "--temperature-unit",
         g->temperature, r->temperature_origin, r->temperature_unit, o->temperature_unit != NULL},
        {"signal column", "--signal-column", "signal unit", "--signal-unit", g->signal,
         r->signal_origin, r->signal_unit, o->signal_unit != NULL}};
    for (size_t i = 0; i < sizeof used / sizeof *used; i++) CE_TRY(column_facts(r, &used[i]));
    return layout_facts(r) == CE_OK ? CE_OK : ce_reader_no_memory(r);
}

/* ---- the steps ------------------------------------------------------------------------------ */

static ce_status check_options(ce_reader *r)
{
    const ce_run_options *o = r->o;
    if (o->delimiter != 0 && strchr(",;\t| ", o->delimiter) == NULL)
        return ce_reader_fail(r, CE_E_ARG, 0, 0, "'%c' is not a delimiter", o->delimiter);
    if (o->decimal != 0 && o->decimal != '.' && o->decimal != ',')
        return ce_reader_fail(r, CE_E_ARG, 0, 0, "'%c' is not a decimal mark", o->decimal);
    if (!isnan(o->rate_K_min) && !(isfinite(o->rate_K_min) && o->rate_K_min != 0.0))
        return ce_reader_fail(r, CE_E_ARG, 0, 0, "a rate of %g K/min is not possible",
                              o->rate_K_min);
    return CE_OK;
}

static ce_status steps(ce_reader *r, ce_bytes *bytes)
{
    CE_TRY(check_options(r));
    CE_TRY(ce_text_decode(bytes, r->run->name, r->o->encoding, &r->text, r->err));
    if (r->text.begin == r->text.end)
        return ce_reader_fail(r, CE_E_SYNTAX, 1, 1, "the file is empty: no rows of numbers");
    r->dialect = ce_sniff_numbers(&r->text, r->o->delimiter, r->o->decimal);
    ce_splitter_init(&r->split, r->run->name, r->dialect.delimiter);
    CE_TRY(dialect_facts(r));
    CE_TRY(ce_reader_layout(r));
    CE_TRY(dialect_facts(r));
    CE_TRY(ce_reader_columns(r));
    CE_TRY(ce_reader_rows(r));
    /* The text may be larger than the numbers: it goes before anything else is allocated. */
    free(r->text.memory);
    r->text.memory = r->text.begin = r->text.end = NULL;
    CE_TRY(ce_reader_behaviour(r));
    CE_TRY(ce_reader_units(r));
    CE_TRY(ce_reader_points(r));
    CE_TRY(ce_reader_programme(r));
    CE_TRY(ce_reader_facts(r));
    return ce_reader_signal(r);
}

static void release(ce_reader *r)
{
    for (size_t c = 0; r->rows.value != NULL && c < r->n_columns; c++) free(r->rows.value[c]);
    free(r->rows.value);
    free(r->rows.lines.item);
    free(r->rows.gap);
    free(r->point_lines.item);
    free(r->start);
    free(r->column);
    ce_splitter_free(&r->split);
    ce_text_free(&r->text);
}

/* bytes are consumed. */
static ce_status read_bytes(ce_bytes *bytes, const char *name, const ce_run_options *options,
                            bool plain_rows, ce_run **run, ce_error *err)
{
    ce_run_options o = options != NULL ? *options : ce_run_options_default();
    ce_reader r = {.o = &o,
                   .err = err,
                   .plain_rows = plain_rows,
                   .run = ce_run_new(name),
                   .segment = CE_NOWHERE,
                   .rate_K_min = (double)NAN};
    ce_status st =
        r.run == NULL ? ce_fail_at(err, CE_E_NOMEM, name, 0, 0, "out of memory") : steps(&r, bytes);
    free(bytes->data);
    *bytes = (ce_bytes){0};
    release(&r);
    if (st == CE_OK)
        *run = r.run;
    else
        ce_run_free(r.run);
    return st;
}

ce_status ce_run_read_as(const void *bytes, size_t n, const char *name,
                         const ce_run_options *options, bool plain_rows, ce_run **run,
                         ce_error *err)
{
    *run = NULL;
    ce_bytes b = {n == SIZE_MAX ? NULL : malloc(n + 1), n};
    if (b.data == NULL) return ce_fail_at(err, CE_E_NOMEM, name, 0, 0, "out of memory");
    if (n > 0) memcpy(b.data, bytes, n);
    b.data[n] = '\0';
    return read_bytes(&b, name, options, plain_rows, run, err);
}

ce_status ce_run_read_memory(const void *bytes, size_t n, const char *name,
                             const ce_run_options *options, ce_run **run, ce_error *err)
{
    return ce_run_read_as(bytes, n, name, options, true, run, err);
}

ce_status ce_run_read(const char *path, const ce_run_options *options, ce_run **run, ce_error *err)
{
    *run = NULL;
    ce_bytes b = {0};
    size_t max = options != NULL ? options->max_bytes : ce_run_options_default().max_bytes;
    ce_status st = ce_bytes_load(path, max, &b, err);
    return st != CE_OK ? st : read_bytes(&b, path, options, true, run, err);
}
