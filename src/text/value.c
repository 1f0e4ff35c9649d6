/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text/value.h"

#include "text/number.h"

#include <math.h>
#include <string.h>

/* Bytes of the number at the front: an 'e' belongs to it only when an exponent follows ("2e5", not
 * "2 eV"). */
static size_t number_length(const char *s)
{
    size_t n = 0;
    if (strncmp(s, "\xE2\x88\x92", 3) == 0) n = 3; /* minus sign */
    if (s[n] == '+' || s[n] == '-') n++;
    n += strspn(s + n, "0123456789.,");
    if ((s[n] == 'e' || s[n] == 'E') && strspn(s + n + 1, "+-0123456789") > 0 &&
        strpbrk(s + n + 1, "0123456789") != NULL)
        n += 1 + strspn(s + n + 1, "+-0123456789");
    return n;
}

ce_status ce_parse_value(const char *text, char decimal, ce_dimension dimension,
                         const ce_unit *assumed, double *value, const ce_unit **unit, ce_error *err)
{
    text += strspn(text, " \t");
    size_t all = strlen(text), n = number_length(text);
    while (all > n && (text[all - 1] == ' ' || text[all - 1] == '\t')) all--;
    double x;
    if (n == 0 || !ce_parse_number(text, n, decimal, &x))
        return ce_fail(err, CE_E_SYNTAX, "cannot read '%.*s' as a number%s",
                       (int)(all < 60 ? all : 60), text,
                       dimension == CE_DIM_NONE ? "" : " with a unit");
    const ce_unit *found = all == n ? assumed : ce_unit_find(text + n, all - n);
    if (found == NULL && all == n)
        return ce_fail(err, CE_E_SYNTAX, "'%.*s' has no unit (a %s is wanted)",
                       (int)(n < 60 ? n : 60), text, ce_dimension_name(dimension));
    if (found == NULL || found->dimension != dimension)
        return ce_fail(err, CE_E_SYNTAX, "'%.*s' is not a unit of %s",
                       (int)(all - n < 40 ? all - n : 40), text + n, ce_dimension_name(dimension));
    *value = ce_to_internal(found, x);
    if (unit != NULL) *unit = found;
    return CE_OK;
}

ce_status ce_parse_range(const char *text, char decimal, ce_dimension dimension,
                         const ce_unit *assumed, double *low, double *high, ce_error *err)
{
    char first[64];
    const char *colon = strchr(text, ':');
    if (colon == NULL || (size_t)(colon - text) >= sizeof first)
        return ce_fail(err, CE_E_SYNTAX, "'%.60s' is not a range A:B", text);
    memcpy(first, text, (size_t)(colon - text));
    first[colon - text] = '\0';
    const ce_unit *unit = NULL;
    ce_status st = ce_parse_value(colon + 1, decimal, dimension, assumed, high, &unit, err);
    if (st == CE_OK) st = ce_parse_value(first, decimal, dimension, unit, low, NULL, err);
    if (st == CE_OK && !(*low < *high))
        st = ce_fail(err, CE_E_DOMAIN, "'%.60s' is not a range: the first value must be the lower",
                     text);
    return st;
}
