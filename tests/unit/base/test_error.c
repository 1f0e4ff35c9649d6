/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <chainend/base.h>

static void first_error_stays(void **state)
{
    (void)state;
    ce_error e = CE_ERROR_INIT;
    assert_int_equal(ce_fail_at(&e, CE_E_SYNTAX, "a.csv", 3, 7, "cannot read '%s'", "12,x"),
                     CE_E_SYNTAX);
    assert_int_equal(ce_fail(&e, CE_E_NOMEM, "later"), CE_E_NOMEM);
    assert_int_equal(e.code, CE_E_SYNTAX);
    assert_string_equal(e.message, "cannot read '12,x'");
    assert_string_equal(e.file, "a.csv");
    assert_int_equal(e.line, 3);
    assert_int_equal(e.column, 7);
    assert_int_equal(ce_fail(NULL, CE_E_IO, "nobody listens"), CE_E_IO);
}

static void control_bytes_do_not_pass(void **state)
{
    (void)state;
    ce_error e = CE_ERROR_INIT;
    (void)ce_fail_at(&e, CE_E_IO, "evil\033[2Jname", 0, 0, "bell \a and\nnewline");
    assert_string_equal(e.file, "evil?[2Jname");
    assert_string_equal(e.message, "bell ? and?newline");
}

static void long_names_keep_their_end(void **state)
{
    (void)state;
    char name[1000];
    memset(name, 'x', sizeof name);
    (void)snprintf(name + 900, 100, "/the-end.csv");
    ce_error e = CE_ERROR_INIT;
    (void)ce_fail_at(&e, CE_E_IO, name, 0, 0, "m");
    assert_int_equal(strlen(e.file), sizeof e.file - 1);
    assert_string_equal(e.file + strlen(e.file) - 12, "/the-end.csv");
    assert_memory_equal(e.file, "...x", 4);
}

static void messages_are_counted_by_severity(void **state)
{
    (void)state;
    ce_messages list = {0};
    for (int i = 0; i < 20; i++)
        assert_int_equal(ce_messages_say(&list, i % 2 ? CE_WARNING : CE_NOTE, "f", 1, 2, "n %d", i),
                         CE_OK);
    assert_int_equal(list.n, 20);
    assert_int_equal(ce_messages_count(&list, CE_WARNING), 10);
    assert_int_equal(ce_messages_count(&list, CE_ERROR), 0);
    assert_string_equal(list.item[19].at.message, "n 19");
    ce_messages_free(&list);
    assert_int_equal(list.n, 0);
    assert_int_equal(ce_messages_say(NULL, CE_ERROR, NULL, 0, 0, "dropped"), CE_OK);
}

static void every_status_has_a_text(void **state)
{
    (void)state;
    for (ce_status s = CE_OK; s < CE_STATUS_END; s++)
        assert_string_not_equal(ce_status_text(s), "unknown status");
    assert_string_equal(ce_status_text(CE_STATUS_END), "unknown status");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(first_error_stays),
        cmocka_unit_test(control_bytes_do_not_pass),
        cmocka_unit_test(long_names_keep_their_end),
        cmocka_unit_test(messages_are_counted_by_severity),
        cmocka_unit_test(every_status_has_a_text),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
