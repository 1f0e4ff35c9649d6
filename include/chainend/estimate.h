/* SPDX-License-Identifier: GPL-3.0-or-later
 * Mn from a Tg, Tg from an Mn, with what can be said and what cannot. */
#ifndef CHAINEND_ESTIMATE_H
#define CHAINEND_ESTIMATE_H

#include <chainend/base.h>
#include <chainend/fit.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef enum {
    CE_TWO_SIDED,     /* "two-sided": finite limits on both sides                       */
    CE_LOWER_ONLY,    /* "lower-only": the reading cannot be told from the plateau      */
    CE_ABOVE_PLATEAU, /* "above-plateau": no finite Mn explains the reading             */
    CE_UNDETERMINED   /* "undetermined": the slope is not significant                   */
} ce_bound;
CE_API const char *ce_bound_name(ce_bound bound);

/* One unknown: n readings of its Tg. */
typedef struct {
    size_t n;
    const double *tg_K;
    double tg_u_K;  /* stated standard uncertainty of one reading; NaN = as the standards' runs */
    size_t mean_of; /* each reading is the mean of so many runs (default 1)                     */
    double mw_over_mn; /* for relations in Mn and Mw; NaN = 1 */
    double chain_ends; /* default 2 */
} ce_unknown;

#define CE_MAX_SHARES 8
typedef struct {
    const char *source; /* "reading", "repeatability", "certificates", ... static */
    double share;       /* of the variance, 0..1; they add to 1                   */
} ce_share;

typedef struct {
    double tg_K, u_K; /* mean reading and its standard uncertainty                     */
    double mn_g_mol;  /* point estimate; NaN above the plateau                         */
    double low_g_mol, high_g_mol; /* limits at level; NaN = none on that side                  */
    ce_bound bound;
    bool disjoint;       /* slope not significant: the set is everything but (low, high)   */
    double level, t, nu; /* coverage, Student factor, effective degrees of freedom        */
    size_t n_shares;
    ce_share share[CE_MAX_SHARES];
    bool below_standards, above_standards; /* extrapolated                                     */
} ce_estimate;

/* ce_estimate_mn - the set of molar masses a Tg is compatible with.
 *   in   fit, unknown, level (0 = the fit's)
 *   ret  CE_OK | CE_E_ARG | CE_E_DOMAIN | CE_E_NOMEM
 *   Source: Fieller, J. R. Stat. Soc. B 16 (1954) 175; classification in chainend-methods(7). */
CE_API ce_status ce_estimate_mn(const ce_fit *fit, const ce_unknown *unknown, double level,
                                ce_estimate *estimate, ce_error *err);

typedef struct {
    double mn_g_mol, tg_K;
    double mean_low_K, mean_high_K; /* confidence interval of the curve                        */
    double low_K, high_K;           /* prediction interval of a new sample measured runs times */
    double u_mean_K, u_K, nu_mean, nu, level;
} ce_tg_estimate;
/* Tg expected at a molar mass; mn_u_rel is the relative standard uncertainty of that Mn (0 =
 * exact), runs >= 1. */
CE_API ce_status ce_estimate_tg(const ce_fit *fit, const ce_molar *molar, double mn_u_rel,
                                size_t runs, double level, ce_tg_estimate *estimate, ce_error *err);

/* Highest reading with a finite upper limit, for unknowns of runs runs, and the Mn there. */
CE_API ce_status ce_ceiling(const ce_fit *fit, size_t runs, double level, double *tg_K,
                            double *mn_g_mol);

#ifdef __cplusplus
}
#endif
#endif
