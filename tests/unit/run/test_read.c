/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <chainend/run.h>

/* A run of 2 K/s steps written in some dialect. */
static ce_status read_text(const char *text, ce_run **run, ce_error *err)
{
    *err = (ce_error)CE_ERROR_INIT;
    return ce_run_read_memory(text, strlen(text), "run.txt", NULL, run, err);
}

#pragma GCC diagnostic push
#pragma GCC diagnostic ignored "-Wformat-nonliteral"
static char *table(const char *head, const char *row, char decimal)
{
    static char text[8000];
    size_t n = (size_t)snprintf(text, sizeof text, "%s", head);
    for (int i = 0; i < 100; i++) {
        n += (size_t)snprintf(text + n, sizeof text - n, row, 2.0 * i, 20.0 + i, 0.25 + 0.001 * i);
    }
    for (char *p = text + strlen(head); decimal == ',' && *p != '\0'; p++)
        if (*p == '.') *p = ',';
    return text;
}
#pragma GCC diagnostic pop

static void point_and_comma(void **state)
{
    (void)state;
    ce_run *run;
    ce_error err;
    const char *text =
        table("Time (s),Temperature (°C),Heat flow endo up (W/g)\n", "%.1f,%.2f,%.4f\n", '.');
    assert_int_equal(read_text(text, &run, &err), CE_OK);
    assert_int_equal(ce_run_size(run), 100);
    assert_int_equal(ce_run_signal_kind(run), CE_SIGNAL_SPECIFIC_POWER);
    assert_int_equal(ce_run_sign_origin(run), CE_ORIGIN_STATED);
    assert_close(ce_run_temperature_K(run)[0], 293.15, 1e-12);
    assert_close(ce_run_signal(run)[99], 0.25 + 0.001 * 99, 1e-15);
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    assert_int_equal(n, 1);
    assert_int_equal(s->kind, CE_HEATING);
    assert_close(s->rate_K_min, 30.0, 1e-9);
    assert_int_equal(s->line, 2);
    ce_run_free(run);
}

static void semicolon_decimal_comma_and_mass(void **state)
{
    (void)state;
    ce_run *run;
    ce_error err;
    const char *text =
        table("Probe;erfunden\nMasse;10,0;mg\n\nZeit;Temperatur;Wärmestrom (exo up)\ns;°C;mW\n",
              "%.1f;%.2f;%.4f\n", ',');
    assert_int_equal(read_text(text, &run, &err), CE_OK);
    assert_close(ce_run_mass_g(run), 0.010, 1e-15);
    assert_int_equal(ce_run_signal_kind(run), CE_SIGNAL_SPECIFIC_POWER);
    /* exothermic up: turned over; 0.25 mW of 10 mg is 0.025 W/g */
    assert_close(ce_run_signal(run)[0], -0.025, 1e-15);
    ce_run_free(run);
}

static void what_cannot_be_read_is_refused_with_its_place(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        size_t line;
        const char *word;
    } bad[] = {
        {"", 1, "no rows of numbers"},
        {"Dear colleague, the samples are in the fridge.\n", 1, "no rows of numbers"},
        {"Time (s),Pressure (bar),Heat flow "
         "(mW)\n0,1,2\n1,2,3\n2,3,4\n3,4,5\n4,5,6\n5,6,7\n6,7,8\n7,8,9\n8,9,10\n9,"
         "10,11\n",
         1, "no column holds the temperature"},
        {"Time (s),Temperature,Heat flow "
         "(mW)\n0,1,2\n1,2,3\n2,3,4\n3,4,5\n4,5,6\n5,6,7\n6,7,8\n7,8,9\n8,9,10\n9,10,"
         "11\n",
         1, "has no unit"},
    };
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        ce_run *run;
        ce_error err;
        assert_int_not_equal(read_text(bad[i].text, &run, &err), CE_OK);
        assert_null(run);
        assert_int_equal(err.line, bad[i].line);
        if (strstr(err.message, bad[i].word) == NULL) print_error("%s\n", err.message);
        assert_non_null(strstr(err.message, bad[i].word));
    }
}

static void a_programme_is_cut_into_segments(void **state)
{
    (void)state;
    enum { N = 700 };
    static double t[N], T[N], y[N];
    for (int i = 0; i < N; i++) {
        t[i] = 6.0 * i; /* 10 K/min: 1 K a point */
        T[i] = i < 100   ? 300.0 + i
               : i < 200 ? 400.0
               : i < 400 ? 400.0 - (i - 200)
               : i < 500 ? 200.0
                         : 200.0 + (i - 500);
        y[i] = 1.0;
    }
    ce_run *run;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(
        ce_run_from_arrays(N, t, T, y, CE_SIGNAL_POWER, (double)NAN, (double)NAN, &run, &err),
        CE_OK);
    size_t n;
    const ce_segment *s = ce_run_segments(run, &n);
    static const ce_segment_kind want[] = {CE_HEATING, CE_ISOTHERMAL, CE_COOLING, CE_ISOTHERMAL,
                                           CE_HEATING};
    size_t k = 0, heatings = 0;
    for (size_t i = 0; i < n; i++) {
        if (k < 5 && s[i].kind == want[k]) k++;
        heatings += s[i].kind == CE_HEATING;
        if (s[i].kind != CE_ISOTHERMAL) assert_close(fabs(s[i].rate_K_min), 10.0, 1e-6);
    }
    assert_int_equal(k, 5);
    assert_int_equal(heatings, 2);
    assert_int_equal(s[n - 1].nth_of_kind, 2);
    ce_run_free(run);
    assert_int_equal(ce_run_from_arrays(1, t, T, y, CE_SIGNAL_POWER, (double)NAN, 10.0, &run, &err),
                     CE_E_ARG);
    assert_null(run);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(point_and_comma),
        cmocka_unit_test(semicolon_decimal_comma_and_mass),
        cmocka_unit_test(what_cannot_be_read_is_refused_with_its_place),
        cmocka_unit_test(a_programme_is_cut_into_segments),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
