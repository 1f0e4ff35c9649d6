/* SPDX-License-Identifier: GPL-3.0-or-later
 * Numbers for reading: as many digits as the uncertainty warrants; and for machines: all of them.
 */
#ifndef CE_OUTPUT_NUMBER_H
#define CE_OUTPUT_NUMBER_H

#include <stddef.h>
#include <stdio.h>

/* Room that every function below fits into. */
#define CE_NUMBER_ROOM 40

/* What stands for a value that does not exist. */
#define CE_NO_VALUE "-"

/* Decimals that show u with two significant digits (GUM 7.2.6); 0..6; 2 when u is not positive. */
int ce_decimals(double u);
/* x with that many decimals; CE_NO_VALUE when not finite. Returns out. */
char *ce_fixed(char out[CE_NUMBER_ROOM], double x, int decimals);
/* x with n significant digits, never in exponent notation between 1e-4 and 1e9. */
char *ce_significant(char out[CE_NUMBER_ROOM], double x, int n);
/* A temperature in kelvin as degrees Celsius, to the decimals of its uncertainty u (K). */
char *ce_celsius(char out[CE_NUMBER_ROOM], double kelvin, double u);
/* A molar mass in g/mol as kg/mol, three significant digits (two decimals at most for small ones).
 */
char *ce_kg_mol(char out[CE_NUMBER_ROOM], double g_mol);
/* The shortest decimal that reads back as x; empty when not finite. */
char *ce_exact(char out[CE_NUMBER_ROOM], double x);

#endif
