/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include "fit/model.h"

static const double theta[CE_RELATIONS][CE_MAX_PARAMETERS] = {
    [CE_FLORY_FOX] = {388, 1.8e5},         [CE_UEBERREITER_KANIG] = {388, 500},
    [CE_ODRISCOLL_SANAYEI] = {388, 1.4e4}, [CE_OGAWA] = {388, 1.8e5},
    [CE_LOG_PLATEAU] = {388, 70, 30000},   [CE_LOG_THREE] = {388, 120, 45, 6000, 60000}};

static void names_find_themselves(void **state)
{
    (void)state;
    for (unsigned i = 0; i < CE_RELATIONS; i++) {
        ce_relation r = (ce_relation)i;
        assert_int_equal(ce_relation_find(ce_relation_name(r)), r);
        assert_true(strlen(ce_relation_formula(r)) > 0 && strlen(ce_relation_validity(r)) > 0);
        assert_true(strlen(ce_relation_source(r)) > 0 && strlen(ce_relation_abscissa_name(r)) > 0);
        for (size_t j = 0; j < ce_relation_parameters(r); j++)
            assert_true(strlen(ce_relation_parameter_name(r, j)) > 0 &&
                        strlen(ce_relation_parameter_unit(r, j)) > 0);
        assert_string_equal(ce_relation_parameter_name(r, ce_relation_parameters(r)), "");
    }
    assert_int_equal(ce_relation_find("nonsense"), CE_RELATIONS);
    assert_int_equal(ce_relation_find(NULL), CE_RELATIONS);
    bool found;
    assert_int_equal(ce_scatter_find("stated", &found), CE_SCATTER_STATED);
    assert_true(found);
    (void)ce_scatter_find("stat", &found);
    assert_false(found);
    assert_int_equal(ce_excess_find("additive", &found), CE_EXCESS_ADDITIVE);
    assert_true(found);
}

static void formulas(void **state)
{
    (void)state;
    ce_molar m = {10000, 20000, 2};
    assert_close(ce_relation_tg(CE_FLORY_FOX, theta[CE_FLORY_FOX], &m), 370, 1e-10);
    assert_close(ce_relation_tg(CE_UEBERREITER_KANIG, theta[CE_UEBERREITER_KANIG], &m), 388 / 1.05,
                 1e-10);
    assert_close(ce_relation_tg(CE_ODRISCOLL_SANAYEI, theta[CE_ODRISCOLL_SANAYEI], &m),
                 388 - 1.4e4 * pow(1e4, -2.0 / 3), 1e-10);
    assert_close(ce_relation_tg(CE_OGAWA, theta[CE_OGAWA], &m), 388 - 18 / sqrt(2), 1e-10);
    assert_close(ce_relation_tg(CE_LOG_PLATEAU, theta[CE_LOG_PLATEAU], &m),
                 388 + 70 * log10(1 / 3.0), 1e-10);
    assert_close(ce_relation_tg(CE_LOG_THREE, theta[CE_LOG_THREE], &m), 388 + 45 * log10(1 / 6.0),
                 1e-10);
    m.mn_g_mol = 600;
    assert_close(ce_relation_tg(CE_LOG_THREE, theta[CE_LOG_THREE], &m), 388 - 45 - 120, 1e-10);
    m.mn_g_mol = 1e5;
    assert_close(ce_relation_tg(CE_LOG_THREE, theta[CE_LOG_THREE], &m), 388, 1e-10);
}

/* A star of f arms has f ends, a ring none: Tg_inf - (n_e/2) K/Mn. */
static void chain_ends(void **state)
{
    (void)state;
    ce_molar star = {10000, (double)NAN, 4}, ring = {10000, (double)NAN, 0};
    assert_close(ce_relation_tg(CE_FLORY_FOX, theta[CE_FLORY_FOX], &star), 388 - 36, 1e-10);
    assert_close(ce_relation_tg(CE_FLORY_FOX, theta[CE_FLORY_FOX], &ring), 388, 1e-10);
    double mn;
    assert_int_equal(ce_relation_mn(CE_FLORY_FOX, theta[CE_FLORY_FOX], 352, &star, &mn), CE_OK);
    assert_digits(mn, 1e4, 1e-12);
    assert_int_equal(ce_relation_mn(CE_FLORY_FOX, theta[CE_FLORY_FOX], 352, &ring, &mn),
                     CE_E_DOMAIN);
}

static void asymptote(void **state)
{
    (void)state;
    for (unsigned i = 0; i < CE_RELATIONS; i++) {
        ce_molar m = {(double)INFINITY, (double)NAN, 2};
        double mn;
        assert_true(ce_relation_tg((ce_relation)i, theta[i], &m) == 388);
        assert_int_equal(
            ce_relation_mn((ce_relation)i, theta[i], 388.5, &(ce_molar){1, 1.5, 2}, &mn),
            CE_E_DOMAIN);
        assert_true(isnan(mn));
        m.mn_g_mol = -1;
        assert_true(isnan(ce_relation_tg((ce_relation)i, theta[i], &m)));
    }
    ce_molar unknown = {10000, (double)NAN, 2};
    assert_true(isnan(ce_relation_tg(CE_OGAWA, theta[CE_OGAWA], &unknown)));
}

/* Tg of a molar mass, and the molar mass of that Tg: the same again, to what Tg can carry. */
static void there_and_back(void **state)
{
    (void)state;
    for (unsigned i = 0; i < CE_RELATIONS; i++)
        for (double mn = 700; mn < 1e6; mn *= 1.37) {
            if (i >= CE_LOG_PLATEAU && mn > theta[i][i == CE_LOG_PLATEAU ? 2 : 4]) continue;
            ce_molar m = {mn, 1.4 * mn, 2};
            double tg = ce_relation_tg((ce_relation)i, theta[i], &m), back;
            assert_int_equal(ce_relation_mn((ce_relation)i, theta[i], tg, &m, &back), CE_OK);
            assert_digits(back, mn, 1e-9);
        }
}

static void derivatives(void **state)
{
    (void)state;
    for (unsigned i = 0; i < CE_RELATIONS; i++) {
        const ce_model *model = ce_relation_model((ce_relation)i);
        ce_model bent = ce_model_with_curvature(model, 1000);
        for (double mn = 1100; mn < 1e6; mn *= 2.3) {
            ce_chain chain = {.ends = 3, .dispersity = 1.7};
            double z = 1 / mn, h = 1e-5 * z, t[CE_MAX_PARAMETERS + 1];
            const ce_model *m = model->p < CE_MAX_PARAMETERS - 1 ? &bent : model;
            memcpy(t, theta[i], sizeof theta[i]);
            if (m == &bent) t[bent.p - 1] = 7;
            ce_jet at, up, down;
            m->eval(m, t, z, &chain, &at);
            m->eval(m, t, z + h, &chain, &up);
            m->eval(m, t, z - h, &chain, &down);
            assert_close(at.slope, (up.value - down.value) / (2 * h),
                         1e-6 * fabs(at.slope) + 388 * 1e-15 / h);
            assert_close(at.curvature, (up.slope - down.slope) / (2 * h),
                         1e-6 * fabs(at.curvature) + 1e-6 * fabs(at.slope) / z);
            for (size_t j = 0; j < m->p; j++) {
                double keep = t[j], d = 1e-5 * keep;
                t[j] = keep + d;
                m->eval(m, t, z, &chain, &up);
                t[j] = keep - d;
                m->eval(m, t, z, &chain, &down);
                t[j] = keep;
                assert_close(at.gradient[j], (up.value - down.value) / (2 * d),
                             1e-6 * fabs(at.gradient[j]) + 1e-8 * 388 / fabs(keep));
            }
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(names_find_themselves),
        cmocka_unit_test(formulas),
        cmocka_unit_test(chain_ends),
        cmocka_unit_test(asymptote),
        cmocka_unit_test(there_and_back),
        cmocka_unit_test(derivatives),
    };
    return cmocka_run_group_tests_name("fit/relation", tests, NULL, NULL);
}
