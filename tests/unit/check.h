/* SPDX-License-Identifier: GPL-3.0-or-later
 * Included first by every unit test: cmocka with what it needs, and numeric assertions that state
 * their tolerance and never accept NaN (cmocka 1.1.5 compares in single precision and does). */
#ifndef CE_TEST_CHECK_H
#define CE_TEST_CHECK_H

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

/* |got - want| <= tol, absolute. */
#define assert_close(got, want, tol) ce_check_close((got), (want), (tol), #got, __FILE__, __LINE__)
/* |got - want| <= rel * |want|: agreement in that many digits. */
#define assert_digits(got, want, rel)                                                              \
    ce_check_close((got), (want), (rel)*fabs(want), #got, __FILE__, __LINE__)

static inline void ce_check_close(double got, double want, double tol, const char *what,
                                  const char *file, int line)
{
    if (isfinite(got) && fabs(got - want) <= tol) return;
    print_error("%s = %.17g, want %.17g within %.3g\n", what, got, want, tol);
    _fail(file, line);
}

#endif
