/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/answers.h"
#include "cli/asked.h"
#include "cli/calibration.h"
#include "cli/cli.h"
#include "cli/commands.h"

#include "output/estimate.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

static const cli_command command = {
    .name = "estimate",
    .operands = "SERIES [RUN...]",
    .summary = "Say what the Mn of an unknown is from its Tg, or the Tg from an Mn, with an "
               "interval that says "
               "what cannot be known.",
    .detail = "Asked with --tg, --mn or run files; without any of them, every unknown of the "
              "series is answered. A "
              "READING is V[,V...][±U][C|K|F]: repeats of one unknown with commas, a standard "
              "uncertainty of one "
              "reading after ± or +-, °C where no unit stands. Each RUN is an unknown of its own, "
              "evaluated as the "
              "calibration was.",
    .example = "chainend estimate series.csv\n"
               "chainend estimate --tg 98.2,98.5C --tg 371.6+-0.3K --mn 20kg/mol series.csv",
};

typedef struct {
    cli_common common;
    cli_calibrating calibrating;
    cli_questions questions;
    size_t mean_of;
    bool despite;
} arguments;

/* An unknown whose readings cannot be compared with the calibration gets no number. */
CE_PRINTF(4, 5)
static void mismatch(const arguments *a, ce_answer *answer, const char *path, const char *fmt, ...)
{
    char text[300];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    answer->despite = true;
    if (!a->despite)
        answer->status = ce_fail_at(&answer->error, CE_E_REFUSED, path, 0, 0,
                                    "%s; --despite overrules, and marks the result", text);
}

static void answer_question(const arguments *a, const cli_calibration *c, const cli_asked *asked,
                            ce_answer *answer)
{
    *answer = (ce_answer){.name = strdup(asked->text), .error = CE_ERROR_INIT};
    if (answer->name == NULL) {
        answer->status = ce_fail(&answer->error, CE_E_NOMEM, "out of memory");
        return;
    }
    if (asked->is_mn) {
        ce_molar molar = {
            .mn_g_mol = asked->mn_g_mol, .mw_g_mol = asked->mn_g_mol, .chain_ends = 2.0};
        answer->tg_of_mn = true;
        answer->readings = a->mean_of;
        answer->status =
            ce_estimate_tg(&c->fit, &molar, 0.0, a->mean_of, 0.0, &answer->tg, &answer->error);
        return;
    }
    ce_unknown unknown = ce_unknown_default();
    unknown.n = asked->n;
    unknown.tg_K = asked->tg_K;
    unknown.tg_u_K = asked->tg_u_K;
    unknown.mean_of = a->mean_of;
    answer->readings = asked->n * a->mean_of;
    cli_answer(c, &unknown, answer);
}

/* ---- runs on the command line --------------------------------------------------------------- */

static void compare_run(const arguments *a, const cli_calibration *c, const ce_evaluation *e,
                        ce_answer *answer)
{
    const ce_segment *s = &e->found.segment;
    double rate = fabs(s->rate_K_min), want = c->series.rate_K_min;
    if (!isnan(want) && fabs(rate / want - 1.0) > 0.05)
        mismatch(a, answer, e->path, "measured at %.3g K/min, the calibration at %.3g K/min", rate,
                 want);
    if (c->series.history == CE_HISTORY_AS_RECEIVED && s->kind == CE_HEATING && s->nth_of_kind > 1)
        mismatch(a, answer, e->path, "heating %zu evaluated, but the calibration is as received",
                 s->nth_of_kind);
    if (s->kind != CE_HEATING)
        mismatch(a, answer, e->path, "a %s segment, but the calibration is of heatings",
                 ce_segment_kind_name(s->kind));
}

static void answer_run(const arguments *a, const cli_calibration *c, const char *path,
                       ce_answer *answer)
{
    *answer = (ce_answer){.name = strdup(path), .readings = 1, .error = CE_ERROR_INIT};
    ce_transition_options how = a->calibrating.how;
    if (how.segment == 0) how.segment = c->series.segment;
    if (how.segment == 0 && c->series.history == CE_HISTORY_AS_RECEIVED) how.heating = 1;
    ce_evaluation e;
    answer->status = ce_evaluate(path, &a->calibrating.reading, &how, false, &e);
    if (answer->status == CE_OK) {
        const ce_reading *r = &e.found.item[0].tg[c->series.construction];
        ce_unknown unknown = ce_unknown_default();
        unknown.n = 1;
        unknown.tg_K = &r->value_K;
        unknown.reading_u_K = r->u_K;
        compare_run(a, c, &e, answer);
        if (isnan(r->value_K))
            answer->status =
                ce_fail_at(&answer->error, CE_E_REFUSED, path, 0, 0, "this run has no %s",
                           ce_construction_name(c->series.construction));
        cli_answer(c, &unknown, answer);
    } else
        answer->error = e.error;
    ce_evaluation_free(&e);
}

/* ---- the whole ------------------------------------------------------------------------------ */

static ce_answer *answer_all(const arguments *a, const cli_calibration *c, char **run,
                             size_t n_runs, size_t *n)
{
    bool series = a->questions.n == 0 && n_runs == 0;
    *n = a->questions.n + n_runs + (series ? cli_count_unknowns(&c->series) : 0);
    ce_answer *answer = calloc(*n > 0 ? *n : 1, sizeof *answer);
    if (answer == NULL) return NULL;
    size_t k = 0;
    for (size_t i = 0; i < a->questions.n; i++)
        answer_question(a, c, &a->questions.item[i], &answer[k++]);
    for (size_t i = 0; i < n_runs; i++) answer_run(a, c, run[i], &answer[k++]);
    for (size_t i = 0; series && i < c->series.n_samples; i++)
        if (c->series.sample[i].role == CE_UNKNOWN)
            cli_answer_sample(c, &c->series.sample[i], &answer[k++]);
    return answer;
}

static int deliver(const arguments *a, const cli_calibration *c, const ce_answer *answer, size_t n,
                   int status)
{
    ce_estimate_result result = cli_estimate_result(c, answer, n);
    size_t refused = 0;
    for (size_t i = 0; i < n; i++) {
        if (answer[i].status == CE_OK) continue;
        refused++;
        cli_error(&command, &answer[i].error);
    }
    for (size_t i = 0; i < a->questions.n; i++)
        result.celsius_assumed = result.celsius_assumed || a->questions.item[i].celsius_assumed;
    if (refused > 0) status = refused == n ? XIT_FAILED : XIT_PART;
    return cli_deliver(&command, &a->common, ce_write_estimate, &result, status);
}

static int run(const arguments *a, int argc, char **argv)
{
    cli_calibration c;
    int status = cli_calibrate(&command, argv[0], &a->calibrating, a->common.quiet, &c);
    if (status == XIT_FAILED) return status;
    size_t n = 0;
    ce_answer *answer = answer_all(a, &c, argv + 1, (size_t)(argc - 1), &n);
    if (answer == NULL || n == 0) {
        ce_error err = CE_ERROR_INIT;
        (void)ce_fail_at(&err, CE_E_ARG, argv[0], 0, 0, "%s",
                         answer == NULL
                             ? "out of memory"
                             : "the series has no unknown: ask with --tg, --mn or a run file");
        cli_error(&command, &err);
        status = XIT_FAILED;
    } else
        status = deliver(a, &c, answer, n, status);
    cli_answers_free(answer, n);
    cli_calibration_free(&c);
    return status;
}

int cmd_estimate(int argc, char **argv)
{
    arguments a = {.calibrating = cli_calibrating_default(), .mean_of = 1};
    const cli_option options[] = {
        CLI_COMMON_OPTIONS(&a.common),
        {.name = "tg",
         .argument = "READING",
         .help = "Mn of an unknown with this Tg, e.g. 98.2,98.5±0.3C; may be given several times",
         .kind = CLI_CALL,
         .to = &a.questions,
         .call = cli_add_tg},
        {.name = "mn",
         .argument = "VALUE",
         .help = "Tg of a sample with this Mn, e.g. 20kg/mol (g/mol where no unit stands)",
         .kind = CLI_CALL,
         .to = &a.questions,
         .call = cli_add_mn},
        {.name = "mean-of",
         .argument = "M",
         .help = "each reading is the mean of M runs (default 1)",
         .kind = CLI_COUNT,
         .to = &a.mean_of,
         .low = 1,
         .high = 10000},
        {.name = "despite",
         .help = "answer although a run was measured in another way than the calibration",
         .kind = CLI_FLAG,
         .to = &a.despite},
        CLI_FIT_OPTIONS(&a.calibrating),
        CLI_SERIES_OPTIONS(&a.calibrating),
    };
    int first, status;
    if (cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first, &status))
        status = first == argc ? cli_usage_error(&command, "no series file is named")
                               : run(&a, argc - first, argv + first);
    cli_questions_free(&a.questions);
    return status;
}
