/* SPDX-License-Identifier: GPL-3.0-or-later
 * Random numbers without shared state: stream i of a seed is the same wherever and in whatever
 * order it is drawn. SplitMix64 (G. L. Steele, D. Lea and C. H. Flood, OOPSLA 2014; constants from
 * memory). */
#ifndef CE_BASE_COUNTER_RNG_H
#define CE_BASE_COUNTER_RNG_H

#include <math.h>
#include <stdint.h>

typedef struct {
    uint64_t state;
} ce_counter_rng;

static inline uint64_t ce_counter_rng_mix(uint64_t x)
{
    x = (x ^ (x >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
    x = (x ^ (x >> 27)) * UINT64_C(0x94d049bb133111eb);
    return x ^ (x >> 31);
}

static inline uint64_t ce_counter_rng_next(ce_counter_rng *rng)
{
    rng->state += UINT64_C(0x9e3779b97f4a7c15);
    return ce_counter_rng_mix(rng->state);
}

static inline ce_counter_rng ce_counter_rng_start(uint64_t seed, uint64_t stream)
{
    return (ce_counter_rng){ce_counter_rng_mix(seed + UINT64_C(0x632be59bd9b4e019)) ^
                            ce_counter_rng_mix(stream * UINT64_C(0xd1342543de82ef95) + 1)};
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
