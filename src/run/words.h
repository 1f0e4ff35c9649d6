/* SPDX-License-Identifier: GPL-3.0-or-later
 * What the words in headers and preambles mean, in English, German, French and Spanish. */
#ifndef CE_RUN_WORDS_H
#define CE_RUN_WORDS_H

#include <chainend/run.h>

#include "base/quantity.h"

typedef enum {
    CE_MEANS_UNKNOWN,
    CE_MEANS_TIME,
    CE_MEANS_TEMPERATURE, /* of the sample                                        */
    CE_MEANS_PROGRAMME,   /* temperature of the programme, furnace or reference   */
    CE_MEANS_HEAT_FLOW,
    CE_MEANS_HEAT_CAPACITY,
    CE_MEANS_SEGMENT, /* number of the programme segment                      */
    CE_MEANS_OTHER    /* known, and of no use here                            */
} ce_meaning;

/* The role a column name and its unit (NULL = none or unknown) give; unit decides where the words
 * leave it open ("t", "temps"). A recognised name whose unit is of another dimension is UNKNOWN. */
ce_meaning ce_meaning_of(const char *name, const ce_unit *unit);
/* May a unit stand with a role at all. */
bool ce_meaning_fits(ce_meaning role, const ce_unit *unit);
const char *ce_meaning_name(ce_meaning role);

/* What a text says about the direction of heat flow: "exo up", "endo-down", "exo ↑", "endotherm
 * nach oben" ...; CE_SIGN_AUTO when nothing. clean, room long, gets the text without those words
 * and without brackets that have become empty; it may be NULL. */
ce_sign ce_sign_of(const char *text, char *clean, size_t room);

/* Preamble keys of interest. */
typedef enum { CE_KEY_OTHER, CE_KEY_MASS, CE_KEY_RATE, CE_KEY_SAMPLE, CE_KEY_DIRECTION } ce_key;
ce_key ce_key_of(const char *key);

/* Lower case without accents, blanks and marks: "Température (°C)" is "temperaturec". Returns its
 * length, never more than room - 1. */
size_t ce_fold_word(const char *text, char *out, size_t room);
/* Does a header text speak of heating (+1), cooling (-1) or neither (0). */
int ce_direction_of(const char *text);

#endif
