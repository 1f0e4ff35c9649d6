/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "simulate/text.h"
#include "simulate/truth.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Number of the heating whose Tg is the series' reading, its rate, and whether something erased the
 * history before it: the start in the liquid, or an earlier heating. */
static double last_heating_rate(const ce_programme *p, bool *erased)
{
    double at = p->start_K, rate = (double)NAN, before = p->start_K, hottest = p->start_K;
    for (size_t i = 0; i < p->n; i++) {
        if (p->step[i].hold) continue;
        if (p->step[i].to_K > at && !p->step[i].unrecorded) {
            rate = p->step[i].rate_K_min;
            before = hottest;
            *erased = before >= p->step[i].to_K - 20.0;
        }
        at = p->step[i].to_K;
        hottest = fmax(hottest, at);
    }
    return rate;
}

static void put_setting(ce_text *t, const char *key, const char *value)
{
    if (value == NULL) return;
    ce_text_put(t, "# ");
    ce_text_put(t, key);
    ce_text_put(t, ": ");
    ce_text_put_line(t, value);
    ce_text_put(t, "\n");
}

static void put_settings(ce_text *t, const ce_series_plan *plan, const ce_series_words *words)
{
    put_setting(t, "polymer", words->polymer);
    put_setting(t, "scope", words->scope);
    put_setting(t, "construction", plan->anchor == CE_FICTIVE ? "fictive" : "half_step");
    bool erased = true;
    double rate = last_heating_rate(&plan->run.programme, &erased);
    if (!plan->whole_runs || !isfinite(rate)) rate = 10.0;
    ce_text_put(t, "# rate: ");
    double whole = round(rate);
    ce_text_put_fixed(t, rate, fabs(rate - whole) < 1e-9 ? 0 : 3);
    ce_text_put(t, " K/min\n");
    put_setting(t, "history", erased ? "erased" : "as received");
    if (plan->mn_common_u_rel > 0.0) {
        ce_text_put(t, "# mn_common_u: ");
        ce_text_put_fixed(t, 100.0 * plan->mn_common_u_rel, 3);
        ce_text_put(t, " %\n");
    }
}

/* A cell of CSV: quoted when it has to be. */
static void put_cell(ce_text *t, const char *s)
{
    if (strpbrk(s, ",\"\r\n") == NULL && s[0] != '#' && s[0] != ' ') {
        ce_text_put_line(t, s);
        return;
    }
    ce_text_put(t, "\"");
    for (; *s != '\0'; s++) {
        char c = (unsigned char)*s < 0x20 ? '?' : *s;
        if (c == '"') ce_text_put(t, "\"");
        ce_text_put_n(t, &c, 1);
    }
    ce_text_put(t, "\"");
}

static void put_row(ce_text *t, const ce_series_plan *plan, const ce_simulated_sample *s,
                    const ce_simulated_reading *r, const char *file)
{
    put_cell(t, s->name);
    ce_text_put(t, ",");
    ce_text_put(t, ce_role_name(s->role));
    ce_text_put(t, ",");
    if (isfinite(s->mn_certified_g_mol)) {
        double m = s->mn_certified_g_mol;
        ce_text_put_fixed(t, m, m >= 1000.0 ? 0 : 3);
    }
    ce_text_put(t, ",");
    if (isfinite(s->mn_certified_g_mol)) ce_text_put_fixed(t, 100.0 * plan->mn_u_rel, 3);
    ce_text_put(t, ",");
    if (file != NULL) {
        put_cell(t, file);
        ce_text_put(t, ",");
        if (r->simulation != NULL)
            ce_text_put_fixed(
                t, 1000.0 * ce_simulation_get_config(r->simulation)->instrument.mass_g, 3);
    } else {
        ce_text_put_fixed(t, r->tg_K, 3);
    }
    ce_text_put(t, "\n");
}

ce_status ce_simulated_series_table(const ce_series_plan *plan, const ce_simulated_series *series,
                                    const ce_series_words *words, char **text, ce_error *err)
{
    ce_text t = {0};
    *text = NULL;
    put_settings(&t, plan, words);
    ce_text_put(&t, words->run_file != NULL ? "sample,role,mn (g/mol),mn_u (%),run,mass (mg)\n"
                                            : "sample,role,mn (g/mol),mn_u (%),tg (K)\n");
    size_t at = 0;
    for (size_t i = 0; i < series->n; i++)
        for (size_t k = 0; k < series->sample[i].n; k++, at++)
            put_row(&t, plan, &series->sample[i], &series->sample[i].reading[k],
                    words->run_file == NULL ? NULL : words->run_file[at]);
    ce_text_put_n(&t, "", 1);
    if (t.failed) {
        free(t.s);
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    }
    *text = t.s;
    return CE_OK;
}

static json_t *reading_json(const ce_simulated_reading *r, const char *file, bool *ok)
{
    json_t *o = json_object();
    if (file != NULL) ce_truth_set(o, "run", json_string(file), ok);
    ce_truth_set(o, "tg_K", ce_truth_number(r->tg_K), ok);
    ce_truth_set(o, "error_K", ce_truth_number(r->error_K), ok);
    if (r->simulation == NULL) return o;
    size_t n;
    const ce_ramp_truth *ramp = ce_simulation_truth(r->simulation, &n);
    const ce_instrument *m = &ce_simulation_get_config(r->simulation)->instrument;
    ce_truth_set(o, "mass_g", ce_truth_number(m->mass_g), ok);
    json_t *ramps = json_array();
    for (size_t i = 0; i < n; i++) ce_truth_append(ramps, ce_truth_ramp(&ramp[i], ok), ok);
    ce_truth_set(o, "ramps", ramps, ok);
    return o;
}

static json_t *sample_json(const ce_simulated_sample *s, const char *const *file, bool *ok)
{
    json_t *o = json_object(), *readings = json_array();
    ce_truth_set(o, "sample", json_string(s->name), ok);
    ce_truth_set(o, "role", json_string(ce_role_name(s->role)), ok);
    ce_truth_set(o, "mn_g_mol", ce_truth_number(s->mn_g_mol), ok);
    ce_truth_set(o, "mn_certified_g_mol", ce_truth_number(s->mn_certified_g_mol), ok);
    ce_truth_set(o, "tg_relation_K", ce_truth_number(s->tg_relation_K), ok);
    ce_truth_set(o, "tg_K", ce_truth_number(s->tg_K), ok);
    ce_truth_set(o, "ln_a", ce_truth_number(s->ln_a), ok);
    for (size_t k = 0; k < s->n; k++)
        ce_truth_append(readings, reading_json(&s->reading[k], file == NULL ? NULL : file[k], ok),
                        ok);
    ce_truth_set(o, "readings", readings, ok);
    return o;
}

ce_status ce_simulated_series_json(const ce_series_plan *plan, const ce_simulated_series *series,
                                   const ce_series_words *words, char **json, ce_error *err)
{
    bool ok = true;
    json_t *root = json_object(), *parameters = json_object(), *samples = json_array();
    ce_truth_set(root, "schema", json_string("chainend.simulate-series/1"), &ok);
    ce_truth_set(root, "relation", json_string(words->relation == NULL ? "" : words->relation),
                 &ok);
    for (size_t i = 0; i < words->n_parameters; i++)
        ce_truth_set(parameters, words->parameter_name[i], ce_truth_number(words->parameter[i]),
                     &ok);
    ce_truth_set(root, "parameters", parameters, &ok);
    ce_truth_set(root, "construction",
                 json_string(plan->anchor == CE_FICTIVE ? "fictive" : "half_step"), &ok);
    ce_truth_set(root, "mn_u_rel", ce_truth_number(plan->mn_u_rel), &ok);
    ce_truth_set(root, "mn_common_u_rel", ce_truth_number(plan->mn_common_u_rel), &ok);
    ce_truth_set(root, "run_sd_K", ce_truth_number(plan->run_sd_K), &ok);
    ce_truth_set(root, "sample_sd_K", ce_truth_number(plan->sample_sd_K), &ok);
    ce_truth_set(root, "seed", ce_truth_seed(plan->seed), &ok);
    size_t at = 0;
    for (size_t i = 0; i < series->n; i++) {
        const char *const *file = words->run_file == NULL ? NULL : words->run_file + at;
        ce_truth_append(samples, sample_json(&series->sample[i], file, &ok), &ok);
        at += series->sample[i].n;
    }
    ce_truth_set(root, "samples", samples, &ok);
    if (plan->whole_runs) ce_truth_set(root, "run", ce_truth_config(&plan->run, &ok), &ok);
    return ce_truth_text(root, ok, json, err);
}
