/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/series.h>

#include <stdlib.h>
#include <string.h>

ce_status ce_evaluate(const char *path, const ce_run_options *reading,
                      const ce_transition_options *how, bool keep_run, ce_evaluation *evaluation)
{
    *evaluation = (ce_evaluation){.error = CE_ERROR_INIT, .path = strdup(path)};
    ce_error *err = &evaluation->error;
    ce_status st = evaluation->path == NULL ? ce_fail(err, CE_E_NOMEM, "out of memory")
                                            : ce_run_read(path, reading, &evaluation->run, err);
    if (st == CE_OK) st = ce_run_settle_sign(evaluation->run, err);
    if (st == CE_OK) st = ce_transition_find(evaluation->run, how, &evaluation->found, err);
    if (st != CE_OK && err->file[0] == '\0') {
        /* what was found wrong with the curve has no place in the file, but it has a file */
        ce_error placed = CE_ERROR_INIT;
        (void)ce_fail_at(&placed, st, path, err->line, err->column, "%s", err->message);
        *err = placed;
    }
    if (!keep_run) {
        ce_run_free(evaluation->run);
        evaluation->run = NULL;
    }
    evaluation->status = st;
    return st;
}

void ce_evaluation_free(ce_evaluation *evaluation)
{
    if (evaluation == NULL) return;
    ce_transitions_free(&evaluation->found);
    ce_run_free(evaluation->run);
    free(evaluation->path);
    *evaluation = (ce_evaluation){.error = CE_ERROR_INIT};
}
