/* SPDX-License-Identifier: GPL-3.0-or-later
 * A result is written in one of three forms; this is what they have in common. */
#ifndef CE_OUTPUT_DOCUMENT_H
#define CE_OUTPUT_DOCUMENT_H

#include <chainend/base.h>

#include <stdbool.h>
#include <stdio.h>

typedef enum { CE_AS_TEXT, CE_AS_CSV, CE_AS_JSON } ce_format;

/* Writes what (of the type its document names) to a stream. CE_OK, CE_E_NOMEM or CE_E_IO. */
typedef ce_status (*ce_writer)(const void *what, FILE *to, ce_format format, bool colour);

/* Declares the three forms of a document and ce_write_NAME, the ce_writer that chooses among them. */
#define CE_DOCUMENT(name, type)                                                                    \
    ce_status ce_write_##name##_text(const type *what, FILE *to, bool colour);                     \
    ce_status ce_write_##name##_csv(const type *what, FILE *to);                                   \
    ce_status ce_write_##name##_json(const type *what, FILE *to);                                  \
    static inline ce_status ce_write_##name(const void *what, FILE *to, ce_format format,          \
                                            bool colour)                                           \
    {                                                                                              \
        return format == CE_AS_CSV    ? ce_write_##name##_csv(what, to)                            \
               : format == CE_AS_JSON ? ce_write_##name##_json(what, to)                           \
                                      : ce_write_##name##_text(what, to, colour);                  \
    }

#endif
