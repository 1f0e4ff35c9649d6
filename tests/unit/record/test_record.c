/* SPDX-License-Identifier: GPL-3.0-or-later
 * What is saved is what is read back, digit by digit; anything else is refused with its place. */
#include "check.h"

#include <chainend/estimate.h>
#include <chainend/record.h>

#include <gsl/gsl_errno.h>
#include <jansson.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static const char table[] =
    "# polymer: invented\n# scope: n-butyl ends\n# construction: half_step\n# rate: 10 K/min\n"
    "# history: erased\n"
    "sample,role,mn (g/mol),mn_u (%),tg (K),date\n"
    "A,standard,2000,5,297.1,2026-01-05\nA,standard,2000,5,298.6,\n"
    "B,standard,8000,5,365.2,\nB,standard,8000,5,365.9,\n"
    "C,standard,35000,5,382.7,\nC,standard,35000,5,383.1,\n"
    "D,standard,300000,5,387.3,\nD,standard,300000,5,387.6,\n"
    "L,left-out,9000,5,300,\nX,unknown,,,371.2,\n";

static ce_series series;
static ce_fit fit;
static char *text;
static const ce_window none = {(double)NAN, (double)NAN};

static int set_up(void **state)
{
    (void)state;
    (void)gsl_set_error_handler_off();
    ce_error err = CE_ERROR_INIT;
    ce_fit_options o = ce_fit_options_default();
    o.mn_common_u_rel = 0.02;
    ce_checksum file = {(char *)"s.csv", 3,
                        "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"};
    assert_int_equal(ce_series_read_memory(table, strlen(table), "s.csv", &series, NULL, &err),
                     CE_OK);
    assert_int_equal(ce_series_evaluate(&series, NULL, NULL, NULL, NULL, NULL, &err), CE_OK);
    assert_int_equal(ce_fit_series(&series, &o, &fit, &err), CE_OK);
    assert_int_equal(ce_record_text(&series, &fit, none, none, &file, 1, &text, &err), CE_OK);
    return 0;
}

static int tear_down(void **state)
{
    (void)state;
    free(text);
    ce_fit_free(&fit);
    ce_series_free(&series);
    return 0;
}

static void read_back_is_the_same(void **state)
{
    (void)state;
    ce_record r;
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_record_read(text, strlen(text), "r.json", &r, &err);
    if (st != CE_OK) print_error("%s\n", err.message);
    assert_int_equal(st, CE_OK);
    assert_memory_equal(r.fit.covariance, fit.covariance, 4 * sizeof(double));
    for (size_t i = 0; i < 2; i++)
        assert_memory_equal(&r.fit.parameter[i], &fit.parameter[i], sizeof(ce_parameter));
    assert_int_equal(r.fit.n_points, 4);
    assert_string_equal(r.fit.point[1].name, "B");
    assert_true(r.fit.run_sd_K == fit.run_sd_K && r.fit.run_nu == fit.run_nu);
    assert_string_equal(r.series.polymer, "invented");
    assert_int_equal(r.series.n_samples, series.n_samples);
    assert_true(r.series.run_sd_K == series.run_sd_K);
    assert_string_equal(r.series.row[0].date, "2026-01-05");
    assert_false(r.series.row[8].used);
    assert_int_equal(r.n_files, 1);
    assert_true(r.file[0].bytes == 3 && isnan(r.glass.low_K));
    /* the answers too */
    const double tg = 371.2;
    ce_unknown u = ce_unknown_default();
    u.n = 1;
    u.tg_K = &tg;
    ce_estimate a, b;
    assert_int_equal(ce_estimate_mn(&fit, &u, 0.0, &a, &err), CE_OK);
    assert_int_equal(ce_estimate_mn(&r.fit, &u, 0.0, &b, &err), CE_OK);
    assert_true(a.mn_g_mol == b.mn_g_mol && a.low_g_mol == b.low_g_mol &&
                a.high_g_mol == b.high_g_mol);
    /* and saved again it is the same text */
    char *again = NULL;
    assert_int_equal(
        ce_record_text(&r.series, &r.fit, r.glass, r.liquid, r.file, r.n_files, &again, &err),
        CE_OK);
    assert_string_equal(again, text);
    free(again);
    ce_record_free(&r);
}

/* The record with one change; the message must begin with the path and hold the words. */
static void refused_with(json_t *root, const char *path, const char *words)
{
    char *changed = json_dumps(root, JSON_REAL_PRECISION(17));
    json_decref(root);
    ce_record r;
    ce_error err = CE_ERROR_INIT;
    const ce_status st = ce_record_read(changed, strlen(changed), "r.json", &r, &err);
    if (st == CE_OK || strncmp(err.message, path, strlen(path)) != 0 ||
        strstr(err.message, words) == NULL)
        print_error("want '%s ... %s', got %d '%s'\n", path, words, (int)st, err.message);
    assert_int_not_equal(st, CE_OK);
    assert_int_equal(strncmp(err.message, path, strlen(path)), 0);
    assert_non_null(strstr(err.message, words));
    assert_string_equal(err.file, "r.json");
    assert_null(r.made_by);
    free(changed);
}

static json_t *loaded(void)
{
    json_t *root = json_loads(text, 0, NULL);
    assert_non_null(root);
    return root;
}

static json_t *fit_of(json_t *root)
{
    return json_object_get(root, "fit");
}

static void members_are_checked(void **state)
{
    (void)state;
    json_t *r = loaded();
    json_object_set_new(r, "schema", json_string("chainend.calibration/2"));
    refused_with(r, "$.schema", "is 'chainend.calibration/2'");
    r = loaded();
    json_object_del(r, "schema");
    refused_with(r, "$.schema", "is missing");
    r = loaded();
    json_object_set_new(r, "extra", json_true());
    refused_with(r, "$", "member 'extra' is not known");
    r = loaded();
    json_object_del(fit_of(r), "run_sd_K");
    refused_with(r, "$.fit.run_sd_K", "is missing");
    r = loaded();
    json_object_set_new(fit_of(r), "run_sd_K", json_string("0.5"));
    refused_with(r, "$.fit.run_sd_K", "is a text, a number is wanted");
    r = loaded();
    json_object_set_new(fit_of(r), "relation", json_string("straight"));
    refused_with(r, "$.fit", "relation is not known");
    r = loaded();
    json_object_set_new(json_array_get(json_object_get(fit_of(r), "parameters"), 1), "u",
                        json_null());
    refused_with(r, "$.fit.parameters[1].u", "is null");
    r = loaded();
    json_object_set_new(json_array_get(json_object_get(fit_of(r), "parameters"), 1), "name",
                        json_string("k"));
    refused_with(r, "$.fit.parameters[1]", "the relation has 'K'");
    r = loaded();
    json_array_remove(json_object_get(fit_of(r), "covariance"), 1);
    refused_with(r, "$.fit.covariance", "has 1 rows, 2 are wanted");
    r = loaded();
    json_object_set_new(json_array_get(json_object_get(json_object_get(r, "series"), "rows"), 0),
                        "role", json_string("king"));
    refused_with(r, "$.series.rows[0].role", "'king' is not a word known here");
    r = loaded();
    json_object_set_new(json_array_get(json_object_get(r, "files"), 0), "sha256",
                        json_string("abc"));
    refused_with(r, "$.files[0].sha256", "is no SHA-256");
}

static void contradictions_are_refused(void **state)
{
    (void)state;
    json_t *r = loaded();
    json_t *row = json_array_get(json_object_get(fit_of(r), "covariance"), 0);
    json_array_set_new(row, 1, json_real(1e9));
    refused_with(r, "$.fit.covariance", "positive definite");
    r = loaded(); /* symmetric, but no covariance */
    json_t *c = json_object_get(fit_of(r), "covariance");
    json_array_set_new(json_array_get(c, 0), 1, json_real(1e9));
    json_array_set_new(json_array_get(c, 1), 0, json_real(1e9));
    refused_with(r, "$.fit.covariance", "positive definite");
    r = loaded();
    c = json_object_get(fit_of(r), "covariance");
    json_array_set_new(json_array_get(c, 0), 0, json_real(4.0));
    refused_with(r, "$.fit.covariance", "does not agree with the uncertainty of parameter 1");
    r = loaded();
    json_object_set_new(json_array_get(json_object_get(fit_of(r), "parameters"), 0), "low",
                        json_real(1e6));
    refused_with(r, "$.fit.parameters[0]", "interval does not enclose");
    r = loaded();
    json_object_set_new(fit_of(r), "level", json_real(1.5));
    refused_with(r, "$.fit", "level must lie between 0 and 1");
    r = loaded();
    json_array_remove(json_object_get(fit_of(r), "runs"), 0);
    refused_with(r, "$.fit", "the samples have 8 runs, there are 7");
    r = loaded();
    json_object_set_new(json_array_get(json_object_get(fit_of(r), "samples"), 2), "mn_g_mol",
                        json_real(-1.0));
    refused_with(r, "$.fit", "samples[2] is impossible");
    r = loaded();
    json_object_set_new(json_array_get(json_object_get(json_object_get(r, "series"), "rows"), 0),
                        "tg_K", json_null());
    refused_with(r, "$.series.rows[0]", "is used but has no Tg");
}

static void other_text_is_refused_with_line_and_column(void **state)
{
    (void)state;
    ce_record r;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_record_read("{\n \"a\": ,\n}", 11, "r.json", &r, &err), CE_E_SYNTAX);
    assert_true(err.line == 2 && err.column > 0);
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_record_read("{\"schema\":1,\"schema\":2}", 23, "r", &r, &err), CE_E_SYNTAX);
    assert_non_null(strstr(err.message, "duplicate"));
    for (size_t cut = 0; cut < strlen(text); cut += 101) /* truncated anywhere */
        assert_int_not_equal(ce_record_read(text, cut, "r", &r, NULL), CE_OK);
    assert_true(ce_record_is(" \n{", 3));
    assert_false(ce_record_is("sample,mn", 9));
    assert_false(ce_record_is("", 0));
}

/* FIPS 180-4 example: SHA-256 of "abc". */
static void checksums(void **state)
{
    (void)state;
    char path[] = "/tmp/chainend-XXXXXX";
    const int fd = mkstemp(path);
    assert_true(fd >= 0);
    assert_int_equal(write(fd, "abc", 3), 3);
    close(fd);
    ce_checksum c;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_checksum_file(path, &c, &err), CE_OK);
    assert_string_equal(c.sha256,
                        "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    assert_int_equal(c.bytes, 3);
    free(c.path);
    unlink(path);
    assert_int_equal(ce_checksum_file(path, &c, &err), CE_E_IO);
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_checksum_file("/tmp", &c, &err), CE_E_IO);
    assert_null(c.path);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(read_back_is_the_same),
        cmocka_unit_test(members_are_checked),
        cmocka_unit_test(contradictions_are_refused),
        cmocka_unit_test(other_text_is_refused_with_line_and_column),
        cmocka_unit_test(checksums),
    };
    return cmocka_run_group_tests_name("record/record", tests, set_up, tear_down);
}
