/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/number.h"

#include "base/quantity.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

int ce_decimals(double u)
{
    if (!(u > 0.0) || !isfinite(u)) return 2;
    /* 0.0996 shows as 0.10, not as 0.100: round to two digits before asking for the magnitude */
    double magnitude = floor(log10(u));
    double scaled = u / pow(10.0, magnitude - 1.0);
    if (round(scaled) >= 100.0) magnitude += 1.0;
    int decimals = 1 - (int)magnitude;
    return decimals < 0 ? 0 : decimals > 6 ? 6 : decimals;
}

char *ce_fixed(char out[CE_NUMBER_ROOM], double x, int decimals)
{
    if (!isfinite(x) || fabs(x) >= 1e20)
        (void)snprintf(out, CE_NUMBER_ROOM, "%s", CE_NO_VALUE);
    else {
        (void)snprintf(out, CE_NUMBER_ROOM, "%.*f", decimals, x);
        /* no "-0.00" */
        if (out[0] == '-' && strspn(out + 1, "0.") == strlen(out + 1))
            memmove(out, out + 1, strlen(out));
    }
    return out;
}

char *ce_significant(char out[CE_NUMBER_ROOM], double x, int n)
{
    if (!isfinite(x)) return ce_fixed(out, x, 0);
    if (x == 0.0) return ce_fixed(out, x, 0);
    if (fabs(x) < 1e-4 || fabs(x) >= 1e9) {
        (void)snprintf(out, CE_NUMBER_ROOM, "%.*e", n - 1, x);
        return out;
    }
    double magnitude = floor(log10(fabs(x)));
    if (fabs(x) / pow(10.0, magnitude) >= 10.0 - 0.5 * pow(10.0, 1 - n)) magnitude += 1.0;
    int decimals = n - 1 - (int)magnitude;
    if (decimals >= 0) return ce_fixed(out, x, decimals);
    double unit = pow(10.0, -decimals);
    return ce_fixed(out, round(x / unit) * unit, 0);
}

char *ce_celsius(char out[CE_NUMBER_ROOM], double kelvin, double u)
{
    return ce_fixed(out, ce_degC_from_K(kelvin), ce_decimals(u));
}

char *ce_kg_mol(char out[CE_NUMBER_ROOM], double g_mol)
{
    return ce_significant(out, g_mol / 1000.0, 3);
}

char *ce_exact(char out[CE_NUMBER_ROOM], double x)
{
    if (!isfinite(x)) {
        out[0] = '\0';
        return out;
    }
    for (int digits = 15; digits <= 17; digits++) {
        (void)snprintf(out, CE_NUMBER_ROOM, "%.*g", digits, x);
        if (strtod(out, NULL) == x) break;
    }
    return out;
}
