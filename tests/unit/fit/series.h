/* SPDX-License-Identifier: GPL-3.0-or-later
 * Series that several tests of this room fit. */
#ifndef CE_TEST_FIT_SERIES_H
#define CE_TEST_FIT_SERIES_H

#include <chainend/fit.h>

#include <math.h>

enum { FF8_SAMPLES = 8, FF8_RUNS = 3 };

/* Synthetic: Tg = 388 K - 1.8e5 K g/mol / Mn, 0.5 K a run; made once for this project and frozen.
 * FF8a: Mn exact. FF8b: certified Mn = true Mn (1 + 5 % normal), the error common to the runs. */
static const double ff8a_mn[FF8_SAMPLES] = {2000, 4000, 8000, 16000, 35000, 70000, 150000, 300000};
static const double ff8a_tg[FF8_SAMPLES][FF8_RUNS] = {
    {297.13, 298.63, 298.03}, {343.73, 343.76, 344.16}, {366.32, 364.96, 365.07},
    {376.51, 376.87, 379.01}, {382.76, 383.07, 383.13}, {385.97, 384.65, 386.30},
    {385.53, 386.54, 387.23}, {387.28, 387.64, 387.45}};
static const double ff8b_mn[FF8_SAMPLES] = {1930, 4010, 7690, 16600, 35900, 68800, 155000, 293000};
static const double ff8b_tg[FF8_SAMPLES][FF8_RUNS] = {
    {297.78, 298.61, 298.82}, {343.73, 343.39, 343.66}, {364.79, 365.64, 366.13},
    {376.31, 376.63, 376.47}, {382.37, 383.14, 381.71}, {385.49, 385.84, 385.86},
    {386.42, 387.43, 386.92}, {388.00, 387.97, 387.13}};
static const char *const ff8_name[FF8_SAMPLES] = {"S1", "S2", "S3", "S4", "S5", "S6", "S7", "S8"};

/* r: relative standard uncertainty of Mn; 0 exact, NaN not stated. */
static inline void ff8_standards(const double *mn, const double (*tg)[FF8_RUNS], double r,
                                 ce_standard *s)
{
    for (size_t i = 0; i < FF8_SAMPLES; i++)
        s[i] = (ce_standard){.name = ff8_name[i],
                             .molar = {mn[i], (double)NAN, 2},
                             .mn_u_g_mol = r * mn[i],
                             .n = FF8_RUNS,
                             .tg_K = tg[i]};
}

/* Exercise 3-1 of a Chinese collection of polymer-physics exercises; method and polymer not stated.
 */
enum { EXERCISE_SAMPLES = 7 };
static const double exercise_mn[EXERCISE_SAMPLES] = {500, 1000, 4000, 5000, 6000, 10000, 20000};
static const double exercise_tg[EXERCISE_SAMPLES] = {182, 278, 354, 361, 362, 369.5, 375.5};
static const char *const exercise_name[EXERCISE_SAMPLES] = {"E1", "E2", "E3", "E4",
                                                            "E5", "E6", "E7"};

static inline void exercise_standards(ce_standard *s)
{
    for (size_t i = 0; i < EXERCISE_SAMPLES; i++)
        s[i] = (ce_standard){.name = exercise_name[i],
                             .molar = {exercise_mn[i], (double)NAN, 2},
                             .mn_u_g_mol = 0,
                             .n = 1,
                             .tg_K = &exercise_tg[i]};
}

#endif
