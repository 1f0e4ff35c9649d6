/* SPDX-License-Identifier: GPL-3.0-or-later
 * Every allocation of a fit fails in turn: an error each time, nothing leaked (the sanitizer build
 * sees to that), nothing left in the fit. Allocations inside the shared GSL are not reached. */
#include "check.h"

#include "fit/series.h"

#include <gsl/gsl_errno.h>

static unsigned long countdown;

static bool fails(void)
{
    return countdown > 0 && --countdown == 0;
}

void *__real_malloc(size_t n);
void *__real_calloc(size_t n, size_t size);
void *__real_reallocarray(void *p, size_t n, size_t size);
char *__real_strdup(const char *s);
void *__wrap_malloc(size_t n);
void *__wrap_calloc(size_t n, size_t size);
void *__wrap_reallocarray(void *p, size_t n, size_t size);
char *__wrap_strdup(const char *s);

void *__wrap_malloc(size_t n)
{
    return fails() ? NULL : __real_malloc(n);
}
void *__wrap_calloc(size_t n, size_t size)
{
    return fails() ? NULL : __real_calloc(n, size);
}
void *__wrap_reallocarray(void *p, size_t n, size_t size)
{
    return fails() ? NULL : __real_reallocarray(p, n, size);
}
char *__wrap_strdup(const char *s)
{
    return fails() ? NULL : __real_strdup(s);
}

/* How many failures it took until the fit came through. A comparison relation whose allocation
 * fails must not pass as one that does not fit. */
static unsigned long torture(const ce_standard *s, const ce_fit_options *o)
{
    for (unsigned long n = 1; n < 100000; n++) {
        ce_fit fit;
        ce_error err = CE_ERROR_INIT;
        countdown = n;
        ce_status status = ce_fit_relation(FF8_SAMPLES, s, o, &fit, &err);
        bool came_through = countdown > 0;
        countdown = 0;
        if (status != CE_OK) {
            assert_null(fit.point);
            assert_null(fit.run);
            assert_int_equal(fit.warnings.n, 0);
            assert_true(err.message[0] != '\0');
        } else {
            ce_fit_free(&fit);
        }
        if (came_through) {
            assert_int_equal(status, CE_OK);
            return n;
        }
        if (status != CE_OK) assert_true(status == CE_E_NOMEM || status == CE_E_NOFIT);
    }
    fail();
    return 0;
}

static void every_allocation_failure_is_clean(void **state)
{
    (void)state;
    ce_standard s[FF8_SAMPLES];
    ff8_standards(ff8b_mn, ff8b_tg, 0.05, s);
    for (size_t i = 0; i < FF8_SAMPLES; i++) s[i].molar.mw_g_mol = 1.2 * s[i].molar.mn_g_mol;
    ce_fit_options o = ce_fit_options_default();
    o.resamples = 100;
    (void)gsl_set_error_handler_off();
    assert_true(torture(s, &o) > 20);
    o.relation = CE_LOG_PLATEAU;
    assert_true(torture(s, &o) > 20);
    o = ce_fit_options_default();
    o.scatter = CE_SCATTER_RESIDUALS;
    o.compare = false;
    assert_true(torture(s, &o) > 10);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(every_allocation_failure_is_clean)};
    return cmocka_run_group_tests_name("fit/memory", tests, NULL, NULL);
}
