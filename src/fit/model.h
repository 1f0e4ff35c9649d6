/* SPDX-License-Identifier: GPL-3.0-or-later
 * A Tg-Mn curve as the fitter sees it: a function of z = 1/Mn with its derivatives. */
#ifndef CE_FIT_MODEL_H
#define CE_FIT_MODEL_H

#include <chainend/fit.h>

#define CE_MAX_KINKS  2
#define CE_MAX_STARTS 6

/* What the molecule is like, apart from its size. */
typedef struct {
    double ends;       /* chain ends per molecule                                        */
    double dispersity; /* Mw/Mn; NaN = not known                                         */
} ce_chain;

/* Value and derivatives of the curve at one place. */
typedef struct {
    double value;     /* K                                                              */
    double slope;     /* by z                                                           */
    double curvature; /* second derivative by z                                         */
    double gradient[CE_MAX_PARAMETERS];
} ce_jet;

/* One sample (or one run) in the fit. The true z is not known: the stated one is normal about it.
 */
typedef struct {
    double z, sd_z;  /* stated 1/Mn and its standard deviation, mol/g                  */
    double y, var_y; /* Tg, K; its variance, K^2, > 0                                  */
    double count;    /* how often it counts: 1; 0 = left out; resampling: any whole number */
    ce_chain chain;
} ce_eiv_point;

typedef struct ce_model ce_model;
struct ce_model {
    size_t p;
    bool linear;   /* in the parameters, for a given z                                   */
    bool positive; /* defined for z > 0 only (z = 0: the asymptote)                      */
    void (*eval)(const ce_model *self, const double *theta, double z, const ce_chain *chain,
                 ce_jet *jet);
    /* Places in z, rising, where the slope jumps; gradient[i*p + j] of place i by parameter j.
     * NULL: smooth. */
    size_t (*kinks)(const double *theta, double z[CE_MAX_KINKS],
                    double gradient[CE_MAX_KINKS * CE_MAX_PARAMETERS]);
    /* Start values, best first, at most CE_MAX_STARTS; 0 = none can be given. */
    size_t (*starts)(const ce_model *self, size_t n, const ce_eiv_point *point,
                     double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS]);
    /* The variable the relation is plotted in; it also tells samples apart. */
    double (*abscissa)(double z, const ce_chain *chain);
    const ce_model *base; /* of a model that adds a term to another one                     */
    double scale;         /* of that term                                                   */
};

const ce_model *ce_relation_model(ce_relation relation);
/* base + theta[p] (scale z)^2: does the data ask for more curvature than the relation has? */
ce_model ce_model_with_curvature(const ce_model *base, double scale);
ce_chain ce_chain_of(const ce_molar *molar);
/* Root of the model in z for a Tg; NaN when there is none. */
double ce_model_root(const ce_model *model, const double *theta, double tg_K,
                     const ce_chain *chain);

#endif
