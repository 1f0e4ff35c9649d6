/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "base/quantity.h"

static const struct {
    const char *text, *name;
    ce_dimension dimension;
    double value, internal;
} good[] = {
    {"°C", "°C", CE_DIM_TEMPERATURE, 25.0, 298.15},
    {"[°C]", "°C", CE_DIM_TEMPERATURE, 0.0, 273.15},
    {"deg C", "°C", CE_DIM_TEMPERATURE, -273.15, 0.0},
    {"\xC2\xBA"
     "C",
     "°C", CE_DIM_TEMPERATURE, 1.0, 274.15},
    {"[k]", "K", CE_DIM_TEMPERATURE, 300.0, 300.0},
    {"°F", "°F", CE_DIM_TEMPERATURE, 212.0, 373.15},
    {"[min]", "min", CE_DIM_TIME, 1.5, 90.0},
    {"S", "s", CE_DIM_TIME, 2.0, 2.0},
    {"h", "h", CE_DIM_TIME, 1.0, 3600.0},
    {"µW", "µW", CE_DIM_POWER, 500.0, 0.5},
    {"\xCE\xBC"
     "W",
     "µW", CE_DIM_POWER, 500.0, 0.5},
    {"mW", "mW", CE_DIM_POWER, 0.5, 0.5},
    {"W", "W", CE_DIM_POWER, 0.001, 1.0},
    {"W g-1", "W/g", CE_DIM_SPECIFIC_POWER, 0.2, 0.2},
    {"W·g⁻¹", "W/g", CE_DIM_SPECIFIC_POWER, 0.2, 0.2},
    {"[mW/mg]", "mW/mg", CE_DIM_SPECIFIC_POWER, 0.2, 0.2},
    {"mJ/(s mg)", "mJ/(s mg)", CE_DIM_SPECIFIC_POWER, 0.2, 0.2},
    {"mJ/(s*mg)", "mJ/(s mg)", CE_DIM_SPECIFIC_POWER, 0.2, 0.2},
    {"(J/(g K))", "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.5, 1.5},
    {"J/(g·K)", "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.5, 1.5},
    {"J/(kg K)", "J/(kg K)", CE_DIM_HEAT_CAPACITY, 1500.0, 1.5},
    {"kg/mol", "kg/mol", CE_DIM_MOLAR_MASS, 2.0, 2000.0},
    {"%", "%", CE_DIM_FRACTION, 5.0, 0.05},
    {"mg", "mg", CE_DIM_MASS, 10.0, 0.01},
    {"K/min", "K/min", CE_DIM_RATE, 10.0, 10.0},
    {"°C/min", "K/min", CE_DIM_RATE, 10.0, 10.0},
};

static void known_units_convert_both_ways(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof good / sizeof *good; i++) {
        const ce_unit *u = ce_unit_find(good[i].text, strlen(good[i].text));
        if (u == NULL) print_error("unit '%s' not found\n", good[i].text);
        assert_non_null(u);
        assert_string_equal(u->name, good[i].name);
        assert_int_equal(u->dimension, good[i].dimension);
        assert_close(ce_to_internal(u, good[i].value), good[i].internal, 1e-13 * 400);
        assert_close(ce_from_internal(u, good[i].internal), good[i].value, 1e-13 * 400);
    }
}

/* A megawatt is not a milliwatt, and a word is not a unit. */
static void unknown_units_are_refused(void **state)
{
    (void)state;
    static const char *const bad[] = {"MW",   "a.u.",   "V", "µV/mg", "%/min", "Temperature", "",
                                      "GW/g", "mW/cm2", "[", "[]",    "K K",   "cal/g"};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        const ce_unit *u = ce_unit_find(bad[i], strlen(bad[i]));
        if (u != NULL) print_error("'%s' passed as %s\n", bad[i], u->name);
        assert_null(u);
    }
    char longest[500];
    memset(longest, 'K', sizeof longest);
    assert_null(ce_unit_find(longest, sizeof longest));
}

/* Ten rows of the reference transitions (ITS-90 fixed points and secondary points): the kelvin and
 * the Celsius column differ by exactly 273.15. */
static void kelvin_and_celsius_columns_agree(void **state)
{
    (void)state;
    static const double row[][2] = {
        {234.3156, -38.8344}, {273.16, 0.01},     {302.9146, 29.7646}, {429.7485, 156.5985},
        {505.078, 231.928},   {544.552, 271.402}, {594.219, 321.069},  {600.612, 327.462},
        {692.677, 419.527},   {933.473, 660.323},
    };
    for (size_t i = 0; i < sizeof row / sizeof *row; i++)
        assert_close(ce_K_from_degC(row[i][1]), row[i][0], 1e-12 * 1000);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(known_units_convert_both_ways),
        cmocka_unit_test(unknown_units_are_refused),
        cmocka_unit_test(kelvin_and_celsius_columns_agree),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
