/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "text/load.h"

#include <fcntl.h>
#include <stdlib.h>
#include <sys/stat.h>
#include <unistd.h>

static ce_error err;

/* Decode n bytes of s; the text must become want (NULL: refused). */
static void decodes(const char *s, size_t n, const char *encoding, const char *want,
                    const char *found)
{
    ce_bytes b = {malloc(n + 1), n};
    assert_non_null(b.data);
    memcpy(b.data, s, n);
    b.data[n] = '\0';
    err = (ce_error)CE_ERROR_INIT;
    ce_text t;
    ce_status st = ce_text_decode(&b, "x", encoding, &t, &err);
    assert_null(b.data);
    if (want == NULL) {
        assert_true(st != CE_OK);
        assert_null(t.memory);
        return;
    }
    if (st != CE_OK) print_error("%s\n", err.message);
    assert_int_equal(st, CE_OK);
    assert_string_equal(t.begin, want);
    assert_ptr_equal(t.begin + strlen(t.begin), t.end);
    assert_string_equal(t.encoding, found);
    ce_text_free(&t);
}

#define D(bytes, encoding, want, found) decodes(bytes, sizeof(bytes) - 1, encoding, want, found)

static void every_encoding_becomes_utf8(void **state)
{
    (void)state;
    D("a,b\n", NULL, "a,b\n", "ASCII");
    D("\xEF\xBB\xBF°C", NULL, "°C", "UTF-8");
    D("°C", NULL, "°C", "UTF-8");
    D("\xB0"
      "C \xB5W \x80",
      NULL, "°C µW €", "Windows-1252");
    D("\xB0"
      "C",
      "latin1", "°C", "latin1");
    D("\xFF\xFE\xB0\0C\0", NULL, "°C", "UTF-16LE");
    D("\xFE\xFF\0\xB0\0C", NULL, "°C", "UTF-16BE");
    D("T\0i\0m\0e\0", NULL, "Time", "UTF-16LE");
    D("\0T\0i\0m\0e", NULL, "Time", "UTF-16BE");
    D("\xFF\xFE\x3D\xD8\x00\xDE", NULL, "\xF0\x9F\x98\x80", "UTF-16LE");
    D("\xF8"
      "C",
      "CP850", "°C", "CP850");
    D("a\x1A", NULL, "a", "ASCII");
    D("", NULL, "", "ASCII");
}

static void what_is_no_text_is_located(void **state)
{
    (void)state;
    D("ab\nc\0d\n", NULL, NULL, NULL);
    assert_int_equal(err.line, 2);
    assert_int_equal(err.column, 2);
    D("ab\r\n\r\nc\x01", NULL, NULL, NULL);
    assert_int_equal(err.line, 3);
    assert_int_equal(err.column, 2);
    D("a\n\xB0", "UTF-8", NULL, NULL);
    assert_int_equal(err.line, 2);
    assert_int_equal(err.column, 1);
    D("\x81 \xB0", NULL, NULL, NULL);
    assert_int_equal(err.line, 1);
    D("\xFF\xFE\x00\xDC", NULL, NULL, NULL);
    D("\xFF\xFE"
      "a\0b",
      NULL, NULL, NULL);
    D("x", "no-such-code", NULL, NULL);
    assert_int_equal(err.code, CE_E_ARG);
}

static char path[64];

static int temporary(const char *content)
{
    strcpy(path, "chainend-load-XXXXXX");
    int fd = mkstemp(path);
    assert_true(fd >= 0);
    assert_int_equal(write(fd, content, strlen(content)), strlen(content));
    return fd;
}

static void odd_files_are_refused(void **state)
{
    (void)state;
    ce_bytes b;
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_bytes_load("/", 100, &b, &err), CE_E_IO);
    assert_non_null(strstr(err.message, "directory"));
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_bytes_load("/dev/zero", 100, &b, &err), CE_E_IO);
    assert_int_equal(ce_bytes_load("/no/such/file", 100, &b, NULL), CE_E_IO);
    int fd = temporary("0123456789");
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_bytes_load(path, 9, &b, &err), CE_E_LIMIT);
    assert_null(b.data);
    assert_int_equal(ce_bytes_load(path, 10, &b, &err), CE_OK);
    assert_string_equal(b.data, "0123456789");
    free(b.data);
    (void)close(fd);
    (void)unlink(path);
    assert_int_equal(mkfifo(path, 0600), 0);
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_bytes_load(path, 100, &b, &err), CE_E_IO);
    assert_non_null(strstr(err.message, "pipe"));
    (void)unlink(path);
}

static void a_file_that_changes_is_refused(void **state)
{
    (void)state;
    int fd = temporary("1,2\n3,4\n");
    struct stat before;
    assert_int_equal(fstat(fd, &before), 0);
    assert_int_equal(write(fd, "5,6\n", 4), 4);
    assert_int_equal(lseek(fd, 0, SEEK_SET), 0);
    ce_bytes b;
    err = (ce_error)CE_ERROR_INIT;
    assert_int_equal(ce_bytes_read(fd, &before, "x", 1000, &b, &err), CE_E_IO);
    assert_non_null(strstr(err.message, "changed while it was read"));
    assert_null(b.data);
    assert_int_equal(fstat(fd, &before), 0);
    assert_int_equal(lseek(fd, 0, SEEK_SET), 0);
    assert_int_equal(ce_bytes_read(fd, &before, "x", 1000, &b, NULL), CE_OK);
    free(b.data);
    (void)close(fd);
    (void)unlink(path);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_encoding_becomes_utf8),
        cmocka_unit_test(what_is_no_text_is_located),
        cmocka_unit_test(odd_files_are_refused),
        cmocka_unit_test(a_file_that_changes_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
