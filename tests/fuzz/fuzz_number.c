/* SPDX-License-Identifier: GPL-3.0-or-later
 * A number is what strtod() in the C locale makes of the same text, or it is none. */
#include "fuzz.h"

#include "text/number.h"

#include <math.h>
#include <string.h>

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    char text[CE_MAX_NUMBER + 1], *end;
    if (size > CE_MAX_NUMBER) return 0;
    if (size > 0) memcpy(text, data, size);
    text[size] = '\0';
    double x = 0.25;
    bool taken = ce_parse_number(text, size, '.', &x);
    if (!taken) MUST(x == 0.25);
    if (strstr(text, "\xE2\x88\x92") != NULL) return 0;
    bool plain = size > 0 && strspn(text, "+-.0123456789eE") == size;
    double want = strtod(text, &end);
    bool expected = plain && end == text + size && isfinite(want);
    MUST(taken == expected);
    if (taken) MUST(memcmp(&x, &want, sizeof x) == 0);
    double y = 0.25;
    for (char *p = text; *p != '\0'; p++) *p = *p == '.' ? ',' : *p;
    MUST(ce_parse_number(text, size, ',', &y) == taken || memchr(data, ',', size) != NULL);
    return 0;
}
