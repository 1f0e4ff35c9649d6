/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "simulate/truth.h"
#include "simulate/simulation.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* JSON has no NaN: absent numbers are null. */
json_t *ce_truth_number(double x)
{
    return isfinite(x) ? json_real(x) : json_null();
}

/* Steals value, also on failure; false latches. */
void ce_truth_set(json_t *object, const char *key, json_t *value, bool *ok)
{
    if (value == NULL || json_object_set_new(object, key, value) != 0) *ok = false;
}

void ce_truth_append(json_t *array, json_t *value, bool *ok)
{
    if (value == NULL || json_array_append_new(array, value) != 0) *ok = false;
}

static const char *kind_name(ce_segment_kind kind)
{
    return kind == CE_HEATING ? "heating" : kind == CE_COOLING ? "cooling" : "isothermal";
}

/* The names of design: those of ce_construction_name(), which belongs to another room. */
static const char *const construction_keys[CE_CONSTRUCTIONS] = {
    [CE_ONSET] = "onset_K",           [CE_MIDPOINT] = "midpoint_K", [CE_HALF_STEP] = "half_step_K",
    [CE_INFLECTION] = "inflection_K", [CE_END] = "end_K",           [CE_FICTIVE] = "fictive_K",
};

json_t *ce_truth_ramp(const ce_ramp_truth *r, bool *ok)
{
    json_t *o = json_object();
    ce_truth_set(o, "kind", json_string(kind_name(r->kind)), ok);
    ce_truth_set(o, "segment", json_integer((json_int_t)r->segment), ok);
    ce_truth_set(o, "nth_of_kind", json_integer((json_int_t)r->nth_of_kind), ok);
    ce_truth_set(o, "glass", json_integer((json_int_t)r->glass + 1), ok);
    ce_truth_set(o, "rate_K_min", ce_truth_number(r->rate_K_min), ok);
    for (int i = 0; i < CE_CONSTRUCTIONS; i++)
        ce_truth_set(o, construction_keys[i], ce_truth_number(r->tg_K[i]), ok);
    ce_truth_set(o, "fictive_area_K", ce_truth_number(r->fictive_area_K), ok);
    ce_truth_set(o, "half_step_sample_K", ce_truth_number(r->half_step_sample_K), ok);
    ce_truth_set(o, "step_height_J_gK", ce_truth_number(r->step_J_gK), ok);
    ce_truth_set(o, "peak", ce_truth_number(r->peak), ok);
    ce_truth_set(o, "peak_K", ce_truth_number(r->peak_K), ok);
    return o;
}

static json_t *glass_json(const ce_glass *g, bool *ok)
{
    json_t *o = json_object();
    ce_truth_set(o, "ln_a", ce_truth_number(g->ln_a), ok);
    ce_truth_set(o, "h_K", ce_truth_number(g->h_K), ok);
    ce_truth_set(o, "x", ce_truth_number(g->x), ok);
    ce_truth_set(o, "beta", ce_truth_number(g->beta), ok);
    ce_truth_set(o, "share", ce_truth_number(g->share), ok);
    ce_truth_set(o, "reference_K", ce_truth_number(g->ref_K), ok);
    ce_truth_set(o, "cp_glass_J_gK", ce_truth_number(g->cp_glass), ok);
    ce_truth_set(o, "slope_glass_J_gK2", ce_truth_number(g->slope_glass), ok);
    ce_truth_set(o, "step_J_gK", ce_truth_number(g->step), ok);
    ce_truth_set(o, "slope_step_J_gK2", ce_truth_number(g->slope_step), ok);
    return o;
}

static json_t *programme_json(const ce_programme *p, bool *ok)
{
    json_t *o = json_object(), *steps = json_array();
    ce_truth_set(o, "start_K", ce_truth_number(p->start_K), ok);
    ce_truth_set(o, "prior_rate_K_min", ce_truth_number(p->prior_rate_K_min), ok);
    ce_truth_set(o, "prior_age_K",
                 ce_truth_number(p->prior_age_s > 0.0 ? p->prior_age_K : (double)NAN), ok);
    ce_truth_set(o, "prior_age_s", ce_truth_number(p->prior_age_s), ok);
    for (size_t i = 0; i < p->n; i++) {
        const ce_programme_step *s = &p->step[i];
        json_t *j = json_object();
        if (s->hold) {
            ce_truth_set(j, "hold_s", ce_truth_number(s->hold_s), ok);
        } else {
            ce_truth_set(j, "to_K", ce_truth_number(s->to_K), ok);
            ce_truth_set(j, "rate_K_min", ce_truth_number(s->rate_K_min), ok);
        }
        ce_truth_set(j, "recorded", json_boolean(!s->unrecorded), ok);
        ce_truth_append(steps, j, ok);
    }
    ce_truth_set(o, "steps", steps, ok);
    return o;
}

static json_t *instrument_json(const ce_instrument *m, bool *ok)
{
    json_t *o = json_object();
    ce_truth_set(o, "mass_g", ce_truth_number(m->mass_g), ok);
    ce_truth_set(o, "interval_s", ce_truth_number(m->interval_s), ok);
    ce_truth_set(o, "noise_mW", ce_truth_number(m->noise_mW), ok);
    ce_truth_set(o, "noise_time_s", ce_truth_number(m->noise_time_s), ok);
    ce_truth_set(o, "temperature_noise_K", ce_truth_number(m->temperature_noise_K), ok);
    ce_truth_set(o, "temperature_offset_K", ce_truth_number(m->temperature_offset_K), ok);
    ce_truth_set(o, "offset_mW", ce_truth_number(m->offset_mW), ok);
    ce_truth_set(o, "drift_mW_min", ce_truth_number(m->drift_mW_min), ok);
    ce_truth_set(o, "transient_mW", ce_truth_number(m->transient_mW), ok);
    ce_truth_set(o, "transient_s", ce_truth_number(m->transient_s), ok);
    ce_truth_set(o, "lag_s", ce_truth_number(m->lag_s), ok);
    return o;
}

static json_t *peaks_json(const ce_simulation_config *c, bool *ok)
{
    json_t *a = json_array();
    for (size_t i = 0; i < c->n_peaks; i++) {
        json_t *o = json_object();
        ce_truth_set(o, "centre_K", ce_truth_number(c->peak[i].centre_K), ok);
        ce_truth_set(o, "sd_K", ce_truth_number(c->peak[i].sd_K), ok);
        ce_truth_set(o, "enthalpy_J_g", ce_truth_number(c->peak[i].enthalpy_J_g), ok);
        ce_truth_append(a, o, ok);
    }
    return a;
}

json_t *ce_truth_seed(uint64_t seed)
{
    char text[24];
    (void)snprintf(text, sizeof text, "%llu", (unsigned long long)seed);
    return json_string(text);
}

json_t *ce_truth_config(const ce_simulation_config *c, bool *ok)
{
    json_t *root = json_object(), *glasses = json_array();
    for (size_t g = 0; g < c->n_glasses; g++)
        ce_truth_append(glasses, glass_json(&c->glass[g], ok), ok);
    ce_truth_set(root, "glasses", glasses, ok);
    ce_truth_set(root, "programme", programme_json(&c->programme, ok), ok);
    ce_truth_set(root, "peaks", peaks_json(c, ok), ok);
    ce_truth_set(root, "instrument", instrument_json(&c->instrument, ok), ok);
    ce_truth_set(root, "max_step_K", ce_truth_number(c->max_step_K), ok);
    return root;
}

ce_status ce_truth_text(json_t *root, bool ok, char **json, ce_error *err)
{
    char *text = ok ? json_dumps(root, JSON_INDENT(1) | JSON_REAL_PRECISION(12)) : NULL;
    json_decref(root);
    size_t n = text == NULL ? 0 : strlen(text);
    char *grown = text == NULL ? NULL : realloc(text, n + 2);
    if (grown == NULL) {
        free(text);
        *json = NULL;
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    }
    memcpy(grown + n, "\n", 2);
    *json = grown;
    return CE_OK;
}

ce_status ce_simulation_truth_json(const ce_simulation *simulation, char **json, ce_error *err)
{
    bool ok = true;
    json_t *root = json_object(), *ramps = json_array();
    ce_truth_set(root, "schema", json_string("chainend.simulate-run/1"), &ok);
    for (size_t i = 0; i < simulation->n_truth; i++)
        ce_truth_append(ramps, ce_truth_ramp(&simulation->truth[i], &ok), &ok);
    ce_truth_set(root, "ramps", ramps, &ok);
    ce_truth_set(root, "seed", ce_truth_seed(simulation->config.seed), &ok);
    ce_truth_set(root, "config", ce_truth_config(&simulation->config, &ok), &ok);
    return ce_truth_text(root, ok, json, err);
}
