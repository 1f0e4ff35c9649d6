/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "check.h"

#include <chainend/simulate.h>

/* Cooling at q from equilibrium, heating at 10 K/min: the truth of the heating. */
static ce_ramp_truth heated(const char *material, double cooling_K_min, double max_step_K)
{
    const ce_glass_set *set = ce_glass_set_find(material);
    ce_simulation_config c = ce_simulation_config_default();
    c.n_glasses = 1;
    c.glass[0] = (ce_glass){.ln_a = set->ln_a,
                            .h_K = set->h_K,
                            .x = set->x,
                            .beta = set->beta,
                            .ref_K = 373.15,
                            .cp_glass = 1.5,
                            .step = 0.3,
                            .share = 1.0};
    double tg = ce_glass_temperature(&c.glass[0], 100.0);
    const ce_programme_step steps[] = {{.to_K = tg - 90.0, .rate_K_min = cooling_K_min},
                                       {.to_K = tg + 50.0, .rate_K_min = 10.0}};
    c.programme =
        (ce_programme){.start_K = tg + 50.0, .n = 2, .step = steps, .prior_rate_K_min = 10.0};
    c.max_step_K = max_step_K;
    ce_simulation *sim = NULL;
    ce_error err = CE_ERROR_INIT;
    assert_int_equal(ce_simulate_run(&c, &sim, &err), CE_OK);
    size_t n;
    const ce_ramp_truth *t = ce_simulation_truth(sim, &n);
    ce_ramp_truth last = t[n - 1];
    assert_int_equal(last.kind, CE_HEATING);
    ce_simulation_free(sim);
    return last;
}

/* Slope of ln(cooling rate) against 1/Tf' is -dh/R (Moynihan et al., J. Am. Ceram. Soc. 59 (1976) 12); with the
 * first-order term 2 Tf' it holds within 0.3 %. */
static void moynihan_slope(void **state)
{
    (void)state;
    static const char *const materials[] = {"ps", "pvac"};
    for (size_t i = 0; i < 2; i++) {
        double fast = heated(materials[i], 10.0, 0.1).tg_K[CE_FICTIVE];
        double slow = heated(materials[i], 1.0, 0.1).tg_K[CE_FICTIVE];
        double slope = log(10.0) / (1.0 / slow - 1.0 / fast),
               h = ce_glass_set_find(materials[i])->h_K;
        assert_digits(slope, h + 2.0 * fast, 0.003);
        assert_digits(slope, h, 0.012);
    }
}

/* Landmarks computed independently for this model (0.1 K steps, flat heat capacities): fictive within 0.02 K,
 * half-step within 0.05 K. */
static void independent_landmarks(void **state)
{
    (void)state;
    ce_ramp_truth ps = heated("ps", 10.0, 0.1), pvac = heated("pvac", 10.0, 0.1);
    assert_close(ps.tg_K[CE_FICTIVE], 370.623, 0.02);
    assert_close(ps.tg_K[CE_HALF_STEP], 373.16, 0.05);
    assert_close(pvac.tg_K[CE_FICTIVE], 309.004, 0.02);
    assert_close(pvac.tg_K[CE_HALF_STEP], 311.32, 0.05);
}

static void equal_areas_give_the_models_own_fictive_temperature(void **state)
{
    (void)state;
    ce_ramp_truth t = heated("ps", 10.0, 0.1);
    assert_close(t.fictive_area_K, t.tg_K[CE_FICTIVE], 0.02);
}

static void halving_the_step_changes_nothing_that_matters(void **state)
{
    (void)state;
    assert_close(heated("pvac", 10.0, 0.05).tg_K[CE_HALF_STEP],
                 heated("pvac", 10.0, 0.1).tg_K[CE_HALF_STEP], 0.01);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(moynihan_slope),
        cmocka_unit_test(independent_landmarks),
        cmocka_unit_test(equal_areas_give_the_models_own_fictive_temperature),
        cmocka_unit_test(halving_the_step_changes_nothing_that_matters),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
