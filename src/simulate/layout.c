/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "simulate/simulation.h"
#include "simulate/text.h"

#include <errno.h>
#include <iconv.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/quantity.h"

ce_layout ce_layout_default(void)
{
    return (ce_layout){.delimiter = ',',
                       .decimal = '.',
                       .encoding = "UTF-8",
                       .time_unit = "s",
                       .temperature_unit = "°C",
                       .signal_unit = "W/g",
                       .state_sign = true};
}

bool ce_layout_find(const char *name, ce_layout *layout)
{
    ce_layout l = ce_layout_default();
    if (strcmp(name, "comma") == 0) {
        /* as it is */
    } else if (strcmp(name, "semicolon") == 0) {
        l.delimiter = ';';
        l.decimal = ',';
        l.encoding = "ISO-8859-1";
        l.signal_unit = "mW";
        l.head = CE_HEAD_BRACKETS;
        l.language = CE_LANGUAGE_DE;
        l.preamble = l.crlf = l.exo_up = true;
    } else if (strcmp(name, "tab") == 0) {
        l.delimiter = '\t';
        l.encoding = "UTF-16LE";
        l.time_unit = "min";
        l.head = CE_HEAD_UNIT_ROW;
        l.crlf = true;
    } else if (strcmp(name, "blanks") == 0) {
        l.delimiter = ' ';
        l.temperature_unit = "K";
        l.signal_unit = "mW";
        l.head = CE_HEAD_SLASH;
    } else {
        return false;
    }
    *layout = l;
    return true;
}

/* One column: its name in both languages, unit, decimals, and how its values are made. */
typedef struct {
    const char *name[2];
    const char *unit;
    int decimals;
    double factor, shift; /* value in the file = internal * factor + shift */
} column;

static ce_status unit_of(const char *what, const char *name, const char *const *allowed, size_t n,
                         size_t *which, ce_error *err)
{
    for (size_t i = 0; i < n; i++)
        if (name != NULL && strcmp(name, allowed[i]) == 0) {
            *which = i;
            return CE_OK;
        }
    return ce_fail(err, CE_E_ARG, "%s: '%s' is not a unit a run can be written in", what,
                   name == NULL ? "" : name);
}

/* Rate of the ramp that is written, when it is a single one. */
static bool single_ramp(const ce_simulation *sim, bool last_heating_only, double *rate_K_s)
{
    const ce_programme *p = &sim->config.programme;
    double at = p->start_K, rate = 0.0;
    size_t n = 0;
    for (size_t i = 0; i < p->n; i++) {
        const ce_programme_step *s = &p->step[i];
        bool up = !s->hold && s->to_K > at;
        if (!s->unrecorded && (up || !last_heating_only)) {
            n = last_heating_only ? 1 : n + 1;
            rate = s->hold ? 0.0 : s->rate_K_min / 60.0 * (up ? 1.0 : -1.0);
        }
        if (!s->hold) at = s->to_K;
    }
    *rate_K_s = rate;
    return n == 1 && rate != 0.0;
}

static ce_status columns_of(const ce_simulation *sim, const ce_layout *l, column c[3],
                            ce_error *err)
{
    static const char *const times[] = {"s", "min"};
    static const char *const temperatures[] = {"°C", "K"};
    static const char *const signals[] = {"mW", "W/g", "J/(g K)"};
    size_t a = 0, b = 0, s = 0;
    ce_status st = unit_of("--time-unit", l->time_unit, times, 2, &a, err);
    if (st == CE_OK)
        st = unit_of("--temperature-unit", l->temperature_unit, temperatures, 2, &b, err);
    if (st == CE_OK) st = unit_of("--signal-unit", l->signal_unit, signals, 3, &s, err);
    double rate = 0.0;
    if (st == CE_OK && s == 2 && !single_ramp(sim, l->last_heating_only, &rate))
        st = ce_fail(err, CE_E_ARG, "--signal-unit: J/(g K) needs a run of one recorded ramp");
    if (st != CE_OK) return st;
    double mass_mg = sim->config.instrument.mass_g * 1000.0;
    double sign = l->exo_up ? -1.0 : 1.0;
    const double factors[] = {sign, sign / mass_mg, s == 2 ? sign / (mass_mg * rate) : 0.0};
    static const int decimals[] = {5, 6, 5};
    c[0] = (column){{"Time", "Zeit"}, times[a], a == 0 ? 3 : 5, a == 0 ? 1.0 : 1.0 / 60.0, 0.0};
    c[1] = (column){
        {"Temperature", "Temperatur"}, temperatures[b], 3, 1.0, b == 0 ? -CE_ZERO_CELSIUS_K : 0.0};
    c[2] = (column){{"Heat flow", "Wärmestrom"}, signals[s], decimals[s], factors[s], 0.0};
    if (s == 2) {
        c[2].name[0] = "Specific heat capacity";
        c[2].name[1] = "Spezifische Wärmekapazität";
    }
    return CE_OK;
}

static void put_line_end(ce_text *t, const ce_layout *l)
{
    ce_text_put(t, l->crlf ? "\r\n" : "\n");
}

static void put_head_cell(ce_text *t, const ce_layout *l, const column *c, bool signal)
{
    char name[96];
    const char *sign = !signal || !l->state_sign ? "" : l->exo_up ? " exo up" : " endo up";
    (void)snprintf(name, sizeof name, "%s%s", c->name[l->language], sign);
    bool glue = l->delimiter == ' ' || l->head == CE_HEAD_BARE;
    for (char *p = name; glue && *p != '\0'; p++)
        if (*p == ' ') *p = '_';
    char cell[160];
    switch (l->head) {
    case CE_HEAD_PARENTHESES:
        (void)snprintf(cell, sizeof cell, glue ? "%s(%s)" : "%s (%s)", name, c->unit);
        break;
    case CE_HEAD_BRACKETS:
        (void)snprintf(cell, sizeof cell, glue ? "%s[%s]" : "%s [%s]", name, c->unit);
        break;
    case CE_HEAD_SLASH:
        (void)snprintf(cell, sizeof cell, glue ? "%s/%s" : "%s / %s", name, c->unit);
        break;
    case CE_HEAD_BARE:
        (void)snprintf(cell, sizeof cell, "%s %s", name, c->unit);
        break;
    default:
        (void)snprintf(cell, sizeof cell, "%s", name);
        break;
    }
    ce_text_put(t, cell);
}

static void put_delimiter(ce_text *t, const ce_layout *l)
{
    ce_text_put_n(t, &l->delimiter, 1);
}

static void put_head(ce_text *t, const ce_layout *l, const column c[3])
{
    if (l->head == CE_HEAD_NONE) return;
    for (int i = 0; i < 3; i++) {
        if (i > 0) put_delimiter(t, l);
        put_head_cell(t, l, &c[i], i == 2);
    }
    put_line_end(t, l);
    if (l->head != CE_HEAD_UNIT_ROW) return;
    for (int i = 0; i < 3; i++) {
        if (i > 0) put_delimiter(t, l);
        ce_text_put(t, c[i].unit);
    }
    put_line_end(t, l);
}

static void put_preamble(ce_text *t, const ce_simulation *sim, const ce_layout *l,
                         const char *sample)
{
    if (!l->preamble) return;
    char number[64];
    bool de = l->language == CE_LANGUAGE_DE;
    ce_text_put(t, de ? "Probe: " : "Sample: ");
    ce_text_put_line(t, sample == NULL ? "-" : sample);
    put_line_end(t, l);
    ce_text_put(t, de ? "Einwaage: " : "Mass: ");
    ce_text_put_n(t, number,
                  ce_text_fixed(number, sim->config.instrument.mass_g * 1000.0, 3, l->decimal));
    ce_text_put(t, " mg");
    put_line_end(t, l);
    ce_text_put(t, de ? "Bemerkung: simuliert, keine Messung" : "Comment: simulated, not measured");
    put_line_end(t, l);
    put_line_end(t, l);
}

static void put_rows(ce_text *t, const ce_simulation *sim, const ce_layout *l, const column c[3])
{
    const double *value[3] = {sim->t_s, sim->t_K, sim->signal_mW};
    char number[64];
    size_t first = l->last_heating_only ? sim->last_heating : 0;
    size_t end = l->last_heating_only ? first + sim->last_heating_n : sim->n;
    for (size_t i = first; i < end && !t->failed; i++) {
        for (int k = 0; k < 3; k++) {
            if (k > 0) put_delimiter(t, l);
            double x = value[k][i] - (k == 0 ? value[k][first] : 0.0);
            x = x * c[k].factor + c[k].shift;
            size_t n = ce_text_fixed(number, x, c[k].decimals, l->decimal);
            for (size_t pad = n; l->delimiter == ' ' && pad < 11; pad++) ce_text_put(t, " ");
            ce_text_put_n(t, number, n);
        }
        put_line_end(t, l);
    }
}

static const char *mark_of(const char *encoding)
{
    bool marked = strcmp(encoding, "UTF-8-BOM") == 0 || strncmp(encoding, "UTF-16", 6) == 0;
    return marked ? "\xEF\xBB\xBF" : "";
}

static ce_status convert(const ce_text *from, const char *encoding, char **bytes, size_t *n,
                         ce_error *err)
{
    const char *to = strcmp(encoding, "UTF-8-BOM") == 0 ? "UTF-8"
                     : strcmp(encoding, "UTF-16") == 0  ? "UTF-16LE"
                                                        : encoding;
    iconv_t cd = iconv_open(to, "UTF-8");
    if (cd == (iconv_t)-1)
        return ce_fail(err, CE_E_ARG, "--encoding: '%s' is not known here", encoding);
    size_t room = 4 * from->n + 16, in_left = from->n, out_left = room;
    char *out = malloc(room), *in = from->s, *o = out;
    ce_status st = CE_OK;
    if (out == NULL)
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    else if (iconv(cd, &in, &in_left, &o, &out_left) == (size_t)-1)
        st = ce_fail(err, CE_E_ARG, "--encoding: '%s' lacks a character of the file", encoding);
    (void)iconv_close(cd);
    if (st == CE_OK) {
        *n = room - out_left;
        *bytes = out;
        out = NULL;
    }
    free(out);
    return st;
}

static ce_status check_layout(const ce_layout *l, ce_error *err)
{
    if (l->decimal != '.' && l->decimal != ',')
        return ce_fail(err, CE_E_ARG, "--decimal: must be '.' or ','");
    if (l->delimiter == '\0' || strchr(",;\t| ", l->delimiter) == NULL)
        return ce_fail(err, CE_E_ARG, "--delimiter: must be one of , ; tab | blank");
    if (l->delimiter == l->decimal)
        return ce_fail(err, CE_E_ARG, "--delimiter: '%c' is the decimal mark too", l->decimal);
    if (l->delimiter == ' ' && (l->head == CE_HEAD_BARE || strchr(l->signal_unit, ' ') != NULL))
        return ce_fail(err, CE_E_ARG,
                       "--delimiter: blanks do not separate headers with blanks in "
                       "them; choose another header style or unit");
    return CE_OK;
}

ce_status ce_simulation_write(const ce_simulation *simulation, const ce_layout *layout,
                              const char *sample, char **bytes, size_t *n, ce_error *err)
{
    ce_layout l = layout == NULL ? ce_layout_default() : *layout;
    *bytes = NULL;
    *n = 0;
    column c[3];
    ce_status st = check_layout(&l, err);
    if (st == CE_OK && l.last_heating_only && simulation->last_heating_n == 0)
        st = ce_fail(err, CE_E_ARG, "--last-heating: the run has no recorded heating");
    if (st == CE_OK) st = columns_of(simulation, &l, c, err);
    if (st != CE_OK) return st;
    ce_text t = {0};
    ce_text_put(&t, mark_of(l.encoding));
    put_preamble(&t, simulation, &l, sample);
    put_head(&t, &l, c);
    put_rows(&t, simulation, &l, c);
    st = t.failed ? ce_fail(err, CE_E_NOMEM, "out of memory")
                  : convert(&t, l.encoding, bytes, n, err);
    free(t.s);
    return st;
}
