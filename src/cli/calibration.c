/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/calibration.h"

#include "cli/progress.h"

#include <math.h>

cli_calibrating cli_calibrating_default(void)
{
    return (cli_calibrating){.reading = ce_run_options_default(),
                             .how = ce_transition_options_default(),
                             .take = CE_CONSTRUCTIONS,
                             .reduce_to_K_min = (double)NAN,
                             .fit = ce_fit_options_default(),
                             .level = (double)NAN};
}

ce_status cli_set_relation(void *to, const char *value, ce_error *err)
{
    ce_relation r = ce_relation_find(value);
    if (r == CE_RELATIONS)
        return ce_fail(err, CE_E_ARG,
                       "'%.30s' is none of flory-fox, ueberreiter-kanig, odriscoll-sanayei, ogawa, "
                       "log-plateau, log-three",
                       value);
    *(ce_relation *)to = r;
    return CE_OK;
}

ce_status cli_set_scatter(void *to, const char *value, ce_error *err)
{
    bool found;
    ce_scatter s = ce_scatter_find(value, &found);
    if (!found)
        return ce_fail(err, CE_E_ARG, "'%.30s' is none of repeats, stated, residuals", value);
    *(ce_scatter *)to = s;
    return CE_OK;
}

ce_status cli_set_excess(void *to, const char *value, ce_error *err)
{
    bool found;
    ce_excess e = ce_excess_find(value, &found);
    if (!found)
        return ce_fail(err, CE_E_ARG, "'%.30s' is none of auto, none, additive, multiplicative",
                       value);
    *(ce_excess *)to = e;
    return CE_OK;
}

ce_status cli_set_fit_seed(void *to, const char *value, ce_error *err)
{
    return cli_whole_number(to, value, err);
}

int cli_read_series(const cli_command *command, const char *path, const cli_calibrating *c,
                    bool quiet, ce_series *series)
{
    ce_messages messages = {0};
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_series_read(path, series, &messages, &err);
    if (st == CE_OK) {
        if (c->take != CE_CONSTRUCTIONS) series->construction = c->take;
        if (!isnan(c->reduce_to_K_min)) series->reduce_to_K_min = c->reduce_to_K_min;
        cli_progress progress = cli_progress_begin("runs", quiet);
        st = ce_series_evaluate(series, &c->reading, &c->how, cli_progress_step, &progress,
                                &messages, &err);
        cli_progress_end(&progress);
        if (st == CE_OK && !isnan(series->reduce_to_K_min))
            st = ce_fit_reduce_rates(series, NULL, &err);
    }
    cli_messages(command, &messages, quiet);
    bool part = ce_messages_count(&messages, CE_ERROR) > 0;
    ce_messages_free(&messages);
    if (st == CE_OK) return part ? XIT_PART : XIT_OK;
    cli_error(command, &err);
    ce_series_free(series);
    return XIT_FAILED;
}

static ce_fit_options options_of(const cli_calibrating *c, const ce_series *series)
{
    ce_fit_options o = c->fit;
    if (!isnan(c->level))
        o.level = c->level;
    else if (!isnan(series->level))
        o.level = series->level;
    if (!isnan(series->mn_common_u_rel)) o.mn_common_u_rel = series->mn_common_u_rel;
    return o;
}

int cli_calibrate(const cli_command *command, const char *path, const cli_calibrating *c,
                  bool quiet, cli_calibration *calibration)
{
    *calibration = (cli_calibration){0};
    int status = cli_read_series(command, path, c, quiet, &calibration->series);
    if (status == XIT_FAILED) return status;
    ce_error err = CE_ERROR_INIT;
    ce_fit_options options = options_of(c, &calibration->series);
    if (ce_fit_series(&calibration->series, &options, &calibration->fit, &err) != CE_OK) {
        ce_error placed = CE_ERROR_INIT;
        (void)ce_fail_at(&placed, err.code, path, 0, 0, "%s", err.message);
        cli_error(command, &placed);
        ce_series_free(&calibration->series);
        return XIT_FAILED;
    }
    if (ce_ceiling(&calibration->fit, 1, 0.0, &calibration->ceiling_tg_K,
                   &calibration->ceiling_mn_g_mol) != CE_OK)
        calibration->ceiling_tg_K = calibration->ceiling_mn_g_mol = (double)NAN;
    return status;
}

void cli_calibration_free(cli_calibration *calibration)
{
    ce_fit_free(&calibration->fit);
    ce_series_free(&calibration->series);
}
