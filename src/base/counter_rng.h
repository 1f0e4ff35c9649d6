/* SPDX-License-Identifier: GPL-3.0-or-later
 * Random numbers without shared state: stream i of a seed is the same wherever and in whatever
 * order it is drawn. */
#ifndef CE_BASE_COUNTER_RNG_H
#define CE_BASE_COUNTER_RNG_H

#include "base/seed.h"

#include <math.h>

typedef struct {
    uint64_t stream, drawn;
} ce_counter_rng;

static inline ce_counter_rng ce_counter_rng_start(uint64_t seed, uint64_t stream)
{
    return (ce_counter_rng){.stream = ce_seed_mix(seed, stream)};
}

static inline uint64_t ce_counter_rng_next(ce_counter_rng *rng)
{
    return ce_seed_mix(rng->stream, rng->drawn++);
}

/* 0 .. n-1, n > 0. The bias of the remainder is below n/2^64. */
static inline uint64_t ce_counter_rng_below(ce_counter_rng *rng, uint64_t n)
{
    return ce_counter_rng_next(rng) % n;
}

/* Inside (0, 1). */
static inline double ce_counter_rng_uniform(ce_counter_rng *rng)
{
    return ((double)(ce_counter_rng_next(rng) >> 11) + 0.5) * 0x1p-53;
}

/* Standard normal (G. E. P. Box and M. E. Muller, Ann. Math. Stat. 29 (1958) 610, from memory). */
static inline double ce_counter_rng_normal(ce_counter_rng *rng)
{
    double u = ce_counter_rng_uniform(rng), v = ce_counter_rng_uniform(rng);
    return sqrt(-2 * log(u)) * cos(2 * M_PI * v);
}

#endif
