/* SPDX-License-Identifier: GPL-3.0-or-later
 * What every fuzz target has: an entry for libFuzzer, and a way to complain that stops it. Without
 * libFuzzer, replay.c calls the same entry with each file of the corpus. */
#ifndef CE_FUZZ_H
#define CE_FUZZ_H

#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/* Stays in release builds, unlike assert(). */
#define MUST(condition)                                                                            \
    do {                                                                                           \
        if (!(condition)) {                                                                        \
            fprintf(stderr, "%s:%d: not so: %s\n", __FILE__, __LINE__, #condition);                \
            abort();                                                                               \
        }                                                                                          \
    } while (0)

#endif
