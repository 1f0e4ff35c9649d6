/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/large.h"

#include <stdint.h>
#include <stdlib.h>
#include <sys/mman.h>

#define PAGE     ((size_t)2 << 20)
#define WORTH_IT (4 * PAGE)

void *ce_large(size_t n, size_t size)
{
    size_t bytes;
    if (__builtin_mul_overflow(n, size, &bytes) || bytes > SIZE_MAX - PAGE) return NULL;
#ifdef MADV_HUGEPAGE
    if (bytes >= WORTH_IT) {
        size_t whole = (bytes + PAGE - 1) / PAGE * PAGE;
        void *p = aligned_alloc(PAGE, whole);
        if (p != NULL) (void)madvise(p, whole, MADV_HUGEPAGE); /* a wish: small pages do too */
        return p;
    }
#endif
    return malloc(bytes == 0 ? 1 : bytes);
}
