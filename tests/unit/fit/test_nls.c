/* SPDX-License-Identifier: GPL-3.0-or-later
 * The solver against certified and published nonlinear fits.
 * NIST StRD (itl.nist.gov/div898/strd): data and certified values of Misra1a, Misra1d, DanWood,
 * Rat42, MGH09, MGH10, BoxBOD, Norris, Pontius. The data of the nonlinear sets and of Pontius are
 * from memory; the certified residual sums of squares confirm them. Puromycin and BOD: R package
 * datasets, from D. M. Bates and D. G. Watts, Nonlinear Regression Analysis (1988), app. A1.3, A1.4;
 * their profile limits were computed with SciPy 1.10.1 for this project (R's confint interpolates). */
#include "check.h"

#include "fit/curves.h"
#include "fit/series.h"
#include "fit/stats.h"

static double misra1a(const double *b, const double *x, double *g)
{
    double e = exp(-b[1] * x[0]);
    g[0] = 1 - e, g[1] = b[0] * x[0] * e;
    return b[0] * (1 - e);
}
static double misra1d(const double *b, const double *x, double *g)
{
    double u = 1 + b[1] * x[0];
    g[0] = b[1] * x[0] / u, g[1] = b[0] * x[0] / (u * u);
    return b[0] * g[0];
}
static double power(const double *b, const double *x, double *g)
{
    g[0] = pow(x[0], b[1]), g[1] = b[0] * g[0] * log(x[0]);
    return b[0] * g[0];
}
static double rat42(const double *b, const double *x, double *g)
{
    double e = exp(b[1] - b[2] * x[0]), u = 1 + e;
    g[0] = 1 / u, g[1] = -b[0] * e / (u * u), g[2] = b[0] * e * x[0] / (u * u);
    return b[0] / u;
}
static double mgh10(const double *b, const double *x, double *g)
{
    double u = x[0] + b[2], e = exp(b[1] / u);
    g[0] = e, g[1] = b[0] * e / u, g[2] = -b[0] * e * b[1] / (u * u);
    return b[0] * e;
}
static double mgh09(const double *b, const double *x, double *g)
{
    double t = x[0], den = t * t + b[2] * t + b[3], q = (t * t + b[1] * t) / den;
    g[0] = q, g[1] = b[0] * t / den, g[2] = -b[0] * q * t / den, g[3] = -b[0] * q / den;
    return b[0] * q;
}
static double michaelis(const double *b, const double *x, double *g)
{
    double u = b[1] + x[0];
    g[0] = x[0] / u, g[1] = -b[0] * x[0] / (u * u);
    return b[0] * x[0] / u;
}

static const double misra_x[] = {77.6,  114.9, 141.1, 190.8, 239.9, 289.0, 332.8,
                                 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0};
static const double misra_y[] = {10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02,
                                 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78};
static const double danwood_x[] = {1.309, 1.471, 1.490, 1.565, 1.611, 1.680};
static const double danwood_y[] = {2.138, 3.421, 3.597, 4.340, 4.882, 5.660};
static const double rat42_x[] = {9, 14, 21, 28, 42, 57, 63, 70, 79};
static const double rat42_y[] = {8.93, 10.80, 18.59, 22.33, 39.35, 56.11, 61.73, 64.62, 67.08};
static const double mgh10_x[] = {50, 55, 60,  65,  70,  75,  80,  85,
                                 90, 95, 100, 105, 110, 115, 120, 125};
static const double mgh10_y[] = {34780, 28610, 23650, 19630, 16370, 13720, 11540, 9744,
                                 8261,  7030,  6005,  5147,  4427,  3820,  3307,  2872};
static const double mgh09_x[] = {4, 2, 1, .5, .25, .167, .125, .1, .0833, .0714, .0625};
static const double mgh09_y[] = {.1957, .1947, .1735, .1600, .0844, .0627,
                                 .0456, .0342, .0323, .0235, .0246};
static const double boxbod_x[] = {1, 2, 3, 5, 7, 10};
static const double boxbod_y[] = {109, 149, 149, 191, 213, 224};
static const double puromycin_x[] = {0.02, 0.02, 0.06, 0.06, 0.11, 0.11,
                                     0.22, 0.22, 0.56, 0.56, 1.1,  1.1};
static const double puromycin_y[] = {76, 47, 97, 107, 123, 139, 159, 152, 191, 201, 207, 200};
static const double bod_x[] = {1, 2, 3, 4, 5, 7};
static const double bod_y[] = {8.3, 10.3, 19, 16, 15.6, 19.8};
static const double norris_x[] = {0.2,   337.4, 118.2, 884.6, 10.1,  226.5, 666.3, 996.3, 448.6,
                                  777.0, 558.2, 0.4,   0.6,   775.5, 666.9, 338.0, 447.5, 11.6,
                                  556.0, 228.1, 995.8, 887.6, 120.2, 0.3,   0.3,   556.8, 339.1,
                                  887.2, 999.0, 779.0, 11.1,  118.3, 229.2, 669.1, 448.9, 0.5};
static const double norris_y[] = {0.1,   338.8, 118.1, 888.0, 9.2,   228.1, 668.5, 998.5, 449.1,
                                  778.9, 559.2, 0.3,   0.1,   778.1, 668.8, 339.3, 448.9, 10.8,
                                  557.7, 228.3, 998.0, 888.8, 119.6, 0.3,   0.6,   557.6, 339.3,
                                  888.0, 998.5, 778.9, 10.2,  117.6, 228.9, 668.4, 449.2, 0.2};

#define CURVE(set, q, fn)                                                                          \
    {                                                                                              \
        .n = sizeof set##_x / sizeof *set##_x, .p = (q), .x = set##_x, .y = set##_y, .f = (fn)     \
    }

/* The hard sets only from the second start StRD gives, to fewer digits. */
typedef struct {
    const char *name;
    curve c;
    size_t first;
    double start[2][4];
    double b[4], sd[4], rss;
} certified;

static const certified strd_sets[] = {
    {"Misra1a",
     CURVE(misra, 2, misra1a),
     0,
     {{500, 1e-4}, {250, 5e-4}},
     {2.3894212918E+02, 5.5015643181E-04},
     {2.7070075241E+00, 7.2668688436E-06},
     1.2455138894E-01},
    {"Misra1d",
     CURVE(misra, 2, misra1d),
     0,
     {{500, 1e-4}, {450, 3e-4}},
     {4.3736970754E+02, 3.0227324449E-04},
     {3.6489174345E+00, 2.9334354479E-06},
     5.6419295283E-02},
    {"DanWood",
     CURVE(danwood, 2, power),
     0,
     {{1, 5}, {0.7, 4}},
     {7.6886226176E-01, 3.8604055871E+00},
     {1.8281973860E-02, 5.1726610913E-02},
     4.3173084083E-03},
    {"Rat42",
     CURVE(rat42, 3, rat42),
     0,
     {{100, 1, 0.1}, {75, 2.5, 0.07}},
     {7.2462237576E+01, 2.6180768402E+00, 6.7359200066E-02},
     {1.7340283401E+00, 8.8295217536E-02, 3.4465663377E-03},
     8.0565229338E+00},
    {"Norris",
     CURVE(norris, 2, line),
     0,
     {{0, 1}, {-1, 2}},
     {-0.262323073774029, 1.00211681802045},
     {0.232818234301152, 0.429796848199937E-03},
     26.6173985294224},
    {"MGH10",
     CURVE(mgh10, 3, mgh10),
     1,
     {{0}, {0.02, 4000, 250}},
     {5.6096364710E-03, 6.1813463463E+03, 3.4522363462E+02},
     {1.5687892471E-04, 2.3309021107E+01, 7.8486103508E-01},
     8.7945855171E+01},
    {"MGH09",
     CURVE(mgh09, 4, mgh09),
     1,
     {{0}, {0.25, 0.39, 0.415, 0.39}},
     {1.9280693458E-01, 1.9128232873E-01, 1.2305650693E-01, 1.3606233068E-01},
     {1.1435312227E-02, 1.9633220911E-01, 8.0842031232E-02, 9.0025542308E-02},
     3.0750560385E-04},
    {"BoxBOD",
     CURVE(boxbod, 2, misra1a),
     1,
     {{0}, {100, 0.75}},
     {2.1380940889E+02, 5.4723748542E-01},
     {1.2354515176E+01, 1.0455993237E-01},
     1.1680088766E+03},
};

static void strd(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof strd_sets / sizeof *strd_sets; i++) {
        const certified *set = &strd_sets[i];
        double digits_b = set->first ? 1e-6 : 1e-8, digits_sd = set->first ? 1e-4 : 1e-6;
        for (size_t k = set->first; k < 2; k++) {
            double b[4];
            memcpy(b, set->start[k], sizeof b);
            print_message("%s, start %zu\n", set->name, k + 1);
            ce_nls *fit = fit_curve(&set->c, b);
            double s = sqrt(fit->sum / (double)(fit->n - fit->p));
            assert_digits(fit->sum, set->rss, 1e-9);
            for (size_t j = 0; j < fit->p; j++) {
                assert_digits(b[j], set->b[j], digits_b);
                assert_digits(s * sqrt(fit->covariance[j * (fit->p + 1)]), set->sd[j], digits_sd);
            }
            ce_nls_free(fit);
        }
    }
}

static void pontius(void **state)
{
    (void)state;
    double x[40], b[3] = {0, 1e-6, 0}, c[2] = {0, 1e-6}, pure = 0;
    pontius_x(x);
    ce_nls *fit = fit_curve(&(curve){.n = 40, .p = 3, .x = x, .y = pontius_y, .f = quadratic}, b);
    assert_digits(b[0], 0.673565789473684E-03, 1e-8);
    assert_digits(b[1], 0.732059160401003E-06, 1e-10);
    assert_digits(b[2], -0.316081871345029E-14, 1e-8);
    assert_digits(sqrt(fit->sum / 37), 0.205177424076185E-03, 1e-8);
    for (size_t i = 0; i < 20; i++) {
        double d = pontius_y[i] - pontius_y[i + 20];
        pure += d * d / 2;
    }
    ce_test bent = ce_lack_of_fit(fit->sum, pure, 40, 20, 3);
    ce_nls_free(fit);
    fit = fit_curve(&(curve){.n = 40, .p = 2, .x = x, .y = pontius_y, .f = line}, c);
    /* NIST/SEMATECH handbook, load cell: F = 214.7464, s = 0.0021712694; in double precision
     * 214.7469237 and 0.00217127259606 (NumPy). */
    ce_test straight = ce_lack_of_fit(fit->sum, pure, 40, 20, 2);
    assert_digits(straight.statistic, 214.7464, 5e-6);
    assert_digits(straight.statistic, 214.7469237, 1e-8);
    assert_digits(sqrt(fit->sum / 38), 0.0021712694, 2e-6);
    assert_digits(sqrt(fit->sum / 38), 0.00217127259606, 1e-10);
    assert_digits(bent.statistic, 0.8107239003, 1e-7);
    assert_digits(bent.p, 0.666173, 1e-6);
    ce_nls_free(fit);
}

static void limits(const curve *c, const ce_nls *fit, const double *theta, double level, size_t i,
                   double *low, double *high)
{
    curve copy = *c;
    double nu = (double)(fit->n - fit->p), t = ce_student_factor(level, nu);
    ce_profile p = {.fn = curve_residuals,
                    .context = &copy,
                    .theta = theta,
                    .rise = t * t * fit->sum / nu,
                    .options = CE_NLS_DEFAULT};
    assert_int_equal(ce_profile_limits(fit, &p, i, -(double)INFINITY, low, high), CE_OK);
}

static void puromycin(void **state)
{
    (void)state;
    curve c = CURVE(puromycin, 2, michaelis);
    double b[2] = {200, 0.1}, low, high, pure = 0;
    ce_nls *fit = fit_curve(&c, b);
    double s = sqrt(fit->sum / 10), t = ce_student_factor(0.95, 10);
    double u0 = s * sqrt(fit->covariance[0]), u1 = s * sqrt(fit->covariance[3]);
    assert_digits(b[0], 212.68374314, 1e-10);
    assert_digits(b[1], 0.064121281682, 1e-10);
    assert_digits(u0, 6.94715516, 1e-9);
    assert_digits(u1, 0.0082809494985, 1e-9);
    assert_digits(fit->sum, 1195.44881444, 1e-11);
    assert_digits(s * s * fit->covariance[1] / (u0 * u1), 0.7650837018, 1e-9);
    assert_digits(b[0] - t * u0, 197.2045168, 1e-9);
    assert_digits(b[1] + t * u1, 0.08257238699, 1e-9);
    limits(&c, fit, b, 0.95, 0, &low, &high);
    assert_digits(low, 197.3019329, 1e-9);
    assert_digits(high, 229.2890551, 1e-9);
    limits(&c, fit, b, 0.95, 1, &low, &high);
    assert_digits(low, 0.04692034204, 1e-9);
    assert_digits(high, 0.08615691343, 1e-9);
    static const double h[] = {.124852021, .193058812, .143721724,
                               .104285492, .176635107, .257446844};
    for (size_t i = 0; i < 12; i++) assert_close(fit->leverage[i], h[i / 2], 6e-10);
    ce_residual_diagnostics d = ce_diagnose_residual(fit->r[0], fit->leverage[0], s, 12, 2);
    assert_digits(d.deleted, 3.818421408, 1e-9);
    assert_digits(d.cook, 0.441064089, 2e-9);
    assert_digits(ce_press(12, fit->r, fit->leverage), 1606.457645, 1e-9);
    for (size_t i = 0; i < 12; i += 2) pure += (c.y[i] - c.y[i + 1]) * (c.y[i] - c.y[i + 1]) / 2;
    ce_test lof = ce_lack_of_fit(fit->sum, pure, 12, 6, 2);
    assert_digits(lof.statistic, 1.070857665, 1e-9);
    assert_digits(lof.p, 0.446835, 2e-6);
    double ll = ce_log_likelihood(fit->sum, 12);
    assert_digits(-2 * ll + 6, 95.27096865, 1e-10);
    assert_digits(ce_aicc(ll, 3, 12), 98.27096865, 1e-10);
    assert_digits(ce_bic(ll, 3, 12), 96.7256886, 1e-9);
    ce_nls_free(fit);
}

/* The exact leave-one-out sum, which the tangent plane's ce_press() approximates: 12 refits. The
 * value was computed with SciPy 1.10.1 for this project. */
static void puromycin_leave_one_out(void **state)
{
    (void)state;
    curve c = CURVE(puromycin, 2, michaelis);
    double sum = 0;
    for (size_t out = 0; out < c.n; out++) {
        double x[12], y[12], b[2] = {200, 0.1}, g[2];
        for (size_t i = 0, k = 0; i < c.n; i++)
            if (i != out) x[k] = c.x[i], y[k++] = c.y[i];
        curve rest = {.n = c.n - 1, .p = 2, .x = x, .y = y, .f = michaelis};
        ce_nls *fit = fit_curve(&rest, b);
        double e = c.y[out] - michaelis(b, c.x + out, g);
        sum += e * e;
        ce_nls_free(fit);
    }
    assert_digits(sum, 1614.856293, 1e-9);
}

/* Tg = a - K/(Mn + c): a hyperbola free to leave Flory and Fox, fitted to the single runs of the
 * frozen series. Computed with SciPy 1.10.1 for this project. */
static double shifted(const double *b, const double *x, double *g)
{
    double u = x[0] + b[2];
    g[0] = 1, g[1] = -1 / u, g[2] = b[1] / (u * u);
    return b[0] - b[1] / u;
}

static void shifted_hyperbola(void **state)
{
    (void)state;
    const struct {
        const double *mn;
        const double (*tg)[FF8_RUNS];
        double rss, aicc;
    } set[] = {{ff8a_mn, ff8a_tg, 11.29213378, 60.11957341},
               {ff8b_mn, ff8b_tg, 8.867438332, 54.3182837}};
    for (size_t k = 0; k < 2; k++) {
        double x[24], y[24], b[3] = {388, 1.8e5, 1};
        for (size_t i = 0; i < 24; i++) x[i] = set[k].mn[i / 3], y[i] = set[k].tg[i / 3][i % 3];
        curve c = {.n = 24, .p = 3, .x = x, .y = y, .f = shifted};
        ce_nls *fit = fit_curve(&c, b);
        assert_digits(fit->sum, set[k].rss, 1e-9);
        assert_digits(ce_aicc(ce_log_likelihood(fit->sum, 24), 4, 24), set[k].aicc, 1e-9);
        ce_nls_free(fit);
    }
}

static void bod(void **state)
{
    (void)state;
    curve c = CURVE(bod, 2, misra1a);
    double b[2] = {20, 0.5}, low, high;
    ce_nls *fit = fit_curve(&c, b);
    double s = sqrt(fit->sum / 4);
    assert_digits(b[0], 19.142575285, 1e-10);
    assert_digits(b[1], 0.53109137697, 1e-10);
    assert_digits(s * sqrt(fit->covariance[0]), 2.4959173322, 1e-10);
    assert_digits(s * sqrt(fit->covariance[3]), 0.20308210043, 1e-10);
    static const double want[2][2][2] = {{{14.04936416, 38.45619797}, {0.1313977467, 1.808169595}},
                                         {{16.01612086, 24.81841708}, {0.2792484739, 0.967757759}}};
    for (size_t l = 0; l < 2; l++)
        for (size_t i = 0; i < 2; i++) {
            limits(&c, fit, b, l == 0 ? 0.95 : 0.80, i, &low, &high);
            assert_digits(low, want[l][i][0], 1e-9);
            assert_digits(high, want[l][i][1], 1e-9);
        }
    /* At 99.9 % the sum of squares never rises enough: the interval has no upper end. */
    limits(&c, fit, b, 0.999, 0, &low, &high);
    assert_true(isinf(high) && high > 0);
    ce_nls_free(fit);
}

static void profiles_of_strd(void **state)
{
    (void)state;
    /* Computed with SciPy 1.10.1 for this project. */
    static const struct {
        size_t set, i;
        double low, high;
    } want[] = {{1, 0, 429.5549039, 445.4814103},   {1, 1, 0.0002958891978, 0.0003086884619},
                {2, 0, 0.7196071629, 0.8207698033}, {2, 1, 3.718058657, 4.004183157},
                {3, 0, 68.76476534, 77.18913929},   {5, 1, 6131.297467, 6232.006577}};
    for (size_t i = 0; i < sizeof want / sizeof *want; i++) {
        const certified *set = &strd_sets[want[i].set];
        double b[4], low, high;
        memcpy(b, set->start[1], sizeof b);
        ce_nls *fit = fit_curve(&set->c, b);
        limits(&set->c, fit, b, 0.95, want[i].i, &low, &high);
        assert_digits(low, want[i].low, 1e-9);
        assert_digits(high, want[i].high, 1e-9);
        ce_nls_free(fit);
    }
}

static void rank_and_nonsense_are_failures(void **state)
{
    (void)state;
    static const double x[] = {1, 1, 1, 1}, y[] = {1, 2, 3, 4};
    curve c = {.n = 4, .p = 2, .x = x, .y = y, .f = line};
    ce_nls_options o = CE_NLS_DEFAULT;
    ce_nls *nls = NULL;
    ce_error err = CE_ERROR_INIT;
    double b[2] = {0, 0};
    assert_int_equal(ce_nls_new(&nls, 4, 2), CE_OK);
    /* GSL's own driver calls this a success (measured with 2.7.1). */
    assert_int_equal(ce_nls_solve(nls, curve_residuals, &c, b, &o, &err), CE_E_NOFIT);
    assert_non_null(strstr(err.message, "do not determine"));
    b[0] = (double)NAN;
    assert_int_equal(ce_nls_solve(nls, curve_residuals, &c, b, &o, NULL), CE_E_NOFIT);
    ce_nls_free(nls);
    assert_int_equal(ce_nls_new(&nls, 1, 2), CE_E_ARG);
    assert_null(nls);
}

static void starts_at_the_solution(void **state)
{
    (void)state;
    /* Exact data and the truth as start: GSL's driver calls that a failure (measured with 2.7.1). */
    static const double x[] = {0, 1, 2, 3}, y[] = {1, 3, 5, 7};
    curve c = {.n = 4, .p = 2, .x = x, .y = y, .f = line};
    double b[2] = {1, 2};
    ce_nls *fit = fit_curve(&c, b);
    assert_close(b[0], 1, 1e-15);
    assert_close(b[1], 2, 1e-15);
    ce_nls_free(fit);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(strd),
        cmocka_unit_test(pontius),
        cmocka_unit_test(puromycin),
        cmocka_unit_test(puromycin_leave_one_out),
        cmocka_unit_test(shifted_hyperbola),
        cmocka_unit_test(bod),
        cmocka_unit_test(profiles_of_strd),
        cmocka_unit_test(rank_and_nonsense_are_failures),
        cmocka_unit_test(starts_at_the_solution),
    };
    return cmocka_run_group_tests_name("fit/nls", tests, NULL, NULL);
}
