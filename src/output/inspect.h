/* SPDX-License-Identifier: GPL-3.0-or-later
 * What the reader found in run files, written out. JSON schema chainend.inspect/1. */
#ifndef CE_OUTPUT_INSPECT_H
#define CE_OUTPUT_INSPECT_H

#include <chainend/run.h>

#include "output/document.h"

typedef struct {
    const char *path;
    ce_status status;
    ce_error error;
    ce_run *run; /* NULL unless CE_OK */
} ce_inspected;

typedef struct {
    size_t n;
    const ce_inspected *file;
} ce_inspect_result;

CE_DOCUMENT(inspect, ce_inspect_result)

#endif
