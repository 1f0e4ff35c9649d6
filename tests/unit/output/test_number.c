/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "output/number.h"

#include <stdlib.h>

static void digits_follow_the_uncertainty(void **state)
{
    (void)state;
    char s[CE_NUMBER_ROOM];
    assert_int_equal(ce_decimals(0.23), 2);
    assert_int_equal(ce_decimals(0.0996), 2); /* shows as 0.10 */
    assert_int_equal(ce_decimals(3.0), 1);
    assert_int_equal(ce_decimals(959.0), 0);
    assert_string_equal(ce_celsius(s, 373.15, 0.23), "100.00");
    assert_string_equal(ce_fixed(s, -0.0004, 2), "0.00");
    assert_string_equal(ce_fixed(s, (double)NAN, 2), "-");
    assert_string_equal(ce_kg_mol(s, 9999.6), "10.0");
    assert_string_equal(ce_kg_mol(s, 233348.0), "233");
    assert_string_equal(ce_kg_mol(s, 1234567.0), "1230");
}

static void exact_numbers_read_back(void **state)
{
    (void)state;
    static const double x[] = {0.1, 1.0 / 3.0, 388.16375474, 1e-300, -5.0, 123456789.123456789};
    char s[CE_NUMBER_ROOM];
    for (size_t i = 0; i < sizeof x / sizeof *x; i++)
        assert_true(strtod(ce_exact(s, x[i]), NULL) == x[i]);
    assert_string_equal(ce_exact(s, 0.1), "0.1");
    assert_string_equal(ce_exact(s, (double)INFINITY), "");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(digits_follow_the_uncertainty),
        cmocka_unit_test(exact_numbers_read_back),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
