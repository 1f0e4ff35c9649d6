/* SPDX-License-Identifier: GPL-3.0-or-later
 * Stands in for src/fit until it lands. */
#include <chainend/fit.h>
#include <math.h>
#include <string.h>
static double exponent(ce_relation r)
{
    return r == CE_ODRISCOLL_SANAYEI ? 2.0 / 3.0 : 1.0;
}
double ce_relation_tg(ce_relation r, const double *th, const ce_molar *m)
{
    return th[0] - th[1] * 0.5 * m->chain_ends * pow(m->mn_g_mol, -exponent(r));
}
size_t ce_relation_parameters(ce_relation r)
{
    (void)r;
    return 2;
}
ce_status ce_fit_mn(const ce_fit *fit, double tg, const ce_molar *like, double *mn)
{
    double x = (fit->parameter[0].value - tg) / (fit->parameter[1].value * 0.5 * like->chain_ends);
    *mn = NAN;
    if (!(x > 0)) return CE_E_DOMAIN;
    *mn = pow(x, -1 / exponent(fit->options.relation));
    return CE_OK;
}
ce_status ce_fit_predict(const ce_fit *fit, const ce_molar *m, ce_prediction *p)
{
    double th[2] = {fit->parameter[0].value, fit->parameter[1].value};
    memset(p, 0, sizeof *p);
    p->tg_K = ce_relation_tg(fit->options.relation, th, m);
    p->gradient[0] = 1;
    double x = 0.5 * m->chain_ends * pow(m->mn_g_mol, -exponent(fit->options.relation));
    p->gradient[1] = -x;
    for (int i = 0; i < 2; i++)
        for (int j = 0; j < 2; j++) {
            double gg = p->gradient[i] * p->gradient[j];
            p->var_fit += gg * fit->covariance[2 * i + j];
            p->var_rep += gg * fit->covariance_run[2 * i + j];
            p->var_excess += gg * fit->covariance_excess[2 * i + j];
        }
    p->dtg_dmn = isinf(m->mn_g_mol) ? 0 : th[1] * exponent(fit->options.relation) * x / m->mn_g_mol;
    for (int i = 0; i < 2; i++) {
        p->common_mn_K += p->gradient[i] * fit->mn_common_shift[i];
        p->common_tg_K += p->gradient[i] * fit->tg_common_shift[i];
        p->common_rate_K += p->gradient[i] * fit->rate_common_shift[i];
    }
    return isfinite(p->tg_K) ? CE_OK : CE_E_DOMAIN;
}
double ce_fit_nu_parts(const ce_fit *fit, const ce_prediction *p, double vr, double vx, double ve)
{
    double run = vr, ex = vx, exact = ve;
    if (p) {
        run += p->var_rep;
        ex += p->var_excess;
        exact += p->var_fit - p->var_rep - p->var_excess;
    }
    double den = (run > 0 ? run * run / fit->run_nu : 0) + (ex > 0 ? ex * ex / fit->excess_nu : 0);
    double tot = run + ex + exact;
    return den > 0 ? tot * tot / den : (double)INFINITY;
}
double ce_fit_nu(const ce_fit *fit, const ce_prediction *p, double v)
{
    return ce_fit_nu_parts(fit, p, v, 0, 0);
}
