/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/asked.h"

#include "base/quantity.h"
#include "text/number.h"
#include "text/value.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* The unit is what follows the last digit or decimal point. */
static size_t unit_begins(const char *text)
{
    size_t n = strlen(text);
    while (n > 0 && strchr("0123456789.", text[n - 1]) == NULL) n--;
    return n;
}

static const char *find_plus_minus(const char *text, size_t n, size_t *length)
{
    static const char *const signs[] = {"\xC2\xB1", "+-", "+/-"};
    for (size_t i = 0; i < sizeof signs / sizeof *signs; i++) {
        size_t k = strlen(signs[i]);
        for (size_t at = 0; at + k <= n; at++)
            if (memcmp(text + at, signs[i], k) == 0) {
                *length = k;
                return text + at;
            }
    }
    return NULL;
}

static ce_status parse_values(const char *text, size_t n, const ce_unit *unit, cli_asked *asked,
                              ce_error *err)
{
    while (n > 0 && text[n - 1] == ' ') n--;
    for (size_t at = 0; at <= n;) {
        size_t k = 0;
        double x;
        while (at + k < n && text[at + k] != ',') k++;
        const char *from = text + at;
        size_t length = k;
        while (length > 0 && *from == ' ') {
            from++;
            length--;
        }
        if (!ce_parse_number(from, length, '.', &x))
            return ce_fail(err, CE_E_SYNTAX, "cannot read '%.*s' as a temperature",
                           (int)(k < 40 ? k : 40), text + at);
        if (asked->n == CLI_MAX_READINGS)
            return ce_fail(err, CE_E_LIMIT, "more than %d readings of one unknown",
                           CLI_MAX_READINGS);
        asked->tg_K[asked->n] = ce_to_internal(unit, x);
        if (!(asked->tg_K[asked->n] > 0.0))
            return ce_fail(err, CE_E_DOMAIN, "'%.*s' lies below absolute zero",
                           (int)(k < 40 ? k : 40), text + at);
        asked->n++;
        at += k + 1;
    }
    return CE_OK;
}

ce_status cli_parse_reading(const char *text, cli_asked *asked, ce_error *err)
{
    *asked = (cli_asked){.text = text, .tg_u_K = (double)NAN};
    size_t n = unit_begins(text), length = 0;
    const char *rest = text + n;
    rest += strspn(rest, " ");
    asked->celsius_assumed = rest[0] == '\0';
    const ce_unit *unit =
        asked->celsius_assumed ? ce_unit_find("degC", 4) : ce_unit_find(rest, strlen(rest));
    if (unit == NULL || unit->dimension != CE_DIM_TEMPERATURE)
        return ce_fail(err, CE_E_SYNTAX, "'%.20s' is not a unit of temperature (C, K or F)", rest);
    const char *sign = find_plus_minus(text, n, &length);
    ce_status st = parse_values(text, sign == NULL ? n : (size_t)(sign - text), unit, asked, err);
    if (st != CE_OK || sign == NULL) return st;
    const char *u = sign + length;
    double x;
    u += strspn(u, " ");
    if (!ce_parse_number(u, n - (size_t)(u - text), '.', &x) || !(x >= 0.0))
        return ce_fail(err, CE_E_SYNTAX, "cannot read '%.*s' as an uncertainty",
                       (int)(n - (size_t)(u - text)), u);
    asked->tg_u_K = x * unit->factor;
    return CE_OK;
}

static cli_asked *append(cli_questions *q, ce_error *err)
{
    cli_asked *p = reallocarray(q->item, q->n + 1, sizeof *p);
    if (p == NULL) {
        (void)ce_fail(err, CE_E_NOMEM, "out of memory");
        return NULL;
    }
    q->item = p;
    return &p[q->n++];
}

ce_status cli_add_tg(void *to, const char *value, ce_error *err)
{
    cli_asked *a = append(to, err);
    return a == NULL ? CE_E_NOMEM : cli_parse_reading(value, a, err);
}

ce_status cli_add_mn(void *to, const char *value, ce_error *err)
{
    cli_asked *a = append(to, err);
    if (a == NULL) return CE_E_NOMEM;
    *a = (cli_asked){.text = value, .is_mn = true, .tg_u_K = (double)NAN};
    ce_status st = ce_parse_value(value, '.', CE_DIM_MOLAR_MASS, ce_unit_find("g/mol", 5),
                                  &a->mn_g_mol, NULL, err);
    if (st == CE_OK && !(a->mn_g_mol > 0.0))
        return ce_fail(err, CE_E_DOMAIN, "'%.40s': a molar mass is above zero", value);
    return st;
}

void cli_questions_free(cli_questions *questions)
{
    free(questions->item);
    *questions = (cli_questions){0};
}
