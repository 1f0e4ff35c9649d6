/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "text/header.h"

static const struct {
    const char *cell, *name, *unit_text, *unit;
} cells[] = {
    {"Time", "Time", "", NULL},
    {"Time (s)", "Time", "s", "s"},
    {"Time [min]", "Time", "min", "min"},
    {"Temperature / K", "Temperature", "K", "K"},
    {"Temp./°C", "Temp.", "°C", "°C"},
    {"t/s", "t", "s", "s"},
    {"HF/mW endo up", "HF endo up", "mW", "mW"},
    {"DSC/(mW/mg)", "DSC", "mW/mg", "mW/mg"},
    {"Heat Flow (W/g, exo up)", "Heat Flow ( exo up)", "W/g", "W/g"},
    {"Heat Flow (normalized) (W/g)", "Heat Flow (normalized)", "W/g", "W/g"},
    {"Heat flow W g-1", "Heat flow", "W g-1", "W/g"},
    {"Heat flow mJ/(s mg)", "Heat flow", "mJ/(s mg)", "mJ/(s mg)"},
    {"Temperatur in °C", "Temperatur", "°C", "°C"},
    {"Température en K", "Température", "K", "K"},
    {"mn (g/mol)", "mn", "g/mol", "g/mol"},
    {"mn_u (%)", "mn_u", "%", "%"},
    {"tg_u[K]", "tg_u", "K", "K"},
    {"Cp (J/(g K))", "Cp", "J/(g K)", "J/(g K)"},
    {"Heat flow [arb.]", "Heat flow", "arb.", NULL},
    {"Heat flow (BTU/h)", "Heat flow", "BTU/h", NULL},
    {"Signal 1", "Signal 1", "", NULL},
    {"  Time  ", "Time", "", NULL},
    {"", "", "", NULL},
    {"(°C)", "", "°C", "°C"},
    {"K", "K", "", NULL},
};

static void a_header_cell_is_a_name_and_a_unit(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof cells / sizeof *cells; i++) {
        ce_header h;
        ce_header_split(cells[i].cell, strlen(cells[i].cell), &h);
        print_message("%s\n", cells[i].cell);
        assert_string_equal(h.name, cells[i].name);
        assert_string_equal(h.unit_text, cells[i].unit_text);
        if (cells[i].unit == NULL)
            assert_null(h.unit);
        else
            assert_string_equal(h.unit == NULL ? "none" : h.unit->name, cells[i].unit);
    }
}

static void names_are_compared_forgivingly(void **state)
{
    (void)state;
    assert_true(ce_same_name("chain_ends", "Chain ends"));
    assert_true(ce_same_name("left-out", "LeftOut"));
    assert_true(ce_same_name("Temp.", "temp"));
    assert_false(ce_same_name("mn", "mn_u"));
    assert_false(ce_same_name("mn_u", "mn"));
    assert_true(ce_same_name("", " _"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_header_cell_is_a_name_and_a_unit),
        cmocka_unit_test(names_are_compared_forgivingly),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
