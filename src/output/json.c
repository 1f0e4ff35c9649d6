/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/json.h"

#include "output/text.h"

#include <math.h>
#include <stdlib.h>

json_t *ce_json_number(double x)
{
    return isfinite(x) ? json_real(x) : json_null();
}

json_t *ce_json_text(const char *s)
{
    if (s == NULL) return json_null();
    json_t *j = json_string(s);
    if (j != NULL) return j;
    char *clean = ce_text_valid_utf8(s);
    j = clean == NULL ? NULL : json_string(clean);
    free(clean);
    return j;
}

ce_status ce_json_write(json_t *root, FILE *to)
{
    if (root == NULL) return CE_E_NOMEM;
    int bad = json_dumpf(root, to, JSON_INDENT(2) | JSON_REAL_PRECISION(17));
    json_decref(root);
    if (bad != 0 || fputc('\n', to) == EOF) return CE_E_IO;
    return CE_OK;
}
