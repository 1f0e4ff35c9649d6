/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/simulate.h>

#include <strings.h>

/* Hodge's tables and the papers behind them, remembered, not re-read. What speaks for the pairs of
 * ln A and h: each gives tau = 100 s at the known glass transition of its material. */
#define FROM_MEMORY                                                                                \
    "from memory; ln A and h agree with the known Tg (tau = 100 s there), x and beta unverified"
#define HODGE "after Hodge, J. Non-Cryst. Solids 169 (1994) 211 and papers cited there"

/* clang-format off */
static const ce_glass_set sets[] = {
    {"pvac",   "poly(vinyl acetate)",         -224.5,  71000.0, 0.35, 0.57, HODGE, FROM_MEMORY},
    {"ps",     "polystyrene",                 -211.2,  80000.0, 0.43, 0.74, HODGE, FROM_MEMORY},
    {"pmma",   "poly(methyl methacrylate)",   -357.8, 138000.0, 0.19, 0.34, HODGE, FROM_MEMORY},
    {"pc",     "polycarbonate of bisphenol A",-355.8, 150000.0, 0.19, 0.54, HODGE, FROM_MEMORY},
    {"pvc",    "poly(vinyl chloride)",        -619.0, 225000.0, 0.10, 0.23, HODGE, FROM_MEMORY},
    {"b2o3",   "boron trioxide",               -75.6,  45000.0, 0.40, 0.65,
     "after DeBolt et al., J. Am. Ceram. Soc. 59 (1976) 16", FROM_MEMORY},
    {"as2se3", "arsenic triselenide",          -85.5,  40900.0, 0.49, 0.67, HODGE, FROM_MEMORY},
};
/* clang-format on */

const ce_glass_set *ce_glass_sets(size_t *n)
{
    *n = sizeof sets / sizeof *sets;
    return sets;
}

const ce_glass_set *ce_glass_set_find(const char *name)
{
    for (size_t i = 0; i < sizeof sets / sizeof *sets; i++)
        if (strcasecmp(name, sets[i].name) == 0) return &sets[i];
    return NULL;
}
