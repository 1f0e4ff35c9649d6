/* SPDX-License-Identifier: GPL-3.0-or-later
 * Output that arrives whole or not at all. */
#ifndef CE_OUTPUT_FILE_H
#define CE_OUTPUT_FILE_H

#include <chainend/base.h>

#include <stdbool.h>
#include <stdio.h>

/* A file being written beside its target; nothing is seen under the target's name before commit. */
typedef struct {
    FILE *stream;    /* write here                                        */
    char *path;      /* the target, symbolic links resolved               */
    char *temporary; /* NULL when written straight (not a regular file) */
} ce_output;

/* Begin writing path. CE_OK, CE_E_IO or CE_E_NOMEM. A target that exists and is not a regular file
 * (a device, a pipe) is written straight. */
ce_status ce_output_begin(ce_output *output, const char *path, ce_error *err);
/* Flush, sync, rename into place, close. On failure the old file is untouched and the error says
 * why. */
ce_status ce_output_commit(ce_output *output, ce_error *err);
/* Give up: remove the temporary file. Harmless after commit. */
void ce_output_discard(ce_output *output);

#endif
