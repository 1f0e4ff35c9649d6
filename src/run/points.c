/* SPDX-License-Identifier: GPL-3.0-or-later
 * From rows of the table to points of the run, in internal units, with the places where a new
 * segment must begin. */
#include "run/reader.h"

#include "base/order.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* ---- units ---------------------------------------------------------------------------------- */

static ce_status unit_by_option(ce_reader *r, const char *text, ce_meaning role, ce_meaning or_role,
                                const char *option, const ce_unit **unit)
{
    const ce_unit *u = ce_unit_find(text, strlen(text));
    if (u == NULL || (!ce_meaning_fits(role, u) && !ce_meaning_fits(or_role, u)))
        return ce_reader_fail(r, CE_E_ARG, 0, 0, "'%.40s' is not a unit for --%s-unit", text,
                              option);
    *unit = u;
    return CE_OK;
}

/* The unit a column states; NULL when it states none. */
static ce_status stated_unit(ce_reader *r, size_t column, ce_meaning role, ce_meaning or_role,
                             const char *option, const ce_unit **unit)
{
    const ce_header *h = &r->column[column].head;
    size_t line = r->units_line != 0 ? r->units_line : r->header_line;
    *unit = h->unit;
    if (h->unit == NULL && h->unit_text[0] != '\0')
        return ce_reader_fail(r, CE_E_SYNTAX, line, column + 1,
                              "unknown unit '%s' of column '%.60s': say what it is with --%s-unit",
                              h->unit_text, r->column[column].title, option);
    if (h->unit != NULL && !ce_meaning_fits(role, h->unit) && !ce_meaning_fits(or_role, h->unit))
        return ce_reader_fail(r, CE_E_SYNTAX, line, column + 1,
                              "'%s' is a unit of %s, not of %s (column '%.60s'): overrule with "
                              "--%s-unit or --%s-column",
                              h->unit_text, ce_dimension_name(h->unit->dimension),
                              ce_meaning_name(role), r->column[column].title, option, option);
    return CE_OK;
}

/* Values that would be colder than a DSC goes cannot be kelvin. */
#define COLDEST_K 100.0
/* Colder than most coolers go, though nitrogen does: worth a word. Common practice. */
#define COLD_K 180.0

/* The share of a column's values below a limit. */
static double share_below(const ce_rows *rows, size_t column, double limit)
{
    size_t n = 0, all = 0;
    for (size_t i = 0; i < rows->n; i++) {
        double x = rows->value[column][i];
        all += isnan(x) ? 0 : 1;
        n += x < limit;
    }
    return all == 0 ? 0.0 : (double)n / (double)all;
}

static ce_status guess_temperature_unit(ce_reader *r, size_t column)
{
    if (share_below(&r->rows, column, COLDEST_K) < 0.01)
        return ce_reader_fail(r, CE_E_SYNTAX, r->header_line, column + 1,
                              "nothing says whether the temperatures are °C or K, and their values "
                              "leave it open: give --temperature-unit");
    r->temperature_unit = ce_unit_find("°C", strlen("°C"));
    if (ce_run_warn(r->run, CE_WARNING, r->header_line, column + 1,
                    "nothing says the unit of temperature: °C is taken, as kelvin would be colder "
                    "than a DSC goes; overrule with --temperature-unit") != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

ce_status ce_reader_units(ce_reader *r)
{
    const ce_run_options *o = r->o;
    const ce_group *g = &r->group[0];
    if (o->temperature_unit != NULL)
        CE_TRY(unit_by_option(r, o->temperature_unit, CE_MEANS_TEMPERATURE, CE_MEANS_TEMPERATURE,
                              "temperature", &r->temperature_unit));
    else
        CE_TRY(stated_unit(r, g->temperature, CE_MEANS_TEMPERATURE, CE_MEANS_TEMPERATURE,
                           "temperature", &r->temperature_unit));
    if (r->temperature_unit == NULL) CE_TRY(guess_temperature_unit(r, g->temperature));
    if (o->signal_unit != NULL)
        CE_TRY(unit_by_option(r, o->signal_unit, CE_MEANS_HEAT_FLOW, CE_MEANS_HEAT_CAPACITY,
                              "signal", &r->signal_unit));
    else
        CE_TRY(stated_unit(r, g->signal, CE_MEANS_HEAT_FLOW, CE_MEANS_HEAT_CAPACITY, "signal",
                           &r->signal_unit));
    if (o->time_unit != NULL)
        CE_TRY(
            unit_by_option(r, o->time_unit, CE_MEANS_TIME, CE_MEANS_TIME, "time", &r->time_unit));
    else if (g->time != CE_NOWHERE)
        CE_TRY(stated_unit(r, g->time, CE_MEANS_TIME, CE_MEANS_TIME, "time", &r->time_unit));
    return CE_OK;
}

/* ---- points --------------------------------------------------------------------------------- */

typedef struct {
    ce_reader *r;
    double *t, *T, *y; /* t may be NULL                                                     */
    size_t n;
    size_t missing, missing_line;
} points;

static ce_status begin_segment(ce_reader *r, size_t point)
{
    if (point == 0 || (r->n_starts > 0 && r->start[r->n_starts - 1] == point)) return CE_OK;
    if (r->n_starts >= CE_MAX_SEGMENTS)
        return ce_reader_fail(r, CE_E_LIMIT, ce_lines_find(&r->point_lines, point), 0,
                              "more than %zu segments", CE_MAX_SEGMENTS);
    size_t *p = reallocarray(r->start, r->n_starts + 1, sizeof *p);
    if (p == NULL) return ce_reader_no_memory(r);
    r->start = p;
    r->start[r->n_starts++] = point;
    return CE_OK;
}

/* Where the step across a blank line is like the steps around it, the blank line means nothing. */
static bool goes_on(const double *t, const double *T, size_t n, size_t j)
{
    if (j < 2 || j + 1 >= n) return true;
    double before = fabs(T[j - 1] - T[j - 2]), after = fabs(T[j + 1] - T[j]);
    if (fabs(T[j] - T[j - 1]) > 5.0 * fmax(before, after) + 0.5) return false;
    if (t == NULL) return true;
    double dt = fmax(t[j - 1] - t[j - 2], t[j + 1] - t[j]);
    return t[j] >= t[j - 1] && t[j] - t[j - 1] <= 5.0 * dt;
}

/* One time out of line, a digit or a mark lost: the ones around it go on without it. */
static bool stray_time(const points *p, size_t from, size_t j, size_t *at)
{
    if (j + 1 < p->n && p->t[j + 1] > p->t[j - 1]) {
        *at = j;
        return true;
    }
    *at = j - 1;
    return j >= from + 2 && p->t[j] > p->t[j - 2];
}

/* A clock that starts again begins a segment; one that goes back is broken. */
static ce_status check_clock(points *p, size_t from, size_t j, bool *restart)
{
    ce_reader *r = p->r;
    *restart = false;
    if (p->t == NULL || j == from || p->t[j] >= p->t[j - 1]) return CE_OK;
    double begin = p->t[from], last = p->t[j - 1];
    size_t at;
    if (stray_time(p, from, j, &at))
        return ce_reader_fail(r, CE_E_DOMAIN, ce_lines_find(&r->point_lines, at),
                              r->group[0].time + 1,
                              "time jumps to %g and back: the row is damaged, or --time-column is "
                              "another",
                              p->t[at]);
    if (p->t[j] <= begin + 0.02 * (last - begin)) {
        *restart = true;
        return CE_OK;
    }
    return ce_reader_fail(r, CE_E_DOMAIN, ce_lines_find(&r->point_lines, j), r->group[0].time + 1,
                          "time goes back from %g to %g: not one measurement, or "
                          "--time-column is another",
                          last, p->t[j]);
}

static bool row_complete(const ce_rows *rows, const ce_group *g, size_t i)
{
    return !isnan(rows->value[g->temperature][i]) && !isnan(rows->value[g->signal][i]) &&
           (g->time == CE_NOWHERE || !isnan(rows->value[g->time][i]));
}

/* The rows of one group, appended; in place when the points are the group's own columns. */
static ce_status append(points *p, const ce_group *g)
{
    ce_reader *r = p->r;
    ce_rows *rows = &r->rows;
    for (size_t i = 0; i < rows->n; i++) {
        if (!row_complete(rows, g, i)) {
            bool empty = isnan(rows->value[g->temperature][i]) && isnan(rows->value[g->signal][i]);
            if (r->n_groups == 1 && !empty && p->missing++ == 0)
                p->missing_line = ce_lines_find(&rows->lines, i);
            continue;
        }
        if (ce_lines_add(&r->point_lines, p->n, ce_lines_find(&rows->lines, i)) != CE_OK)
            return ce_reader_no_memory(r);
        if (p->t != NULL) p->t[p->n] = rows->value[g->time][i];
        p->T[p->n] = rows->value[g->temperature][i];
        p->y[p->n] = rows->value[g->signal][i];
        p->n++;
    }
    return CE_OK;
}

static bool complete(const ce_rows *rows, const ce_group *g)
{
    for (size_t i = 0; i < rows->n; i++)
        if (!row_complete(rows, g, i)) return false;
    return true;
}

static void release_rows(ce_reader *r)
{
    for (size_t c = 0; r->rows.value != NULL && c < r->n_columns; c++) {
        free(r->rows.value[c]);
        r->rows.value[c] = NULL;
    }
}

/* Nothing is copied when there is one group and no gap, which is the rule. */
static ce_status gather(points *p)
{
    ce_reader *r = p->r;
    ce_rows *rows = &r->rows;
    const ce_group *g = &r->group[0];
    if (r->n_groups == 1) {
        p->t = g->time == CE_NOWHERE ? NULL : rows->value[g->time];
        p->T = rows->value[g->temperature];
        p->y = rows->value[g->signal];
        if (complete(rows, g)) {
            p->n = rows->n;
            r->point_lines = rows->lines;
            rows->lines = (ce_line_map){0};
        } else
            CE_TRY(append(p, g));
        if (g->time != CE_NOWHERE) rows->value[g->time] = NULL;
        rows->value[g->temperature] = rows->value[g->signal] = NULL;
        return CE_OK;
    }
    size_t most = r->n_groups * rows->n;
    if (most > CE_MAX_POINTS)
        return ce_reader_fail(r, CE_E_LIMIT, r->data_line, 0, "more than %zu points",
                              CE_MAX_POINTS);
    p->T = reallocarray(NULL, most, sizeof *p->T);
    p->y = reallocarray(NULL, most, sizeof *p->y);
    p->t = g->time == CE_NOWHERE ? NULL : reallocarray(NULL, most, sizeof *p->t);
    if (p->T == NULL || p->y == NULL || (p->t == NULL && g->time != CE_NOWHERE))
        return ce_reader_no_memory(r);
    for (size_t i = 0; i < r->n_groups; i++) {
        CE_TRY(begin_segment(r, p->n));
        CE_TRY(append(p, &r->group[i]));
    }
    return CE_OK;
}

/* A row of zeros before the programme begins: 0 °C and no heat flow, then a jump. */
static size_t fillers(const points *p, const ce_unit *unit)
{
    size_t k = 0;
    while (k < 3 && k + 3 < p->n && p->y[k] == 0.0) {
        double T = ce_to_internal(unit, p->T[k]);
        bool nothing = p->T[k] == 0.0 || fabs(T - CE_ZERO_CELSIUS_K) < 1e-6;
        double jump = fabs(p->T[k + 1] - p->T[k]), step = fabs(p->T[k + 2] - p->T[k + 1]);
        bool again = p->T[k + 1] == p->T[k] && p->y[k + 1] == 0.0;
        if (!nothing || !(again || (jump > 5.0 && jump > 5.0 * step))) break;
        k++;
    }
    /* Rows of zeros only count when they end in a jump. */
    while (k > 0 && !(fabs(p->T[k] - p->T[k - 1]) > 5.0)) k--;
    return k;
}

static ce_status drop_fillers(points *p)
{
    ce_reader *r = p->r;
    size_t k = fillers(p, r->temperature_unit);
    if (k == 0) return CE_OK;
    size_t line = ce_lines_find(&r->point_lines, 0);
    ce_line_map moved = {0};
    for (size_t i = 0; i < r->point_lines.n; i++) {
        ce_stretch s = r->point_lines.item[i];
        size_t end = i + 1 < r->point_lines.n ? r->point_lines.item[i + 1].row : p->n;
        if (end <= k) continue;
        size_t skip = s.row < k ? k - s.row : 0;
        if (ce_lines_add(&moved, s.row + skip - k, s.line + skip) != CE_OK) {
            free(moved.item);
            return ce_reader_no_memory(r);
        }
    }
    free(r->point_lines.item);
    r->point_lines = moved;
    p->n -= k;
    memmove(p->T, p->T + k, p->n * sizeof *p->T);
    memmove(p->y, p->y + k, p->n * sizeof *p->y);
    if (p->t != NULL) memmove(p->t, p->t + k, p->n * sizeof *p->t);
    for (size_t i = 0; i < r->n_starts; i++) r->start[i] -= k;
    if (ce_run_warn(r->run, CE_WARNING, line, 0,
                    "%zu filler row%s before the first measurement (zero, then a jump) left out", k,
                    k == 1 ? "" : "s") != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

/* The point that is first in a line or behind it. */
static size_t point_behind(const ce_line_map *map, size_t n, size_t line)
{
    size_t lo = 0, hi = n;
    while (lo < hi) {
        size_t mid = lo + (hi - lo) / 2;
        if (ce_lines_find(map, mid) < line)
            lo = mid + 1;
        else
            hi = mid;
    }
    return lo;
}

static int by_size(const void *a, const void *b)
{
    size_t x, y;
    memcpy(&x, a, sizeof x);
    memcpy(&y, b, sizeof y);
    return (x > y) - (x < y);
}

static void sort_starts(ce_reader *r)
{
    size_t k = 0;
    if (r->n_starts == 0) return;
    qsort(r->start, r->n_starts, sizeof *r->start, by_size);
    for (size_t i = 0; i < r->n_starts; i++)
        if (k == 0 || r->start[i] != r->start[k - 1]) r->start[k++] = r->start[i];
    r->n_starts = k;
}

/* Lines between the rows begin segments: headers and words always, blank lines where the
 * measurement does not simply go on. */
static ce_status starts_from_gaps(points *p)
{
    ce_reader *r = p->r;
    const ce_rows *rows = &r->rows;
    size_t blanks = 0, words = 0, first_words = 0;
    for (size_t i = 0; i < rows->n_gaps; i++) blanks += rows->gap[i].kind == CE_BREAK_BLANK;
    for (size_t i = 0; i < rows->n_gaps; i++) {
        const ce_break *gap = &rows->gap[i];
        size_t j = point_behind(&r->point_lines, p->n, gap->line);
        if (j == 0 || j >= p->n) continue;
        if (gap->kind == CE_BREAK_BLANK && (blanks > p->n / 5 || goes_on(p->t, p->T, p->n, j)))
            continue;
        if (gap->kind == CE_BREAK_TEXT && words++ == 0) first_words = gap->line;
        CE_TRY(begin_segment(r, j));
    }
    if (words > 0 && ce_run_warn(r->run, CE_NOTE, first_words, 0,
                                 "words between the rows, %zu time%s: a segment begins behind them",
                                 words, words == 1 ? "" : "s") != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

/* A column of segment numbers; one that changes with nearly every row is something else. */
static ce_status starts_from_column(ce_reader *r)
{
    const ce_rows *rows = &r->rows;
    if (r->segment == CE_NOWHERE || r->n_groups > 1 || rows->value[r->segment] == NULL)
        return CE_OK;
    const double *s = rows->value[r->segment];
    size_t changes = 0;
    for (size_t i = 1; i < rows->n; i++) changes += s[i] != s[i - 1] && !isnan(s[i]);
    if (changes == 0) return CE_OK;
    if (changes > rows->n / 4 || changes >= CE_MAX_SEGMENTS) {
        if (ce_run_warn(r->run, CE_WARNING, r->header_line, r->segment + 1,
                        "column '%.60s' changes too often to number segments: not used",
                        r->column[r->segment].title) != CE_OK)
            return ce_reader_no_memory(r);
        r->segment = CE_NOWHERE;
        return CE_OK;
    }
    for (size_t i = 1; i < rows->n; i++)
        if (s[i] != s[i - 1] && !isnan(s[i])) {
            size_t line = ce_lines_find(rows->lines.n > 0 ? &rows->lines : &r->point_lines, i);
            CE_TRY(begin_segment(r, point_behind(&r->point_lines, r->run->n, line)));
        }
    return CE_OK;
}

/* Segments listed side by side are sometimes all sorted by rising temperature: the words of the
 * header tell which ran the other way. */
static ce_status turn_sorted(points *p, size_t first, size_t end, int direction)
{
    if (p->t != NULL || direction == 0 || end - first < 2) return CE_OK;
    double d = p->T[end - 1] - p->T[first];
    if ((d > 0.0) == (direction > 0)) return CE_OK;
    for (size_t a = first, b = end - 1; a < b; a++, b--) {
        double T = p->T[a], y = p->y[a];
        p->T[a] = p->T[b];
        p->y[a] = p->y[b];
        p->T[b] = T;
        p->y[b] = y;
    }
    if (ce_run_warn(p->r->run, CE_NOTE, p->r->header_line, 0,
                    "a %s segment is listed by %s temperature: turned round",
                    direction > 0 ? "heating" : "cooling",
                    direction > 0 ? "falling" : "rising") != CE_OK)
        return ce_reader_no_memory(p->r);
    return CE_OK;
}

static ce_status turn_groups(points *p)
{
    ce_reader *r = p->r;
    for (size_t g = 0; g < r->n_groups; g++) {
        const ce_group *c = &r->group[g];
        int d = r->column[c->signal].direction;
        if (d == 0) d = r->column[c->temperature].direction;
        size_t first = g == 0 ? 0 : g <= r->n_starts ? r->start[g - 1] : p->n;
        size_t end = g < r->n_starts && r->n_groups > 1 ? r->start[g] : p->n;
        if (first < end) CE_TRY(turn_sorted(p, first, end, d));
    }
    return CE_OK;
}

/* Where the temperature jumps and stays, one table ends and another begins, marks or not. */
static ce_status starts_from_jumps(points *p)
{
    enum { SAMPLES = 2001 };
    double step[SAMPLES];
    size_t n = 0, stride = p->n / (SAMPLES - 1) + 1;
    for (size_t j = 1; j < p->n; j += stride) step[n++] = fabs(p->T[j] - p->T[j - 1]);
    double large = fmax(5.0, 15.0 * ce_median(step, n));
    for (size_t j = 2; j + 1 < p->n; j++)
        if (fabs(p->T[j] - p->T[j - 1]) > large && fabs(p->T[j + 1] - p->T[j - 1]) > large &&
            fabs(p->T[j] - p->T[j - 2]) > large)
            CE_TRY(begin_segment(p->r, j));
    sort_starts(p->r);
    return CE_OK;
}

static ce_status starts_from_clock(points *p)
{
    ce_reader *r = p->r;
    size_t k = 0, from = 0, known = r->n_starts;
    for (size_t j = 1; j < p->n; j++) {
        bool restart;
        while (k < known && r->start[k] < j) k++;
        if (k < known && r->start[k] == j) {
            from = j;
            continue;
        }
        CE_TRY(check_clock(p, from, j, &restart));
        if (!restart) continue;
        from = j;
        CE_TRY(begin_segment(r, j));
    }
    sort_starts(r);
    return CE_OK;
}

/* ---- into internal units -------------------------------------------------------------------- */

static ce_status into_kelvin(points *p)
{
    ce_reader *r = p->r;
    const ce_unit *u = r->temperature_unit;
    bool told = r->o->temperature_unit != NULL;
    size_t column = r->group[0].temperature + 1;
    for (size_t j = 0; j < p->n; j++) {
        double K = ce_to_internal(u, p->T[j]);
        if (K < 0.0 || K > 3000.0)
            return ce_reader_fail(r, CE_E_DOMAIN, ce_lines_find(&r->point_lines, j), column,
                                  "a temperature of %g %s is not possible: is %s the unit? "
                                  "overrule with --temperature-unit",
                                  p->T[j], u->name, u->name);
        if (K < COLDEST_K && !told && strcmp(u->name, "K") == 0)
            return ce_reader_fail(
                r, CE_E_DOMAIN, ce_lines_find(&r->point_lines, j), column,
                "%g K is colder than a DSC goes: the values look like °C; say the "
                "unit with --temperature-unit",
                p->T[j]);
        p->T[j] = K;
    }
    if (!told && strcmp(u->name, "K") == 0 && p->T[0] < COLD_K &&
        ce_run_warn(r->run, CE_WARNING, ce_lines_find(&r->point_lines, 0), column,
                    "the run begins at %g K: if the values are °C, give --temperature-unit C",
                    p->T[0]) != CE_OK)
        return ce_reader_no_memory(r);
    double start = ce_from_internal(u, p->T[0]);
    if (!told && strcmp(u->name, "°C") == 0 && start > 285.0 && start < 313.0 &&
        ce_run_warn(r->run, CE_WARNING, ce_lines_find(&r->point_lines, 0), column,
                    "the run begins at %g °C: if the values are kelvin, give --temperature-unit K",
                    start) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status into_seconds(points *p)
{
    ce_reader *r = p->r;
    for (size_t j = 0; p->t != NULL && j < p->n; j++) {
        if (r->time_unit != NULL) p->t[j] = ce_to_internal(r->time_unit, p->t[j]);
        if (!(fabs(p->t[j]) <= 1e12))
            return ce_reader_fail(r, CE_E_DOMAIN, ce_lines_find(&r->point_lines, j),
                                  r->group[0].time + 1, "a time of %g s is not possible", p->t[j]);
    }
    return CE_OK;
}

static ce_status note_missing(const points *p)
{
    ce_reader *r = p->r;
    if (p->missing == 0) return CE_OK;
    if (ce_run_warn(r->run, CE_WARNING, p->missing_line, 0,
                    "%zu row%s without a value in a column that is used left out", p->missing,
                    p->missing == 1 ? "" : "s") != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status make_points(points *p)
{
    ce_reader *r = p->r;
    CE_TRY(gather(p));
    CE_TRY(note_missing(p));
    if (p->n < CE_MIN_POINTS)
        return ce_reader_fail(r, CE_E_SYNTAX, r->data_line, 0,
                              "only %zu complete rows: a run needs at least %zu", p->n,
                              CE_MIN_POINTS);
    CE_TRY(drop_fillers(p));
    r->run->n = p->n;
    CE_TRY(turn_groups(p));
    if (r->n_groups == 1) CE_TRY(starts_from_gaps(p));
    CE_TRY(starts_from_column(r));
    CE_TRY(starts_from_jumps(p));
    CE_TRY(starts_from_clock(p));
    CE_TRY(into_kelvin(p));
    return into_seconds(p);
}

ce_status ce_reader_points(ce_reader *r)
{
    points p = {.r = r};
    ce_status st = make_points(&p);
    r->run->n = st == CE_OK ? p.n : 0;
    r->run->time_s = p.t;
    r->run->temperature_K = p.T;
    r->run->signal = p.y;
    release_rows(r);
    return st;
}
