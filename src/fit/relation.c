/* SPDX-License-Identifier: GPL-3.0-or-later
 * The relations: one table entry each. To add one, write its eval and starts functions, add a line
 * to the table and a name to ce_relation; nothing else knows how many there are. */
#include "fit/model.h"
#include "fit/starts.h"

#include <math.h>
#include <string.h>

typedef struct {
    const char *name, *formula, *validity, *source;
    const char *abscissa_name, *abscissa_unit;
    const char *parameter_name[CE_MAX_PARAMETERS], *parameter_unit[CE_MAX_PARAMETERS];
    ce_model model;
} relation_entry;

/* ---- Tg = Tg_inf - K z (ends/2) ------------------------------------------------------------- */

static double half_ends_z(double z, const ce_chain *chain)
{
    return 0.5 * chain->ends * z;
}

static void eval_flory_fox(const ce_model *self, const double *theta, double z,
                           const ce_chain *chain, ce_jet *jet)
{
    (void)self;
    double half = 0.5 * chain->ends;
    *jet = (ce_jet){.value = theta[0] - theta[1] * half * z,
                    .slope = -theta[1] * half,
                    .gradient = {1, -half * z}};
}

static size_t starts_in_abscissa(const ce_model *self, size_t n, const ce_eiv_point *point,
                                 double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS])
{
    double a, b;
    if (!ce_start_line(self, n, point, NULL, &a, &b)) return 0;
    theta[0][0] = a;
    theta[0][1] = -b;
    return 1;
}

/* ---- Tg = Tg_inf / (1 + C z) ---------------------------------------------------------------- */

static double plain_z(double z, const ce_chain *chain)
{
    (void)chain;
    return z;
}

static void eval_ueberreiter_kanig(const ce_model *self, const double *theta, double z,
                                   const ce_chain *chain, ce_jet *jet)
{
    (void)self;
    (void)chain;
    double u = 1 + theta[1] * z, q = theta[0] / u;
    if (!(u > 0)) q = (double)NAN; /* beyond its pole the curve means nothing */
    *jet = (ce_jet){.value = q,
                    .slope = -q * theta[1] / u,
                    .curvature = 2 * q * theta[1] * theta[1] / (u * u),
                    .gradient = {1 / u, -q * z / u}};
}

static double reciprocal(double tg)
{
    return 1 / tg;
}

/* 1/Tg is a straight line in z. */
static size_t starts_reciprocal(const ce_model *self, size_t n, const ce_eiv_point *point,
                                double theta[CE_MAX_STARTS][CE_MAX_PARAMETERS])
{
    double a, b;
    if (!ce_start_line(self, n, point, reciprocal, &a, &b) || !(a > 0)) return 0;
    theta[0][0] = 1 / a;
    theta[0][1] = b / a;
    return 1;
}

/* ---- Tg = Tg_inf - K' z^(2/3) --------------------------------------------------------------- */

static double z_two_thirds(double z, const ce_chain *chain)
{
    (void)chain;
    double c = cbrt(z);
    return c * c;
}

static void eval_odriscoll_sanayei(const ce_model *self, const double *theta, double z,
                                   const ce_chain *chain, ce_jet *jet)
{
    (void)self;
    double x = z < 0 ? (double)NAN : z_two_thirds(z, chain);
    double slope = -theta[1] * (2.0 / 3.0) * x / z;
    *jet = (ce_jet){.value = theta[0] - theta[1] * x,
                    .slope = z > 0 ? slope : -copysign((double)INFINITY, theta[1]),
                    .curvature = z > 0 ? -slope / (3 * z) : (double)INFINITY,
                    .gradient = {1, -x}};
}

/* ---- Tg = Tg_inf - K / sqrt(Mn Mw) ---------------------------------------------------------- */

static double z_over_root_dispersity(double z, const ce_chain *chain)
{
    return z / sqrt(chain->dispersity);
}

static void eval_ogawa(const ce_model *self, const double *theta, double z, const ce_chain *chain,
                       ce_jet *jet)
{
    (void)self;
    double f = z == 0 ? 1 : 1 / sqrt(chain->dispersity);
    *jet = (ce_jet){
        .value = theta[0] - theta[1] * f * z, .slope = -theta[1] * f, .gradient = {1, -f * z}};
}

/* ---- straight lines in log10 Mn up to a plateau --------------------------------------------- */

static double decades(double z, const ce_chain *chain)
{
    (void)chain;
    return -log10(z);
}

/* Adds one hinge: slope b (K per decade) below the molar mass m, nothing above. */
static void add_hinge(double b, double m, double z, ce_jet *jet, double *by_b, double *by_m)
{
    *by_b = *by_m = 0;
    if (!(m > 0)) jet->value = (double)NAN;
    if (!(z * m > 1)) return;
    double x = log10(z * m);
    jet->value -= b * x;
    jet->slope -= b / (M_LN10 * z);
    jet->curvature += b / (M_LN10 * z * z);
    *by_b = -x;
    *by_m = -b / (M_LN10 * m);
}

static void eval_log_plateau(const ce_model *self, const double *theta, double z,
                             const ce_chain *chain, ce_jet *jet)
{
    (void)self;
    (void)chain;
    *jet = (ce_jet){.value = theta[0], .gradient = {1}};
    add_hinge(theta[1], theta[2], z, jet, &jet->gradient[1], &jet->gradient[2]);
}

static size_t kinks_log_plateau(const double *theta, double z[CE_MAX_KINKS],
                                double gradient[CE_MAX_KINKS * CE_MAX_PARAMETERS])
{
    z[0] = 1 / theta[2];
    gradient[0] = gradient[1] = 0;
    gradient[2] = -z[0] * z[0];
    return 1;
}

/* theta: Tg_inf, B_1 below M_1, B_2 between M_1 and M_2, M_1, M_2. */
static void eval_log_three(const ce_model *self, const double *theta, double z,
                           const ce_chain *chain, ce_jet *jet)
{
    (void)self;
    (void)chain;
    double extra, m1;
    *jet = (ce_jet){.value = theta[3] < theta[4] ? theta[0] : (double)NAN, .gradient = {1}};
    add_hinge(theta[2], theta[4], z, jet, &jet->gradient[2], &jet->gradient[4]);
    add_hinge(theta[1] - theta[2], theta[3], z, jet, &extra, &m1);
    jet->gradient[1] = extra;
    jet->gradient[2] -= extra;
    jet->gradient[3] = m1;
}

static size_t kinks_log_three(const double *theta, double z[CE_MAX_KINKS],
                              double gradient[CE_MAX_KINKS * CE_MAX_PARAMETERS])
{
    memset(gradient, 0, 2 * 5 * sizeof *gradient);
    z[0] = 1 / theta[4];
    z[1] = 1 / theta[3];
    gradient[0 * 5 + 4] = -z[0] * z[0];
    gradient[1 * 5 + 3] = -z[1] * z[1];
    return 2;
}

/* ---- the table ------------------------------------------------------------------------------ */

/* The citations are from memory; the formulas agree with those in common use. */
static const relation_entry table[CE_RELATIONS] = {
    [CE_FLORY_FOX] =
        {.name = "flory-fox",
         .formula = "Tg = Tg_inf - K/Mn",
         .validity =
             "linear chains from about 1e3 g/mol up; for n_e chain ends per molecule K/Mn is "
             "taken n_e/2 times (stars, rings), in so far as branch points do not stiffen the "
             "chain",
         .source = "T. G Fox and P. J. Flory, J. Appl. Phys. 21 (1950) 581",
         .abscissa_name = "n_e/(2 Mn)",
         .abscissa_unit = "mol/g",
         .parameter_name = {"Tg_inf", "K"},
         .parameter_unit = {"K", "K g/mol"},
         .model = {.p = 2,
                   .linear = true,
                   .eval = eval_flory_fox,
                   .starts = starts_in_abscissa,
                   .abscissa = half_ends_z}},
    [CE_UEBERREITER_KANIG] =
        {.name = "ueberreiter-kanig",
         .formula = "Tg = Tg_inf/(1 + C/Mn)",
         .validity =
             "as Flory-Fox; 1/Tg is linear in 1/Mn, so Tg stays above 0 K at low molar mass",
         .source = "K. Ueberreiter and G. Kanig, J. Colloid Sci. 7 (1952) 569",
         .abscissa_name = "1/Mn",
         .abscissa_unit = "mol/g",
         .parameter_name = {"Tg_inf", "C"},
         .parameter_unit = {"K", "g/mol"},
         .model = {.p = 2,
                   .eval = eval_ueberreiter_kanig,
                   .starts = starts_reciprocal,
                   .abscissa = plain_z}},
    [CE_ODRISCOLL_SANAYEI] =
        {.name = "odriscoll-sanayei",
         .formula = "Tg = Tg_inf - K'/Mn^(2/3)",
         .validity = "slower approach to the plateau than Flory-Fox; narrow distributions",
         .source = "K. F. O'Driscoll and R. A. Sanayei, Macromolecules 24 (1991) 4479",
         .abscissa_name = "Mn^(-2/3)",
         .abscissa_unit = "(mol/g)^(2/3)",
         .parameter_name = {"Tg_inf", "K'"},
         .parameter_unit = {"K", "K (g/mol)^(2/3)"},
         .model = {.p = 2,
                   .linear = true,
                   .positive = true,
                   .eval = eval_odriscoll_sanayei,
                   .starts = starts_in_abscissa,
                   .abscissa = z_two_thirds}},
    [CE_OGAWA] = {.name = "ogawa",
                  .formula = "Tg = Tg_inf - K/sqrt(Mn Mw)",
                  .validity = "broad distributions; needs Mw of every sample",
                  .source = "T. Ogawa, J. Appl. Polym. Sci. 44 (1992) 1869",
                  .abscissa_name = "1/sqrt(Mn Mw)",
                  .abscissa_unit = "mol/g",
                  .parameter_name = {"Tg_inf", "K"},
                  .parameter_unit = {"K", "K g/mol"},
                  .model = {.p = 2,
                            .linear = true,
                            .eval = eval_ogawa,
                            .starts = starts_in_abscissa,
                            .abscissa = z_over_root_dispersity}},
    [CE_LOG_PLATEAU] =
        {.name = "log-plateau",
         .formula = "Tg = Tg_inf + B log10(Mn/M_c) below M_c, Tg = Tg_inf above",
         .validity = "two regimes with a break at M_c; at least two samples below it and one above",
         .source = "J. M. G. Cowie, Eur. Polym. J. 11 (1975) 297",
         .abscissa_name = "log10 Mn",
         .abscissa_unit = "g/mol",
         .parameter_name = {"Tg_inf", "B", "M_c"},
         .parameter_unit = {"K", "K/decade", "g/mol"},
         .model = {.p = 3,
                   .positive = true,
                   .eval = eval_log_plateau,
                   .kinks = kinks_log_plateau,
                   .starts = ce_starts_log_plateau,
                   .abscissa = decades}},
    [CE_LOG_THREE] =
        {.name = "log-three",
         .formula = "Tg = Tg_inf + B_2 log10(Mn/M_2) from M_1 to M_2, slope B_1 below M_1, Tg_inf "
                    "above M_2",
         .validity = "oligomer, intermediate and plateau regime; at least two samples in each of "
                     "the first two and one on the plateau",
         .source = "J. Hintermeyer, A. Herrmann, R. Kahlau, C. Goiceanu and E. A. Roessler, "
                   "Macromolecules 41 (2008) 9335",
         .abscissa_name = "log10 Mn",
         .abscissa_unit = "g/mol",
         .parameter_name = {"Tg_inf", "B_1", "B_2", "M_1", "M_2"},
         .parameter_unit = {"K", "K/decade", "K/decade", "g/mol", "g/mol"},
         .model = {.p = 5,
                   .positive = true,
                   .eval = eval_log_three,
                   .kinks = kinks_log_three,
                   .starts = ce_starts_log_three,
                   .abscissa = decades}},
};

static const relation_entry *entry(ce_relation relation)
{
    return (unsigned)relation < CE_RELATIONS ? &table[relation] : NULL;
}

const ce_model *ce_relation_model(ce_relation relation)
{
    const relation_entry *e = entry(relation);
    return e == NULL ? NULL : &e->model;
}

#define TEXT_OF(member)                                                                            \
    const relation_entry *e = entry(relation);                                                     \
    return e == NULL ? "" : e->member
const char *ce_relation_name(ce_relation relation)
{
    TEXT_OF(name);
}
const char *ce_relation_formula(ce_relation relation)
{
    TEXT_OF(formula);
}
const char *ce_relation_validity(ce_relation relation)
{
    TEXT_OF(validity);
}
const char *ce_relation_source(ce_relation relation)
{
    TEXT_OF(source);
}
const char *ce_relation_abscissa_name(ce_relation relation)
{
    TEXT_OF(abscissa_name);
}
const char *ce_relation_abscissa_unit(ce_relation relation)
{
    TEXT_OF(abscissa_unit);
}

ce_relation ce_relation_find(const char *name)
{
    unsigned i = 0;
    while (i < CE_RELATIONS && (name == NULL || strcmp(name, table[i].name) != 0)) i++;
    return (ce_relation)i;
}

bool ce_relation_linear(ce_relation relation)
{
    const relation_entry *e = entry(relation);
    return e != NULL && e->model.linear;
}

size_t ce_relation_parameters(ce_relation relation)
{
    const relation_entry *e = entry(relation);
    return e == NULL ? 0 : e->model.p;
}

const char *ce_relation_parameter_name(ce_relation relation, size_t i)
{
    return i < ce_relation_parameters(relation) ? table[relation].parameter_name[i] : "";
}

const char *ce_relation_parameter_unit(ce_relation relation, size_t i)
{
    return i < ce_relation_parameters(relation) ? table[relation].parameter_unit[i] : "";
}

ce_chain ce_chain_of(const ce_molar *molar)
{
    double d = molar->mw_g_mol / molar->mn_g_mol;
    return (ce_chain){.ends = molar->chain_ends,
                      .dispersity = isfinite(d) && d > 0 ? d : (double)NAN};
}

double ce_relation_tg(ce_relation relation, const double *theta, const ce_molar *molar)
{
    const ce_model *model = ce_relation_model(relation);
    if (model == NULL || !(molar->mn_g_mol > 0)) return (double)NAN;
    ce_chain chain = ce_chain_of(molar);
    ce_jet jet;
    model->eval(model, theta, 1 / molar->mn_g_mol, &chain, &jet);
    return jet.value;
}

double ce_relation_abscissa(ce_relation relation, const ce_molar *molar)
{
    const ce_model *model = ce_relation_model(relation);
    ce_chain chain = ce_chain_of(molar);
    return model == NULL || !(molar->mn_g_mol > 0) ? (double)NAN
                                                   : model->abscissa(1 / molar->mn_g_mol, &chain);
}

static void eval_with_curvature(const ce_model *self, const double *theta, double z,
                                const ce_chain *chain, ce_jet *jet)
{
    double c = theta[self->p - 1], u = self->scale * z;
    self->base->eval(self->base, theta, z, chain, jet);
    jet->value += c * u * u;
    jet->slope += 2 * c * u * self->scale;
    jet->curvature += 2 * c * self->scale * self->scale;
    jet->gradient[self->p - 1] = u * u;
}

ce_model ce_model_with_curvature(const ce_model *base, double scale)
{
    ce_model m = *base;
    m.p = base->p + 1;
    m.eval = eval_with_curvature;
    m.starts = NULL;
    m.base = base;
    m.scale = scale;
    return m;
}

static double value_at(const ce_model *model, const double *theta, double z, const ce_chain *chain)
{
    ce_jet jet;
    model->eval(model, theta, z, chain, &jet);
    return jet.value;
}

/* The curve is monotone in z: bracket by decades around one chemist's molar mass, then bisect in
 * ln z until the interval is down to rounding, with a last secant step. */
double ce_model_root(const ce_model *model, const double *theta, double tg_K, const ce_chain *chain)
{
    double lo = 1e-5, hi = 1e-5, flo, fhi;
    flo = fhi = value_at(model, theta, lo, chain) - tg_K;
    double falling = (double)NAN;
    for (double z = 1; z > 1e-9 && !(isfinite(falling) && falling != 0); z /= 10)
        falling = value_at(model, theta, z, chain) - value_at(model, theta, 1e-12, chain);
    if (!isfinite(flo) || !isfinite(falling) || falling == 0) return (double)NAN;
    double s = falling < 0 ? 1 : -1; /* s (f - tg) falls with z */
    while (s * flo < 0 && lo > 1e-300) {
        hi = lo, fhi = flo;
        lo /= 10;
        flo = value_at(model, theta, lo, chain) - tg_K;
    }
    while (s * fhi > 0 && hi < 1e300) {
        lo = hi, flo = fhi;
        hi *= 10;
        fhi = value_at(model, theta, hi, chain) - tg_K;
        if (!isfinite(fhi)) return (double)NAN;
    }
    if (s * flo < 0 || s * fhi > 0) return (double)NAN;
    if (flo == 0) return lo;
    if (fhi == 0) return hi;
    for (int i = 0; i < 200 && hi - lo > 4e-16 * hi; i++) {
        double mid = i < 6 ? sqrt(lo * hi) : lo + (hi - lo) * (i % 2 ? 0.5 : flo / (flo - fhi));
        if (!(mid > lo && mid < hi)) mid = 0.5 * (lo + hi);
        double f = value_at(model, theta, mid, chain) - tg_K;
        if (f == 0) return mid;
        if (s * f > 0)
            lo = mid, flo = f;
        else
            hi = mid, fhi = f;
    }
    return 0.5 * (lo + hi);
}

ce_status ce_relation_mn(ce_relation relation, const double *theta, double tg_K,
                         const ce_molar *like, double *mn_g_mol)
{
    *mn_g_mol = (double)NAN;
    const ce_model *model = ce_relation_model(relation);
    if (model == NULL || !isfinite(tg_K)) return CE_E_ARG;
    ce_chain chain = ce_chain_of(like);
    if (tg_K == value_at(model, theta, 0, &chain)) {
        *mn_g_mol = (double)INFINITY;
        return CE_OK;
    }
    double z = ce_model_root(model, theta, tg_K, &chain);
    if (!(z > 0)) return CE_E_DOMAIN;
    *mn_g_mol = 1 / z;
    return CE_OK;
}
