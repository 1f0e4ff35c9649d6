/* SPDX-License-Identifier: GPL-3.0-or-later
 * Fits series from standard input, for the comparisons with other programs:
 *   RELATION SCATTER EXCESS N, then N lines: Mn u(Mn) Mw ends u(Tg) runs Tg...  (nan = not stated)
 * writes for each: p, the parameters, their standard uncertainties, chi2, residual s.d.; or "fail". */
#include <chainend/fit.h>

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { MAX_STANDARDS = 64, MAX_RUNS = 8 };

static int read_number(double *x)
{
    char word[64];
    char *end;
    if (scanf("%63s", word) != 1) return 0;
    *x = strtod(word, &end);
    return *end == '\0';
}

static int read_standard(ce_standard *s, double *tg, double *tg_u)
{
    double runs, u;
    if (!read_number(&s->molar.mn_g_mol) || !read_number(&s->mn_u_g_mol) ||
        !read_number(&s->molar.mw_g_mol) || !read_number(&s->molar.chain_ends) ||
        !read_number(&u) || !read_number(&runs) || !(runs >= 1 && runs <= MAX_RUNS))
        return 0;
    s->n = (size_t)runs;
    for (size_t i = 0; i < s->n; i++) {
        if (!read_number(&tg[i])) return 0;
        tg_u[i] = u;
    }
    s->name = "S";
    s->tg_K = tg;
    s->tg_u_K = tg_u;
    return 1;
}

static void report(size_t n, const ce_standard *s, const ce_fit_options *o)
{
    ce_fit fit;
    ce_error err = CE_ERROR_INIT;
    if (ce_fit_relation(n, s, o, &fit, &err) != CE_OK) {
        printf("fail %s\n", err.message);
        return;
    }
    printf("%zu", fit.p);
    for (size_t i = 0; i < fit.p; i++) printf(" %.17g", fit.parameter[i].value);
    for (size_t i = 0; i < fit.p; i++) printf(" %.17g", fit.parameter[i].u);
    printf(" %.17g %.17g\n", fit.chi2, fit.residual_sd_K);
    ce_fit_free(&fit);
}

int main(void)
{
    static ce_standard s[MAX_STANDARDS];
    static double tg[MAX_STANDARDS][MAX_RUNS], tg_u[MAX_STANDARDS][MAX_RUNS];
    char relation[32], scatter[32], excess[32];
    size_t n;
    while (scanf("%31s %31s %31s %zu", relation, scatter, excess, &n) == 4) {
        ce_fit_options o = ce_fit_options_default();
        bool known_scatter, known_excess;
        o.relation = ce_relation_find(relation);
        o.scatter = ce_scatter_find(scatter, &known_scatter);
        o.excess = ce_excess_find(excess, &known_excess);
        o.compare = o.diagnose = false;
        if (!known_scatter || !known_excess || n > MAX_STANDARDS) return EXIT_FAILURE;
        for (size_t i = 0; i < n; i++)
            if (!read_standard(&s[i], tg[i], tg_u[i])) return EXIT_FAILURE;
        report(n, s, &o);
    }
    return feof(stdin) ? EXIT_SUCCESS : EXIT_FAILURE;
}
