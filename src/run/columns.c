/* SPDX-License-Identifier: GPL-3.0-or-later
 * Which columns are time, temperature and signal, as far as header and options say. */
#include "run/reader.h"

#include "text/number.h"

#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static bool is_signal(ce_meaning m)
{
    return m == CE_MEANS_HEAT_FLOW || m == CE_MEANS_HEAT_CAPACITY;
}

static size_t collect(const ce_reader *r, bool (*fits)(ce_meaning), size_t *at, size_t room)
{
    size_t n = 0;
    for (size_t i = 0; i < r->n_columns; i++)
        if (fits(r->column[i].role) && n++ < room) at[n - 1] = i;
    return n;
}

static bool is_time(ce_meaning m)
{
    return m == CE_MEANS_TIME;
}

static bool is_temperature(ce_meaning m)
{
    return m == CE_MEANS_TEMPERATURE;
}

static bool is_programme(ce_meaning m)
{
    return m == CE_MEANS_PROGRAMME;
}

/* A column the caller names: by header name, else by number. */
static ce_status by_option(ce_reader *r, const char *wanted, const char *option, size_t *at)
{
    size_t found = CE_NOWHERE, n = 0;
    for (size_t i = 0; i < r->n_columns; i++)
        if (r->header_line > 0 && (ce_same_name(r->column[i].title, wanted) ||
                                   ce_same_name(r->column[i].head.name, wanted))) {
            if (n++ == 0) found = i;
        }
    if (n > 1)
        return ce_reader_fail(r, CE_E_ARG, r->header_line, found + 1,
                              "%zu columns are called '%.60s': give --%s-column by number", n,
                              wanted, option);
    double x;
    if (found == CE_NOWHERE && ce_parse_number(wanted, strlen(wanted), '.', &x) && x >= 1.0 &&
        x <= (double)r->n_columns && floor(x) == x)
        found = (size_t)x - 1;
    if (found == CE_NOWHERE)
        return ce_reader_fail(r, CE_E_ARG, r->header_line, 0,
                              "--%s-column: there is no column '%.60s' among %zu", option, wanted,
                              r->n_columns);
    *at = found;
    return CE_OK;
}

/* Titles that differ only in digits and in words for heating and cooling: one and the same
 * quantity. */
static bool same_but_number(const char *a, const char *b)
{
    for (;;) {
        while (*a != '\0' && !isalpha((unsigned char)*a)) a++;
        while (*b != '\0' && !isalpha((unsigned char)*b)) b++;
        if (tolower((unsigned char)*a) != tolower((unsigned char)*b)) return false;
        if (*a == '\0') return true;
        a++;
        b++;
    }
}

/* Two names that mean the same: equal, or one for heating and one for cooling. */
static bool same_quantity(const ce_run_column *a, const ce_run_column *b)
{
    if (a->head.unit != b->head.unit) return false;
    return same_but_number(a->head.name, b->head.name) || (a->direction != 0 && b->direction != 0);
}

/* Groups of columns side by side, every group with its own temperature: the same columns again and
 * again at equal distances. */
static bool side_by_side(ce_reader *r, const size_t *t, size_t nt, const size_t *T, size_t nT,
                         const size_t *s, size_t ns)
{
    if (nT < 2 || ns != nT || (nt != 0 && nt != nT) || nT > CE_MAX_GROUPS) return false;
    for (size_t g = 1; g < nT; g++) {
        size_t step = T[1] - T[0];
        if (T[g] - T[g - 1] != step || s[g] - s[g - 1] != step ||
            (nt > 0 && t[g] - t[g - 1] != step))
            return false;
        if (!same_quantity(&r->column[T[g]], &r->column[T[0]]) ||
            !same_quantity(&r->column[s[g]], &r->column[s[0]]) ||
            (nt > 0 && !same_quantity(&r->column[t[g]], &r->column[t[0]])) ||
            r->column[s[g]].sign != r->column[s[0]].sign)
            return false;
    }
    for (size_t g = 0; g < nT; g++)
        r->group[g] = (ce_group){nt > 0 ? t[g] : CE_NOWHERE, T[g], s[g]};
    r->n_groups = nT;
    return true;
}

/* Signals of heating and cooling beside one column of temperature and none of time. */
static bool one_temperature(ce_reader *r, size_t T, const size_t *s, size_t ns)
{
    if (ns < 2 || ns > CE_MAX_GROUPS) return false;
    for (size_t g = 0; g < ns; g++)
        if (r->column[s[g]].direction == 0 || !same_quantity(&r->column[s[g]], &r->column[s[0]]) ||
            r->column[s[g]].sign != r->column[s[0]].sign)
            return false;
    for (size_t g = 0; g < ns; g++) r->group[g] = (ce_group){CE_NOWHERE, T, s[g]};
    r->n_groups = ns;
    return true;
}

/* The nearest of the columns at or before c, else the first. */
static size_t nearest_before(const size_t *at, size_t n, size_t c)
{
    size_t best = n > 0 ? at[0] : CE_NOWHERE;
    for (size_t i = 0; i < n; i++)
        if (at[i] < c) best = at[i];
    return best;
}

/* Of several temperatures, the one that says it is the sample's. */
static size_t sample_temperature(const ce_reader *r, const size_t *at, size_t n)
{
    static const char *const words[] = {"sample", "probe", "echantillon", "muestra"};
    size_t found = CE_NOWHERE, hits = 0;
    for (size_t i = 0; i < n; i++) {
        char w[200];
        (void)ce_fold_word(r->column[at[i]].head.name, w, sizeof w);
        bool yes = strcmp(w, "ts") == 0;
        for (size_t k = 0; k < sizeof words / sizeof *words; k++)
            yes = yes || strstr(w, words[k]) != NULL;
        if (yes && hits++ == 0) found = at[i];
    }
    return hits == 1 ? found : CE_NOWHERE;
}

/* Of several signals: heat flow before heat capacity, heat flow per mass before heat flow. */
static size_t preferred_signal(const ce_reader *r, const size_t *at, size_t n)
{
    static const ce_dimension order[] = {CE_DIM_SPECIFIC_POWER, CE_DIM_POWER, CE_DIM_HEAT_CAPACITY};
    for (size_t d = 0; d < sizeof order / sizeof *order; d++) {
        size_t found = CE_NOWHERE, hits = 0;
        for (size_t i = 0; i < n; i++) {
            const ce_unit *u = r->column[at[i]].head.unit;
            if (u == NULL) return CE_NOWHERE;
            if (u->dimension == order[d] && hits++ == 0) found = at[i];
        }
        if (hits == 1) return found;
        if (hits > 1) return CE_NOWHERE;
    }
    return CE_NOWHERE;
}

static ce_status ambiguous(ce_reader *r, const char *what, const char *option, const size_t *at,
                           size_t n)
{
    return ce_reader_fail(
        r, CE_E_SYNTAX, r->header_line, at[1] + 1,
        "%zu columns could be the %s, such as %zu '%.40s' and %zu '%.40s': choose "
        "with --%s-column",
        n, what, at[0] + 1, r->column[at[0]].title, at[1] + 1, r->column[at[1]].title, option);
}

static ce_status choose_temperature(ce_reader *r, const size_t *T, size_t n, size_t signal,
                                    size_t *at)
{
    size_t p[2];
    if (n == 1)
        *at = T[0];
    else if (n > 1) {
        *at = sample_temperature(r, T, n);
        /* Who names the signal means the temperature beside it. */
        if (*at == CE_NOWHERE && r->signal_origin == CE_ORIGIN_OPTION)
            *at = nearest_before(T, n, signal);
        if (*at == CE_NOWHERE) return ambiguous(r, "temperature", "temperature", T, n);
    } else if (collect(r, is_programme, p, 2) == 1) {
        *at = p[0];
        if (ce_run_warn(r->run, CE_WARNING, r->header_line, p[0] + 1,
                        "no temperature of the sample: the programme's, '%.60s', is taken",
                        r->column[p[0]].title) != CE_OK)
            return ce_reader_no_memory(r);
    }
    return CE_OK;
}

static ce_status choose_signal(ce_reader *r, const size_t *s, size_t n, size_t *at)
{
    if (n == 1) *at = s[0];
    if (n < 2) return CE_OK;
    *at = preferred_signal(r, s, n);
    if (*at == CE_NOWHERE) return ambiguous(r, "heat flow", "signal", s, n);
    if (ce_run_warn(r->run, CE_NOTE, r->header_line, *at + 1,
                    "of %zu columns of heat flow or heat capacity, '%.60s' is taken", n,
                    r->column[*at].title) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

#define CANDIDATES 256

ce_status ce_reader_columns(ce_reader *r)
{
    const ce_run_options *o = r->o;
    size_t t[CANDIDATES], T[CANDIDATES], s[CANDIDATES];
    size_t nt = collect(r, is_time, t, CANDIDATES);
    size_t nT = collect(r, is_temperature, T, CANDIDATES);
    size_t ns = collect(r, is_signal, s, CANDIDATES);
    nt = nt < CANDIDATES ? nt : CANDIDATES;
    nT = nT < CANDIDATES ? nT : CANDIDATES;
    ns = ns < CANDIDATES ? ns : CANDIDATES;
    bool no_time = o->time_column != NULL && strcmp(o->time_column, "none") == 0;
    bool given = o->temperature_column != NULL || o->signal_column != NULL ||
                 (o->time_column != NULL && !no_time);
    r->segment = CE_NOWHERE;
    for (size_t i = 0; i < r->n_columns && r->segment == CE_NOWHERE; i++)
        if (r->column[i].role == CE_MEANS_SEGMENT) r->segment = i;
    r->n_groups = 1;
    ce_group *g = &r->group[0];
    *g = (ce_group){CE_NOWHERE, CE_NOWHERE, CE_NOWHERE};
    if (!given && side_by_side(r, t, no_time ? 0 : nt, T, nT, s, ns)) return CE_OK;
    if (!given && nT == 1 && nt == 0 && one_temperature(r, T[0], s, ns)) return CE_OK;
    if (o->signal_column != NULL) {
        CE_TRY(by_option(r, o->signal_column, "signal", &g->signal));
        r->signal_origin = CE_ORIGIN_OPTION;
    }
    if (o->temperature_column != NULL) {
        CE_TRY(by_option(r, o->temperature_column, "temperature", &g->temperature));
        r->temperature_origin = CE_ORIGIN_OPTION;
    }
    if (g->signal == CE_NOWHERE) CE_TRY(choose_signal(r, s, ns, &g->signal));
    if (g->temperature == CE_NOWHERE)
        CE_TRY(choose_temperature(r, T, nT, g->signal, &g->temperature));
    if (o->time_column != NULL && !no_time) {
        CE_TRY(by_option(r, o->time_column, "time", &g->time));
        r->time_origin = CE_ORIGIN_OPTION;
    } else if (!no_time)
        g->time = nearest_before(t, nt, g->temperature);
    if (no_time) r->time_origin = CE_ORIGIN_OPTION;
    if ((g->temperature != CE_NOWHERE && g->temperature == g->signal) ||
        (g->time != CE_NOWHERE && (g->time == g->temperature || g->time == g->signal)))
        return ce_reader_fail(r, CE_E_ARG, r->header_line, 0,
                              "one column cannot be two things: check the --...-column options");
    r->behave = g->temperature == CE_NOWHERE || g->signal == CE_NOWHERE ||
                (g->time == CE_NOWHERE && !no_time && r->header_line == 0);
    return CE_OK;
}
