/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/calibration.h"

#include "cli/progress.h"

#include "output/file.h"
#include "text/load.h"
#include "text/value.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

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

ce_status cli_set_share(void *to, const char *value, ce_error *err)
{
    double x;
    ce_status st = ce_parse_value(value, '.', CE_DIM_FRACTION, NULL, &x, NULL, err);
    if (st != CE_OK) return st;
    if (!(x >= 0.0 && x < 1.0))
        return ce_fail(err, CE_E_DOMAIN, "'%.40s' must lie between 0 and 100 %%", value);
    *(double *)to = x;
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

enum { MOST_BYTES = 256 << 20 };

/* The series file, evaluated, from its bytes. */
static int evaluate_series(const cli_command *command, const char *path, const ce_bytes *bytes,
                           const cli_calibrating *c, bool quiet, ce_series *series)
{
    ce_messages messages = {0};
    ce_error err = CE_ERROR_INIT;
    ce_status st = ce_series_read_memory(bytes->data, bytes->n, path, series, &messages, &err);
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

/* XIT_OK or XIT_FAILED, told. */
static int load(const cli_command *command, const char *path, ce_bytes *bytes)
{
    ce_error err = CE_ERROR_INIT;
    if (ce_bytes_load(path, MOST_BYTES, bytes, &err) == CE_OK) return XIT_OK;
    cli_error(command, &err);
    return XIT_FAILED;
}

static int fail_with(const cli_command *command, const char *path, ce_status st, const char *text)
{
    ce_error err = CE_ERROR_INIT;
    (void)ce_fail_at(&err, st, path, 0, 0, "%s", text);
    cli_error(command, &err);
    return XIT_FAILED;
}

int cli_read_series(const cli_command *command, const char *path, const cli_calibrating *c,
                    bool quiet, ce_series *series)
{
    ce_bytes bytes;
    int status = load(command, path, &bytes);
    if (status != XIT_OK) return status;
    status = ce_record_is(bytes.data, bytes.n)
                 ? fail_with(command, path, CE_E_ARG,
                             "is a saved calibration, a series file is wanted here")
                 : evaluate_series(command, path, &bytes, c, quiet, series);
    free(bytes.data);
    return status;
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

/* A record holds its fit: options that would make another one are refused. */
static const char *changes_the_fit(const cli_calibrating *c)
{
    const ce_fit_options plain = ce_fit_options_default();
    if (c->fit.relation != plain.relation) return "--relation";
    if (c->fit.scatter != plain.scatter) return "--scatter";
    if (c->fit.excess != plain.excess) return "--excess";
    if (c->fit.tg_common_u_K != plain.tg_common_u_K) return "--tg-common-u";
    if (c->fit.resamples != plain.resamples) return "--resamples";
    if (c->take != CE_CONSTRUCTIONS) return "--take";
    if (!isnan(c->reduce_to_K_min)) return "--reduce-to";
    return NULL;
}

static int from_record(const cli_command *command, const char *path, const ce_bytes *bytes,
                       const cli_calibrating *c, cli_calibration *calibration)
{
    ce_error err = CE_ERROR_INIT;
    ce_record record;
    const char *option = changes_the_fit(c);
    if (option != NULL) {
        char text[160];
        (void)snprintf(text, sizeof text,
                       "%s cannot change a saved calibration: fit the series again", option);
        return fail_with(command, path, CE_E_ARG, text);
    }
    if (ce_record_read(bytes->data, bytes->n, path, &record, &err) != CE_OK) {
        cli_error(command, &err);
        return XIT_FAILED;
    }
    calibration->series = record.series;
    calibration->fit = record.fit;
    calibration->glass = record.glass;
    calibration->liquid = record.liquid;
    calibration->recorded = true;
    if (!isnan(c->level)) calibration->fit.options.level = c->level;
    free(record.made_by); /* series and fit have moved */
    ce_checksums_free(record.file, record.n_files);
    return XIT_OK;
}

static int from_series(const cli_command *command, const char *path, const ce_bytes *bytes,
                       const cli_calibrating *c, bool quiet, cli_calibration *calibration)
{
    int status = evaluate_series(command, path, bytes, c, quiet, &calibration->series);
    if (status == XIT_FAILED) return status;
    ce_error err = CE_ERROR_INIT;
    ce_fit_options options = options_of(c, &calibration->series);
    calibration->glass = c->how.glass;
    calibration->liquid = c->how.liquid;
    if (ce_fit_series(&calibration->series, &options, &calibration->fit, &err) == CE_OK)
        return status;
    ce_series_free(&calibration->series);
    return fail_with(command, path, err.code, err.message);
}

/* Ten molar masses evenly spaced in log over the standards, rounded to two digits. */
static void fill_range(cli_calibration *c)
{
    double low = HUGE_VAL, high = 0.0, mn[CLI_RANGE_ROWS];
    for (size_t i = 0; i < c->fit.n_points; i++) {
        low = fmin(low, c->fit.point[i].molar.mn_g_mol);
        high = fmax(high, c->fit.point[i].molar.mn_g_mol);
    }
    if (!(high > low)) return;
    for (size_t i = 0; i < CLI_RANGE_ROWS; i++) {
        const double x = low * pow(high / low, (double)i / (CLI_RANGE_ROWS - 1));
        const double unit = pow(10.0, floor(log10(x)) - 1.0);
        mn[i] = round(x / unit) * unit;
    }
    if (ce_working_range(&c->fit, 1, 0.0, CLI_RANGE_ROWS, mn, c->range, NULL) == CE_OK)
        c->n_range = CLI_RANGE_ROWS;
}

int cli_calibrate(const cli_command *command, const char *path, const cli_calibrating *c,
                  bool quiet, cli_calibration *calibration)
{
    *calibration = (cli_calibration){0};
    ce_bytes bytes;
    int status = load(command, path, &bytes);
    if (status == XIT_FAILED) return status;
    status = ce_record_is(bytes.data, bytes.n)
                 ? from_record(command, path, &bytes, c, calibration)
                 : from_series(command, path, &bytes, c, quiet, calibration);
    free(bytes.data);
    if (status == XIT_FAILED) return status;
    if (ce_ceiling(&calibration->fit, 1, 0.0, &calibration->ceiling_tg_K,
                   &calibration->ceiling_mn_g_mol) != CE_OK)
        calibration->ceiling_tg_K = calibration->ceiling_mn_g_mol = (double)NAN;
    fill_range(calibration);
    return status;
}

void cli_calibration_free(cli_calibration *calibration)
{
    ce_fit_free(&calibration->fit);
    ce_series_free(&calibration->series);
}

ce_status cli_save(const char *path, const cli_calibration *c, ce_error *err)
{
    ce_checksum *file = NULL;
    size_t n = 0;
    char *text = NULL;
    ce_output output;
    ce_status st = ce_checksum_series(&c->series, &file, &n, err);
    if (st == CE_OK)
        st = ce_record_text(&c->series, &c->fit, c->glass, c->liquid, file, n, &text, err);
    if (st == CE_OK) st = ce_output_begin(&output, path, err);
    if (st == CE_OK) {
        if (fputs(text, output.stream) == EOF)
            st = ce_fail_at(err, CE_E_IO, path, 0, 0, "cannot write");
        if (st == CE_OK) st = ce_output_commit(&output, err);
        ce_output_discard(&output);
    }
    free(text);
    ce_checksums_free(file, n);
    return st;
}
