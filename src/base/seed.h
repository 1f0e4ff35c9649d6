/* SPDX-License-Identifier: GPL-3.0-or-later
 * Seeds for many independent random streams, the same whatever the order or thread they are used in.
 */
#ifndef CE_BASE_SEED_H
#define CE_BASE_SEED_H

#include <stdint.h>

/* Seed of stream number stream of a master seed: the splitmix64 output function (Steele, Lea and
 * Flood, OOPSLA 2014, p. 453; constants from memory, checked by the published first output) applied
 * to master + (stream + 1) * golden gamma. Distinct streams of one master never collide. */
uint64_t ce_seed_mix(uint64_t master, uint64_t stream);

#endif
