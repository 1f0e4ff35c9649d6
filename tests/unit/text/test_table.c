/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "text/table.h"

static ce_table t;
static ce_error err;

static ce_status read_it(const char *text)
{
    err = (ce_error)CE_ERROR_INIT;
    ce_table_free(&t);
    return ce_table_read_memory(text, strlen(text), "t.csv", NULL, &t, &err);
}

static int free_table(void **state)
{
    (void)state;
    ce_table_free(&t);
    return 0;
}

static const char series[] = "# polymer: invented poly(methacrylate) M7\n"
                             "# construction: half_step\n"
                             "# just a remark\n"
                             "#rate:10 K/min\n"
                             "sample, role,     mn (g/mol), mn_u (%), tg (K)\n"
                             "A2,     standard, 2000,       5,        297.13\n"
                             "\n"
                             "# between\n"
                             "\"A, 3\", standard, 2000,     5,        298.63\n"
                             "X1,     unknown,  ,           ,         371.20\n"
                             "Y,\n";

static void a_series_file_comes_apart(void **state)
{
    (void)state;
    assert_int_equal(read_it(series), CE_OK);
    assert_string_equal(t.encoding, "ASCII");
    assert_int_equal(t.delimiter, ',');
    assert_int_equal(t.decimal, '.');
    assert_true(t.decimal_known);
    assert_int_equal(t.n_settings, 3);
    assert_string_equal(ce_table_setting(&t, "Polymer")->value, "invented poly(methacrylate) M7");
    assert_string_equal(ce_table_setting(&t, "rate")->value, "10 K/min");
    assert_int_equal(ce_table_setting(&t, "rate")->line, 4);
    assert_null(ce_table_setting(&t, "level"));
    assert_int_equal(t.n_columns, 5);
    assert_int_equal(t.n_rows, 4);
    size_t mn = ce_table_find(&t, "Mn", 0);
    assert_int_equal(mn, 2);
    assert_string_equal(t.column[mn].unit->name, "g/mol");
    assert_int_equal(ce_table_find(&t, "mn", mn + 1), t.n_columns);
    assert_string_equal(ce_table_cell(&t, 1, 0)->text, "A, 3");
    assert_int_equal(ce_table_cell(&t, 1, 0)->line, 9);
    assert_int_equal(ce_table_cell(&t, 1, 4)->column, 5);
    assert_string_equal(ce_table_cell(&t, 3, 4)->text, "");
    double x;
    assert_int_equal(ce_cell_number(&t, ce_table_cell(&t, 0, 4), &x, &err), CE_OK);
    assert_true(x == 297.13);
    assert_int_equal(ce_cell_number(&t, ce_table_cell(&t, 0, 0), &x, &err), CE_E_SYNTAX);
    assert_int_equal(err.line, 6);
    assert_int_equal(err.column, 1);
}

static void other_dialects_give_the_same(void **state)
{
    (void)state;
    assert_int_equal(read_it("\xEF\xBB\xBFsample;tg;mn\r\n;°C;kg/mol\r\nA;24,5;2\r\nB;-3,25;4\r\n"),
                     CE_OK);
    assert_int_equal(t.delimiter, ';');
    assert_int_equal(t.decimal, ',');
    assert_string_equal(t.column[1].unit->name, "°C");
    assert_string_equal(t.column[2].unit->name, "kg/mol");
    double x;
    assert_int_equal(ce_cell_number(&t, ce_table_cell(&t, 1, 1), &x, &err), CE_OK);
    assert_true(x == -3.25);
    assert_int_equal(read_it("sample\ttg\rA\t24.5\rB\t30.5"), CE_OK);
    assert_int_equal(t.delimiter, '\t');
    assert_int_equal(t.n_rows, 2);
    assert_int_equal(ce_table_cell(&t, 1, 1)->line, 3);
}

static void quoted_line_ends_do_not_confuse_lines(void **state)
{
    (void)state;
    assert_int_equal(read_it("sample,note\nA,\"two\nlines\"\nB,\"say \"\"so\"\"\"\n"), CE_OK);
    assert_string_equal(ce_table_cell(&t, 0, 1)->text, "two\nlines");
    assert_string_equal(ce_table_cell(&t, 1, 1)->text, "say \"so\"");
    assert_int_equal(ce_table_cell(&t, 1, 1)->line, 4);
}

static void mistakes_are_located(void **state)
{
    (void)state;
    assert_int_equal(read_it(""), CE_E_SYNTAX);
    assert_int_equal(read_it("# only: settings\n"), CE_E_SYNTAX);
    assert_null(t.cell);
    assert_int_equal(read_it("a,b\n1,2\n1,2,3\n"), CE_E_SYNTAX);
    assert_int_equal(err.line, 3);
    assert_int_equal(err.column, 3);
    assert_int_equal(read_it("a,b\n1,2,\n"), CE_OK);
    assert_int_equal(read_it("a,b\n1,\"2\n3,4\n"), CE_E_SYNTAX);
    assert_int_equal(err.line, 2);
    assert_int_equal(err.column, 2);
    assert_int_equal(read_it("a;b\n1,5;2\n2.5;2\n3,5;1\n"), CE_OK);
    double x;
    assert_int_equal(ce_cell_number(&t, ce_table_cell(&t, 1, 0), &x, &err), CE_E_SYNTAX);
    assert_non_null(strstr(err.message, "decimal point where the file has decimal commas"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_teardown(a_series_file_comes_apart, free_table),
        cmocka_unit_test_teardown(other_dialects_give_the_same, free_table),
        cmocka_unit_test_teardown(quoted_line_ends_do_not_confuse_lines, free_table),
        cmocka_unit_test_teardown(mistakes_are_located, free_table),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
