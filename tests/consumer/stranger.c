/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/chainend.h>

#include <math.h>
#include <stdio.h>
#include <string.h>

/* Tg = 380 - 1e5/Mn exactly; the fit must give it back. */
int main(void)
{
    static const double mn[] = {2000, 5000, 20000, 100000};
    double tg[4];
    ce_standard s[4];
    for (int i = 0; i < 4; i++) {
        tg[i] = 380.0 - 1e5 / mn[i] + (i % 2 ? 0.01 : -0.01);
        s[i] =
            (ce_standard){.name = "s", .molar = {mn[i], (double)NAN, 2.0}, .n = 1, .tg_K = &tg[i]};
    }
    ce_fit fit;
    ce_error err = CE_ERROR_INIT;
    if (ce_fit_relation(4, s, NULL, &fit, &err) != CE_OK) {
        fprintf(stderr, "%s\n", err.message);
        return 1;
    }
    int ok =
        fabs(fit.parameter[0].value - 380.0) < 0.05 && strcmp(ce_version(), CE_VERSION_TEXT) == 0;
    ce_fit_free(&fit);
    return ok ? 0 : 1;
}
