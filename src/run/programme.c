/* SPDX-License-Identifier: GPL-3.0-or-later
 * Segments, and what time, temperature and the declared rate say about each other. */
#include "run/reader.h"
#include "run/segments.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* A DSC of this kind does not heat faster, K/min. */
#define FASTEST 300.0
/* Rates that programmes are written with; common practice. */
#define USUAL_LOW  0.5
#define USUAL_HIGH 100.0
/* Relative distance at which a declared and a measured rate are two. */
#define RATE_DIFFERS 0.05
/* Temperature may go back by so much within a ramp before it is worth a word, K. */
#define BACK_K 0.3

/* The ramp that spans most; NULL when there is none. */
static const ce_segment *main_ramp(const ce_run *run)
{
    const ce_segment *best = NULL;
    for (size_t i = 0; i < run->n_segments; i++) {
        const ce_segment *s = &run->segment[i];
        if (s->kind != CE_ISOTHERMAL && isfinite(s->rate_K_min) &&
            (best == NULL || s->high_K - s->low_K > best->high_K - best->low_K))
            best = s;
    }
    return best;
}

static ce_status find_segments(ce_reader *r, double rate)
{
    free(r->run->segment);
    r->run->segment = NULL;
    r->run->n_segments = 0;
    return ce_run_find_segments(r->run, r->start, r->n_starts, rate, r->err);
}

static bool near(double a, double b, double rel)
{
    return fabs(a - b) <= rel * fabs(b);
}

/* A time column without unit: the unit that gives the declared rate, else the only one that gives a
 * usual rate. */
static ce_status guess_time_unit(ce_reader *r)
{
    static const char *const names[] = {"s", "min", "h"};
    CE_TRY(find_segments(r, (double)NAN));
    const ce_segment *ramp = main_ramp(r->run);
    const ce_unit *found = NULL;
    size_t hits = 0;
    for (size_t i = 0; ramp != NULL && i < 3; i++) {
        const ce_unit *u = ce_unit_find(names[i], strlen(names[i]));
        double rate = fabs(ramp->rate_K_min) / u->factor;
        bool fits = isnan(r->rate_K_min) ? i < 2 && rate >= USUAL_LOW && rate <= USUAL_HIGH
                                         : near(rate, fabs(r->rate_K_min), 0.15);
        if (fits && hits++ == 0) found = u;
    }
    if (hits != 1)
        return ce_reader_fail(r, CE_E_SYNTAX, r->header_line, r->group[0].time + 1,
                              "nothing says the unit of time, and the rate it would give leaves it "
                              "open: give --time-unit");
    r->time_unit = found;
    for (size_t i = 0; i < r->run->n; i++)
        r->run->time_s[i] = ce_to_internal(found, r->run->time_s[i]);
    r->time_origin = CE_ORIGIN_GUESSED;
    return CE_OK;
}

/* Minutes under "[s]" make ten kelvin per minute six hundred. */
static ce_status check_time_unit(ce_reader *r)
{
    const ce_segment *ramp = main_ramp(r->run);
    if (ramp == NULL || r->o->time_unit != NULL) return CE_OK;
    double rate = fabs(ramp->rate_K_min), declared = fabs(r->rate_K_min);
    size_t line = r->units_line != 0 ? r->units_line : r->header_line;
    size_t column = r->group[0].time + 1;
    if (near(rate, 60.0 * declared, 0.1) || near(60.0 * rate, declared, 0.1))
        return ce_reader_fail(r, CE_E_DOMAIN, line, column,
                              "with times in %s the rate is %.4g K/min where line %zu declares "
                              "%.4g: say the unit of time with --time-unit",
                              r->time_unit->name, rate, r->rate_line, declared);
    if (rate > FASTEST)
        return ce_reader_fail(
            r, CE_E_DOMAIN, line, column,
            "with times in %s the rate would be %.4g K/min: are they minutes? say "
            "the unit of time with --time-unit",
            r->time_unit->name, rate);
    if ((rate < 0.99 * USUAL_LOW || rate > 1.01 * USUAL_HIGH) && !near(rate, declared, 0.2) &&
        ce_run_warn(r->run, CE_WARNING, line, column,
                    "with times in %s the rate is %.3g K/min, which is unusual: overrule with "
                    "--time-unit if that is wrong",
                    r->time_unit->name, rate) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status check_declared(ce_reader *r)
{
    if (isnan(r->rate_K_min)) return CE_OK;
    const ce_segment *ramp = main_ramp(r->run);
    for (size_t i = 0; i < r->run->n_segments; i++) {
        const ce_segment *s = &r->run->segment[i];
        if (s->kind != CE_ISOTHERMAL &&
            near(fabs(s->rate_K_min), fabs(r->rate_K_min), RATE_DIFFERS))
            return CE_OK;
    }
    if (ramp == NULL) return CE_OK;
    if (ce_run_warn(r->run, CE_WARNING, r->rate_line, 0,
                    "the file declares %.4g K/min, time and temperature give %.4g: the latter is "
                    "used",
                    r->rate_K_min, ramp->rate_K_min) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

/* How far the temperature falls back behind what it had reached, and where. */
static double falls_back(const ce_run *run, const ce_segment *s, size_t *at)
{
    double sign = s->kind == CE_COOLING ? -1.0 : 1.0, reached = -HUGE_VAL, most = 0.0;
    for (size_t i = s->first; i < s->first + s->n; i++) {
        double T = sign * run->temperature_K[i];
        if (T > reached) reached = T;
        if (reached - T > most) {
            most = reached - T;
            *at = i;
        }
    }
    return most;
}

/* In a run that only heats (or only cools) even small steps back deserve a word. */
static ce_status note_steps_back(ce_reader *r)
{
    const ce_run *run = r->run;
    size_t ramps[3] = {0, 0, 0}, steps = 0, first = 0;
    double most = 0.0;
    for (size_t i = 0; i < run->n_segments; i++) ramps[run->segment[i].kind]++;
    if (r->n_starts > 0 || (ramps[CE_HEATING] > 0) == (ramps[CE_COOLING] > 0)) return CE_OK;
    double sign = ramps[CE_HEATING] > 0 ? 1.0 : -1.0;
    for (size_t i = 1; i < run->n; i++) {
        double back = sign * (run->temperature_K[i - 1] - run->temperature_K[i]);
        if (back <= 0.0) continue;
        if (steps++ == 0) first = i;
        most = fmax(most, back);
    }
    if (steps == 0) return CE_OK;
    if (ce_run_warn(r->run, most > BACK_K ? CE_WARNING : CE_NOTE,
                    ce_lines_find(&r->point_lines, first), r->group[0].temperature + 1,
                    "the temperature is not monotone: %zu step%s back, by %.2g K at most", steps,
                    steps == 1 ? "" : "s", most) != CE_OK)
        return ce_reader_no_memory(r);
    return CE_OK;
}

static ce_status check_ramps(ce_reader *r)
{
    const ce_run *run = r->run;
    for (size_t i = 0; i < run->n_segments; i++) {
        const ce_segment *s = &run->segment[i];
        size_t at = s->first;
        if (s->kind == CE_ISOTHERMAL) continue;
        double back = falls_back(run, s, &at);
        if (back > BACK_K && ce_run_warn(r->run, CE_WARNING, ce_lines_find(&r->point_lines, at),
                                         r->group[0].temperature + 1,
                                         "the temperature of segment %zu falls back by %.2g K",
                                         s->index, back) != CE_OK)
            return ce_reader_no_memory(r);
        if (s->rate_sd_K_min > 0.2 * fabs(s->rate_K_min) &&
            ce_run_warn(r->run, CE_WARNING, s->line, 0,
                        "the rate of segment %zu is not steady: %.3g K/min with a spread of %.2g",
                        s->index, s->rate_K_min, s->rate_sd_K_min) != CE_OK)
            return ce_reader_no_memory(r);
    }
    return note_steps_back(r);
}

ce_status ce_reader_programme(ce_reader *r)
{
    ce_run *run = r->run;
    double rate = isnan(r->o->rate_K_min) ? r->rate_K_min : r->o->rate_K_min;
    if (run->time_s != NULL && r->time_unit == NULL) CE_TRY(guess_time_unit(r));
    CE_TRY(find_segments(r, rate));
    for (size_t i = 0; i < run->n_segments; i++)
        run->segment[i].line = ce_lines_find(&r->point_lines, run->segment[i].first);
    if (run->time_s == NULL) {
        if (isnan(r->o->rate_K_min) && r->other_rate_line > 0)
            return ce_reader_fail(r, CE_E_SYNTAX, r->other_rate_line, 0,
                                  "another rate than in line %zu, and no time to tell: give --rate",
                                  r->rate_line);
        if (isnan(rate) && ce_run_warn(run, CE_WARNING, 0, 0,
                                       "no time column and no rate stated: give --rate") != CE_OK)
            return ce_reader_no_memory(r);
    } else {
        CE_TRY(check_time_unit(r));
        CE_TRY(check_declared(r));
    }
    return check_ramps(r);
}
