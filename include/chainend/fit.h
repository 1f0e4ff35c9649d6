/* SPDX-License-Identifier: GPL-3.0-or-later
 * The Tg-Mn relation fitted to a series: parameters, intervals, diagnostics, comparison. */
#ifndef CHAINEND_FIT_H
#define CHAINEND_FIT_H

#include <chainend/base.h>
#include <chainend/series.h>

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
/* Linear in its parameters: intervals by Student t; else by profile likelihood. */
CE_API bool ce_relation_linear(ce_relation relation);
CE_API size_t ce_relation_parameters(ce_relation relation); /* how many                        */
CE_API const char *ce_relation_parameter_name(ce_relation relation, size_t i); /* "Tg_inf"     */
CE_API const char *ce_relation_parameter_unit(ce_relation relation, size_t i); /* "K g/mol"    */
/* The variable in which the relation is plotted, e.g. "1/Mn", and its unit, e.g. "mol/g". */
CE_API const char *ce_relation_abscissa_name(ce_relation relation);
CE_API const char *ce_relation_abscissa_unit(ce_relation relation);

/* What the relation needs to know of a molar mass. */
typedef struct {
    double mn_g_mol;   /* number average, > 0                                             */
    double mw_g_mol;   /* mass average; NaN = not known (Ogawa refuses)                   */
    double chain_ends; /* per molecule; 2 for a linear chain, 0 for a ring                */
} ce_molar;

/* ce_relation_tg - Tg, K, of a relation with parameters theta (ce_relation_parameters() of them).
 *   mn_g_mol may be infinite: the asymptote. NaN where the relation is not defined (Ogawa without
 *   Mw, Mn <= 0). */
CE_API double ce_relation_tg(ce_relation relation, const double *theta, const ce_molar *molar);
/* The value of the plotted variable (ce_relation_abscissa_name()) at a molar mass. */
CE_API double ce_relation_abscissa(ce_relation relation, const ce_molar *molar);
/* ce_relation_mn - the molar mass at which the relation has this Tg.
 *   in   like       dispersity (mw/mn of it; NaN mw = dispersity not known) and chain ends of the
 *                   molecule; its molar mass itself does not matter
 *   out  mn_g_mol   g/mol; infinite exactly at the asymptote; NaN unless CE_OK
 *   ret  CE_OK | CE_E_ARG | CE_E_DOMAIN (no molar mass has this Tg: beyond the asymptote, a
 * relation that does not depend on the molar mass, Ogawa without Mw) Bracketed root in 1/Mn to
 * rounding, so that Tg -> Mn -> Tg returns. */
CE_API ce_status ce_relation_mn(ce_relation relation, const double *theta, double tg_K,
                                const ce_molar *like, double *mn_g_mol);

/* One standard. Arrays are borrowed during the call. */
typedef struct {
    const char *name;
    ce_molar molar;
    double mn_u_g_mol;  /* standard uncertainty of the certificate; 0 = exact, NaN = not stated  */
    size_t n;           /* runs                                                                 */
    const double *tg_K; /* n readings                                                           */
    const double *tg_u_K; /* n stated standard uncertainties; NULL or NaN = not stated            */
    double rate_decades;  /* mean log10(rate/reference) the readings were reduced by; 0 = not     */
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
CE_API const char *
ce_excess_name(ce_excess excess); /* "auto", "none", "additive", "multiplicative" */
CE_API ce_excess ce_excess_find(const char *name, bool *found);

typedef struct {
    ce_relation relation;   /* default CE_FLORY_FOX                                             */
    ce_scatter scatter;     /* default CE_SCATTER_AUTO                                          */
    ce_excess excess;       /* default CE_EXCESS_AUTO                                           */
    double level;           /* default 0.95                                                     */
    double mn_common_u_rel; /* relative standard uncertainty shared by all certificates; 0      */
    double tg_common_u_K;   /* standard uncertainty of the temperature scale, common to all; 0  */
    double rate_slope_u_K;  /* of the slope per decade of rate the readings were reduced by; 0  */
    bool compare;           /* fit the other relations too; default true                        */
    bool diagnose; /* leave-one-out, robust fits, curvature; default true (simulations: false)  */
    size_t resamples;      /* whole-sample BCa resamples as a diagnostic; default 0            */
    uint64_t seed;         /* of the resampling; default 1                                     */
    size_t max_iterations; /* default 200                                                      */
    double tolerance;      /* relative change at which the solver hands over to a polish to
                               rounding; default 1e-7                                        */
} ce_fit_options;
CE_API ce_fit_options ce_fit_options_default(void);

/* One parameter with its interval: Student t for relations linear in their parameters, profile
 * likelihood for the others. */
typedef struct {
    double value, u;  /* combined standard uncertainty: covariance and common parts        */
    double u_common;  /* its part from what is common to all standards (options); 0        */
    double nu;        /* effective degrees of freedom (Welch-Satterthwaite)                */
    double low, high; /* at the fit's level; may be infinite                               */
} ce_parameter;

/* One standard as it was fitted, with its diagnostics. */
typedef struct {
    char *name; /* owned by the fit                                             */
    ce_molar molar;
    double mn_u_g_mol;   /* as used                                                      */
    double mn_u_stated;  /* as stated, g/mol; NaN = not stated                           */
    double mn_adjusted;  /* most likely true Mn given the fit, g/mol                     */
    size_t n, first_run; /* runs; the first of them in the fit's run array               */
    double tg_K, tg_u_K; /* mean and its standard uncertainty                            */
    double fitted_K;     /* relation at the stated molar mass                            */
    double residual_K;   /* tg_K - fitted_K                                              */
    double weight;       /* 1/variance in Tg, effective, 1/K^2                           */
    double leverage;     /* 0..1; they add to p                               */
    double influence;    /* Cook's distance                                   */
    double deleted_t;    /* studentised deleted residual                      */
    double deleted_p;    /* its two-sided p, Bonferroni-corrected             */
    double shift_tg_inf_K, shift_k;       /* of the first two parameters when left out         */
    double huber_weight, bisquare_weight; /* 0..1 in the robust fits                     */
    unsigned flags;                       /* CE_POINT_* bits                             */
} ce_fit_point;
/* One run. With scatter "residuals" the residual is about the curve, else about the sample mean. */
typedef struct {
    size_t point;        /* which standard                                               */
    double tg_K, tg_u_K; /* reading; stated standard uncertainty, NaN = not stated       */
    double residual_K;
    double leverage;
    double deleted_t; /* NaN when a single run of its sample tells nothing            */
    double deleted_p; /* Bonferroni-corrected over all runs                           */
    unsigned flags;   /* CE_POINT_OUTLYING                                            */
} ce_fit_run;
enum { CE_POINT_OUTLYING = 1u << 0, CE_POINT_DOMINATES = 1u << 1, CE_POINT_LEVERAGE = 1u << 2 };
/* The text of one flag bit. */
CE_API const char *ce_point_flag_text(unsigned bit);

typedef struct {
    ce_relation relation;
    bool fitted;         /* false: the relation cannot be fitted to this series              */
    double aicc, weight; /* Akaike weight among those fitted                              */
    bool plausible;      /* in the smallest set whose weights add to 0.95, or chosen by the user */
    double chi2;         /* weighted sum of squares                                       */
    double tg_inf_K;
    double mid_mn_g_mol; /* Mn it gives for the Tg of the mid-range molar mass            */
    double residual_sd_K;
} ce_comparison;

/* Whole-sample resampling of one parameter (a diagnostic: it covers less than it says when the
 * standards are few). */
typedef struct {
    double sd, bias;                        /* of the resampled estimates                        */
    double percentile_low, percentile_high; /* at the fit's level                                */
    double bca_low, bca_high; /* Efron, J. Am. Stat. Assoc. 82 (1987) 171 (from memory) */
} ce_resampled;

/* A fit holds everything an estimate or a saved calibration needs; apart from the two arrays, the
 * names in them and the warnings it is plain data. A fit read back from a file needs for
 * ce_fit_predict() and its kin: options, p, parameter[].value, the three covariances, the three
 * common shifts, run_sd_K, run_nu, excess_*. */
typedef struct {
    ce_fit_options options; /* as used; scatter and excess resolved, never AUTO           */
    size_t p;               /* parameters                                                 */
    ce_parameter parameter[CE_MAX_PARAMETERS];
    /* Row-major p x p, without the common parts; = run part + excess part + certificate part. */
    double covariance[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
    double covariance_run[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS]; /* run scatter: run_nu        */
    double covariance_excess[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS]; /* found excess: excess_nu   */
    /* Change of the parameters for one standard uncertainty of what is common to all standards. */
    double mn_common_shift[CE_MAX_PARAMETERS];
    double tg_common_shift[CE_MAX_PARAMETERS];
    double rate_common_shift[CE_MAX_PARAMETERS];
    size_t n_points, n_runs;
    ce_fit_point *point;         /* n_points, owned                                            */
    ce_fit_run *run;             /* n_runs, owned, grouped by point                            */
    double run_sd_K, run_nu;     /* s.d. of one run and its degrees of freedom (inf = stated)  */
    double chi2;                 /* weighted sum of squares before any excess was added        */
    double chi2_p;               /* of chi2 with dof degrees, the variances taken as known     */
    double dof;                  /* n - p                                                      */
    double residual_sd_K;        /* sqrt(residual sum of squares/dof), unweighted: of the means
                                    about the curve; of the runs with scatter "residuals"      */
    double log_likelihood, aicc; /* errors-in-variables; residuals: of the runs            */
    double excess_tau_K; /* between-sample s.d. carried by an unknown too; 0 = none        */
    double excess_r;     /* relative Mn uncertainty used instead of the stated; 0 = none   */
    double excess_nu;    /* its degrees of freedom; inf when none                          */
    double excess_p;     /* p of the F test for excess, dof and excess_p_nu degrees of freedom */
    double excess_p_nu;  /* of the variances, as uncertain as the run scatter makes them   */
    double lack_of_fit_F, lack_of_fit_p;       /* NaN without repeats                  */
    double lack_of_fit_dof1, lack_of_fit_dof2; /* see ce_fit_lack_of_fit_meaning()     */
    double curvature_F, curvature_p;           /* added curvature term in the weighted fit; NaN */
    double bartlett_p, levene_p;               /* equal run scatter in all samples; NaN */
    double
        slope_significance; /* g = (t u/value)^2 of the second parameter; >= 1: not significant */
    double rcond;           /* reciprocal condition number of the scaled Jacobian      */
    size_t iterations;
    double huber[CE_MAX_PARAMETERS], bisquare[CE_MAX_PARAMETERS]; /* robust fits; NaN = none */
    double huber_scale, bisquare_scale; /* robust s.d.: of e/sqrt(V), or K for "residuals"  */
    size_t n_resampled;                 /* resamples that could be fitted; 0 = not asked    */
    ce_resampled resampled[CE_MAX_PARAMETERS];
    size_t n_comparison;
    ce_comparison comparison[CE_RELATIONS];
    double mid_mn_g_mol; /* geometric middle of the standards                              */
    double spread_tg_inf_low_K, spread_tg_inf_high_K; /* over the plausible relations; NaN  */
    double spread_mid_low_g_mol, spread_mid_high_g_mol;
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
/* ce_fit_reduce_rates - bring every Tg of an evaluated series to series->reduce_to_K_min with one
 * slope per decade of rate fitted within its samples (ce_rate_slope_fit()), all roles together. The
 * rows and samples then hold the reduced values, the rows what was taken off.
 *   out  slope   what was fitted; may be NULL
 *   ret  CE_OK (also when all rows are at that rate already: nothing is changed, the slope's value
 *        is NaN) | as ce_rate_slope_fit() | CE_E_REFUSED (a used row has no rate) */
struct ce_rate_slope;
CE_API ce_status ce_fit_reduce_rates(ce_series *series, struct ce_rate_slope *slope, ce_error *err);
/* The same for the used standards of an evaluated series. When its rates were reduced the slope's
 * uncertainty is taken from it, whatever the options say. */
CE_API ce_status ce_fit_series(const ce_series *series, const ce_fit_options *options, ce_fit *fit,
                               ce_error *err);
/* Releases what the fit owns and empties it. NULL allowed; a fit set to {0} too. */
CE_API void ce_fit_free(ce_fit *fit);
/* What the lack-of-fit test of this fit tests, in plain words: with uncertain Mn it is not
 * curvature.
 */
CE_API const char *ce_fit_lack_of_fit_meaning(const ce_fit *fit);

/* Tg of the relation at a molar mass, and what is uncertain about it. */
typedef struct {
    double tg_K;
    double var_fit;    /* variance of the curve there, K^2, without the common parts           */
    double var_rep;    /* its part that comes from the run scatter (run_nu degrees)            */
    double var_excess; /* its part that comes from found excess scatter (excess_nu degrees)    */
    double dtg_dmn;    /* slope, K/(g/mol); 0 at infinity                                      */
    double dtg_dz;     /* slope in z = 1/Mn, K g/mol; finite at infinity for Flory-Fox, Ogawa and
                          Ueberreiter-Kanig, infinite for O'Driscoll-Sanayei                   */
    double gradient[CE_MAX_PARAMETERS]; /* of Tg by the parameters                             */
    double common_mn_K, common_tg_K, common_rate_K; /* signed shift for one standard uncertainty
                          of what is common to all standards, at a given Mn                    */
} ce_prediction;
/* mn_g_mol may be infinite: the asymptote. CE_OK or CE_E_DOMAIN. */
CE_API ce_status ce_fit_predict(const ce_fit *fit, const ce_molar *molar,
                                ce_prediction *prediction);
/* Molar mass of a Tg by the fitted relation: ce_relation_mn() with the fit's parameters. */
CE_API ce_status ce_fit_mn(const ce_fit *fit, double tg_K, const ce_molar *like, double *mn_g_mol);
/* Effective degrees of freedom at a molar mass with extra variance var_extra (K^2) that has run_nu
 * degrees (Welch-Satterthwaite). With prediction NULL: of the extra variance alone. */
CE_API double ce_fit_nu(const ce_fit *fit, const ce_prediction *prediction, double var_extra);
/* The same with extra variances of three kinds: run scatter (run_nu), excess scatter of the unknown
 * itself (excess_nu: excess_tau_K squared when the fit found an additive excess), exactly known. */
CE_API double ce_fit_nu_parts(const ce_fit *fit, const ce_prediction *prediction, double var_run,
                              double var_excess, double var_exact);

/* Bands at a molar mass: of the curve, of the mean of runs of a new sample whose Mn has the
 * relative standard uncertainty mn_u_rel, and of the whole curve at once
 * (Working-Hotelling/Scheffe, sqrt(p F)). The common parts are not in them. */
typedef struct {
    double tg_K;
    double u_mean_K, nu_mean, mean_low_K, mean_high_K;
    double u_new_K, nu_new, new_low_K, new_high_K;
    double curve_low_K, curve_high_K;
} ce_band;
/* runs >= 1, 0 <= mn_u_rel < 1, 0 < level < 1 (0 = the fit's). CE_OK, CE_E_ARG or CE_E_DOMAIN. */
CE_API ce_status ce_fit_band(const ce_fit *fit, const ce_molar *molar, double mn_u_rel, size_t runs,
                             double level, ce_band *band);

/* Heating rate: one slope per decade common to all samples, fitted within the samples. */
typedef struct ce_rate_slope {
    double slope_K_decade, u_K_decade, nu;
    double reference_K_min;
    double run_sd_K;               /* about the parallel lines                                   */
    double parallel_F, parallel_p; /* is one slope enough? NaN = cannot be tested              */
    size_t n_runs, n_samples;      /* that carry information: samples at two rates or more       */
} ce_rate_slope;
/* ce_rate_slope_fit - slope of Tg against log10 of the heating rate.
 *   in   n runs: sample[i] any label of the run's sample, tg_K[i], rate_K_min[i] > 0
 *        reference_K_min > 0, the rate to reduce to
 *   ret  CE_OK | CE_E_DOMAIN | CE_E_NOFIT (no sample at two rates; nothing left to judge the
 * scatter) | CE_E_NOMEM Analysis of covariance with a common slope; see chainend-methods(7). */
CE_API ce_status ce_rate_slope_fit(size_t n, const size_t *sample, const double *tg_K,
                                   const double *rate_K_min, double reference_K_min,
                                   ce_rate_slope *slope, ce_error *err);
/* Tg reduced to the reference rate; decades (may be NULL): log10(rate/reference). */
CE_API double ce_rate_reduce(const ce_rate_slope *slope, double tg_K, double rate_K_min,
                             double *decades);

#ifdef __cplusplus
}
#endif
#endif
