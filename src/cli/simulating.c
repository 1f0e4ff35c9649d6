/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/simulating.h"

#include "base/quantity.h"

#include "text/number.h"
#include "text/value.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* A methacrylate-like glass in a usual programme: cooled, held, heated at 10 K/min. */
cli_simulating cli_simulating_default(void)
{
    cli_simulating s = {.config = ce_simulation_config_default(),
                        .tg_K = (double)NAN,
                        .plan = ce_series_plan_default(),
                        .relation = CE_FLORY_FOX};
    const ce_glass_set *set = ce_glass_set_find("pmma");
    ce_glass *g = &s.config.glass[0];
    s.config.n_glasses = 1;
    *g = (ce_glass){.ln_a = set->ln_a,
                    .h_K = set->h_K,
                    .x = set->x,
                    .beta = set->beta,
                    .ref_K = 373.15,
                    .cp_glass = 1.6,
                    .slope_glass = 0.0035,
                    .step = 0.30,
                    .slope_step = -0.0010,
                    .share = 1.0};
    s.sample[0].runs = 3;
    return s;
}

void cli_simulating_free(cli_simulating *s)
{
    for (size_t i = 0; i < CLI_MAX_SAMPLES; i++) free(s->name[i]);
}

/* ---- single values ------------------------------------------------------------------------ */

static ce_status value_of(double *to, const char *value, ce_dimension dimension,
                          const char *assumed, ce_error *err)
{
    const ce_unit *unit = assumed == NULL ? NULL : ce_unit_find(assumed, strlen(assumed));
    return ce_parse_value(value, '.', dimension, unit, to, NULL, err);
}

ce_status cli_set_material(void *to, const char *value, ce_error *err)
{
    ce_glass *g = &((cli_simulating *)to)->config.glass[0];
    const ce_glass_set *set = ce_glass_set_find(value);
    if (set == NULL)
        return ce_fail(err, CE_E_ARG, "'%.20s' is none of pvac, ps, pmma, pc, pvc, b2o3, as2se3",
                       value);
    g->ln_a = set->ln_a;
    g->h_K = set->h_K;
    g->x = set->x;
    g->beta = set->beta;
    return CE_OK;
}

ce_status cli_set_kelvin(void *to, const char *value, ce_error *err)
{
    return value_of(to, value, CE_DIM_TEMPERATURE, "degC", err);
}

ce_status cli_set_seconds(void *to, const char *value, ce_error *err)
{
    return value_of(to, value, CE_DIM_TIME, "s", err);
}

ce_status cli_set_power(void *to, const char *value, ce_error *err)
{
    return value_of(to, value, CE_DIM_POWER, "mW", err);
}

ce_status cli_set_gram(void *to, const char *value, ce_error *err)
{
    return value_of(to, value, CE_DIM_MASS, "mg", err);
}

ce_status cli_set_fraction(void *to, const char *value, ce_error *err)
{
    return value_of(to, value, CE_DIM_FRACTION, NULL, err);
}

ce_status cli_set_seed(void *to, const char *value, ce_error *err)
{
    cli_simulating *s = to;
    ce_status st = cli_whole_number(&s->config.seed, value, err);
    s->plan.seed = s->config.seed;
    return st;
}

ce_status cli_set_anchor(void *to, const char *value, ce_error *err)
{
    if (strcmp(value, "half_step") == 0)
        *(ce_construction *)to = CE_HALF_STEP;
    else if (strcmp(value, "fictive") == 0)
        *(ce_construction *)to = CE_FICTIVE;
    else
        return ce_fail(err, CE_E_ARG, "'%.20s' is neither half_step nor fictive", value);
    return CE_OK;
}

ce_status cli_set_sim_relation(void *to, const char *value, ce_error *err)
{
    ce_relation r = ce_relation_find(value);
    if (r == CE_RELATIONS) return ce_fail(err, CE_E_ARG, "'%.30s' is not a relation", value);
    *(ce_relation *)to = r;
    return CE_OK;
}

/* Split "A<mark>B" into copies of at most 63 bytes; false when there is no mark. */
static bool split(const char *value, char mark, char first[64], const char **rest)
{
    const char *at = strchr(value, mark);
    if (at == NULL || (size_t)(at - value) >= 64) return false;
    memcpy(first, value, (size_t)(at - value));
    first[at - value] = '\0';
    *rest = at + 1;
    return true;
}

/* ---- programme and instrument ------------------------------------------------------------- */

static ce_status add_step(cli_simulating *s, ce_programme_step step, ce_error *err)
{
    ce_programme *p = &s->config.programme;
    if (p->n == CLI_MAX_STEPS)
        return ce_fail(err, CE_E_LIMIT, "more than %d ramps and holds", CLI_MAX_STEPS);
    s->step[p->n++] = step;
    return CE_OK;
}

ce_status cli_add_ramp(void *to, const char *value, ce_error *err)
{
    char first[64];
    const char *rate;
    ce_programme_step step = {0};
    if (!split(value, '@', first, &rate))
        return ce_fail(err, CE_E_SYNTAX, "'%.60s' is not a ramp T@RATE", value);
    ce_status st = value_of(&step.to_K, first, CE_DIM_TEMPERATURE, "degC", err);
    if (st == CE_OK) st = value_of(&step.rate_K_min, rate, CE_DIM_RATE, "K/min", err);
    if (st == CE_OK && !(step.rate_K_min > 0.0))
        st = ce_fail(err, CE_E_DOMAIN,
                     "'%.60s': a rate is above zero, the direction follows from the "
                     "temperatures",
                     value);
    return st == CE_OK ? add_step(to, step, err) : st;
}

ce_status cli_add_hold(void *to, const char *value, ce_error *err)
{
    ce_programme_step step = {.hold = true};
    ce_status st = value_of(&step.hold_s, value, CE_DIM_TIME, NULL, err);
    if (st == CE_OK && !(step.hold_s > 0.0))
        st = ce_fail(err, CE_E_DOMAIN, "'%.60s': a hold takes time", value);
    return st == CE_OK ? add_step(to, step, err) : st;
}

ce_status cli_set_prior_age(void *to, const char *value, ce_error *err)
{
    ce_programme *p = to;
    char first[64];
    const char *time;
    if (!split(value, ':', first, &time))
        return ce_fail(err, CE_E_SYNTAX, "'%.60s' is not T:TIME", value);
    ce_status st = value_of(&p->prior_age_K, first, CE_DIM_TEMPERATURE, "degC", err);
    return st == CE_OK ? value_of(&p->prior_age_s, time, CE_DIM_TIME, NULL, err) : st;
}

ce_status cli_add_peak(void *to, const char *value, ce_error *err)
{
    ce_simulation_config *c = to;
    char first[64], second[64];
    const char *rest, *heat;
    if (c->n_peaks == CE_MAX_PEAKS)
        return ce_fail(err, CE_E_LIMIT, "more than %d peaks", CE_MAX_PEAKS);
    if (!split(value, ':', first, &rest) || !split(rest, ':', second, &heat))
        return ce_fail(err, CE_E_SYNTAX, "'%.60s' is not a peak T:WIDTH:HEAT", value);
    ce_peak *p = &c->peak[c->n_peaks];
    ce_status st = value_of(&p->centre_K, first, CE_DIM_TEMPERATURE, "degC", err);
    if (st == CE_OK && (!ce_parse_number(second, strlen(second), '.', &p->sd_K) ||
                        !ce_parse_number(heat, strlen(heat), '.', &p->enthalpy_J_g)))
        st = ce_fail(err, CE_E_SYNTAX, "'%.60s': width (K) and heat (J/g) must be plain numbers",
                     value);
    if (st == CE_OK) c->n_peaks++;
    return st;
}

ce_status cli_set_transient(void *to, const char *value, ce_error *err)
{
    ce_instrument *m = to;
    char first[64];
    const char *rest;
    if (!split(value, ':', first, &rest))
        return value_of(&m->transient_mW, value, CE_DIM_POWER, "mW", err);
    ce_status st = value_of(&m->transient_mW, first, CE_DIM_POWER, "mW", err);
    return st == CE_OK ? value_of(&m->transient_s, rest, CE_DIM_TIME, "s", err) : st;
}

/* ---- layouts ------------------------------------------------------------------------------ */

static void ensure_layout(cli_simulating *s)
{
    if (s->n_layouts == 0) s->layout[s->n_layouts++] = ce_layout_default();
}

ce_status cli_add_layouts(void *to, const char *value, ce_error *err)
{
    cli_simulating *s = to;
    for (const char *p = value; *p != '\0';) {
        char name[32];
        size_t n = strcspn(p, ",");
        (void)snprintf(name, sizeof name, "%.*s", (int)(n < 31 ? n : 31), p);
        if (s->n_layouts == CLI_MAX_LAYOUTS)
            return ce_fail(err, CE_E_LIMIT, "more than %d layouts", CLI_MAX_LAYOUTS);
        if (!ce_layout_find(name, &s->layout[s->n_layouts++]))
            return ce_fail(err, CE_E_ARG, "'%s' is none of comma, semicolon, tab, blanks", name);
        p += n + (p[n] == ',');
    }
    return CE_OK;
}

/* The layouts named so far, or the default one when none was; *n of them. */
static ce_layout *named_layouts(void *to, size_t *n)
{
    cli_simulating *s = to;
    ensure_layout(s);
    *n = s->n_layouts;
    return s->layout;
}

/* Sets one member of all of them. */
#define SET_LAYOUTS(to, member, value)                                                             \
    do {                                                                                           \
        size_t n_;                                                                                 \
        ce_layout *l_ = named_layouts(to, &n_);                                                    \
        for (size_t i_ = 0; i_ < n_; i_++) l_[i_].member = (value);                                \
    } while (0)

ce_status cli_set_last_heating_only(void *to, const char *value, ce_error *err)
{
    (void)value;
    (void)err;
    SET_LAYOUTS(to, last_heating_only, true);
    return CE_OK;
}

ce_status cli_set_hidden_sign(void *to, const char *value, ce_error *err)
{
    (void)value;
    (void)err;
    SET_LAYOUTS(to, state_sign, false);
    return CE_OK;
}

ce_status cli_set_layout_sign(void *to, const char *value, ce_error *err)
{
    ce_sign sign;
    ce_status st = cli_set_sign(&sign, value, err);
    if (st != CE_OK) return st;
    SET_LAYOUTS(to, exo_up, sign == CE_SIGN_EXO_UP);
    return CE_OK;
}

ce_status cli_set_layout_delimiter(void *to, const char *value, ce_error *err)
{
    char mark;
    ce_status st = cli_set_delimiter(&mark, value, err);
    if (st != CE_OK) return st;
    SET_LAYOUTS(to, delimiter, mark);
    return CE_OK;
}

ce_status cli_set_layout_decimal(void *to, const char *value, ce_error *err)
{
    char mark;
    ce_status st = cli_set_decimal(&mark, value, err);
    if (st != CE_OK) return st;
    SET_LAYOUTS(to, decimal, mark);
    return CE_OK;
}

ce_status cli_set_encoding(void *to, const char *value, ce_error *err)
{
    (void)err;
    SET_LAYOUTS(to, encoding, value);
    return CE_OK;
}

ce_status cli_set_time_unit(void *to, const char *value, ce_error *err)
{
    (void)err;
    SET_LAYOUTS(to, time_unit, value);
    return CE_OK;
}

ce_status cli_set_temperature_unit(void *to, const char *value, ce_error *err)
{
    (void)err;
    SET_LAYOUTS(to, temperature_unit, strcmp(value, "C") == 0 ? "°C" : value);
    return CE_OK;
}

ce_status cli_set_signal_unit(void *to, const char *value, ce_error *err)
{
    (void)err;
    SET_LAYOUTS(to, signal_unit, value);
    return CE_OK;
}

/* ---- samples ------------------------------------------------------------------------------ */

static ce_status add_sample(cli_simulating *s, ce_role role, const char *value, ce_error *err)
{
    char first[64];
    const char *mn;
    size_t k = s->plan.n;
    if (k == CLI_MAX_SAMPLES)
        return ce_fail(err, CE_E_LIMIT, "more than %d samples", CLI_MAX_SAMPLES);
    if (!split(value, ':', first, &mn))
        return ce_fail(err, CE_E_SYNTAX, "'%.60s' is not NAME:MN", value);
    if (strchr(first, '/') != NULL) /* its runs are named after it */
        return ce_fail(err, CE_E_ARG, "'%.60s': a sample's name cannot hold a slash", value);
    ce_sample_plan *p = &s->sample[k];
    ce_status st = value_of(&p->mn_g_mol, mn, CE_DIM_MOLAR_MASS, "g/mol", err);
    if (st != CE_OK) return st;
    s->name[k] = strdup(first);
    if (s->name[k] == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    p->name = s->name[k];
    p->role = role;
    s->plan.n++;
    return CE_OK;
}

ce_status cli_add_standard(void *to, const char *value, ce_error *err)
{
    return add_sample(to, CE_STANDARD, value, err);
}

ce_status cli_add_unknown(void *to, const char *value, ce_error *err)
{
    return add_sample(to, CE_UNKNOWN, value, err);
}

ce_status cli_add_control(void *to, const char *value, ce_error *err)
{
    return add_sample(to, CE_CONTROL, value, err);
}

ce_status cli_set_parameters(void *to, const char *value, ce_error *err)
{
    cli_simulating *s = to;
    s->n_theta = 0;
    for (const char *p = value; *p != '\0' && s->n_theta < CE_MAX_PARAMETERS;) {
        size_t n = strcspn(p, ",");
        if (!ce_parse_number(p, n, '.', &s->theta[s->n_theta++]))
            return ce_fail(err, CE_E_SYNTAX, "cannot read '%.*s' as a number",
                           (int)(n < 30 ? n : 30), p);
        p += n + (p[n] == ',');
    }
    return CE_OK;
}

/* ---- the whole ---------------------------------------------------------------------------- */

static ce_status settle_second(cli_simulating *s, ce_error *err)
{
    char first[64];
    const char *share;
    double tg = 0.0;
    if (s->second == NULL) return CE_OK;
    ce_glass *g = &s->config.glass[1];
    *g = s->config.glass[0];
    if (!split(s->second, ':', first, &share))
        return ce_fail(err, CE_E_ARG, "--second: '%.40s' is not T:SHARE", s->second);
    ce_status st = value_of(&tg, first, CE_DIM_TEMPERATURE, "degC", err);
    if (st == CE_OK) st = value_of(&g->share, share, CE_DIM_FRACTION, "1", err);
    if (st != CE_OK) return st;
    ce_glass_move(g, ce_glass_temperature(g, 100.0), tg);
    s->config.glass[0].share = 1.0 - g->share;
    s->config.n_glasses = 2;
    return CE_OK;
}

/* Without a programme: from 60 K above the glass transition to 70 K below at 10 K/min, 5 min, and back. */
static void settle_programme(cli_simulating *s)
{
    ce_programme *p = &s->config.programme;
    double tg = ce_glass_temperature(&s->config.glass[0], 100.0);
    p->step = s->step;
    if (p->n > 0) return;
    p->start_K = round(tg) + 60.0;
    s->step[0] = (ce_programme_step){.to_K = p->start_K - 130.0, .rate_K_min = 10.0};
    s->step[1] = (ce_programme_step){.hold = true, .hold_s = 300.0};
    s->step[2] = (ce_programme_step){.to_K = p->start_K, .rate_K_min = 10.0};
    p->n = 3;
}

ce_status cli_simulating_settle(cli_simulating *s, ce_error *err)
{
    ce_glass *g = &s->config.glass[0];
    if (!isnan(s->tg_K)) {
        double ref = g->ref_K;
        ce_glass_move(g, ce_glass_temperature(g, 100.0), s->tg_K);
        g->ref_K = ref;
    }
    ce_status st = settle_second(s, err);
    if (st == CE_OK && s->config.programme.n > 0 && !(s->config.programme.start_K > 0.0))
        st = ce_fail(err, CE_E_ARG, "--start: a programme with ramps needs a start");
    if (st != CE_OK) return st;
    settle_programme(s);
    ensure_layout(s);
    for (size_t i = 1; i < s->plan.n; i++) s->sample[i].runs = s->sample[0].runs;
    s->plan.sample = s->sample;
    s->plan.run = s->config;
    s->plan.whole_runs = !s->bare;
    return CE_OK;
}
