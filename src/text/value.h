/* SPDX-License-Identifier: GPL-3.0-or-later
 * A number with its unit, as people write it in options, settings and cells. */
#ifndef CE_TEXT_VALUE_H
#define CE_TEXT_VALUE_H

#include <chainend/base.h>

#include "base/quantity.h"

/* decimal is the mark of the numbers: '.' or ','. "10 K/min", "10.2mg", "371.2" (then assumed applies; NULL = a unit must stand there). On CE_OK
 * *value is in the internal unit of the dimension and *unit (may be NULL) what it was given in.
 * CE_E_SYNTAX: err says what is wrong with text, naming no option or cell. */
ce_status ce_parse_value(const char *text, char decimal, ce_dimension dimension,
                         const ce_unit *assumed, double *value, const ce_unit **unit,
                         ce_error *err);

/* "A:B" with A < B, each as above; a unit behind B alone counts for A too. */
ce_status ce_parse_range(const char *text, char decimal, ce_dimension dimension,
                         const ce_unit *assumed, double *low, double *high, ce_error *err);

#endif
