/* SPDX-License-Identifier: GPL-3.0-or-later
 * The Tg-Mn relation fitted to a series: parameters, intervals, diagnostics, comparison. */
#ifndef CHAINEND_FIT_H
#define CHAINEND_FIT_H

#include <chainend/base.h>

#include <stdbool.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef enum {
    CE_FLORY_FOX,
    CE_UEBERREITER_KANIG,
    CE_ODRISCOLL_SANAYEI,
    CE_OGAWA,
    CE_LOG_PLATEAU,
    CE_LOG_THREE,
    CE_RELATIONS
} ce_relation;
#define CE_MAX_PARAMETERS 6

/* "flory-fox", "ueberreiter-kanig", "odriscoll-sanayei", "ogawa", "log-plateau", "log-three". */
CE_API const char *ce_relation_name(ce_relation relation);
/* CE_RELATIONS when there is no such name. */
CE_API ce_relation ce_relation_find(const char *name);
/* "Tg = Tg_inf - K/Mn", its validity and its published source, one line each. */
CE_API const char *ce_relation_formula(ce_relation relation);
CE_API const char *ce_relation_validity(ce_relation relation);
CE_API const char *ce_relation_source(ce_relation relation);
CE_API size_t ce_relation_parameters(ce_relation relation); /* how many                        */
CE_API const char *ce_relation_parameter_name(ce_relation relation, size_t i); /* "Tg_inf"     */
CE_API const char *ce_relation_parameter_unit(ce_relation relation, size_t i); /* "K g/mol"    */

/* What the relation needs to know of a molar mass. */
typedef struct {
    double mn_g_mol;   /* number average, > 0                                             */
    double mw_g_mol;   /* mass average; NaN = not known (Ogawa refuses)                   */
    double chain_ends; /* per molecule; 2 for a linear chain                              */
} ce_molar;

/* One standard. Arrays are borrowed during the call. */
typedef struct {
    const char *name;
    ce_molar molar;
    double mn_u_g_mol;  /* standard uncertainty of the certificate; 0 = exact, NaN = not stated  */
    size_t n;           /* runs                                                                 */
    const double *tg_K; /* n readings                                                           */
    const double *tg_u_K; /* n stated standard uncertainties; NULL or NaN = not stated            */
} ce_standard;

typedef enum {
    CE_SCATTER_AUTO,     /* repeats where the standards have them, else stated, else residuals  */
    CE_SCATTER_REPEATS,  /* pooled within-sample variance                                       */
    CE_SCATTER_STATED,   /* the stated uncertainties of the readings                            */
    CE_SCATTER_RESIDUALS /* from the residuals of the fit to the single runs                    */
} ce_scatter;
CE_API const char *
ce_scatter_name(ce_scatter scatter); /* "auto", "repeats", "stated", "residuals" */
CE_API ce_scatter ce_scatter_find(const char *name, bool *found);

/* What to do when samples scatter about the curve by more than their uncertainties explain. */
typedef enum {
    CE_EXCESS_AUTO, /* test; in Mn when certificates have an uncertainty, else additive */
    CE_EXCESS_NONE,
    CE_EXCESS_ADDITIVE,      /* between-sample Tg scatter tau (tacticity, end groups, residue)   */
    CE_EXCESS_MULTIPLICATIVE /* larger relative Mn uncertainty r                                 */
} ce_excess;

typedef struct {
    ce_relation relation;   /* default CE_FLORY_FOX                                             */
    ce_scatter scatter;     /* default CE_SCATTER_AUTO                                          */
    ce_excess excess;       /* default CE_EXCESS_AUTO                                           */
    double level;           /* default 0.95                                                     */
    double mn_common_u_rel; /* relative standard uncertainty shared by all certificates; 0      */
    double tg_common_u_K;   /* standard uncertainty of the temperature scale, common to all; 0  */
    bool compare;           /* fit the other relations too; default true                        */
    size_t resamples;       /* whole-sample BCa resamples as a diagnostic; default 0            */
    uint64_t seed;          /* of the resampling; default 1                                     */
    size_t max_iterations;  /* default 200                                                      */
    double tolerance;       /* relative, of the solver; default 1e-12                           */
} ce_fit_options;
CE_API ce_fit_options ce_fit_options_default(void);

/* One parameter with its interval. */
typedef struct {
    double value, u;  /* standard uncertainty                                              */
    double nu;        /* effective degrees of freedom (Welch-Satterthwaite)                */
    double low, high; /* at the fit's level; may be infinite                               */
} ce_parameter;

/* One standard as it was fitted, with its diagnostics. */
typedef struct {
    char *name; /* owned by the fit                                             */
    ce_molar molar;
    double mn_u_g_mol;   /* as used                                                      */
    size_t n;            /* runs                                                         */
    double tg_K, tg_u_K; /* mean and its standard uncertainty                            */
    double fitted_K;     /* relation at the stated molar mass                            */
    double residual_K;   /* tg_K - fitted_K                                              */
    double weight;       /* 1/variance in Tg, effective, 1/K^2                           */
    double leverage;
    double influence; /* Cook's distance                                              */
    double deleted_t; /* studentised deleted residual                                 */
    double deleted_p; /* its two-sided p, Bonferroni-corrected                        */
    double shift_tg_inf_K, shift_k; /* of the first two parameters when left out           */
    unsigned flags; /* CE_POINT_* bits                                              */
} ce_fit_point;
enum { CE_POINT_OUTLYING = 1u << 0, CE_POINT_DOMINATES = 1u << 1, CE_POINT_LEVERAGE = 1u << 2 };
/* The text of one flag bit. */
CE_API const char *ce_point_flag_text(unsigned bit);

typedef struct {
    ce_relation relation;
    bool fitted;         /* false: the relation cannot be fitted to this series              */
    double aicc, weight; /* Akaike weight among those fitted                              */
    double tg_inf_K;
    double mid_mn_g_mol; /* Mn it gives for the Tg of the mid-range molar mass            */
    double residual_sd_K;
} ce_comparison;

typedef struct {
    ce_fit_options options; /* as used; scatter and excess resolved, never AUTO           */
    size_t p;               /* parameters                                                 */
    ce_parameter parameter[CE_MAX_PARAMETERS];
    double covariance[CE_MAX_PARAMETERS *
                      CE_MAX_PARAMETERS]; /* row-major p x p, without the common parts */
    size_t n_points, n_runs;
    ce_fit_point *point;     /* n_points, owned                                            */
    double run_sd_K, run_nu; /* s.d. of one run and its degrees of freedom (inf = stated)  */
    double chi2;             /* weighted sum of squares                                    */
    double dof;              /* n - p                                                      */
    double residual_sd_K;    /* of the means about the curve, unweighted                   */
    double excess_tau_K;     /* between-sample s.d. carried by an unknown too; 0 = none    */
    double excess_r;         /* relative Mn uncertainty used instead of the stated; 0 = none */
    double excess_nu;        /* its degrees of freedom; inf when none                      */
    double lack_of_fit_F, lack_of_fit_p; /* NaN without repeats                                */
    double curvature_F, curvature_p;     /* added curvature term in the weighted fit; NaN = none */
    double rcond; /* reciprocal condition number of the scaled Jacobian         */
    size_t iterations;
    size_t n_comparison;
    ce_comparison comparison[CE_RELATIONS];
    ce_messages warnings; /* plain words; severity CE_WARNING or CE_NOTE                */
} ce_fit;

/* ce_fit_relation - fit a Tg-Mn relation with errors in both variables.
 *   in   standard  n_standards of them, at least three distinct molar masses (two parameters)
 *        options   NULL = defaults
 *   out  fit       the caller's, to be released with ce_fit_free(); emptied on failure
 *   ret  CE_OK | CE_E_DOMAIN (Mn <= 0, uncertainty negative) | CE_E_NOFIT (too few samples, all Mn
 *        equal, rank) | CE_E_REFUSED | CE_E_NOMEM
 *   Sources: York et al., Am. J. Phys. 72 (2004) 367; see chainend-methods(7). */
CE_API ce_status ce_fit_relation(size_t n_standards, const ce_standard *standard,
                                 const ce_fit_options *options, ce_fit *fit, ce_error *err);
CE_API void ce_fit_free(ce_fit *fit);

/* Tg of the relation at a molar mass, and what is uncertain about it. */
typedef struct {
    double tg_K;
    double var_fit; /* variance of the curve there, K^2                                  */
    double var_rep; /* its part that comes from the run scatter (run_nu degrees)         */
    double dtg_dmn; /* slope, K/(g/mol)                                                  */
} ce_prediction;
/* mn_g_mol may be infinite: the asymptote. CE_OK or CE_E_DOMAIN. */
CE_API ce_status ce_fit_predict(const ce_fit *fit, const ce_molar *molar,
                                ce_prediction *prediction);
/* Effective degrees of freedom at a molar mass with extra variance var_extra (K^2) that has run_nu
 * degrees (Welch-Satterthwaite). */
CE_API double ce_fit_nu(const ce_fit *fit, const ce_prediction *prediction, double var_extra);

#ifdef __cplusplus
}
#endif
#endif
