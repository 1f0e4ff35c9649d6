/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "run/run_internal.h"
#include "transition/flags.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { MOST_TRANSITIONS = 6, LEAST_POINTS = 24 };
static const double least_range_K = 20.0;
static const double least_strength = 1.2; /* of the evidence for a step                       */
static const double least_share = 0.1;    /* of the strongest step, for a further one            */
/* The sanity band of a step: 0.15 to 0.65 J/(g K) for an amorphous polymer (ATHAS-type values, from
 * memory); a larger one than this is a sign of another event. */
static const double plausible_J_gK = 0.8;

/* J/(g K) per unit of the signal; NaN when mass or rate are not known. */
static double to_heat_capacity(const ce_run *run, const ce_segment *s)
{
    const double per_s = fabs(s->rate_K_min) / 60.0;
    switch (ce_run_signal_kind(run)) {
    case CE_SIGNAL_HEAT_CAPACITY:
        return 1.0;
    case CE_SIGNAL_SPECIFIC_POWER:
        return per_s > 0.0 ? 1.0 / per_s : (double)NAN;
    case CE_SIGNAL_UNSTATED:
        return (double)NAN;
    case CE_SIGNAL_POWER:
        break;
    }
    const double mg = 1000.0 * ce_run_mass_g(run);
    return per_s > 0.0 && mg > 0.0 ? 1.0 / (mg * per_s) : (double)NAN;
}

static ce_line turned(ce_line line, bool cooling)
{
    if (cooling) {
        line.at_ref = -line.at_ref;
        line.slope = -line.slope;
    }
    return line;
}

/* A finding as the outside wants it. */
static ce_transition present(const ce_run *run, const ce_segment *s, const ce_curve *c,
                             const ce_transition_options *o, const ce_finding *f)
{
    const double factor = to_heat_capacity(run, s), scale = isnan(factor) ? 1.0 : factor;
    ce_transition t = {
        .step_height = f->points.step * scale,
        .step_height_u = f->step_u * scale,
        .step_unit = isnan(factor) ? ce_signal_unit(ce_run_signal_kind(run)) : "J/(g K)",
        .width_K = f->points.at[CE_END] - f->points.at[CE_ONSET],
        .width_u_K = f->width_u,
        .noise_sd = f->noise,
        .overshoot = fmax(f->points.overshoot, 0.0),
        .glass = f->glass,
        .liquid = f->liquid,
        .glass_line = turned(f->lines.glass, c->cooling),
        .liquid_line = turned(f->lines.liquid, c->cooling),
        .tangent = turned(f->points.tangent, c->cooling),
        .windows_given = !isnan(o->glass.low_K) || !isnan(o->liquid.low_K),
        .model_lines = f->model,
    };
    for (size_t k = 0; k < CE_CONSTRUCTIONS; k++)
        t.tg[k] = (ce_reading){f->points.at[k], hypot(f->u_noise[k], f->u_window[k]), f->u_noise[k],
                               f->u_window[k]};
    ce_flag_finding(f, &t);
    const double half = f->points.at[CE_HALF_STEP];
    if (t.windows_given && !(t.glass.high_K < half && half < t.liquid.low_K))
        ce_add_flag(&t, CE_FLAG_NO_OVERLAP, half);
    if (!isnan(factor) && (t.step_height < 0.15 || t.step_height > 0.65))
        ce_add_flag(&t, CE_FLAG_STEP_IMPLAUSIBLE, t.step_height);
    return t;
}

/* The stretch of curve that belongs to place i: up to the middle between it and its neighbours. */
static ce_window edge_of(const ce_place *place, size_t n, size_t i)
{
    ce_window edge = {-HUGE_VAL, HUGE_VAL};
    for (size_t k = 0; k < n; k++) {
        if (k == i) continue;
        if (place[k].high_K < place[i].low_K)
            edge.low_K = fmax(edge.low_K, 0.5 * (place[k].high_K + place[i].low_K));
        else
            edge.high_K = fmin(edge.high_K, 0.5 * (place[k].low_K + place[i].high_K));
    }
    return edge;
}

typedef struct {
    size_t n;
    ce_transition item[MOST_TRANSITIONS];
    double score;
} findings;

/* The hotter, the likelier is a step one of decomposition; evidence there counts less (common
 * practice: look below first). */
static void prefer_low(ce_finding *f)
{
    f->strength /= 1.0 + fmax(f->points.at[CE_HALF_STEP] - 400.0, 0.0) / 100.0;
}

static int stronger(const void *a, const void *b)
{
    const ce_finding *x = a, *y = b;
    return (x->strength < y->strength) - (x->strength > y->strength);
}

/* A further transition must be as clean as a first one: peaks and bends look like small steps, unless
 * two make up the height of a wide one, or the step is that of a glass to a hundredth. */
static bool another(const ce_finding *f, const ce_finding *strongest)
{
    const bool glass = f->part || (f->model && f->rough < 0.01);
    return f->strength > (glass ? 2.0 : 6.0) && f->rough < 0.03 &&
           f->points.step > least_share * strongest->points.step &&
           fabs(f->points.at[CE_HALF_STEP] - strongest->points.at[CE_HALF_STEP]) > 8.0;
}

static ce_status find_places(const ce_run *run, const ce_segment *s, const ce_curve *c,
                             const ce_transition_options *o, findings *found, ce_error *err)
{
    const double factor = to_heat_capacity(run, s);
    ce_place place[MOST_TRANSITIONS];
    size_t n = 0;
    double detectable;
    ce_status st = ce_locate(c, isnan(factor) ? HUGE_VAL : plausible_J_gK / factor, place,
                             MOST_TRANSITIONS, &n, &detectable);
    if (st != CE_OK) return ce_fail(err, st, "out of memory");
    if (n == 0)
        return ce_fail(err, CE_E_REFUSED,
                       "no step in segment %zu: one of %.2g %s would have been seen", s->index,
                       detectable * (isnan(factor) ? 1.0 : factor),
                       isnan(factor) ? ce_signal_unit(ce_run_signal_kind(run)) : "J/(g K)");
    size_t real = 0; /* last digits and ripples must not fence in the step                     */
    for (size_t i = 0; i < n; i++)
        if (place[i].step >= least_share * place[0].step) place[real++] = place[i];
    n = real;
    ce_finding f[MOST_TRANSITIONS];
    size_t kept = 0;
    ce_error first = CE_ERROR_INIT;
    for (size_t i = 0; i < n && (i == 0 || place[i].score > 0.5 * place[0].score); i++) {
        ce_error e = CE_ERROR_INIT;
        st = ce_read_step(c, &place[i], edge_of(place, n, i), o, &f[kept], &e);
        if (st == CE_E_NOMEM) return ce_fail(err, st, "out of memory");
        if (st == CE_OK)
            prefer_low(&f[kept++]);
        else if (first.code == CE_OK)
            first = e;
    }
    if (kept == 0) {
        if (err != NULL && err->code == CE_OK) *err = first;
        return first.code;
    }
    qsort(f, kept, sizeof *f, stronger);
    found->score = f[0].strength;
    if (!(f[0].strength > least_strength))
        return ce_fail(err, CE_E_REFUSED,
                       "no step in segment %zu: the best candidate, at %.1f °C, leaves as much "
                       "unexplained as it explains",
                       s->index, f[0].points.at[CE_HALF_STEP] - 273.15);
    for (size_t i = 0; i < kept && found->n < MOST_TRANSITIONS; i++)
        if (i == 0 || another(&f[i], &f[0])) found->item[found->n++] = present(run, s, c, o, &f[i]);
    return CE_OK;
}

static ce_status find_in(const ce_run *run, const ce_segment *s, const ce_transition_options *o,
                         bool mirrored, findings *found, ce_error *err)
{
    memset(found, 0, sizeof *found);
    if (s->n < LEAST_POINTS || !(s->high_K - s->low_K > least_range_K))
        return ce_fail(err, CE_E_REFUSED,
                       "segment %zu has %zu points over %.0f K: too little curve for a step",
                       s->index, s->n, s->high_K - s->low_K);
    ce_curve c;
    ce_status st = ce_curve_make(s->n, ce_run_temperature_K(run) + s->first,
                                 ce_run_signal(run) + s->first, mirrored, &c);
    if (st != CE_OK) return ce_fail(err, st, "out of memory");
    st = find_places(run, s, &c, o, found, err);
    ce_curve_free(&c);
    return st;
}

static bool wanted(const ce_segment *s, const ce_transition_options *o)
{
    if (o->segment > 0) return s->index == o->segment;
    if (s->kind != CE_HEATING) return false;
    return o->heating == 0 || s->nth_of_kind == o->heating;
}

/* A cooling from the liquid earlier in the file has erased the history as well as a heating would. */
static bool cooled_before(const ce_segment *s, size_t i, const ce_transition *t)
{
    for (size_t k = 0; k < i; k++)
        if (s[k].kind == CE_COOLING && s[k].high_K > t->tg[CE_END].value_K) return true;
    return false;
}

/* The first heating against this one: a difference that its uncertainty does not explain. */
static void compare_heatings(const ce_run *run, const ce_segment *s, size_t i,
                             const ce_transition_options *o, ce_transition *t)
{
    if (s[i].kind != CE_HEATING || s[i].nth_of_kind < 2) return;
    size_t k = 0;
    while (k < i && s[k].kind != CE_HEATING) k++;
    findings first;
    if (k == i || find_in(run, &s[k], o, false, &first, NULL) != CE_OK) return;
    const ce_reading *a = &first.item[0].tg[CE_HALF_STEP], *b = &t->tg[CE_HALF_STEP];
    const double off = a->value_K - b->value_K;
    if (fabs(off) > 2.0 * hypot(a->u_K, b->u_K) && fabs(off) < 60.0)
        ce_add_flag(t, CE_FLAG_HEATINGS_DIFFER, off);
}

/* Steps against the direction of a segment, when they are more than the last digit of a slow programme
 * would make: over one in a hundred; else 0. */
static size_t steps_back(const ce_run *run, const ce_segment *s)
{
    const double *T = ce_run_temperature_K(run) + s->first;
    const double way = s->kind == CE_COOLING ? -1.0 : 1.0;
    size_t n = 0;
    for (size_t i = 1; i < s->n; i++) n += way * (T[i] - T[i - 1]) < 0.0;
    return 100 * n > s->n ? n : 0;
}

static ce_status hand_over(const ce_run *run, const ce_segment *s, size_t i,
                           const ce_transition_options *o, findings *f, ce_transitions *found,
                           ce_error *err)
{
    const size_t back = steps_back(run, &s[i]);
    compare_heatings(run, s, i, o, &f->item[0]);
    for (size_t k = 0; k < f->n; k++) {
        ce_transition *t = &f->item[k];
        if (s[i].kind == CE_HEATING && s[i].nth_of_kind == 1 && !cooled_before(s, i, t))
            ce_add_flag(t, CE_FLAG_FIRST_HEATING, 1.0);
        if (back > 0) ce_add_flag(t, CE_FLAG_NOT_MONOTONE, (double)back);
        if (ce_run_sign_origin(run) == CE_ORIGIN_GUESSED) ce_add_flag(t, CE_FLAG_SIGN_GUESSED, 0.0);
    }
    found->item = malloc(f->n * sizeof *found->item);
    if (found->item == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    memcpy(found->item, f->item, f->n * sizeof *found->item);
    found->n = f->n;
    found->segment = s[i];
    return CE_OK;
}

ce_status ce_transition_find(const ce_run *run, const ce_transition_options *options,
                             ce_transitions *found, ce_error *err)
{
    const ce_transition_options o = options != NULL ? *options : ce_transition_options_default();
    *found = (ce_transitions){0};
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    ce_error last = CE_ERROR_INIT;
    for (size_t i = n; i-- > 0;) {
        if (!wanted(&s[i], &o)) continue;
        findings f;
        ce_error e = CE_ERROR_INIT;
        if (find_in(run, &s[i], &o, s[i].kind == CE_COOLING, &f, &e) == CE_OK)
            return hand_over(run, s, i, &o, &f, found, err);
        if (last.code == CE_OK) last = e;
    }
    if (last.code != CE_OK) {
        if (err != NULL && err->code == CE_OK) *err = last;
        return last.code;
    }
    if (o.segment > 0)
        return ce_fail(err, CE_E_ARG, "there is no segment %zu (the run has %zu)", o.segment, n);
    return ce_fail(err, CE_E_ARG, "no heating segment to evaluate among the %zu segments", n);
}

ce_status ce_run_settle_sign(ce_run *run, ce_error *err)
{
    const ce_origin origin = ce_run_sign_origin(run);
    if (origin == CE_ORIGIN_STATED || origin == CE_ORIGIN_OPTION) return CE_OK;
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    const ce_transition_options o = ce_transition_options_default();
    for (size_t i = n; i-- > 0;) {
        if (s[i].kind != CE_HEATING) continue;
        findings up, down;
        const ce_status a = find_in(run, &s[i], &o, false, &up, NULL);
        const ce_status b = find_in(run, &s[i], &o, true, &down, NULL);
        if (a != CE_OK && b != CE_OK) continue;
        /* as the file has it, unless the other way is clearly the better glass transition */
        return ce_run_flip(run, a != CE_OK || (b == CE_OK && down.score > 1.5 * up.score),
                           "step of the glass transition", err);
    }
    return CE_OK;
}

void ce_transitions_free(ce_transitions *found)
{
    if (found == NULL) return;
    free(found->item);
    *found = (ce_transitions){0};
}
