/* SPDX-License-Identifier: GPL-3.0-or-later
 * The grammar of a header cell: "Name", "Name unit", "Name (unit)", "Name [unit]", "Name / unit".
 */
#ifndef CE_TEXT_HEADER_H
#define CE_TEXT_HEADER_H

#include "base/quantity.h"
#include "text/split.h"

#define CE_HEADER_NAME 160
#define CE_HEADER_UNIT 64

typedef struct {
    char name[CE_HEADER_NAME]; /* without the unit, trimmed, perhaps shortened              */
    char unit_text[CE_HEADER_UNIT];
    const ce_unit *unit; /* NULL when there is none or it is not known                  */
} ce_header;

/* Take a cell apart. Text in square brackets is a unit even when it is not known, in round ones
 * when it is known or looks like one ("(BTU/h)"); otherwise it stays part of the name. */
void ce_header_split(const char *text, size_t len, ce_header *header);
/* Is this cell of a row of units: a unit, bare or bracketed? A word in square brackets counts as
 * one that is not known (*unit NULL). */
bool ce_header_is_unit(ce_span cell, const ce_unit **unit);
/* Do two names mean the same column: compared without case, blanks, '_', '-' and '.'. */
bool ce_same_name(const char *a, const char *b);

#endif
