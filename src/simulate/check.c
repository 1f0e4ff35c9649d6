/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "simulate/check.h"

#include <math.h>

/* Where a number must lie; a limit that is not closed is excluded. NaN lies nowhere. */
typedef struct {
    const char *option;
    double value, low, high;
    bool low_closed, high_closed;
    const char *unit;
} rule;

static ce_status check_rules(const rule *r, size_t n, ce_error *err)
{
    for (size_t i = 0; i < n; i++) {
        bool above = r[i].low_closed ? r[i].value >= r[i].low : r[i].value > r[i].low;
        bool below = r[i].high_closed ? r[i].value <= r[i].high : r[i].value < r[i].high;
        if (above && below) continue;
        return ce_fail(err, CE_E_DOMAIN, "%s: %.9g%s is not in %c%.9g, %.9g%c%s", r[i].option,
                       r[i].value, r[i].unit, r[i].low_closed ? '[' : '(', r[i].low, r[i].high,
                       r[i].high_closed ? ']' : ')', r[i].unit);
    }
    return CE_OK;
}

#define COUNT(a) (sizeof(a) / sizeof *(a))

static ce_status check_glass(const ce_glass *g, ce_error *err)
{
    const rule rules[] = {
        {"--x", g->x, 0.0, 1.0, false, true, ""},
        {"--beta", g->beta, 0.0, 1.0, false, true, ""},
        {"--h", g->h_K, 0.0, 1.0e7, false, true, " K"},
        {"--ln-a", g->ln_a, -1.0e5, 1.0e3, true, true, ""},
        {"--reference", g->ref_K, 0.0, 3000.0, false, true, " K"},
        {"--cp-glass", g->cp_glass, 0.0, 100.0, true, true, " J/(g K)"},
        {"--slope-glass", g->slope_glass, -1.0, 1.0, true, true, " J/(g K^2)"},
        {"--step", g->step, 0.0, 100.0, false, true, " J/(g K)"},
        {"--slope-step", g->slope_step, -1.0, 1.0, true, true, " J/(g K^2)"},
        {"--second SHARE", g->share, 0.0, 1.0, false, true, ""},
    };
    return check_rules(rules, COUNT(rules), err);
}

static ce_status check_programme(const ce_programme *p, ce_error *err)
{
    const rule rules[] = {
        {"--start", p->start_K, 0.0, 3000.0, false, true, " K"},
        {"--prior-rate", p->prior_rate_K_min, 0.0, 1.0e6, false, true, " K/min"},
        {"--prior-age", p->prior_age_s, 0.0, 1.0e10, true, true, " s"},
        {"--prior-age", p->prior_age_s > 0.0 ? p->prior_age_K : 1.0, 0.0, 3000.0, false, true,
         " K"},
    };
    ce_status st = check_rules(rules, COUNT(rules), err);
    if (st == CE_OK && (p->n == 0 || p->step == NULL))
        st = ce_fail(err, CE_E_DOMAIN, "--ramp: the programme has no ramp and no hold");
    if (st == CE_OK && p->n > CE_MAX_SEGMENTS)
        st = ce_fail(err, CE_E_LIMIT, "--ramp: more than %zu ramps and holds", CE_MAX_SEGMENTS);
    double at = p->start_K;
    size_t recorded = 0;
    for (size_t i = 0; i < p->n && st == CE_OK; i++) {
        const ce_programme_step *s = &p->step[i];
        recorded += s->unrecorded ? 0 : 1;
        if (s->hold) {
            const rule hold = {"--hold", s->hold_s, 0.0, 1.0e10, false, true, " s"};
            st = check_rules(&hold, 1, err);
            continue;
        }
        const rule ramp[] = {{"--ramp rate", s->rate_K_min, 0.0, 1.0e6, false, true, " K/min"},
                             {"--ramp", s->to_K, 0.0, 3000.0, false, true, " K"}};
        st = check_rules(ramp, COUNT(ramp), err);
        if (st == CE_OK && !(fabs(s->to_K - at) >= 1.0e-3))
            st = ce_fail(err, CE_E_DOMAIN,
                         "--ramp: step %zu of the programme goes from %.9g K to "
                         "%.9g K; use a hold to stay",
                         i + 1, at, s->to_K);
        at = s->to_K;
    }
    if (st == CE_OK && recorded == 0)
        st = ce_fail(err, CE_E_DOMAIN, "--ramp: no part of the programme is recorded");
    return st;
}

static ce_status check_instrument(const ce_instrument *m, ce_error *err)
{
    const rule rules[] = {
        {"--mass", m->mass_g * 1000.0, 0.0, 1.0e6, false, true, " mg"},
        {"--interval", m->interval_s, 0.0, 1.0e6, false, true, " s"},
        {"--noise", m->noise_mW, 0.0, 1.0e6, true, true, " mW"},
        {"--noise-time", m->noise_time_s, 0.0, 1.0e6, true, true, " s"},
        {"--temperature-noise", m->temperature_noise_K, 0.0, 100.0, true, true, " K"},
        {"--temperature-offset", m->temperature_offset_K, -100.0, 100.0, true, true, " K"},
        {"--offset", m->offset_mW, -1.0e6, 1.0e6, true, true, " mW"},
        {"--drift", m->drift_mW_min, -1.0e6, 1.0e6, true, true, " mW/min"},
        {"--transient", m->transient_mW, -1.0e6, 1.0e6, true, true, " mW"},
        {"--transient time", m->transient_s, 0.0, 1.0e6, false, true, " s"},
        {"--lag", m->lag_s, 0.0, 1.0e4, true, true, " s"},
    };
    return check_rules(rules, COUNT(rules), err);
}

static ce_status check_peaks(const ce_simulation_config *config, ce_error *err)
{
    ce_status st = CE_OK;
    if (config->n_peaks > CE_MAX_PEAKS)
        st = ce_fail(err, CE_E_LIMIT, "--peak: more than %d peaks", CE_MAX_PEAKS);
    for (size_t i = 0; i < config->n_peaks && st == CE_OK; i++) {
        const ce_peak *p = &config->peak[i];
        const rule rules[] = {
            {"--peak", p->centre_K, 0.0, 3000.0, false, true, " K"},
            {"--peak width", p->sd_K, 0.0, 1000.0, false, true, " K"},
            {"--peak enthalpy", p->enthalpy_J_g, -1.0e5, 1.0e5, true, true, " J/g"},
        };
        st = check_rules(rules, COUNT(rules), err);
    }
    return st;
}

/* The step in heat capacity must stay a step at every temperature the programme reaches. */
static ce_status check_lines(const ce_glass *g, const ce_programme *p, ce_error *err)
{
    double low = p->start_K, high = p->start_K;
    for (size_t i = 0; i < p->n; i++)
        if (!p->step[i].hold) {
            low = fmin(low, p->step[i].to_K);
            high = fmax(high, p->step[i].to_K);
        }
    for (int i = 0; i < 2; i++) {
        double t = i == 0 ? low : high;
        if (!(g->step + g->slope_step * (t - g->ref_K) > 0.0))
            return ce_fail(err, CE_E_DOMAIN,
                           "--slope-step: the heat capacities of glass and liquid "
                           "cross before %.6g K",
                           t);
    }
    return CE_OK;
}

ce_status ce_simulation_check(const ce_simulation_config *config, ce_error *err)
{
    if (config->n_glasses < 1 || config->n_glasses > CE_MAX_GLASSES)
        return ce_fail(err, CE_E_DOMAIN, "a run needs 1 to %d glasses, not %zu", CE_MAX_GLASSES,
                       config->n_glasses);
    double shares = 0.0;
    ce_status st = CE_OK;
    for (size_t g = 0; g < config->n_glasses && st == CE_OK; g++) {
        st = check_glass(&config->glass[g], err);
        shares += config->glass[g].share;
    }
    if (st == CE_OK && !(shares <= 1.0 + 1.0e-9))
        st = ce_fail(err, CE_E_DOMAIN,
                     "--second: the shares of the glasses add to %.9g, more than 1", shares);
    if (st == CE_OK) st = check_programme(&config->programme, err);
    if (st == CE_OK) st = check_instrument(&config->instrument, err);
    if (st == CE_OK) st = check_peaks(config, err);
    const rule step = {"--max-step", config->max_step_K, 0.0, 10.0, false, true, " K"};
    if (st == CE_OK) st = check_rules(&step, 1, err);
    for (size_t g = 0; g < config->n_glasses && st == CE_OK; g++)
        st = check_lines(&config->glass[g], &config->programme, err);
    return st;
}
