/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transition/modelled.h"

#include <stdlib.h>

static const double roughly = 0.03;   /* of a step, when starts are compared by their gross shape */
static const size_t most_work = 100;  /* iterations after which no other history is tried       */
static const double most_prior = 9.0; /* chi-square of the priors: as many as there are         */
static const double inexact_steps = 5e-4; /* what the model may miss of a step, any cell        */
static const double inexact_start = 0.02; /* and of a start-up, relative                        */
/* Near the overshoot no model of relaxation is exact: neither the measured glass, whose response is no
 * stretched exponential to the last per cent, nor another integration of the same equations, where
 * a first-order scheme in steps of 0.05 K is off by 0.8 % of a step. There the curve itself is read,
 * and the lines must not bend to it. */
static const double inexact_peak = 0.01; /* of the overshoot's height over the glass line */

static void weigh_cells(const ce_windowed *s, ce_cells *cells)
{
    /* below the glass window (on cooling: above the liquid one) the start-up need not be what the
     * model makes of it; where it crosses the line it is no better known than beside it */
    double off = 0.0;
    const bool down = s->curve->cooling;
    for (size_t k = cells->n; k-- > 0;) {
        const size_t i = down ? cells->n - 1 - k : k;
        const double T = cells->T[i];
        if (!down && T < s->glass.low_K)
            off = fmax(off, fabs(cells->y[i] - ce_line_at(&s->g.line, T)));
        if (down && T > s->liquid.high_K)
            off = fmax(off, fabs(cells->y[i] - ce_line_at(&s->l.line, T)));
        /* centred and as wide as overshoots are, between half-step and the liquid line */
        const double peak = (T - s->p.at[CE_HALF_STEP] - 0.8 * s->width) / (0.7 * s->width);
        cells->sd[i] = hypot(
            hypot(inexact_steps, inexact_peak * (1.0 + s->p.overshoot) * exp(-0.5 * peak * peak)) *
                s->p.step,
            inexact_start * off);
    }
}

double ce_expected_misfit(const ce_modelled *f)
{
    const ce_cells *cells = &f->cells;
    double sum = 0.0;
    for (size_t i = 0; i < cells->n; i++) {
        const double v = f->model.sigma * f->model.sigma / cells->w[i];
        sum += v / (v + cells->sd[i] * cells->sd[i]);
    }
    return sum / (double)cells->n;
}

/* Fit from a start and keep the better; so_far is CE_OK when there is a fit already. */
static ce_status try_model(ce_modelled *f, double step, ce_model next, ce_status so_far)
{
    ce_design design = {0};
    if (next.least_sd >
        0.0) { /* from the gross shape to the fine one                              */
        const ce_status rough = ce_model_fit(&f->cells, step, &next, NULL);
        f->work += next.iterations;
        if (rough != CE_OK) return rough == CE_E_NOMEM ? rough : so_far;
        next.least_sd = 0.0;
    }
    const ce_status st = ce_model_fit(&f->cells, step, &next, &design);
    f->work += next.iterations;
    if (st == CE_OK && (so_far != CE_OK || next.total < 0.9 * f->model.total)) {
        ce_design_free(&f->design);
        f->design = design;
        f->model = next;
        return CE_OK;
    }
    ce_design_free(&design);
    return st == CE_E_NOMEM ? st : so_far;
}

/* Histories to begin from where the plain one (cooled at the rate of the scan) does not do: glasses
 * from poly(vinyl chloride) to polystyrene, cooled seven times slower to faster, or annealed near and
 * far below the step. */
#define OF_GLASS(unit, x)                                                                          \
    {unit, x, -2.0, 0.0, 0.0}, {unit, x, -0.7, 0.0, 0.0}, {unit, x, 0.7, 0.0, 0.0},                \
        {unit, x, 2.0, 0.0, 0.0}, {unit, x, 0.5, 3.0, 8.0}, {unit, x, 0.5, 5.5, 10.0},             \
        {unit, x, 0.5, 8.0, 14.0},                                                                 \
    {                                                                                              \
        unit, x, 0.5, 5.5, 20.0                                                                    \
    }
static const ce_past histories[] = {OF_GLASS(-0.55, -1.6), OF_GLASS(0.0, -1.2),
                                    OF_GLASS(0.55, -0.85)};
enum { HISTORIES = sizeof histories / sizeof *histories };

static int by_total(const void *a, const void *b)
{
    const double x = ((const ce_model *)a)->total, y = ((const ce_model *)b)->total;
    return (x > y) - (x < y);
}

/* Neither the curve nor what is known of glasses asks for another history. */
static bool fits_well(const ce_modelled *f)
{
    const double expected = ce_expected_misfit(f);
    const double priors = f->model.total - f->model.misfit * (double)f->cells.n;
    const double luck =
        3.0 * sqrt(2.0 / (double)f->cells.n); /* of a mean of squares              */
    return f->model.misfit < (1.0 + luck) * expected + 0.05 && priors < most_prior;
}

/* From the plain history; where that does not do, from those of the list that come nearest. */
static ce_status try_histories(ce_modelled *f, double step, const ce_model *start)
{
    ce_status st = try_model(f, step, *start, CE_E_NOFIT);
    if (st == CE_E_NOMEM || start->cooling || (st == CE_OK && fits_well(f))) return st;
    ce_model *from = malloc(HISTORIES * sizeof *from);
    if (from == NULL) return CE_E_NOMEM;
    for (size_t k = 0; k < HISTORIES; k++) {
        from[k] = *start;
        from[k].least_sd = roughly * step;
        ce_model_history(&from[k], &histories[k]);
        if (ce_model_try(&f->cells, step, &from[k]) != CE_OK) {
            free(from);
            return CE_E_NOMEM;
        }
    }
    qsort(from, HISTORIES, sizeof *from, by_total);
    /* the plain fit has been where the others without annealing lead: those with it come first */
    static const bool annealed[] = {true, false, true, true, false};
    size_t next[2] = {0};
    for (size_t k = 0; k < sizeof annealed / sizeof *annealed && f->work < most_work; k++) {
        size_t *i = &next[annealed[k]];
        while (from[*i].aged != annealed[k]) ++*i;
        st = try_model(f, step, from[(*i)++], st);
        if (st == CE_E_NOMEM || (st == CE_OK && fits_well(f))) break;
    }
    free(from);
    return st;
}

ce_status ce_fit_histories(const ce_windowed *s, ce_window range, ce_modelled *f)
{
    const ce_curve *c = s->curve;
    const double centre = s->p.at[CE_HALF_STEP];
    const double fine = ce_clamp(s->width / 16.0, fmax(0.1, c->spacing), 0.4);
    ce_model start =
        ce_model_start(c->cooling, centre, s->width, fmax(c->slow_noise, 1e-9 * s->p.step),
                       c->cooling ? c->T[c->n - 1] : c->T[0]);
    start.fine_K = ce_clamp(s->width / 16.0, 0.15, 0.5);
    ce_status st = ce_cells_make(c, range.low_K, range.high_K, centre, fine, &f->cells);
    if (st != CE_OK) return st;
    weigh_cells(s, &f->cells);
    return try_histories(f, s->p.step, &start);
}

void ce_modelled_free(ce_modelled *f)
{
    ce_cells_free(&f->cells);
    ce_design_free(&f->design);
}
