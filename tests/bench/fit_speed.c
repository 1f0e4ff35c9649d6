/* SPDX-License-Identifier: GPL-3.0-or-later
 * How long a fit takes. usage: fit_speed [RESAMPLES]; prints "name seconds". */
#include <chainend/fit.h>

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

static const double mn[8] = {1930, 4010, 7690, 16600, 35900, 68800, 155000, 293000};
static const double tg[8][3] = {{297.78, 298.61, 298.82}, {343.73, 343.39, 343.66},
                                {364.79, 365.64, 366.13}, {376.31, 376.63, 376.47},
                                {382.37, 383.14, 381.71}, {385.49, 385.84, 385.86},
                                {386.42, 387.43, 386.92}, {388.00, 387.97, 387.13}};

static double now(void)
{
    struct timespec t;
    (void)clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static double time_fits(const ce_standard *s, const ce_fit_options *o, int repeats)
{
    double best = 1e9;
    for (int round = 0; round < 5; round++) {
        double start = now();
        for (int i = 0; i < repeats; i++) {
            ce_fit fit;
            if (ce_fit_relation(8, s, o, &fit, NULL) != CE_OK) exit(EXIT_FAILURE);
            ce_fit_free(&fit);
        }
        best = fmin(best, (now() - start) / repeats);
    }
    return best;
}

int main(int argc, char **argv)
{
    ce_standard s[8];
    for (size_t i = 0; i < 8; i++)
        s[i] = (ce_standard){.name = "S",
                             .molar = {mn[i], 1.1 * mn[i], 2},
                             .mn_u_g_mol = 0.05 * mn[i],
                             .n = 3,
                             .tg_K = tg[i]};
    size_t resamples = argc > 1 ? (size_t)strtoul(argv[1], NULL, 10) : 10000;
    ce_fit_options bare = ce_fit_options_default(), diagnosed = bare, full = bare, many = bare;
    bare.compare = bare.diagnose = diagnosed.compare = many.compare = many.diagnose = false;
    many.resamples = resamples;
    printf("fit %.3g\n", time_fits(s, &bare, 200));
    printf("fit_with_diagnostics %.3g\n", time_fits(s, &diagnosed, 50));
    printf("fit_with_diagnostics_and_comparison %.3g\n", time_fits(s, &full, 20));
    printf("resamples_%zu %.3g\n", resamples, time_fits(s, &many, 1));
    for (unsigned r = 0; r < CE_RELATIONS; r++) {
        ce_fit_options o = diagnosed;
        o.relation = (ce_relation)r;
        printf("%s_with_diagnostics %.3g\n", ce_relation_name(o.relation), time_fits(s, &o, 5));
    }
    return EXIT_SUCCESS;
}
