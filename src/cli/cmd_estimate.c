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
    .operands = "CALIBRATION [RUN...]",
    .summary = "Say what the Mn of an unknown is from its Tg, or the Tg from an Mn, with an "
               "interval that says "
               "what cannot be known.",
    .detail = "Asked with --tg, --mn or run files; without any of them, every unknown of the "
              "series is answered. CALIBRATION is a series file, or a record saved by fit. A "
              "READING is V[,V...][±U][C|K|F]: repeats of one unknown with commas, a standard "
              "uncertainty of one "
              "reading after ± or +-, °C where no unit stands. Each RUN is an unknown of its own, "
              "evaluated as the "
              "calibration was.",
    .example = "chainend estimate calibration.json --tg 98.2,98.5C\n"
               "chainend estimate --tg 98.2,98.5C --tg 371.6+-0.3K --mn 20kg/mol series.csv",
};

typedef struct {
    cli_common common;
    cli_calibrating calibrating;
    cli_questions questions;
    cli_answering how;
    size_t mean_of;
    bool despite, pool, ascii;
    double rate_tolerance;
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
    cli_answer(c, &a->how, &unknown, answer);
}

/* ---- runs on the command line --------------------------------------------------------------- */

/* Heatings, coolings and holds of the file are not at hand; the flag tells a first heating that has a
 * later one. */
static bool first_of_several(const ce_evaluation *e)
{
    const ce_transition *t = &e->found.item[0];
    size_t n = 0, heatings = 0;
    const ce_segment *s = e->run == NULL ? NULL : ce_run_segments(e->run, &n);
    for (size_t i = 0; i < n; i++) heatings += s[i].kind == CE_HEATING;
    for (size_t f = 0; f < t->n_flags; f++)
        if (t->flags[f].code == CE_FLAG_FIRST_HEATING) return heatings > 1;
    return false;
}

/* A run of another rate is reduced when the calibration was; else it must agree. *decades: by how much
 * it was reduced. */
static void compare_rate(const arguments *a, const cli_calibration *c, const ce_evaluation *e,
                         double *tg_K, double *decades, ce_answer *answer)
{
    const double rate = fabs(e->found.segment.rate_K_min), want = c->series.rate_K_min;
    *decades = 0.0;
    if (isnan(want)) return;
    if (!isnan(c->series.rate_slope_K_decade)) {
        const ce_rate_slope slope = {.slope_K_decade = c->series.rate_slope_K_decade,
                                     .reference_K_min = want};
        *tg_K = ce_rate_reduce(&slope, *tg_K, rate, decades);
    } else if (fabs(rate / want - 1.0) > a->rate_tolerance)
        mismatch(a, answer, e->path, "measured at %.3g K/min, the calibration at %.3g K/min", rate,
                 want);
}

static void compare_run(const arguments *a, const cli_calibration *c, const ce_evaluation *e,
                        ce_answer *answer)
{
    const ce_segment *s = &e->found.segment;
    if (c->series.history == CE_HISTORY_AS_RECEIVED && s->kind == CE_HEATING && s->nth_of_kind > 1)
        mismatch(a, answer, e->path, "heating %zu evaluated, but the calibration is as received",
                 s->nth_of_kind);
    if (c->series.history == CE_HISTORY_ERASED && first_of_several(e))
        mismatch(a, answer, e->path,
                 "first heating evaluated, but the history of the calibration is erased");
    if (s->kind != CE_HEATING)
        mismatch(a, answer, e->path, "a %s segment, but the calibration is of heatings",
                 ce_segment_kind_name(s->kind));
}

/* As the runs of the calibration were evaluated, unless an option says otherwise. */
static ce_transition_options how_of(const arguments *a, const cli_calibration *c)
{
    ce_transition_options how = a->calibrating.how;
    if (how.segment == 0) how.segment = c->series.segment;
    if (how.segment == 0 && c->series.history == CE_HISTORY_AS_RECEIVED) how.heating = 1;
    if (isnan(how.glass.low_K)) how.glass = c->glass;
    if (isnan(how.liquid.low_K)) how.liquid = c->liquid;
    return how;
}

/* The reading of one run; false when there is none, with the reason in answer. */
static bool read_run(const arguments *a, const cli_calibration *c, const char *path, double *tg_K,
                     double *u_K, double *decades, ce_answer *answer)
{
    const ce_transition_options how = how_of(a, c);
    ce_evaluation e;
    ce_status st = ce_evaluate(path, &a->calibrating.reading, &how, true, &e);
    if (st == CE_OK) {
        const ce_reading *r = &e.found.item[0].tg[c->series.construction];
        *tg_K = r->value_K;
        *u_K = r->u_K;
        compare_rate(a, c, &e, tg_K, decades, answer);
        compare_run(a, c, &e, answer);
        if (isnan(r->value_K) && answer->status == CE_OK)
            answer->status =
                ce_fail_at(&answer->error, CE_E_REFUSED, path, 0, 0, "this run has no %s",
                           ce_construction_name(c->series.construction));
    } else {
        answer->status = st;
        answer->error = e.error;
    }
    ce_evaluation_free(&e);
    return answer->status == CE_OK;
}

/* n runs of one unknown. */
static void answer_runs(const arguments *a, const cli_calibration *c, char **path, size_t n,
                        ce_answer *answer)
{
    *answer = (ce_answer){
        .name = strdup(path[0]), .from_runs = true, .readings = n, .error = CE_ERROR_INIT};
    double *tg = calloc(n, sizeof *tg), squares = 0.0, decades = 0.0;
    if (answer->name == NULL || tg == NULL)
        answer->status = ce_fail(&answer->error, CE_E_NOMEM, "out of memory");
    for (size_t i = 0; i < n && answer->status == CE_OK; i++) {
        double u = 0.0, off = 0.0;
        if (!read_run(a, c, path[i], &tg[i], &u, &off, answer)) break;
        squares += u * u / (double)n;
        decades += off / (double)n;
    }
    ce_unknown unknown = ce_unknown_default();
    unknown.n = n;
    unknown.tg_K = tg;
    unknown.reading_u_K = sqrt(squares);
    unknown.rate_decades = decades;
    cli_answer(c, &a->how, &unknown, answer);
    free(tg);
}

/* ---- the whole ------------------------------------------------------------------------------ */

static ce_answer *answer_all(const arguments *a, const cli_calibration *c, char **run,
                             size_t n_runs, size_t *n)
{
    const bool series = a->questions.n == 0 && n_runs == 0;
    const size_t each = a->pool && n_runs > 0 ? n_runs : 1;
    *n = a->questions.n + n_runs / each + (series ? cli_count_unknowns(&c->series) : 0);
    ce_answer *answer = calloc(*n > 0 ? *n : 1, sizeof *answer);
    if (answer == NULL) return NULL;
    size_t k = 0;
    for (size_t i = 0; i < a->questions.n; i++)
        answer_question(a, c, &a->questions.item[i], &answer[k++]);
    for (size_t i = 0; i < n_runs; i += each) answer_runs(a, c, run + i, each, &answer[k++]);
    for (size_t i = 0; series && i < c->series.n_samples; i++)
        if (c->series.sample[i].role == CE_UNKNOWN)
            cli_answer_sample(c, &a->how, &c->series.sample[i], &answer[k++]);
    return answer;
}

static int deliver(const arguments *a, const cli_calibration *c, const ce_answer *answer, size_t n,
                   int status)
{
    ce_estimate_result result = cli_estimate_result(c, answer, n);
    size_t refused = 0;
    result.ascii = a->ascii || !cli_speaks_utf8();
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
    arguments a = {.calibrating = cli_calibrating_default(),
                   .how = cli_answering_default(),
                   .mean_of = 1,
                   .rate_tolerance = 0.05};
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
        {.name = "pool",
         .help = "the run files are repeats of one unknown (default: each is one of its own)",
         .kind = CLI_FLAG,
         .to = &a.pool},
        {.name = "rate-tolerance",
         .argument = "SHARE",
         .help = "heating rates that differ by less count as the same (default 5%)",
         .kind = CLI_CALL,
         .to = &a.rate_tolerance,
         .call = cli_set_share},
        {.name = "monte-carlo",
         .help = "cross-check every interval by propagation of distributions (JCGM 101)",
         .kind = CLI_FLAG,
         .to = &a.how.monte_carlo},
        {.name = "ascii",
         .help = "plain ASCII in the ruler, whatever the terminal says",
         .kind = CLI_FLAG,
         .to = &a.ascii},
        {.name = "despite",
         .help = "answer although a run was measured in another way than the calibration",
         .kind = CLI_FLAG,
         .to = &a.despite},
        CLI_FIT_OPTIONS(&a.calibrating),
        CLI_SERIES_OPTIONS(&a.calibrating),
    };
    int first, status;
    if (cli_parse(&command, options, sizeof options / sizeof *options, argc, argv, &first, &status))
        status = first == argc ? cli_usage_error(&command, "no calibration is named")
                               : run(&a, argc - first, argv + first);
    cli_questions_free(&a.questions);
    return status;
}
