/* SPDX-License-Identifier: GPL-3.0-or-later
 * Inputs too large or too odd to be kept as files: made on the fly. And every failing allocation. */
#include "check.h"

#include "run/run_internal.h"

#include <fcntl.h>
#include <signal.h>
#include <stdbool.h>
#include <stdlib.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

static ce_run *run;
static ce_error err;

static ce_status read_text(const char *text, size_t n)
{
    err = (ce_error)CE_ERROR_INIT;
    return ce_run_read_memory(text, n, "x.csv", NULL, &run, &err);
}

static void refused(ce_status st, ce_status want, size_t line, size_t column, const char *words)
{
    if (st != want || err.line != line || err.column != column ||
        strstr(err.message, words) == NULL)
        print_error("%d %zu:%zu %s\n", (int)st, err.line, err.column, err.message);
    assert_int_equal(st, want);
    assert_null(run);
    assert_int_equal(err.line, line);
    assert_int_equal(err.column, column);
    assert_non_null(strstr(err.message, words));
}

/* A child writes to the pipe that has become standard input until it is closed or all is written.
 */
static ce_status read_pipe(const char *repeat, size_t n_bytes)
{
    int end[2], before = dup(STDIN_FILENO);
    assert_int_equal(pipe(end), 0);
    pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0) {
        static char block[1 << 16];
        size_t k = strlen(repeat);
        for (size_t i = 0; i < sizeof block; i++) block[i] = repeat[i % k];
        (void)signal(SIGPIPE, SIG_DFL);
        (void)close(end[0]);
        size_t whole = sizeof block / k * k;
        for (size_t done = 0; done < n_bytes; done += whole)
            if (write(end[1], block, whole) < 0) break;
        _exit(0);
    }
    (void)close(end[1]);
    (void)dup2(end[0], STDIN_FILENO);
    (void)close(end[0]);
    err = (ce_error)CE_ERROR_INIT;
    ce_status st = ce_run_read("-", NULL, &run, &err);
    (void)dup2(before, STDIN_FILENO);
    (void)close(before);
    (void)waitpid(child, NULL, 0);
    return st;
}

static void a_line_of_a_gigabyte_is_given_up_early(void **state)
{
    (void)state;
    refused(read_pipe("x", (size_t)1 << 30), CE_E_LIMIT, 1, 1, "line is longer");
}

static void ten_million_columns_are_given_up_early(void **state)
{
    (void)state;
    refused(read_pipe("1,", 20000000), CE_E_LIMIT, 1, 1, "line is longer");
}

static void standard_input_is_read(void **state)
{
    (void)state;
    assert_int_equal(read_pipe("Time (s),Temperature (°C),Heat flow (W/g)\n1,20,0.1\n7,21,0.1\n"
                               "13,22,0.1\n19,23,0.1\n25,24,0.1\n31,25,0.1\n",
                               60),
                     CE_OK);
    assert_true(ce_run_size(run) > 5);
    ce_run_free(run);
    run = NULL;
}

static void too_many_columns_and_too_long_cells(void **state)
{
    (void)state;
    enum { COLUMNS = 5000, ROWS = 5, CELL = 70000 };
    static char text[2 * COLUMNS * ROWS + 1];
    for (size_t i = 0; i < 2 * COLUMNS * ROWS; i += 2) {
        text[i] = '1';
        text[i + 1] = (i / 2) % COLUMNS == COLUMNS - 1 ? '\n' : ',';
    }
    refused(read_text(text, strlen(text)), CE_E_LIMIT, 1, 4097, "more than 4096 columns");
    static char cell[CELL + 300];
    strcpy(cell, "Time (s),Temperature (°C),Heat flow (W/g)\n1,20,0.1\n7,21,0.1\n13,\"");
    size_t n = strlen(cell);
    memset(cell + n, 'x', CELL);
    strcpy(cell + n + CELL, "\",0.1\n19,23,0.1\n25,24,0.1\n");
    refused(read_text(cell, strlen(cell)), CE_E_LIMIT, 4, 2, "longer than 65536 bytes");
}

static void files_that_are_none(void **state)
{
    (void)state;
    err = (ce_error)CE_ERROR_INIT;
    refused(ce_run_read("/", NULL, &run, &err), CE_E_IO, 0, 0, "directory");
    err = (ce_error)CE_ERROR_INIT;
    refused(ce_run_read("no such file", NULL, &run, &err), CE_E_IO, 0, 0, "No such file");
    (void)unlink("hostile.fifo");
    assert_int_equal(mkfifo("hostile.fifo", 0600), 0);
    err = (ce_error)CE_ERROR_INIT;
    refused(ce_run_read("hostile.fifo", NULL, &run, &err), CE_E_IO, 0, 0, "pipe");
    (void)unlink("hostile.fifo");
    ce_run_options o = ce_run_options_default();
    o.max_bytes = 10;
    FILE *f = fopen("hostile.csv", "w");
    assert_non_null(f);
    fputs("0,1,2\n0,1,2\n0,1,2\n", f);
    assert_int_equal(fclose(f), 0);
    err = (ce_error)CE_ERROR_INIT;
    refused(ce_run_read("hostile.csv", &o, &run, &err), CE_E_LIMIT, 0, 0, "limit of 10 bytes");
    (void)unlink("hostile.csv");
}

static void odd_options_are_refused(void **state)
{
    (void)state;
    static const char text[] =
        "t/s,T/K,HF/mW\n0,300,1\n60,310,1\n120,320,1\n180,330,1\n240,340,1\n";
    ce_run_options o = ce_run_options_default();
    o.delimiter = 'x';
    assert_int_equal(ce_run_read_memory(text, strlen(text), "x", &o, &run, &err), CE_E_ARG);
    o = ce_run_options_default();
    o.decimal = ';';
    assert_int_equal(ce_run_read_memory(text, strlen(text), "x", &o, &run, &err), CE_E_ARG);
    o = ce_run_options_default();
    o.rate_K_min = 0.0;
    assert_int_equal(ce_run_read_memory(text, strlen(text), "x", &o, &run, &err), CE_E_ARG);
    assert_null(run);
}

static void a_guessed_sign_can_be_turned_a_stated_one_not(void **state)
{
    (void)state;
    static const char text[] =
        "t/s,T/K,HF/mW\n0,300,1\n60,310,2\n120,320,3\n180,330,4\n240,340,5\n";
    assert_int_equal(read_text(text, strlen(text)), CE_OK);
    assert_int_equal(ce_run_sign_origin(run), CE_ORIGIN_DEFAULT);
    assert_int_equal(ce_run_flip(run, true, "step", &err), CE_OK);
    assert_true(ce_run_signal(run)[4] == -5.0);
    assert_int_equal(ce_run_sign_origin(run), CE_ORIGIN_GUESSED);
    size_t n;
    const ce_fact *f = ce_run_facts(run, &n);
    bool told = false;
    for (size_t i = 0; i < n; i++)
        told = told || (strcmp(f[i].key, "sign of heat flow") == 0 &&
                        strcmp(f[i].value, "exo up, from the step") == 0 &&
                        f[i].origin == CE_ORIGIN_GUESSED);
    assert_true(told);
    ce_run_free(run);
    ce_run_options o = ce_run_options_default();
    o.sign = CE_SIGN_ENDO_UP;
    assert_int_equal(ce_run_read_memory(text, strlen(text), "x", &o, &run, &err), CE_OK);
    assert_int_equal(ce_run_flip(run, true, "step", &err), CE_E_ARG);
    assert_true(ce_run_signal(run)[4] == 5.0);
    ce_run_free(run);
    run = NULL;
}

static void the_preamble_is_kept(void **state)
{
    (void)state;
    static const char text[] =
        "Sample: A 7\nOperator;\nMass;5,2;mg\n# Note = \"x\x7F\"\nt/s;T/K;HF/mW\n0;300;1\n"
        "60;310;1\n120;320;1\n180;330;1\n240;340;1,5\n";
    assert_int_equal(read_text(text, strlen(text)), CE_E_SYNTAX); /* the control byte */
    char clean[sizeof text];
    memcpy(clean, text, sizeof text);
    *strchr(clean, '\x7F') = 'y';
    assert_int_equal(read_text(clean, strlen(clean)), CE_OK);
    assert_string_equal(ce_run_preamble(run, "SAMPLE"), "A 7");
    assert_string_equal(ce_run_preamble(run, "mass"), "5,2 mg");
    assert_non_null(strstr(ce_run_preamble(run, "note"), "xy"));
    assert_null(ce_run_preamble(run, "Pressure"));
    assert_close(ce_run_mass_g(run), 5.2e-3, 1e-15);
    ce_run_free(run);
    run = NULL;
}

/* ---- allocation failure: -Wl,--wrap sends every allocation of the library here ----------------- */

static unsigned fail_at, count;

static bool fails(void)
{
    return fail_at != 0 && ++count >= fail_at;
}

void *__real_malloc(size_t n);
void *__real_calloc(size_t n, size_t size);
void *__real_realloc(void *p, size_t n);
void *__real_reallocarray(void *p, size_t n, size_t size);
void *__wrap_malloc(size_t n);
void *__wrap_calloc(size_t n, size_t size);
void *__wrap_realloc(void *p, size_t n);
void *__wrap_reallocarray(void *p, size_t n, size_t size);

void *__wrap_malloc(size_t n)
{
    return fails() ? NULL : __real_malloc(n);
}

void *__wrap_calloc(size_t n, size_t size)
{
    return fails() ? NULL : __real_calloc(n, size);
}

void *__wrap_realloc(void *p, size_t n)
{
    return fails() ? NULL : __real_realloc(p, n);
}

void *__wrap_reallocarray(void *p, size_t n, size_t size)
{
    return fails() ? NULL : __real_reallocarray(p, n, size);
}

static void every_allocation_failure_is_clean(void **state)
{
    (void)state;
    static const char text[] =
        "Sample;A\nMass;5,2;mg\nHeating rate;11 K/min\nSegment;Zeit;Temperatur;Wärmestrom\n"
        ";s;°C;mW\n0;0;0;0\n1;0;80;\"1,5\"\n1;60;85;1\n1;120;90;1\n1;180;95;1\n1;240;100;1\n"
        "\nSegment;Zeit;Temperatur;Wärmestrom\n;s;°C;mW\n2;300;95;0\n2;360;90;0\n2;420;85;0\n"
        "2;480;80;0\n2;540;75\n";
    ce_status st = CE_E_NOMEM;
    unsigned n = 0;
    while (st != CE_OK && n < 2000) {
        n++;
        err = (ce_error)CE_ERROR_INIT;
        fail_at = n;
        count = 0;
        st = ce_run_read_memory(text, strlen(text), "x.csv", NULL, &run, &err);
        fail_at = 0;
        if (st == CE_OK) break;
        if (st != CE_E_NOMEM) print_error("allocation %u: %s\n", n, err.message);
        assert_int_equal(st, CE_E_NOMEM);
        assert_int_equal(err.code, CE_E_NOMEM);
        assert_null(run);
    }
    assert_int_equal(st, CE_OK);
    assert_true(n > 20);
    assert_int_equal(ce_run_size(run), 9);
    ce_run_free(run);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_line_of_a_gigabyte_is_given_up_early),
        cmocka_unit_test(ten_million_columns_are_given_up_early),
        cmocka_unit_test(standard_input_is_read),
        cmocka_unit_test(too_many_columns_and_too_long_cells),
        cmocka_unit_test(files_that_are_none),
        cmocka_unit_test(odd_options_are_refused),
        cmocka_unit_test(a_guessed_sign_can_be_turned_a_stated_one_not),
        cmocka_unit_test(the_preamble_is_kept),
        cmocka_unit_test(every_allocation_failure_is_clean),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
