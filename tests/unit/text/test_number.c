/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "text/number.h"

#include <locale.h>
#include <stdbool.h>
#include <stdlib.h>

/* The judge is strtod() of the C library; this process stays in the C locale. */
static void same_as_strtod(const char *text)
{
    double got = 0.5, want = strtod(text, NULL);
    bool ok = ce_parse_number(text, strlen(text), '.', &got);
    if (!ok || memcmp(&got, &want, sizeof got) != 0)
        print_error("'%s': got %.17g, strtod gives %.17g\n", text, got, want);
    assert_true(ok);
    assert_memory_equal(&got, &want, sizeof got);
}

/* Places where decimal to binary conversion goes wrong: halfway cases, ends of the range, many
 * digits. 2^53 + 1 and its neighbours, 1e23, and the largest and smallest doubles are classics. */
static void hard_numbers_are_exact(void **state)
{
    (void)state;
    static const char *const text[] = {"0",
                                       "-0",
                                       "+1",
                                       "1.",
                                       ".5",
                                       "-.5",
                                       "1e5",
                                       "1E+05",
                                       "1e-05",
                                       "00012.500",
                                       "373.15",
                                       "-40.9676",
                                       "0.1",
                                       "0.3",
                                       "1e22",
                                       "1e23",
                                       "9007199254740993",
                                       "9007199254740992.5",
                                       "9007199254740993.0000000000000001",
                                       "9007199254740994.999999",
                                       "123456789012345678",
                                       "18446744073709551615",
                                       "18446744073709551616",
                                       "0.1234567890123456789",
                                       "0.12345678901234567890123",
                                       "1.7976931348623157e308",
                                       "4.9406564584124654e-324",
                                       "2.2250738585072011e-308",
                                       "2.2250738585072014e-308",
                                       "1e-400",
                                       "0e999999",
                                       "0.0000000000000000000000000000001",
                                       "100000000000000000000000000000000",
                                       "8.5",
                                       "4503599627370496.5",
                                       "4503599627370497.5",
                                       "0.500000000000000166533453693773481063544750213623046875",
                                       "179769313486231580793728971405301e276",
                                       "6.87E-03",
                                       "9223372036854775807e-19",
                                       "1.00000000000000011102230246251565404236316680908203125",
                                       "5e-20",
                                       "12345678901234567e-19"};
    for (size_t i = 0; i < sizeof text / sizeof *text; i++) same_as_strtod(text[i]);
}

static uint64_t next(uint64_t *s)
{
    *s ^= *s << 13;
    *s ^= *s >> 7;
    *s ^= *s << 17;
    return *s;
}

static void random_numbers_are_exact(void **state)
{
    (void)state;
    uint64_t s = 88172645463325252u;
    char text[64];
    for (int i = 0; i < 400000; i++) {
        uint64_t r = next(&s), digits = r % 20, w = next(&s);
        if (digits < 19) w %= (uint64_t)pow(10.0, (double)digits + 1);
        switch (r >> 60) {
        case 0:
        case 1:
        case 2:
        case 3:
            (void)snprintf(text, sizeof text, "%llu.%llu", (unsigned long long)(w % 1000),
                           (unsigned long long)(next(&s) % 10000000000000000u));
            break;
        case 4:
        case 5:
            (void)snprintf(text, sizeof text, "-%llue%d", (unsigned long long)w,
                           (int)(next(&s) % 60) - 30);
            break;
        case 6:
            (void)snprintf(text, sizeof text, "%.17g", (double)(int64_t)w * 1e-17);
            break;
        default:
            (void)snprintf(text, sizeof text, "0.%0*llu", (int)(r % 5) + 15, (unsigned long long)w);
        }
        same_as_strtod(text);
    }
}

static void anything_else_is_refused(void **state)
{
    (void)state;
    static const char *const text[] = {
        "",    "-",     "+",      ".",       "e5",  "1e",           "1e+",   "0x1p4",
        "inf", "nan",   "NAN(7)", "1 ",      " 1",  "1,5",          "1.5.2", "1e5.5",
        "--1", "1e999", "12abc",  "1'000.5", "1_0", "\xE2\x88\x92", "1d5",   "1/2"};
    for (size_t i = 0; i < sizeof text / sizeof *text; i++) {
        double x = 7.25;
        if (ce_parse_number(text[i], strlen(text[i]), '.', &x)) print_error("'%s'\n", text[i]);
        assert_false(ce_parse_number(text[i], strlen(text[i]), '.', &x));
        assert_true(x == 7.25);
    }
    double x;
    assert_false(ce_parse_number("1\0", 2, '.', &x));
    static char longest[CE_MAX_NUMBER + 2];
    memset(longest, '1', sizeof longest);
    assert_false(ce_parse_number(longest, sizeof longest, '.', &x));
}

static void decimal_comma_and_typographic_minus(void **state)
{
    (void)state;
    double x;
    assert_true(ce_parse_number("10,722", 6, ',', &x));
    assert_true(x == 10.722);
    assert_false(ce_parse_number("1.234,5", 7, ',', &x));
    assert_false(ce_parse_number("1,234,5", 7, ',', &x));
    assert_false(ce_parse_number("10.5", 4, ',', &x));
    assert_true(ce_parse_number("0,12345678901234567890123", 25, ',', &x));
    assert_true(x == 0.12345678901234567890123);
    assert_true(ce_parse_number("\xE2\x88\x92"
                                "40.5",
                                7, '.', &x));
    assert_true(x == -40.5);
    assert_true(ce_parse_number("1e\xE2\x88\x92"
                                "3",
                                6, '.', &x));
    assert_true(x == 1e-3);
}

/* A process in a comma locale reads the same numbers; where no such locale is installed there is
 * nothing to show. */
static void the_locale_does_not_matter(void **state)
{
    (void)state;
    static const char *const names[] = {"de_DE.UTF-8", "fr_FR.UTF-8", "es_ES.UTF-8", "de_DE"};
    const char *found = NULL;
    for (size_t i = 0; i < sizeof names / sizeof *names && found == NULL; i++)
        found = setlocale(LC_NUMERIC, names[i]);
    double x = 0.0, y = 0.0;
    bool a = ce_parse_number("0.1234567890123456789012345", 27, '.', &x);
    bool b = ce_parse_number("373.15", 6, '.', &y);
    (void)setlocale(LC_NUMERIC, "C");
    if (found == NULL) skip();
    assert_true(a && b);
    assert_true(x == 0.1234567890123456789012345 && y == 373.15);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(hard_numbers_are_exact),
        cmocka_unit_test(random_numbers_are_exact),
        cmocka_unit_test(anything_else_is_refused),
        cmocka_unit_test(decimal_comma_and_typographic_minus),
        cmocka_unit_test(the_locale_does_not_matter),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
