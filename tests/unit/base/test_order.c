/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "base/order.h"

/* chem of R's MASS package (copper in wholemeal flour, 24 determinations): median 3.385 and scaled
 * MAD 0.526323 as R 4.2.2 computes them. */
static void chem_of_mass(void **state)
{
    (void)state;
    static const double chem[] = {2.9,   3.1,  3.4, 3.4, 3.7,  3.7,  2.8,  2.5,
                                  2.4,   2.4,  2.7, 2.2, 5.28, 3.37, 3.03, 3.03,
                                  28.95, 3.77, 3.4, 2.2, 3.5,  3.6,  3.7,  3.7};
    double x[24];
    memcpy(x, chem, sizeof x);
    assert_close(ce_median(x, 24), 3.385, 1e-12);
    memcpy(x, chem, sizeof x);
    assert_close(CE_MAD_TO_SD * ce_mad(x, 24), 0.526323, 1e-6);
}

static void quantiles_interpolate(void **state)
{
    (void)state;
    double x[] = {5, 1, 4, 2, 3}, y[] = {2, 1};
    assert_close(ce_quantile(x, 5, 0.0), 1.0, 0);
    assert_close(ce_quantile(x, 5, 1.0), 5.0, 0);
    assert_close(ce_quantile(x, 5, 0.25), 2.0, 0);
    assert_close(ce_quantile(x, 5, 0.3), 2.2, 1e-15);
    assert_close(ce_median(y, 2), 1.5, 0);
    assert_true(isnan(ce_median(y, 0)));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(chem_of_mass),
        cmocka_unit_test(quantiles_interpolate),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
