/* SPDX-License-Identifier: GPL-3.0-or-later
 * Mn from a Tg, Tg from an Mn, with what can be said and what cannot; whether a calibration still
 * holds; what would narrow its answers. Methods and sources: chainend-methods(7).
 *
 * Everything here reads a ce_fit and changes nothing: functions may run in parallel on one fit. A
 * fit read back from a record gives the same digits as the fit itself. */
#ifndef CHAINEND_ESTIMATE_H
#define CHAINEND_ESTIMATE_H

#include <chainend/base.h>
#include <chainend/fit.h>

#ifdef __cplusplus
extern "C" {
#endif

/* ---- Mn from Tg ------------------------------------------------------------------------------ */

/* What the set of molar masses looks like. With a falling relation (negative slope parameter) the
 * same words hold with the plateau approached from above. */
typedef enum {
    CE_TWO_SIDED,     /* "two-sided": finite limits on both sides                       */
    CE_LOWER_ONLY,    /* "lower-only": the reading cannot be told from the plateau      */
    CE_ABOVE_PLATEAU, /* "above-plateau": no finite Mn explains the reading             */
    CE_UNDETERMINED   /* "undetermined": the slope is not significant                   */
} ce_bound;
CE_API const char *ce_bound_name(ce_bound bound);

/* One unknown: n readings of its Tg, all of the same sample. Start from ce_unknown_default(). */
typedef struct {
    size_t n;            /* readings, >= 1                                                       */
    const double *tg_K;  /* n of them, borrowed                                                  */
    double tg_u_K;       /* stated standard uncertainty of one reading (all of it: repeatability
                            included; 0 = exact); NaN = as the runs of the standards             */
    size_t mean_of;      /* each reading is the mean of so many runs (default 1)                 */
    double mw_over_mn;   /* dispersity, for relations in Mn and Mw; NaN = 1 (default NaN)        */
    double chain_ends;   /* per molecule (default 2)                                             */
    double reading_u_K;  /* what the evaluation of one run reports (noise and windows); raises the
                            scatter of a run where it is larger and is named in the budget;
                            NaN = not known (default)                                            */
    double rate_decades; /* log10(rate/reference) the readings were reduced by (default 0)       */
    bool other_instrument;  /* temperature scale not that of the standards: their common
                               uncertainty counts (default false: it cancels)                    */
    bool certificate_scale; /* Mn wanted on the scale of the certificates: what they have in common
                               does not count (default false)                                   */
} ce_unknown;
CE_API ce_unknown ce_unknown_default(void);

/* Parts of the variance of an answer, as they appear in a budget. */
typedef enum {
    CE_SHARE_READING,       /* noise and windows of the unknown's own runs                  */
    CE_SHARE_REPEATABILITY, /* the rest of their run-to-run scatter                         */
    CE_SHARE_SAMPLE,        /* between-sample scatter the fit found, carried by the unknown */
    CE_SHARE_TEMPERATURE,   /* temperature scale                                            */
    CE_SHARE_RATE,          /* slope used to reduce readings to one heating rate            */
    CE_SHARE_CERTIFICATES,  /* certificates of the standards                                */
    CE_SHARE_STANDARDS,     /* between-sample scatter of the standards                      */
    CE_SHARE_FIT,           /* run scatter of the standards                                 */
    CE_SHARE_COMMON_MN,     /* what all certificates have in common                         */
    CE_SHARES
} ce_share_source;
/* "reading", "repeatability", "between samples", "temperature scale", "heating rate",
 * "certificates", "standards' samples", "standards' runs", "common Mn scale". */
CE_API const char *ce_share_name(ce_share_source source);

#define CE_MAX_SHARES 9
typedef struct {
    const char *source; /* ce_share_name(); static                                */
    double share;       /* of the variance in Tg at the estimate, 0..1; they add to 1 */
} ce_share;

/* Doubts about an estimate. */
enum {
    CE_EST_BELOW_STANDARDS = 1u << 0, /* extrapolated below the smallest standard               */
    CE_EST_ABOVE_STANDARDS = 1u << 1, /* extrapolated above the largest standard                */
    CE_EST_HIGH_ABSURD = 1u << 2,     /* upper limit beyond cap_g_mol: show "> cap"             */
    CE_EST_SCATTERED = 1u << 3,       /* readings scatter more than the standards' runs: own scatter
                                         used, see ce_estimate.own_sd_K                              */
    CE_EST_TOO_QUIET = 1u << 4, /* readings scatter less than the standards' runs can: not pooled */
    CE_EST_FALLING = 1u << 5,   /* the relation falls with Mn: not a chain-end effect          */
    CE_EST_CURVE_EXTENDED = 1u << 6 /* a limit lies outside the standards                       */
};
/* One plain sentence for one bit; "" for anything else. */
CE_API const char *ce_estimate_flag_text(unsigned bit);

typedef struct {
    double tg_K, u_K; /* mean reading; its standard uncertainty, between-sample scatter included */
    double mn_g_mol;  /* point estimate; NaN at and above the plateau                            */
    double low_g_mol, high_g_mol; /* limits at level; NaN = none on that side                    */
    ce_bound bound;
    bool disjoint;       /* slope not significant: the set is everything but (low, high)         */
    double level, t, nu; /* coverage, Student factor, effective degrees of freedom               */
    double g;            /* Fieller's g: the slope is significant iff g < 1                      */
    double u_log;        /* relative standard uncertainty of Mn, first order: for budgets only; NaN
                            without estimate                                                     */
    size_t n_shares;
    ce_share share[CE_MAX_SHARES]; /* largest first                                              */
    bool below_standards, above_standards; /* extrapolated                                       */
    unsigned flags;          /* CE_EST_*                                                   */
    double cap_g_mol;        /* ten times the largest standard: no limit above it means much */
    double run_sd_K, run_nu; /* scatter of one run as used, and its degrees of freedom     */
    double own_sd_K;         /* scatter of one run from the readings alone; NaN when n < 2 */
    bool pooled;             /* the two were pooled                                        */
} ce_estimate;

/* ce_estimate_mn - the set of molar masses a Tg is compatible with.
 *   in   fit, unknown (note 1), level (0 = the fit's)
 *   out  estimate   zeroed unless CE_OK
 *   ret  CE_OK | CE_E_ARG (no reading, not finite, level, dispersity) | CE_E_DOMAIN (reading below
 *        0 K or below anything the relation can give; chain_ends 0: no relation left) | CE_E_NOMEM
 *   1) Scatter of one run, with nu_w degrees: the standards' s_w; with n >= 2 readings the two
 *      scatters are pooled, s^2 = (nu_w s_w^2 + (n-1) mean_of s_0^2) / (nu_w + n - 1), unless an F
 *      test at 1 % two-sided tells them apart: then the unknown's own scatter counts when it is the
 *      larger one, and the standards' when it is suspiciously small. A stated tg_u_K is used as it
 *      is, with infinite degrees of freedom.
 *   2) Relations linear in a power of 1/Mn: Fieller's set in that abscissa, closed form. The
 * others: the same test inverted, with the asymptote deciding about the upper limit. t has the
 *      Welch-Satterthwaite degrees of freedom at the estimate.
 *   Sources: Fieller, J. R. Stat. Soc. B 16 (1954) 175; JCGM 100:2008 G.4; chainend-methods(7). */
CE_API ce_status ce_estimate_mn(const ce_fit *fit, const ce_unknown *unknown, double level,
                                ce_estimate *estimate, ce_error *err);

/* ce_estimate_hint - which contribution to attack first, one or two plain sentences with numbers.
 *   text is always terminated; nothing is said where nothing can be (text[0] == 0).
 *   ret  CE_OK | CE_E_ARG | CE_E_NOMEM */
CE_API ce_status ce_estimate_hint(const ce_fit *fit, const ce_unknown *unknown,
                                  const ce_estimate *estimate, char *text, size_t room);

/* ---- Tg from Mn ------------------------------------------------------------------------------ */

typedef struct {
    double mn_g_mol, tg_K;
    double mean_low_K, mean_high_K; /* confidence interval of the curve                        */
    double low_K, high_K;           /* prediction interval of a new sample measured runs times */
    double u_mean_K, u_K, nu_mean, nu, level;
    double u_scale_K; /* common uncertainty of the temperature scale: add in quadrature to compare
                         with a Tg of another instrument; not in the intervals above            */
    bool below_standards, above_standards; /* extrapolated */
} ce_tg_estimate;
/* Tg expected at a molar mass on the scale of the certificates; mn_u_rel is the relative standard
 * uncertainty of that Mn (0 = exact), runs >= 1, level 0 = the fit's.
 * CE_OK | CE_E_ARG | CE_E_DOMAIN. Sources: as ce_estimate_mn. */
CE_API ce_status ce_estimate_tg(const ce_fit *fit, const ce_molar *molar, double mn_u_rel,
                                size_t runs, double level, ce_tg_estimate *estimate, ce_error *err);

/* ---- working range --------------------------------------------------------------------------- */

/* Highest reading with a finite upper limit, for unknowns of runs runs, and the Mn there. Linear
 * chains, dispersity 1. CE_OK | CE_E_ARG | CE_E_REFUSED (slope not significant: no reading has one;
 * outputs NaN). */
CE_API ce_status ce_ceiling(const ce_fit *fit, size_t runs, double level, double *tg_K,
                            double *mn_g_mol);

/* One line of the working range: what an unknown of this molar mass would get, its readings lying
 * exactly on the curve. */
typedef struct {
    double mn_g_mol, tg_K, low_g_mol, high_g_mol; /* NaN as in ce_estimate                      */
    ce_bound bound;
    double relative; /* half-width over mn; NaN when not two-sided                              */
} ce_range_row;
/* n rows for given molar masses, unknowns of runs runs. CE_OK | CE_E_ARG | CE_E_DOMAIN |
 * CE_E_NOMEM. */
CE_API ce_status ce_working_range(const ce_fit *fit, size_t runs, double level, size_t n,
                                  const double *mn_g_mol, ce_range_row *row, ce_error *err);

/* ---- Monte Carlo cross-check ----------------------------------------------------------------- */

typedef struct {
    uint64_t seed;     /* default 1                                                              */
    size_t max_trials; /* 1e4 to 1e8; default 4 000 000 (8 bytes each)                           */
    bool normal;       /* variances taken as known, so that the limits are Fieller's with the normal
                          factor; default false: scatter with finite degrees of freedom is drawn as
                          Student's t, JCGM 101:2008 6.4.9                                         */
} ce_monte_carlo_options;
CE_API ce_monte_carlo_options ce_monte_carlo_options_default(void);

/* Mn has no mean and no variance here (1/z with a density at z = 0): only quantiles are given. */
typedef struct {
    size_t trials;
    bool settled;                 /* the stopping rule was met before max_trials               */
    double median_g_mol;          /* infinite when more than half the trials have no finite Mn */
    double low_g_mol, high_g_mol; /* probabilistically symmetric; high NaN = open              */
    double p_none;                /* probability that no finite Mn explains the reading        */
    double z_mean, z_u;           /* of 1/Mn, "no finite Mn" counted as 0, mol/g               */
    double z_delta;               /* numerical tolerance of z: the limits are this stable      */
    double level;
} ce_monte_carlo;

/* ce_monte_carlo_mn - propagate distributions through the relation, JCGM 101:2008.
 *   Parameters multivariate normal (run part, excess part, certificate part, what is common), reading
 *   normal or t. Blocks of max(1e4, 100/(1 - level)) trials until twice the standard error of mean,
 *   u and both limits of 1/Mn is below half a unit of the second digit of u (7.9).
 *   The same seed gives the same digits. options NULL = defaults.
 *   ret  CE_OK | as ce_estimate_mn */
CE_API ce_status ce_monte_carlo_mn(const ce_fit *fit, const ce_unknown *unknown, double level,
                                   const ce_monte_carlo_options *options, ce_monte_carlo *result,
                                   ce_error *err);

/* ---- does it still hold? ---------------------------------------------------------------------- */

/* A control sample: its Mn is certified, its Tg was measured again. Arrays are borrowed. */
typedef struct {
    const char *name;
    ce_molar molar;
    double mn_u_g_mol; /* standard uncertainty of the certificate; NaN = taken as exact          */
    size_t n;          /* runs, >= 1                                                             */
    const double *tg_K;
    const double *day; /* of each run, days from any origin; NULL or NaN = not known             */
} ce_control;

typedef struct {
    size_t n;
    double tg_K, expected_K; /* mean measured; of the calibration at the certified Mn            */
    double difference_K, u_K, nu; /* measured minus expected; all of its uncertainty             */
    double normalised; /* difference over its expanded uncertainty: beyond 1 it is one     */
    double p;          /* two-sided, of this control alone                                 */
    double own_sd_K;   /* of its runs; NaN below two                                       */
    bool scattered;    /* its runs scatter more than the standards' (F test, 1 %)          */
} ce_control_result;

/* One run of a control on the control chart. */
typedef struct {
    size_t control;
    double day, difference_K;
    double z;             /* difference over its standard uncertainty                           */
    bool warning, action; /* beyond 2; beyond 3, or the second of three successive beyond 2 on one
                             side                                                              */
} ce_chart_point;

typedef struct {
    double level;
    size_t n;
    ce_control_result *item;            /* n, owned                                            */
    double shift_K, shift_u_K, shift_p; /* common to all controls, weighted mean               */
    double limit_p;                     /* each p below it speaks against the calibration      */
    size_t n_chart;
    ce_chart_point *chart; /* dated runs by date, owned                           */
    size_t n_warnings, n_actions;
    double drift_K_year, drift_u_K_year, drift_nu,
        drift_p; /* NaN: fewer than three dates         */
    bool holds; /* no p below the limit and no action                                             */
} ce_check;

/* ce_check_calibration - controls measured again against a calibration.
 *   Each difference with the uncertainty of the curve, the certificate and the runs; normalised as E_n
 *   (ISO 13528:2022, from memory) at level (0 = the fit's). The verdict takes all of them and their
 *   common shift together (Bonferroni). Chart of single runs with warning limits at 2 and action
 *   limits at 3 standard uncertainties (ISO 7870-2:2013, from memory), drift as one slope over the
 *   dates common to all controls, against the run scatter of the calibration.
 *   ret  CE_OK | CE_E_ARG (no control, a control without runs) | CE_E_DOMAIN | CE_E_NOMEM; out is
 *        released with ce_check_free() */
CE_API ce_status ce_check_calibration(const ce_fit *fit, size_t n, const ce_control *control,
                                      double level, ce_check *check, ce_error *err);
CE_API void ce_check_free(ce_check *check);

/* ---- planning ------------------------------------------------------------------------------- */

typedef struct {
    double want;     /* wanted half-width of the interval over Mn, e.g. 0.1; no default   */
    double mn_u_rel; /* of certificates of new standards (default 0.05)                   */
    double low_g_mol,
        high_g_mol; /* where new standards may lie (default: as the standards)       */
    size_t
        runs_per_standard; /* of a new standard (default 3)                                     */
    size_t unknown_runs;   /* of the unknown, now (default 1)                                   */
    size_t
        most_unknown_runs; /* at most (default 12)                                              */
    double standard_cost;  /* of a new standard besides its runs, in runs (default 5)           */
    size_t most_steps;     /* default 40                                                        */
    double level;          /* 0 = the fit's                                                     */
} ce_plan_options;
CE_API ce_plan_options ce_plan_options_default(void);

typedef enum { CE_PLAN_UNKNOWN_RUN, CE_PLAN_STANDARD_RUN, CE_PLAN_NEW_STANDARD } ce_plan_kind;
typedef struct {
    ce_plan_kind kind;
    size_t point; /* existing standard of the fit, for a further run of it                      */
    double
        mn_g_mol; /* of the standard, old or new                                                */
    double cost;  /* in runs                                                                    */
    double worst,
        mean_square; /* half-width over Mn after it: largest over the targets; criterion */
} ce_plan_step;
typedef struct {
    double mn_g_mol, tg_K;
    double now,
        then;     /* half-width over Mn, first order                                           */
    double floor; /* with a perfect calibration and the most runs of the unknown               */
} ce_plan_target;
typedef struct {
    double level, want;
    size_t n_targets;
    ce_plan_target *target; /* owned */
    size_t n_steps;
    ce_plan_step *step;  /* owned; in the order to take them                                    */
    size_t unknown_runs; /* after all of them                                                   */
    bool met;
    size_t limiting; /* target with the largest half-width at the end                       */
    bool reachable;  /* no floor above the wish                                             */
} ce_plan;

/* ce_plan_make - what to measure so that Mn is known well enough where it matters.
 *   Step by step the one of all possible ones (a further run of the unknown, of a standard, a new
 *   standard anywhere in the range with a certificate of its own) that lowers the mean square of the
 *   half-widths at the targets most for its cost: V-optimality, the criterion that averages the
 *   variance of prediction over the points that matter (Atkinson, Donev, Tobias, Optimum Experimental
 *   Designs, with SAS (2007), ch 10, from memory), sequentially (Wynn, Ann. Math. Stat. 41 (1970)
 *   1655, from memory). Half-widths are first-order ones: t u / |dTg/dMn| / Mn.
 *   in   n molar masses (linear chains, dispersity as unknown: 1); options
 *   ret  CE_OK (met or not) | CE_E_ARG | CE_E_DOMAIN | CE_E_NOMEM; out released with ce_plan_free() */
CE_API ce_status ce_plan_make(const ce_fit *fit, size_t n, const double *mn_g_mol,
                              const ce_plan_options *options, ce_plan *plan, ce_error *err);
CE_API void ce_plan_free(ce_plan *plan);

#ifdef __cplusplus
}
#endif
#endif
