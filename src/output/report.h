/* SPDX-License-Identifier: GPL-3.0-or-later
 * One page that says everything: a calibration with its unknowns, for an auditor. */
#ifndef CE_OUTPUT_REPORT_H
#define CE_OUTPUT_REPORT_H

#include <chainend/record.h>

#include "output/check.h"
#include "output/estimate.h"
#include "output/fit.h"

/* One figure: its picture, or the reason why there is none. */
typedef struct {
    const char *caption, *alt;
    char *svg; /* owned by the caller; NULL = not drawn */
    size_t n;
} ce_report_figure;

typedef struct {
    const ce_series *series;
    ce_fit_result fit;
    ce_estimate_result unknowns;  /* n may be 0                                          */
    const ce_check_result *check; /* NULL = no controls                                  */
    size_t n_figures;
    const ce_report_figure *figure;
    const char *no_figures; /* why a figure is missing; NULL = none is             */
    size_t n_files;
    const ce_checksum *file;
    size_t n_versions;
    const char *const (*version)[2]; /* name and version of what computed it       */
} ce_report;

/* Self-contained HTML without a script; the same report gives the same bytes. CE_OK, CE_E_NOMEM. */
ce_status ce_write_report(const ce_report *report, FILE *to);

#endif
