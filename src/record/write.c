/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "record/tables.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Append an object made of table and struct to a list of an object. */
static bool append(json_t *object, const char *key, const ce_members *table, const void *from)
{
    json_t *list = json_object_get(object, key);
    json_t *o = ce_members_write(table, from, 0);
    return o != NULL && json_array_append_new(list, o) == 0;
}

static bool put_parameters(json_t *o, const ce_fit *fit)
{
    bool good = true;
    for (size_t i = 0; i < fit->p && good; i++) {
        const ce_relation r = fit->options.relation;
        const ce_named_parameter named = {(char *)(uintptr_t)ce_relation_parameter_name(r, i),
                                          (char *)(uintptr_t)ce_relation_parameter_unit(r, i),
                                          fit->parameter[i]};
        good = append(o, "parameters", &ce_table_parameter, &named);
    }
    return good;
}

static json_t *fit_object(const ce_fit *fit)
{
    json_t *o = ce_members_write(&ce_table_fit, fit, fit->p);
    bool good = o != NULL && put_parameters(o, fit);
    for (size_t i = 0; i < fit->n_points && good; i++)
        good = append(o, "samples", &ce_table_point, &fit->point[i]);
    for (size_t i = 0; i < fit->n_runs && good; i++)
        good = append(o, "runs", &ce_table_run, &fit->run[i]);
    for (size_t i = 0; i < fit->n_comparison && good; i++)
        good = append(o, "comparison", &ce_table_comparison, &fit->comparison[i]);
    for (size_t i = 0; i < fit->warnings.n && good; i++) {
        const ce_warning_text warning = {fit->warnings.item[i].severity,
                                         fit->warnings.item[i].at.message};
        good = append(o, "warnings", &ce_table_warning, &warning);
    }
    if (good) return o;
    json_decref(o);
    return NULL;
}

static json_t *series_object(const ce_series *series)
{
    json_t *o = ce_members_write(&ce_table_series, series, 0);
    bool good = o != NULL;
    for (size_t i = 0; i < series->n_rows && good; i++)
        good = append(o, "rows", &ce_table_row, &series->row[i]);
    if (good) return o;
    json_decref(o);
    return NULL;
}

ce_status ce_record_text(const ce_series *series, const ce_fit *fit, ce_window glass,
                         ce_window liquid, const ce_checksum *file, size_t n_files, char **json,
                         ce_error *err)
{
    char made_by[64];
    (void)snprintf(made_by, sizeof made_by, "chainend %s", ce_version());
    const ce_record head = {.made_by = made_by, .glass = glass, .liquid = liquid};
    json_t *o = ce_members_write(&ce_table_record, &head, 0);
    bool good = o != NULL && json_object_set_new(o, "schema", json_string(CE_RECORD_SCHEMA)) == 0 &&
                json_object_set_new(o, "fit", fit_object(fit)) == 0 &&
                json_object_set_new(o, "series", series_object(series)) == 0;
    for (size_t i = 0; i < n_files && good; i++) {
        const ce_named_file named = {file[i].path, file[i].bytes,
                                     (char *)(uintptr_t)file[i].sha256};
        good = append(o, "files", &ce_table_file, &named);
    }
    /* 17 digits: the same double when read back */
    char *text = good ? json_dumps(o, JSON_INDENT(1) | JSON_REAL_PRECISION(17)) : NULL;
    json_decref(o);
    char *line = text == NULL ? NULL : realloc(text, strlen(text) + 2);
    if (line == NULL) {
        free(text);
        return ce_fail(err, CE_E_DOMAIN,
                       "this fit cannot be saved: a number in it is not finite, or a name is not "
                       "UTF-8");
    }
    strcat(line, "\n");
    *json = line;
    return CE_OK;
}
