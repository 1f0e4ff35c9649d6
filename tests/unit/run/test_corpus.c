/* SPDX-License-Identifier: GPL-3.0-or-later
 * The small run files of tests/data/run against what is written down of each: good.tsv and
 * hostile.tsv, made by generate.py from the truth the files were written from. */
#include "check.h"

#include "run/run_internal.h"

#include <stdbool.h>
#include <stdlib.h>

#define FIELDS 16

static size_t failures;

static void complain(const char *file, const char *what, const char *got, const char *want)
{
    print_error("%s: %s is '%s', want '%s'\n", file, what, got, want);
    failures++;
}

/* Cut at a mark, keeping empty pieces; the text is changed. */
static size_t cut(char *text, char mark, char **piece, size_t room)
{
    size_t n = 0;
    for (char *p = text; p != NULL && n < room; n++) {
        piece[n] = p;
        p = strchr(p, mark);
        if (p != NULL) *p++ = '\0';
    }
    return n;
}

static char *slurp(const char *path, size_t *n)
{
    FILE *f = fopen(path, "rb");
    if (f == NULL) return NULL;
    char *text = malloc((size_t)1 << 20);
    *n = text == NULL ? 0 : fread(text, 1, ((size_t)1 << 20) - 1, f);
    if (text != NULL) text[*n] = '\0';
    (void)fclose(f);
    return text;
}

static bool set_option(ce_run_options *o, const char *key, const char *value)
{
    const struct {
        const char *key;
        const char **to;
    } texts[] = {{"encoding", &o->encoding},
                 {"time-column", &o->time_column},
                 {"temperature-column", &o->temperature_column},
                 {"signal-column", &o->signal_column},
                 {"time-unit", &o->time_unit},
                 {"temperature-unit", &o->temperature_unit},
                 {"signal-unit", &o->signal_unit}};
    for (size_t i = 0; i < sizeof texts / sizeof *texts; i++)
        if (strcmp(key, texts[i].key) == 0) {
            *texts[i].to = value;
            return true;
        }
    if (strcmp(key, "mass") == 0)
        o->mass_g = 1e-3 * strtod(value, NULL);
    else if (strcmp(key, "rate") == 0)
        o->rate_K_min = strtod(value, NULL);
    else if (strcmp(key, "sign") == 0)
        o->sign = strcmp(value, "exo-up") == 0 ? CE_SIGN_EXO_UP : CE_SIGN_ENDO_UP;
    else
        return false;
    return true;
}

static ce_run_options options_of(char *text)
{
    ce_run_options o = ce_run_options_default();
    char *piece[FIELDS];
    if (strcmp(text, "-") == 0) return o;
    size_t n = cut(text, ';', piece, FIELDS);
    for (size_t i = 0; i < n; i++) {
        char *value = strchr(piece[i], '=');
        assert_non_null(value);
        *value++ = '\0';
        assert_true(set_option(&o, piece[i], value));
    }
    return o;
}

static void check_number(const char *file, const char *what, double got, const char *want)
{
    char text[40];
    (void)snprintf(text, sizeof text, "%.17g", got);
    double w = strtod(want, NULL);
    if (!(fabs(got - w) <= 1e-13 * fabs(w) + 1e-16)) complain(file, what, text, want);
}

static void check_facts(const char *file, const ce_run *run, char *facts)
{
    char *piece[FIELDS];
    size_t n_facts, n = strcmp(facts, "-") == 0 ? 0 : cut(facts, ';', piece, FIELDS);
    const ce_fact *fact = ce_run_facts(run, &n_facts);
    for (size_t i = 0; i < n; i++) {
        char *want = strchr(piece[i], '=');
        assert_non_null(want);
        *want++ = '\0';
        const char *got = "no such fact";
        for (size_t k = 0; k < n_facts; k++)
            if (strcmp(fact[k].key, piece[i]) == 0) got = fact[k].value;
        /* "temperature column=2" also means "2 'Temp'" */
        size_t m = strlen(want);
        bool short_form = strncmp(got, want, m) == 0 && (got[m] == '\0' || got[m] == ' ');
        if (!short_form) complain(file, piece[i], got, want);
    }
    for (size_t k = 0; k < n_facts; k++) {
        if (fact[k].origin == CE_ORIGIN_GUESSED && fact[k].overrule == NULL &&
            strcmp(fact[k].key, "layout") != 0)
            complain(file, fact[k].key, "a guess without option", "an option");
        if (fact[k].origin == CE_ORIGIN_STATED && strcmp(fact[k].key, "encoding") != 0 &&
            fact[k].line == 0)
            complain(file, fact[k].key, "stated in line 0", "a line");
    }
}

static void check_segments(const char *file, const ce_run *run, const char *want)
{
    char got[200] = "";
    size_t n, points = 0;
    const ce_segment *s = ce_run_segments(run, &n);
    for (size_t i = 0; i < n && i < 60; i++) {
        static const char *const letter[] = {"H", "C", "I"};
        if (i > 0) strcat(got, " ");
        strcat(got, letter[s[i].kind]);
        if (s[i].first != points || s[i].index != i + 1 || s[i].line == 0)
            complain(file, "order of segments", "broken", "whole");
        points += s[i].n;
    }
    if (points != ce_run_size(run)) complain(file, "points in segments", "not all", "all");
    if (strcmp(got, want) != 0) complain(file, "segments", got, want);
}

/* file options points unit mass sign segments t0 t1 T0 T1 y0 y1 facts message */
static void check_good(char **f, const ce_run *run)
{
    char text[40];
    (void)snprintf(text, sizeof text, "%zu", ce_run_size(run));
    if (strcmp(text, f[2]) != 0) {
        complain(f[0], "number of points", text, f[2]);
        return;
    }
    if (strcmp(ce_signal_unit(ce_run_signal_kind(run)), f[3]) != 0)
        complain(f[0], "unit", ce_signal_unit(ce_run_signal_kind(run)), f[3]);
    if (strcmp(f[4], "-") == 0) {
        if (!isnan(ce_run_mass_g(run))) complain(f[0], "mass", "known", "not known");
    } else
        check_number(f[0], "mass", 1e3 * ce_run_mass_g(run), f[4]);
    if (strcmp(ce_origin_name(ce_run_sign_origin(run)), f[5]) != 0)
        complain(f[0], "sign", ce_origin_name(ce_run_sign_origin(run)), f[5]);
    check_segments(f[0], run, f[6]);
    size_t last = ce_run_size(run) - 1;
    const double *t = ce_run_time_s(run);
    if ((t == NULL) != (strcmp(f[7], "-") == 0))
        complain(f[0], "time", t == NULL ? "absent" : "there", f[7]);
    else if (t != NULL) {
        check_number(f[0], "first time", t[0], f[7]);
        check_number(f[0], "last time", t[last], f[8]);
    }
    check_number(f[0], "first temperature", ce_run_temperature_K(run)[0], f[9]);
    check_number(f[0], "last temperature", ce_run_temperature_K(run)[last], f[10]);
    check_number(f[0], "first signal", ce_run_signal(run)[0], f[11]);
    check_number(f[0], "last signal", ce_run_signal(run)[last], f[12]);
    check_facts(f[0], run, f[13]);
    const ce_messages *m = ce_run_messages(run);
    bool found = strcmp(f[14], "-") == 0;
    for (size_t i = 0; i < m->n; i++) found = found || strstr(m->item[i].at.message, f[14]) != NULL;
    if (!found) complain(f[0], "message", m->n == 0 ? "none" : m->item[0].at.message, f[14]);
    if (strcmp(f[14], "-") == 0 && ce_messages_count(m, CE_WARNING) > 0)
        complain(f[0], "message", m->item[0].at.message, "none");
}

static bool same_run(const ce_run *a, const ce_run *b)
{
    size_t n = ce_run_size(a), na, nb;
    const ce_segment *s = ce_run_segments(a, &na), *q = ce_run_segments(b, &nb);
    if (n != ce_run_size(b) || na != nb || a->messages.n != b->messages.n) return false;
    for (size_t i = 0; i < na; i++)
        if (s[i].first != q[i].first || s[i].line != q[i].line || s[i].kind != q[i].kind)
            return false;
    return memcmp(a->temperature_K, b->temperature_K, n * sizeof(double)) == 0 &&
           memcmp(a->signal, b->signal, n * sizeof(double)) == 0 &&
           (a->time_s == NULL) == (b->time_s == NULL) &&
           (a->time_s == NULL || memcmp(a->time_s, b->time_s, n * sizeof(double)) == 0);
}

/* Each line of a table of expectations, with the file read both ways. */
static size_t each(const char *list, size_t fields,
                   void (*check)(char **f, ce_status st, ce_run *run, const ce_error *err))
{
    size_t n, n_files = 0;
    char path[600], *rest = NULL;
    (void)snprintf(path, sizeof path, "%s/run/%s", CE_TEST_DATA, list);
    char *text = slurp(path, &n);
    assert_non_null(text);
    for (char *line = strtok_r(text, "\n", &rest); line != NULL;
         line = strtok_r(NULL, "\n", &rest)) {
        char *f[FIELDS];
        if (*line == '#') continue;
        assert_int_equal(cut(line, '\t', f, FIELDS), fields);
        ce_run_options o = options_of(f[1]);
        (void)snprintf(path, sizeof path, "%s/run/%s", CE_TEST_DATA, f[0]);
        char *bytes = slurp(path, &n);
        assert_non_null(bytes);
        ce_run *fast, *slow;
        ce_error err = CE_ERROR_INIT, other = CE_ERROR_INIT;
        ce_status st = ce_run_read_as(bytes, n, f[0], &o, true, &fast, &err);
        ce_status st2 = ce_run_read_as(bytes, n, f[0], &o, false, &slow, &other);
        if (st != st2 || strcmp(err.message, other.message) != 0 || err.line != other.line ||
            (st == CE_OK && !same_run(fast, slow)))
            complain(f[0], "reading row by row", "something else", "the same");
        check(f, st, fast, &err);
        ce_run_free(fast);
        ce_run_free(slow);
        free(bytes);
        n_files++;
    }
    free(text);
    return n_files;
}

static void must_be_read(char **f, ce_status st, ce_run *run, const ce_error *err)
{
    if (st == CE_OK)
        check_good(f, run);
    else
        complain(f[0], "refusal", err->message, "none");
}

/* file options line column message */
static void must_be_refused(char **f, ce_status st, ce_run *run, const ce_error *err)
{
    char got[80], want[80];
    if (st == CE_OK) {
        complain(f[0], "refusal", "none", f[4]);
        return;
    }
    assert_null(run);
    (void)snprintf(got, sizeof got, "%zu:%zu", err->line, err->column);
    (void)snprintf(want, sizeof want, "%s:%s", f[2], f[3]);
    if (strcmp(got, want) != 0) {
        print_error("%s\n", err->message);
        complain(f[0], "place", got, want);
    }
    if (strstr(err->message, f[4]) == NULL) complain(f[0], "message", err->message, f[4]);
    if (strcmp(err->file, f[0]) != 0) complain(f[0], "name", err->file, f[0]);
}

static void plain_files_are_read_right(void **state)
{
    (void)state;
    failures = 0;
    assert_true(each("good.tsv", 15, must_be_read) >= 60);
    assert_int_equal(failures, 0);
}

static void hostile_files_are_refused_with_their_place(void **state)
{
    (void)state;
    failures = 0;
    assert_true(each("hostile.tsv", 5, must_be_refused) >= 40);
    assert_int_equal(failures, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(plain_files_are_read_right),
        cmocka_unit_test(hostile_files_are_refused_with_their_place),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
