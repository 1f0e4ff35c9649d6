/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/seed.h"

uint64_t ce_seed_mix(uint64_t master, uint64_t stream)
{
    uint64_t z = master + (stream + 1) * UINT64_C(0x9e3779b97f4a7c15);
    z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
    z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
    return z ^ (z >> 31);
}
