/* SPDX-License-Identifier: GPL-3.0-or-later
 * Memory for whole files and whole columns. */
#ifndef CE_BASE_LARGE_H
#define CE_BASE_LARGE_H

#include <stddef.h>

/* Memory for n items of size bytes, to be freed with free() and grown with realloc(); NULL when there
 * is none or the product overflows. The system is asked for large pages where they pay: half the time
 * of reading a large file was spent on the first touch of small ones. */
void *ce_large(size_t n, size_t size);

#endif
