/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <chainend/series.h>

static const char good[] =
    "# polymer: invented\n# construction: onset\n# rate: 20 K/min\n# history: erased\n"
    "sample;mn (kg/mol);mn_u (%);tg (°C);tg_u;role\n"
    "A;2,0;5;26,85;0,3;\nA;2,0;5;27,85;0,3;\nB;4,0;5;76,85;0,3;left-out\nX;;;50;;\n";

static void settings_rows_and_samples(void **state)
{
    (void)state;
    ce_series s;
    ce_messages m = {0};
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_series_read_memory(good, sizeof good - 1, "dir/s.csv", &s, &m, &err),
                     CE_OK);
    assert_int_equal(m.n, 0);
    assert_int_equal(s.construction, CE_ONSET);
    assert_close(s.rate_K_min, 20.0, 0);
    assert_int_equal(s.history, CE_HISTORY_ERASED);
    assert_int_equal(s.n_rows, 4);
    assert_int_equal(s.n_samples, 3);
    assert_close(s.row[0].tg_K, 300.0, 1e-12);
    assert_close(s.row[0].tg_u_K, 0.3, 1e-15);
    assert_close(s.row[0].mn_u_g_mol, 100.0, 1e-12);
    assert_int_equal(s.row[3].role, CE_UNKNOWN);
    assert_int_equal(ce_series_evaluate(&s, NULL, NULL, NULL, NULL, &m, &err), CE_OK);
    assert_int_equal(s.sample[0].n_used, 2);
    assert_close(s.sample[0].mean_K, 300.5, 1e-12);
    assert_close(s.sample[0].sd_K, sqrt(0.5), 1e-12);
    assert_close(s.run_sd_K, sqrt(0.5), 1e-12);
    assert_close(s.run_nu, 1.0, 0);
    assert_int_equal(s.sample[1].n_used, 0);
    assert_non_null(s.row[2].reason);
    ce_series_free(&s);
    ce_messages_free(&m);
}

static void run_paths_are_found_from_the_series(void **state)
{
    (void)state;
    static const char text[] = "sample,mn (g/mol),run\nA,2000,r/a.csv\nB,3000,/abs/b.csv\n";
    ce_series s;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_series_read_memory(text, sizeof text - 1, "dir/s.csv", &s, NULL, &err),
                     CE_OK);
    assert_string_equal(s.row[0].path, "dir/r/a.csv");
    assert_string_equal(s.row[1].path, "/abs/b.csv");
    ce_series_free(&s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(settings_rows_and_samples),
        cmocka_unit_test(run_paths_are_found_from_the_series),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
