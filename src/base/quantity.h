/* SPDX-License-Identifier: GPL-3.0-or-later
 * Units as they stand in files and options, and the one internal unit of each dimension. */
#ifndef CE_BASE_QUANTITY_H
#define CE_BASE_QUANTITY_H

#include <stdbool.h>
#include <stddef.h>

/* Offset of the Celsius scale, K: exact, by the definition of the degree Celsius (SI Brochure,
 * from memory). */
#define CE_ZERO_CELSIUS_K 273.15
/* Molar gas constant, J/(mol K): exact since 2019 (CODATA 2018, from memory). */
#define CE_GAS_CONSTANT 8.31446261815324

static inline double ce_K_from_degC(double t)
{
    return t + CE_ZERO_CELSIUS_K;
}
static inline double ce_degC_from_K(double t)
{
    return t - CE_ZERO_CELSIUS_K;
}

/* Dimension, and the unit that values of it have inside the library. */
typedef enum {
    CE_DIM_NONE,           /* -       */
    CE_DIM_TIME,           /* s       */
    CE_DIM_TEMPERATURE,    /* K       */
    CE_DIM_RATE,           /* K/min   */
    CE_DIM_POWER,          /* mW      */
    CE_DIM_SPECIFIC_POWER, /* W/g     */
    CE_DIM_HEAT_CAPACITY,  /* J/(g K) */
    CE_DIM_MASS,           /* g       */
    CE_DIM_MOLAR_MASS,     /* g/mol   */
    CE_DIM_FRACTION        /* 1       */
} ce_dimension;

/* internal value = (value in this unit) * factor + offset, then for temperatures in degF see
 * ce_to_internal(), which keeps the order of operations that is exact for whole degrees. */
typedef struct {
    const char *name; /* as we print it, UTF-8: "°C", "mW", "J/(g K)" */
    ce_dimension dimension;
    double factor, offset;
} ce_unit;

/* The unit a text spells, case and blanks forgiven where no other unit is meant ("[k]" is kelvin,
 * but "MW" is not milliwatt); text is UTF-8, not terminated. NULL when unknown. Static storage. */
const ce_unit *ce_unit_find(const char *text, size_t len);
/* A value given in a unit, in the internal unit of its dimension; and back. */
double ce_to_internal(const ce_unit *unit, double value);
double ce_from_internal(const ce_unit *unit, double value);
/* What a dimension is called in messages ("temperature", "heat flow per mass" ...). */
const char *ce_dimension_name(ce_dimension dimension);

#endif
