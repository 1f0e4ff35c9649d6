/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "record/tables.h"

#include <string.h>

/* Names of enums by number, NULL beyond the last. */
static const char *construction(size_t i)
{
    return i < CE_CONSTRUCTIONS ? ce_construction_name((ce_construction)i) : NULL;
}
static const char *history(size_t i)
{
    return i <= CE_HISTORY_AS_RECEIVED ? ce_history_name((ce_history)i) : NULL;
}
static const char *role(size_t i)
{
    return i <= CE_LEFT_OUT ? ce_role_name((ce_role)i) : NULL;
}
static const char *relation(size_t i)
{
    return i < CE_RELATIONS ? ce_relation_name((ce_relation)i) : NULL;
}
static const char *scatter(size_t i)
{
    return i <= CE_SCATTER_RESIDUALS ? ce_scatter_name((ce_scatter)i) : NULL;
}
static const char *excess(size_t i)
{
    return i <= CE_EXCESS_MULTIPLICATIVE ? ce_excess_name((ce_excess)i) : NULL;
}

#define TABLE(name, list) const ce_members name = {sizeof(list) / sizeof *(list), list}

#define AT(member) offsetof(ce_record, member)
static const ce_member record[] = {
    {"schema", CE_M_ASIDE, 0, NULL},
    {"made_by", CE_M_TEXT, AT(made_by), NULL},
    {"glass_from_K", CE_M_KNOWN, AT(glass.low_K), NULL},
    {"glass_to_K", CE_M_KNOWN, AT(glass.high_K), NULL},
    {"liquid_from_K", CE_M_KNOWN, AT(liquid.low_K), NULL},
    {"liquid_to_K", CE_M_KNOWN, AT(liquid.high_K), NULL},
    {"fit", CE_M_ASIDE, 0, NULL},
    {"series", CE_M_ASIDE, 0, NULL},
    {"files", CE_M_LIST, 0, NULL},
};
TABLE(ce_table_record, record);
#undef AT

#define AT(member) offsetof(ce_series, member)
static const ce_member series[] = {
    {"path", CE_M_TEXT, AT(path), NULL},
    {"polymer", CE_M_WORDS, AT(polymer), NULL},
    {"scope", CE_M_WORDS, AT(scope), NULL},
    {"temperature_correction", CE_M_WORDS, AT(temperature_correction), NULL},
    {"construction", CE_M_CHOICE, AT(construction), construction},
    {"rate_K_min", CE_M_KNOWN, AT(rate_K_min), NULL},
    {"history", CE_M_CHOICE, AT(history), history},
    {"segment", CE_M_COUNT, AT(segment), NULL},
    {"reduced_to_K_min", CE_M_KNOWN, AT(reduce_to_K_min), NULL},
    {"rate_slope_K_decade", CE_M_KNOWN, AT(rate_slope_K_decade), NULL},
    {"rate_slope_u_K", CE_M_KNOWN, AT(rate_slope_u_K), NULL},
    {"rate_slope_nu", CE_M_KNOWN, AT(rate_slope_nu), NULL},
    {"mn_common_u", CE_M_KNOWN, AT(mn_common_u_rel), NULL},
    {"level", CE_M_KNOWN, AT(level), NULL},
    {"rows", CE_M_LIST, 0, NULL},
};
TABLE(ce_table_series, series);
#undef AT

#define AT(member) offsetof(ce_series_row, member)
static const ce_member row[] = {
    {"line", CE_M_COUNT, AT(line), NULL},
    {"sample", CE_M_TEXT, AT(sample), NULL},
    {"role", CE_M_CHOICE, AT(role), role},
    {"run", CE_M_WORDS, AT(run), NULL},
    {"used", CE_M_FLAG, AT(used), NULL},
    {"reason", CE_M_WORDS, AT(reason), NULL},
    {"tg_K", CE_M_KNOWN, AT(tg_K), NULL},
    {"tg_u_K", CE_M_KNOWN, AT(tg_u_K), NULL},
    {"u_noise_K", CE_M_KNOWN, AT(reading.u_noise_K), NULL},
    {"u_window_K", CE_M_KNOWN, AT(reading.u_window_K), NULL},
    {"reduced_K", CE_M_NUMBER, AT(reduced_K), NULL},
    {"rate_K_min", CE_M_KNOWN, AT(rate_K_min), NULL},
    {"segment", CE_M_COUNT, AT(segment), NULL},
    {"heating", CE_M_COUNT, AT(heating), NULL},
    {"mn_g_mol", CE_M_KNOWN, AT(mn_g_mol), NULL},
    {"mn_u_g_mol", CE_M_KNOWN, AT(mn_u_g_mol), NULL},
    {"mw_g_mol", CE_M_KNOWN, AT(mw_g_mol), NULL},
    {"dispersity", CE_M_KNOWN, AT(dispersity), NULL},
    {"chain_ends", CE_M_KNOWN, AT(chain_ends), NULL},
    {"mass_g", CE_M_KNOWN, AT(mass_g), NULL},
    {"glass_from_K", CE_M_KNOWN, AT(glass.low_K), NULL},
    {"glass_to_K", CE_M_KNOWN, AT(glass.high_K), NULL},
    {"liquid_from_K", CE_M_KNOWN, AT(liquid.low_K), NULL},
    {"liquid_to_K", CE_M_KNOWN, AT(liquid.high_K), NULL},
    {"date", CE_M_WORDS, AT(date), NULL},
    {"note", CE_M_WORDS, AT(note), NULL},
};
TABLE(ce_table_row, row);
#undef AT

#define AT(member) offsetof(ce_fit, member)
static const ce_member fit[] = {
    {"relation", CE_M_CHOICE, AT(options.relation), relation},
    {"level", CE_M_NUMBER, AT(options.level), NULL},
    {"scatter", CE_M_CHOICE, AT(options.scatter), scatter},
    {"excess", CE_M_CHOICE, AT(options.excess), excess},
    {"mn_common_u", CE_M_NUMBER, AT(options.mn_common_u_rel), NULL},
    {"tg_common_u_K", CE_M_NUMBER, AT(options.tg_common_u_K), NULL},
    {"rate_slope_u_K", CE_M_NUMBER, AT(options.rate_slope_u_K), NULL},
    {"parameters", CE_M_LIST, 0, NULL},
    {"covariance", CE_M_MATRIX, AT(covariance), NULL},
    {"covariance_run", CE_M_MATRIX, AT(covariance_run), NULL},
    {"covariance_excess", CE_M_MATRIX, AT(covariance_excess), NULL},
    {"mn_common_shift", CE_M_VECTOR, AT(mn_common_shift), NULL},
    {"tg_common_shift", CE_M_VECTOR, AT(tg_common_shift), NULL},
    {"rate_common_shift", CE_M_VECTOR, AT(rate_common_shift), NULL},
    {"run_sd_K", CE_M_NUMBER, AT(run_sd_K), NULL},
    {"run_nu", CE_M_LIMITED, AT(run_nu), NULL},
    {"excess_tau_K", CE_M_NUMBER, AT(excess_tau_K), NULL},
    {"excess_r", CE_M_NUMBER, AT(excess_r), NULL},
    {"excess_nu", CE_M_LIMITED, AT(excess_nu), NULL},
    {"excess_p", CE_M_KNOWN, AT(excess_p), NULL},
    {"excess_p_nu", CE_M_LIMITED, AT(excess_p_nu), NULL},
    {"chi2", CE_M_KNOWN, AT(chi2), NULL},
    {"chi2_p", CE_M_KNOWN, AT(chi2_p), NULL},
    {"dof", CE_M_NUMBER, AT(dof), NULL},
    {"residual_sd_K", CE_M_KNOWN, AT(residual_sd_K), NULL},
    {"log_likelihood", CE_M_KNOWN, AT(log_likelihood), NULL},
    {"aicc", CE_M_KNOWN, AT(aicc), NULL},
    {"lack_of_fit_F", CE_M_KNOWN, AT(lack_of_fit_F), NULL},
    {"lack_of_fit_p", CE_M_KNOWN, AT(lack_of_fit_p), NULL},
    {"lack_of_fit_dof1", CE_M_KNOWN, AT(lack_of_fit_dof1), NULL},
    {"lack_of_fit_dof2", CE_M_KNOWN, AT(lack_of_fit_dof2), NULL},
    {"curvature_F", CE_M_KNOWN, AT(curvature_F), NULL},
    {"curvature_p", CE_M_KNOWN, AT(curvature_p), NULL},
    {"bartlett_p", CE_M_KNOWN, AT(bartlett_p), NULL},
    {"levene_p", CE_M_KNOWN, AT(levene_p), NULL},
    {"slope_significance", CE_M_KNOWN, AT(slope_significance), NULL},
    {"rcond", CE_M_KNOWN, AT(rcond), NULL},
    {"huber_scale", CE_M_KNOWN, AT(huber_scale), NULL},
    {"bisquare_scale", CE_M_KNOWN, AT(bisquare_scale), NULL},
    {"mid_mn_g_mol", CE_M_KNOWN, AT(mid_mn_g_mol), NULL},
    {"spread_tg_inf_low_K", CE_M_KNOWN, AT(spread_tg_inf_low_K), NULL},
    {"spread_tg_inf_high_K", CE_M_KNOWN, AT(spread_tg_inf_high_K), NULL},
    {"spread_mid_low_g_mol", CE_M_KNOWN, AT(spread_mid_low_g_mol), NULL},
    {"spread_mid_high_g_mol", CE_M_KNOWN, AT(spread_mid_high_g_mol), NULL},
    {"samples", CE_M_LIST, 0, NULL},
    {"runs", CE_M_LIST, 0, NULL},
    {"comparison", CE_M_LIST, 0, NULL},
    {"warnings", CE_M_LIST, 0, NULL},
};
TABLE(ce_table_fit, fit);
#undef AT

#define AT(member) offsetof(ce_named_parameter, member)
static const ce_member parameter[] = {
    {"name", CE_M_TEXT, AT(name), NULL},
    {"unit", CE_M_TEXT, AT(unit), NULL},
    {"value", CE_M_NUMBER, AT(is.value), NULL},
    {"u", CE_M_NUMBER, AT(is.u), NULL},
    {"u_common", CE_M_NUMBER, AT(is.u_common), NULL},
    {"nu", CE_M_LIMITED, AT(is.nu), NULL},
    {"low", CE_M_FROM_BELOW, AT(is.low), NULL},
    {"high", CE_M_LIMITED, AT(is.high), NULL},
};
TABLE(ce_table_parameter, parameter);
#undef AT

#define AT(member) offsetof(ce_fit_point, member)
static const ce_member point[] = {
    {"sample", CE_M_TEXT, AT(name), NULL},
    {"mn_g_mol", CE_M_NUMBER, AT(molar.mn_g_mol), NULL},
    {"mw_g_mol", CE_M_KNOWN, AT(molar.mw_g_mol), NULL},
    {"chain_ends", CE_M_NUMBER, AT(molar.chain_ends), NULL},
    {"mn_u_g_mol", CE_M_KNOWN, AT(mn_u_g_mol), NULL},
    {"mn_u_stated_g_mol", CE_M_KNOWN, AT(mn_u_stated), NULL},
    {"mn_adjusted_g_mol", CE_M_KNOWN, AT(mn_adjusted), NULL},
    {"runs", CE_M_COUNT, AT(n), NULL},
    {"first_run", CE_M_COUNT, AT(first_run), NULL},
    {"tg_K", CE_M_NUMBER, AT(tg_K), NULL},
    {"tg_u_K", CE_M_KNOWN, AT(tg_u_K), NULL},
    {"fitted_K", CE_M_NUMBER, AT(fitted_K), NULL},
    {"residual_K", CE_M_NUMBER, AT(residual_K), NULL},
    {"weight", CE_M_NUMBER, AT(weight), NULL},
    {"leverage", CE_M_NUMBER, AT(leverage), NULL},
    {"influence", CE_M_KNOWN, AT(influence), NULL},
    {"deleted_t", CE_M_KNOWN, AT(deleted_t), NULL},
    {"deleted_p", CE_M_KNOWN, AT(deleted_p), NULL},
    {"shift_tg_inf_K", CE_M_KNOWN, AT(shift_tg_inf_K), NULL},
    {"shift_k", CE_M_KNOWN, AT(shift_k), NULL},
    {"huber_weight", CE_M_KNOWN, AT(huber_weight), NULL},
    {"bisquare_weight", CE_M_KNOWN, AT(bisquare_weight), NULL},
    {"flags", CE_M_BITS, AT(flags), NULL},
};
TABLE(ce_table_point, point);
#undef AT

#define AT(member) offsetof(ce_fit_run, member)
static const ce_member run[] = {
    {"sample", CE_M_COUNT, AT(point), NULL},
    {"tg_K", CE_M_NUMBER, AT(tg_K), NULL},
    {"tg_u_K", CE_M_KNOWN, AT(tg_u_K), NULL},
    {"residual_K", CE_M_KNOWN, AT(residual_K), NULL},
    {"leverage", CE_M_KNOWN, AT(leverage), NULL},
    {"deleted_t", CE_M_KNOWN, AT(deleted_t), NULL},
    {"deleted_p", CE_M_KNOWN, AT(deleted_p), NULL},
    {"flags", CE_M_BITS, AT(flags), NULL},
};
TABLE(ce_table_run, run);
#undef AT

#define AT(member) offsetof(ce_comparison, member)
static const ce_member comparison[] = {
    {"relation", CE_M_CHOICE, AT(relation), relation},
    {"fitted", CE_M_FLAG, AT(fitted), NULL},
    {"plausible", CE_M_FLAG, AT(plausible), NULL},
    {"aicc", CE_M_KNOWN, AT(aicc), NULL},
    {"weight", CE_M_KNOWN, AT(weight), NULL},
    {"chi2", CE_M_KNOWN, AT(chi2), NULL},
    {"tg_inf_K", CE_M_KNOWN, AT(tg_inf_K), NULL},
    {"mid_mn_g_mol", CE_M_KNOWN, AT(mid_mn_g_mol), NULL},
    {"residual_sd_K", CE_M_KNOWN, AT(residual_sd_K), NULL},
};
TABLE(ce_table_comparison, comparison);
#undef AT

#define AT(member) offsetof(ce_named_file, member)
static const ce_member file[] = {
    {"path", CE_M_TEXT, AT(path), NULL},
    {"bytes", CE_M_COUNT, AT(bytes), NULL},
    {"sha256", CE_M_TEXT, AT(sha256), NULL},
};
TABLE(ce_table_file, file);
#undef AT

static const char *severity(size_t i)
{
    static const char *const names[] = {"note", "warning", "error"};
    return i < sizeof names / sizeof *names ? names[i] : NULL;
}

#define AT(member) offsetof(ce_warning_text, member)
static const ce_member warning[] = {
    {"severity", CE_M_CHOICE, AT(severity), severity},
    {"text", CE_M_TEXT, AT(text), NULL},
};
TABLE(ce_table_warning, warning);
#undef AT

ce_status ce_record_relation(const json_t *object, const char *path, ce_relation *to, ce_error *err)
{
    const char *name = json_string_value(json_object_get(object, "relation"));
    *to = name == NULL ? CE_RELATIONS : ce_relation_find(name);
    if (*to < CE_RELATIONS) return CE_OK;
    return ce_member_fail(err, CE_E_SYNTAX, path, "the relation is %s",
                          name == NULL ? "missing" : "not known here");
}
