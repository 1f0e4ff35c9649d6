/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/reading.h"

#include "base/quantity.h"
#include "text/value.h"

#include <string.h>

static ce_status set_char(char *to, const char *value, const char *const (*word)[2], size_t n,
                          ce_error *err)
{
    for (size_t i = 0; i < n; i++)
        if (strcmp(value, word[i][0]) == 0 || strcmp(value, word[i][1]) == 0) {
            *to = word[i][1][0];
            return CE_OK;
        }
    return ce_fail(err, CE_E_ARG, "'%.20s' is not one of those this option takes", value);
}

ce_status cli_set_delimiter(void *to, const char *value, ce_error *err)
{
    static const char *const words[][2] = {
        {"comma", ","}, {"semicolon", ";"}, {"tab", "\t"}, {"pipe", "|"}, {"blank", " "}};
    return set_char(to, value, words, sizeof words / sizeof *words, err);
}

ce_status cli_set_decimal(void *to, const char *value, ce_error *err)
{
    static const char *const words[][2] = {{"point", "."}, {"comma", ","}};
    return set_char(to, value, words, sizeof words / sizeof *words, err);
}

ce_status cli_set_sign(void *to, const char *value, ce_error *err)
{
    if (strcmp(value, "endo-up") == 0)
        *(ce_sign *)to = CE_SIGN_ENDO_UP;
    else if (strcmp(value, "exo-up") == 0)
        *(ce_sign *)to = CE_SIGN_EXO_UP;
    else
        return ce_fail(err, CE_E_ARG, "'%.20s' is neither endo-up nor exo-up", value);
    return CE_OK;
}

static ce_status positive(double *to, const char *value, ce_dimension dimension,
                          const char *assumed, ce_error *err)
{
    double x;
    ce_status st = ce_parse_value(value, '.', dimension, ce_unit_find(assumed, strlen(assumed)), &x,
                                  NULL, err);
    if (st != CE_OK) return st;
    if (!(x > 0.0)) return ce_fail(err, CE_E_DOMAIN, "'%.40s' is not above zero", value);
    *to = x;
    return CE_OK;
}

ce_status cli_set_mass(void *to, const char *value, ce_error *err)
{
    return positive(to, value, CE_DIM_MASS, "mg", err);
}

ce_status cli_set_rate(void *to, const char *value, ce_error *err)
{
    return positive(to, value, CE_DIM_RATE, "K/min", err);
}

ce_status cli_set_window(void *to, const char *value, ce_error *err)
{
    ce_window w;
    ce_status st = ce_parse_range(value, '.', CE_DIM_TEMPERATURE, ce_unit_find("degC", 4), &w.low_K,
                                  &w.high_K, err);
    if (st == CE_OK) *(ce_window *)to = w;
    return st;
}

ce_status cli_set_take(void *to, const char *value, ce_error *err)
{
    ce_construction c = ce_construction_find(value);
    if (c == CE_CONSTRUCTIONS)
        return ce_fail(err, CE_E_ARG,
                       "'%.20s' is none of half_step, midpoint, onset, inflection, end, fictive",
                       value);
    *(ce_construction *)to = c;
    return CE_OK;
}
