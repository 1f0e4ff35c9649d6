/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/cli.h"
#include "cli/commands.h"
#include "cli/simulating.h"

#include "output/file.h"
#include "output/sheet.h"

#include <errno.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

static const cli_command command = {
    .name = "simulate",
    .operands = "run | series",
    .summary = "Make synthetic data with known truth: a DSC run of a glass with structural "
               "relaxation, or a series "
               "of standards and unknowns with their runs.",
    .detail = "'run' writes the run to standard output or to -o FILE, and its truth as JSON to "
              "--truth FILE. 'series' "
              "writes series.csv, truth.json, truth.csv and the folder runs into the folder named "
              "by -o. All "
              "data made by it are "
              "invented; the same seed gives the same bytes.",
    .example =
        "chainend simulate run --tg 85C --noise 5uW --truth truth.json -o run.csv\n"
        "chainend simulate series --standard A:2kg/mol --standard B:20kg/mol --standard "
        "C:200kg/mol "
        "--unknown X:9kg/mol --parameters 360,110000 --mn-u 5% --run-sd 0.4 --noise 5uW -o demo",
};

/* ---- writing ------------------------------------------------------------------------------ */

static int failed(ce_error *err)
{
    cli_error(&command, err);
    return XIT_FAILED;
}

static ce_status write_bytes(const char *path, const char *bytes, size_t n, ce_error *err)
{
    if (path == NULL || strcmp(path, "-") == 0)
        return fwrite(bytes, 1, n, stdout) == n ? CE_OK : ce_fail(err, CE_E_IO, "cannot write");
    ce_output output;
    ce_status st = ce_output_begin(&output, path, err);
    if (st != CE_OK) return st;
    if (fwrite(bytes, 1, n, output.stream) != n)
        st = ce_fail_at(err, CE_E_IO, path, 0, 0, "cannot write");
    if (st == CE_OK) st = ce_output_commit(&output, err);
    ce_output_discard(&output);
    return st;
}

static ce_status make_folder(const char *path, ce_error *err)
{
    if (mkdir(path, 0777) == 0 || errno == EEXIST) return CE_OK;
    return ce_fail_at(err, CE_E_IO, path, 0, 0, "cannot make the folder: %s", strerror(errno));
}

/* ---- run ---------------------------------------------------------------------------------- */

static int simulate_run(cli_simulating *s, const char *output, const char *truth)
{
    ce_error err = CE_ERROR_INIT;
    ce_simulation *simulation = NULL;
    char *bytes = NULL, *json = NULL;
    size_t n = 0;
    ce_status st = ce_simulate_run(&s->config, &simulation, &err);
    if (st == CE_OK)
        st = ce_simulation_write(simulation, &s->layout[0], "simulated", &bytes, &n, &err);
    if (st == CE_OK && truth != NULL) st = ce_simulation_truth_json(simulation, &json, &err);
    if (st == CE_OK) st = write_bytes(output, bytes, n, &err);
    if (st == CE_OK && truth != NULL) st = write_bytes(truth, json, strlen(json), &err);
    free(json);
    free(bytes);
    ce_simulation_free(simulation);
    if (st == CE_E_DOMAIN || st == CE_E_ARG || st == CE_E_LIMIT)
        return cli_usage_error(&command, "%s", err.message);
    return st == CE_OK ? XIT_OK : failed(&err);
}

/* ---- series ------------------------------------------------------------------------------- */

typedef struct {
    ce_relation relation;
    const double *theta;
} law;

static double law_tg(double mn_g_mol, const void *context)
{
    const law *l = context;
    ce_molar molar = {.mn_g_mol = mn_g_mol, .mw_g_mol = mn_g_mol, .chain_ends = 2.0};
    return ce_relation_tg(l->relation, l->theta, &molar);
}

static size_t count_runs(const ce_simulated_series *series)
{
    size_t n = 0;
    for (size_t i = 0; i < series->n; i++) n += series->sample[i].n;
    return n;
}

/* "runs/q1-2.csv": the ending says which layout it is in. */
static char **name_files(const cli_simulating *s, const ce_simulated_series *series)
{
    static const char *const endings[] = {"csv", "txt", "tsv", "dat"};
    char **name = calloc(count_runs(series) + 1, sizeof *name);
    size_t at = 0;
    for (size_t i = 0; name != NULL && i < series->n; i++)
        for (size_t k = 0; k < series->sample[i].n; k++, at++) {
            char d = s->layout[at % s->n_layouts].delimiter;
            const char *e = endings[d == ';' ? 1 : d == '\t' ? 2 : d == ' ' ? 3 : 0];
            if (asprintf(&name[at], "runs/%s-%zu.%s", series->sample[i].name, k + 1, e) < 0)
                name[at] = NULL;
        }
    return name;
}

static void free_names(char **name)
{
    for (size_t i = 0; name != NULL && name[i] != NULL; i++) free(name[i]);
    free(name);
}

static ce_status write_runs(const cli_simulating *s, const ce_simulated_series *series,
                            const char *folder, char **name, ce_error *err)
{
    ce_status st = CE_OK;
    size_t at = 0;
    for (size_t i = 0; i < series->n && st == CE_OK; i++)
        for (size_t k = 0; k < series->sample[i].n && st == CE_OK; k++, at++) {
            char *bytes = NULL, *path = NULL;
            size_t n = 0;
            st = ce_simulation_write(series->sample[i].reading[k].simulation,
                                     &s->layout[at % s->n_layouts], series->sample[i].name, &bytes,
                                     &n, err);
            if (st == CE_OK && (name[at] == NULL || asprintf(&path, "%s/%s", folder, name[at]) < 0))
                st = ce_fail(err, CE_E_NOMEM, "out of memory");
            if (st == CE_OK) st = write_bytes(path, bytes, n, err);
            free(path);
            free(bytes);
        }
    return st;
}

static ce_status write_text(const char *folder, const char *name, const char *text, ce_error *err)
{
    char *path = NULL;
    if (asprintf(&path, "%s/%s", folder, name) < 0)
        return ce_fail(err, CE_E_NOMEM, "out of memory");
    ce_status st = write_bytes(path, text, strlen(text), err);
    free(path);
    return st;
}

/* The truth in short, for scripts and spreadsheets. */
static char *short_truth(const ce_simulated_series *series)
{
    char *text = NULL;
    size_t n = 0;
    FILE *to = open_memstream(&text, &n);
    if (to == NULL) return NULL;
    ce_csv_heading(to, "sample,role,mn_g_mol,tg_K");
    for (size_t i = 0; i < series->n; i++) {
        ce_csv_text(to, true, series->sample[i].name);
        ce_csv_text(to, false, ce_role_name(series->sample[i].role));
        ce_csv_number(to, false, series->sample[i].mn_g_mol);
        ce_csv_number(to, false, series->sample[i].tg_K);
        ce_csv_end_row(to);
    }
    if (fclose(to) == 0) return text;
    free(text);
    return NULL;
}

static ce_status write_series(const cli_simulating *s, const ce_simulated_series *series,
                              const char *folder, ce_error *err)
{
    char *runs = NULL, *table = NULL, *json = NULL, *brief = short_truth(series);
    char **name = s->bare ? NULL : name_files(s, series);
    const char *parameter[CE_MAX_PARAMETERS];
    for (size_t i = 0; i < s->n_theta; i++)
        parameter[i] = ce_relation_parameter_name(s->relation, i);
    ce_series_words words = {.polymer = s->polymer,
                             .scope = s->scope,
                             .relation = ce_relation_name(s->relation),
                             .n_parameters = s->n_theta,
                             .parameter_name = parameter,
                             .parameter = s->theta,
                             .run_file = (const char *const *)name};
    ce_status st =
        asprintf(&runs, "%s/runs", folder) < 0 || brief == NULL || (!s->bare && name == NULL)
            ? ce_fail(err, CE_E_NOMEM, "out of memory")
            : make_folder(folder, err);
    if (st == CE_OK && !s->bare) st = make_folder(runs, err);
    if (st == CE_OK) st = ce_simulated_series_table(&s->plan, series, &words, &table, err);
    if (st == CE_OK) st = ce_simulated_series_json(&s->plan, series, &words, &json, err);
    if (st == CE_OK && !s->bare) st = write_runs(s, series, folder, name, err);
    if (st == CE_OK) st = write_text(folder, "truth.json", json, err);
    if (st == CE_OK) st = write_text(folder, "truth.csv", brief, err);
    if (st == CE_OK) st = write_text(folder, "series.csv", table, err);
    free(brief);
    free_names(name);
    free(runs);
    free(table);
    free(json);
    return st;
}

static int simulate_series(cli_simulating *s, const char *folder)
{
    ce_error err = CE_ERROR_INIT;
    if (folder == NULL)
        return cli_usage_error(&command, "a series needs a folder to go to: -o FOLDER");
    if (s->n_theta != ce_relation_parameters(s->relation))
        return cli_usage_error(&command, "--parameters: %s has %zu parameters",
                               ce_relation_name(s->relation), ce_relation_parameters(s->relation));
    law l = {s->relation, s->theta};
    s->plan.relation = law_tg;
    s->plan.relation_context = &l;
    ce_simulated_series series;
    ce_status st = ce_simulate_series(&s->plan, &series, &err);
    if (st == CE_OK) st = write_series(s, &series, folder, &err);
    ce_simulated_series_free(&series);
    if (st == CE_E_DOMAIN || st == CE_E_ARG || st == CE_E_LIMIT)
        return cli_usage_error(&command, "%s", err.message);
    return st == CE_OK ? XIT_OK : failed(&err);
}

/* ---- the command -------------------------------------------------------------------------- */

static int run(cli_simulating *s, const char *kind, const char *output, const char *truth)
{
    ce_error err = CE_ERROR_INIT;
    if (cli_simulating_settle(s, &err) != CE_OK)
        return cli_usage_error(&command, "%s", err.message);
    if (strcmp(kind, "run") == 0) return simulate_run(s, output, truth);
    if (strcmp(kind, "series") == 0) return simulate_series(s, output);
    return cli_usage_error(&command, "'%s' is neither run nor series", kind);
}

int cmd_simulate(int argc, char **argv)
{
    cli_simulating s = cli_simulating_default();
    const char *output = NULL, *truth = NULL;
    const cli_option options[] = {
        {.name = "output",
         .letter = 'o',
         .argument = "PATH",
         .help = "file of the run, or folder of the series",
         .kind = CLI_TEXT,
         .to = &output},
        {.name = "truth",
         .argument = "FILE",
         .help = "write the truth of a run to FILE, as JSON",
         .kind = CLI_TEXT,
         .to = &truth},
        CLI_GLASS_OPTIONS(&s),
        CLI_PROGRAMME_OPTIONS(&s),
        CLI_INSTRUMENT_OPTIONS(&s),
        CLI_LAYOUT_OPTIONS(&s),
        CLI_SAMPLE_OPTIONS(&s),
    };
    int first, status;
    if (cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first, &status))
        status = argc - first == 1
                     ? run(&s, argv[first], output, truth)
                     : cli_usage_error(&command, "what to simulate must be named: run or series");
    cli_simulating_free(&s);
    return status;
}
