/* SPDX-License-Identifier: GPL-3.0-or-later
 * Any bytes as a saved calibration: read or refused. What is read gives answers without a crash, and is the
 * same text when it is saved again and read again. */
#include "fuzz.h"

#include <chainend/estimate.h>
#include <chainend/record.h>

#include <gsl/gsl_errno.h>
#include <string.h>

static void use(const ce_record *r)
{
    const double tg = 370.0, mn = 20000.0;
    ce_unknown u = ce_unknown_default();
    ce_estimate e;
    ce_range_row row;
    double ceiling_K, ceiling;
    u.n = 1;
    u.tg_K = &tg;
    (void)ce_estimate_mn(&r->fit, &u, 0.0, &e, NULL);
    (void)ce_ceiling(&r->fit, 1, 0.0, &ceiling_K, &ceiling);
    (void)ce_working_range(&r->fit, 1, 0.0, 1, &mn, &row, NULL);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static int once;
    if (!once++) (void)gsl_set_error_handler_off();
    ce_record r, again;
    ce_error err = CE_ERROR_INIT;
    const ce_status st = ce_record_read(data, size, "fuzz", &r, &err);
    MUST(st == err.code);
    if (st != CE_OK) {
        MUST(err.message[0] != '\0' && r.made_by == NULL && r.fit.point == NULL);
        for (const char *p = err.message; *p != '\0'; p++) MUST((unsigned char)*p >= 0x20);
        return 0;
    }
    use(&r);
    char *text = NULL, *second = NULL;
    if (ce_record_text(&r.series, &r.fit, r.glass, r.liquid, r.file, r.n_files, &text, &err) ==
        CE_OK) {
        MUST(ce_record_read(text, strlen(text), "again", &again, &err) == CE_OK);
        MUST(ce_record_text(&again.series, &again.fit, again.glass, again.liquid, again.file,
                            again.n_files, &second, &err) == CE_OK);
        /* the maker is the program that saves */
        MUST(strcmp(text, second) == 0);
        ce_record_free(&again);
    }
    free(text);
    free(second);
    ce_record_free(&r);
    return 0;
}
