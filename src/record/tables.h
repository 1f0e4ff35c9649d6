/* SPDX-License-Identifier: GPL-3.0-or-later
 * Which members a record has. */
#ifndef CE_RECORD_TABLES_H
#define CE_RECORD_TABLES_H

#include "record/members.h"

#include <chainend/record.h>

#define CE_RECORD_SCHEMA "chainend.calibration/1"

/* One parameter with the name and unit the relation gives it. */
typedef struct {
    char *name, *unit;
    ce_parameter is;
} ce_named_parameter;

/* One input file, one warning of the fit. */
typedef struct {
    char *path;
    size_t bytes;
    char *sha256;
} ce_named_file;
typedef struct {
    ce_severity severity;
    char *text;
} ce_warning_text;

extern const ce_members ce_table_record, ce_table_series, ce_table_row, ce_table_fit,
    ce_table_parameter, ce_table_point, ce_table_run, ce_table_comparison, ce_table_file,
    ce_table_warning;

/* The members of ce_table_fit that say how long its vectors are come first: the relation alone. */
ce_status ce_record_relation(const json_t *fit, const char *path, ce_relation *relation,
                             ce_error *err);

#endif
