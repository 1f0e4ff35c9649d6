/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "output/gnuplot.h"
#include "output/text.h"

#include <stdlib.h>

static void shown_text_is_tame(void **state)
{
    (void)state;
    static const char *const pairs[][2] = {
        {"plain", "plain"},
        {"a\033[2Jb", "a?[2Jb"},
        {"\xE2\x80\xAEgnp.exe", "?gnp.exe"},                      /* right-to-left override */
        {"caf\xC3\xA9", "caf\xC3\xA9"},                           /* valid UTF-8 stays       */
        {"\xFF\xC0\xAF", "\xEF\xBF\xBD\xEF\xBF\xBD\xEF\xBF\xBD"}, /* overlong slash does not */
    };
    for (size_t i = 0; i < sizeof pairs / sizeof *pairs; i++) {
        char *s = ce_text_shown(pairs[i][0], 0);
        assert_string_equal(s, pairs[i][1]);
        free(s);
    }
    char *cut = ce_text_shown("abcdefghij", 7);
    assert_string_equal(cut, "abcd...");
    free(cut);
    assert_int_equal(ce_text_columns("°C"), 2);
}

/* Nothing a file says can leave its gnuplot string: quotes become typographic, the rest is plain in single quotes. */
static void plot_text_stays_in_its_quotes(void **state)
{
    (void)state;
    char *out = NULL;
    size_t n = 0;
    FILE *to = open_memstream(&out, &n);
    ce_plot_text(to, "'; system('touch x'); `id` $HOME \"\n\\", 0);
    (void)fclose(to);
    assert_string_equal(
        out, "'\xE2\x80\x99; system(\xE2\x80\x99touch x\xE2\x80\x99); `id` $HOME \"?\\'");
    free(out);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(shown_text_is_tame),
        cmocka_unit_test(plot_text_stays_in_its_quotes),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
