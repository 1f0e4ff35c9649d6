/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "record/tables.h"
#include "series/series_internal.h"

#include <gsl/gsl_linalg.h>
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

enum { MOST_ITEMS = 1000000 };

/* ---- lists -------------------------------------------------------------------------------- */

typedef struct {
    const json_t *list;
    char path[96];
    size_t n;
} listing;

static ce_status open_list(const json_t *object, const char *path, const char *key, size_t most,
                           listing *l, ce_error *err)
{
    l->list = json_object_get(object, key);
    l->n = json_array_size(l->list);
    (void)snprintf(l->path, sizeof l->path, "%s.%s", path, key);
    if (l->n > most)
        return ce_member_fail(err, CE_E_SYNTAX, l->path, "has more than %zu members", most);
    return CE_OK;
}

static ce_status read_item(const listing *l, size_t i, const ce_members *table, void *to,
                           ce_error *err)
{
    char path[128];
    (void)snprintf(path, sizeof path, "%s[%zu]", l->path, i);
    return ce_members_read(table, json_array_get(l->list, i), path, 0, to, err);
}

/* An array of n structs of a size, zeroed, read one after the other; *n counts those that hold
 * something. */
static ce_status read_list(const listing *l, const ce_members *table, size_t size, void **array,
                           size_t *n, ce_error *err)
{
    *array = calloc(l->n + 1, size);
    if (*array == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    ce_status st = CE_OK;
    for (size_t i = 0; i < l->n && st == CE_OK; i++) {
        *n = i + 1;
        st = read_item(l, i, table, (char *)*array + i * size, err);
    }
    return st;
}

/* ---- the fit ------------------------------------------------------------------------------ */

static bool near(double a, double b)
{
    return fabs(a - b) <= 1e-9 * fmax(fabs(a), fabs(b));
}

static ce_status check_parameter(const ce_fit *fit, size_t i, const ce_named_parameter *named,
                                 const char *path, ce_error *err)
{
    const ce_relation r = fit->options.relation;
    const ce_parameter *p = &named->is;
    char at[128];
    (void)snprintf(at, sizeof at, "%s[%zu]", path, i);
    if (strcmp(named->name, ce_relation_parameter_name(r, i)) != 0 ||
        strcmp(named->unit, ce_relation_parameter_unit(r, i)) != 0)
        return ce_member_fail(
            err, CE_E_DOMAIN, at, "is '%.20s' in %.20s, the relation has '%s' in %s", named->name,
            named->unit, ce_relation_parameter_name(r, i), ce_relation_parameter_unit(r, i));
    if (!(p->u > 0.0 && p->u_common >= 0.0 && p->u_common <= p->u))
        return ce_member_fail(err, CE_E_DOMAIN, at, "its uncertainties are impossible");
    if (!(p->low <= p->value && p->value <= p->high && p->nu > 0.0))
        return ce_member_fail(err, CE_E_DOMAIN, at, "its interval does not enclose its value");
    return CE_OK;
}

static ce_status read_parameters(const json_t *object, const char *path, ce_fit *fit, ce_error *err)
{
    listing l;
    ce_status st = open_list(object, path, "parameters", CE_MAX_PARAMETERS, &l, err);
    if (st == CE_OK && l.n != fit->p)
        st = ce_member_fail(err, CE_E_DOMAIN, l.path, "has %zu members, the relation has %zu", l.n,
                            fit->p);
    for (size_t i = 0; i < fit->p && st == CE_OK; i++) {
        ce_named_parameter named = {0};
        st = read_item(&l, i, &ce_table_parameter, &named, err);
        if (st == CE_OK) st = check_parameter(fit, i, &named, l.path, err);
        fit->parameter[i] = named.is;
        free(named.name);
        free(named.unit);
    }
    return st;
}

static bool positive_definite(const double *c, size_t p)
{
    double data[CE_MAX_PARAMETERS * CE_MAX_PARAMETERS];
    gsl_matrix_view m = gsl_matrix_view_array(data, p, p);
    for (size_t i = 0; i < p; i++)
        for (size_t k = 0; k < p; k++) {
            if (!(c[i * p + i] > 0.0) || !near(c[i * p + k], c[k * p + i])) return false;
            data[i * p + k] = c[i * p + k] / sqrt(c[i * p + i] * c[k * p + k]);
        }
    return gsl_linalg_cholesky_decomp1(&m.matrix) == GSL_SUCCESS;
}

static ce_status check_covariance(const ce_fit *fit, const char *path, ce_error *err)
{
    const size_t p = fit->p;
    char at[96];
    (void)snprintf(at, sizeof at, "%s.covariance", path);
    if (!positive_definite(fit->covariance, p))
        return ce_member_fail(err, CE_E_DOMAIN, at, "is not symmetric and positive definite");
    for (size_t i = 0; i < p; i++) {
        const double all = fit->covariance[i * p + i];
        const double run = fit->covariance_run[i * p + i];
        const double excess = fit->covariance_excess[i * p + i];
        const ce_parameter *q = &fit->parameter[i];
        if (!near(q->u * q->u, all + q->u_common * q->u_common))
            return ce_member_fail(err, CE_E_DOMAIN, at,
                                  "does not agree with the uncertainty of parameter %zu", i + 1);
        if (!(run >= 0.0 && excess >= 0.0 && run + excess <= all * (1.0 + 1e-9)))
            return ce_member_fail(err, CE_E_DOMAIN, at,
                                  "is smaller than its parts for parameter %zu", i + 1);
    }
    return CE_OK;
}

static ce_status check_points(const ce_fit *fit, const char *path, ce_error *err)
{
    size_t runs = 0;
    for (size_t i = 0; i < fit->n_points; i++) {
        const ce_fit_point *q = &fit->point[i];
        if (!(q->molar.mn_g_mol > 0.0 && q->tg_K > 0.0 && q->weight > 0.0 && q->n > 0 &&
              q->first_run == runs && q->molar.chain_ends >= 0.0))
            return ce_member_fail(err, CE_E_DOMAIN, path, "samples[%zu] is impossible", i);
        runs += q->n;
    }
    if (runs != fit->n_runs)
        return ce_member_fail(err, CE_E_DOMAIN, path, "the samples have %zu runs, there are %zu",
                              runs, fit->n_runs);
    for (size_t i = 0; i < fit->n_runs; i++)
        if (fit->run[i].point >= fit->n_points)
            return ce_member_fail(err, CE_E_DOMAIN, path, "runs[%zu] belongs to no sample", i);
    if (fit->n_points < fit->p)
        return ce_member_fail(err, CE_E_DOMAIN, path, "has fewer samples than parameters");
    return CE_OK;
}

static ce_status check_fit(const ce_fit *fit, const char *path, ce_error *err)
{
    const ce_fit_options *o = &fit->options;
    if (!(o->level > 0.0 && o->level < 1.0))
        return ce_member_fail(err, CE_E_DOMAIN, path, "level must lie between 0 and 1");
    if (o->scatter == CE_SCATTER_AUTO || o->excess == CE_EXCESS_AUTO)
        return ce_member_fail(err, CE_E_DOMAIN, path, "scatter and excess cannot be 'auto' here");
    if (!(o->mn_common_u_rel >= 0.0 && o->tg_common_u_K >= 0.0 && o->rate_slope_u_K >= 0.0 &&
          fit->run_sd_K >= 0.0 && fit->run_nu > 0.0 && fit->excess_tau_K >= 0.0 &&
          fit->excess_r >= 0.0 && fit->excess_nu > 0.0))
        return ce_member_fail(err, CE_E_DOMAIN, path, "an uncertainty is negative");
    ce_status st = check_covariance(fit, path, err);
    return st == CE_OK ? check_points(fit, path, err) : st;
}

static ce_status read_warnings(const json_t *object, const char *path, ce_fit *fit, ce_error *err)
{
    listing l;
    ce_status st = open_list(object, path, "warnings", 1000, &l, err);
    for (size_t i = 0; i < l.n && st == CE_OK; i++) {
        ce_warning_text w = {0};
        st = read_item(&l, i, &ce_table_warning, &w, err);
        if (st == CE_OK &&
            ce_messages_say(&fit->warnings, w.severity, NULL, 0, 0, "%s", w.text) != CE_OK)
            st = ce_fail(err, CE_E_NOMEM, "out of memory");
        free(w.text);
    }
    return st;
}

static ce_status read_fit(const json_t *object, ce_fit *fit, ce_error *err)
{
    static const char path[] = "$.fit";
    ce_relation relation;
    ce_status st = ce_record_relation(object, path, &relation, err);
    if (st != CE_OK) return st;
    fit->p = ce_relation_parameters(relation);
    st = ce_members_read(&ce_table_fit, object, path, fit->p, fit, err);
    for (size_t i = 0; i < CE_MAX_PARAMETERS; i++) fit->huber[i] = fit->bisquare[i] = (double)NAN;
    if (st == CE_OK) st = read_parameters(object, path, fit, err);
    listing l;
    if (st == CE_OK) st = open_list(object, path, "samples", MOST_ITEMS, &l, err);
    if (st == CE_OK)
        st = read_list(&l, &ce_table_point, sizeof *fit->point, (void **)&fit->point,
                       &fit->n_points, err);
    if (st == CE_OK) st = open_list(object, path, "runs", MOST_ITEMS, &l, err);
    if (st == CE_OK)
        st = read_list(&l, &ce_table_run, sizeof *fit->run, (void **)&fit->run, &fit->n_runs, err);
    if (st == CE_OK) st = open_list(object, path, "comparison", CE_RELATIONS, &l, err);
    for (size_t i = 0; st == CE_OK && i < l.n; i++) {
        fit->n_comparison = i + 1;
        st = read_item(&l, i, &ce_table_comparison, &fit->comparison[i], err);
    }
    if (st == CE_OK) st = read_warnings(object, path, fit, err);
    return st == CE_OK ? check_fit(fit, path, err) : st;
}

/* ---- the series --------------------------------------------------------------------------- */

static ce_status check_row(const ce_series_row *row, const listing *l, size_t i, ce_error *err)
{
    char at[128];
    (void)snprintf(at, sizeof at, "%s[%zu]", l->path, i);
    if (row->used && !(row->tg_K > 0.0))
        return ce_member_fail(err, CE_E_DOMAIN, at, "is used but has no Tg");
    if (!row->used && row->reason == NULL)
        return ce_member_fail(err, CE_E_DOMAIN, at, "is not used, and no reason is given");
    if (row->role == CE_STANDARD && !(row->mn_g_mol > 0.0))
        return ce_member_fail(err, CE_E_DOMAIN, at, "is a standard without an Mn");
    return CE_OK;
}

static ce_status read_series(const json_t *object, ce_series *series, ce_error *err)
{
    static const char path[] = "$.series";
    ce_series_clear(series);
    ce_status st = ce_members_read(&ce_table_series, object, path, 0, series, err);
    listing l = {0};
    if (st == CE_OK) st = open_list(object, path, "rows", CE_MAX_SERIES_ROWS, &l, err);
    if (st == CE_OK)
        st = read_list(&l, &ce_table_row, sizeof *series->row, (void **)&series->row,
                       &series->n_rows, err);
    for (size_t i = 0; st == CE_OK && i < series->n_rows; i++) {
        ce_series_row *row = &series->row[i];
        row->reading.value_K = row->run == NULL ? (double)NAN : row->tg_K + row->reduced_K;
        row->reading.u_K = row->run == NULL ? (double)NAN : row->tg_u_K;
        if (row->run != NULL && (row->path = ce_series_resolve(series->path, row->run)) == NULL)
            return ce_fail(err, CE_E_NOMEM, "out of memory");
        st = check_row(row, &l, i, err);
    }
    series->construction_stated = true;
    if (st == CE_OK && (ce_series_group(series) != CE_OK || ce_series_average(series) != CE_OK))
        st = ce_fail(err, CE_E_NOMEM, "out of memory");
    return st;
}

/* ---- the files ---------------------------------------------------------------------------- */

static bool is_sha256(const char *text)
{
    return strlen(text) == 64 && strspn(text, "0123456789abcdef") == 64;
}

static ce_status read_files(const json_t *root, ce_record *record, ce_error *err)
{
    listing l;
    ce_status st = open_list(root, "$", "files", MOST_ITEMS, &l, err);
    if (st != CE_OK) return st;
    record->file = calloc(l.n + 1, sizeof *record->file);
    if (record->file == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    for (size_t i = 0; i < l.n && st == CE_OK; i++) {
        ce_named_file named = {0};
        ce_checksum *c = &record->file[i];
        st = read_item(&l, i, &ce_table_file, &named, err);
        if (st == CE_OK && !is_sha256(named.sha256)) {
            char at[128];
            (void)snprintf(at, sizeof at, "%s[%zu].sha256", l.path, i);
            st = ce_member_fail(err, CE_E_SYNTAX, at, "is no SHA-256");
        }
        if (st == CE_OK) {
            c->bytes = named.bytes;
            (void)snprintf(c->sha256, sizeof c->sha256, "%s", named.sha256);
        }
        c->path = named.path;
        record->n_files = i + 1;
        free(named.sha256);
    }
    return st;
}

/* ---- the whole ---------------------------------------------------------------------------- */

bool ce_record_is(const void *bytes, size_t n)
{
    const char *p = bytes, *end = p + n;
    if (n >= 3 && memcmp(p, "\xEF\xBB\xBF", 3) == 0) p += 3;
    while (p < end && strchr(" \t\r\n", *p) != NULL && *p != '\0') p++;
    return p < end && *p == '{';
}

static ce_status read_root(const json_t *root, ce_record *record, ce_error *err)
{
    const char *schema = json_string_value(json_object_get(root, "schema"));
    if (schema == NULL)
        return ce_member_fail(err, CE_E_SYNTAX, "$.schema", "is missing: this is no calibration");
    if (strcmp(schema, CE_RECORD_SCHEMA) != 0)
        return ce_member_fail(err, CE_E_SYNTAX, "$.schema",
                              "is '%.60s', this program reads '" CE_RECORD_SCHEMA "'", schema);
    ce_status st = ce_members_read(&ce_table_record, root, "$", 0, record, err);
    if (st == CE_OK) st = read_fit(json_object_get(root, "fit"), &record->fit, err);
    if (st == CE_OK) st = read_series(json_object_get(root, "series"), &record->series, err);
    return st == CE_OK ? read_files(root, record, err) : st;
}

ce_status ce_record_read(const void *bytes, size_t n, const char *name, ce_record *record,
                         ce_error *err)
{
    *record = (ce_record){0};
    ce_series_clear(&record->series);
    json_error_t at;
    json_t *root = json_loadb(bytes, n, JSON_REJECT_DUPLICATES, &at);
    if (root == NULL)
        return ce_fail_at(err, CE_E_SYNTAX, name, at.line > 0 ? (size_t)at.line : 0,
                          at.column > 0 ? (size_t)at.column : 0, "%s", at.text);
    ce_error e = CE_ERROR_INIT;
    ce_status st = read_root(root, record, &e);
    json_decref(root);
    if (st == CE_OK) return CE_OK;
    ce_record_free(record);
    return ce_fail_at(err, st, name, 0, 0, "%s", e.message);
}

void ce_record_free(ce_record *record)
{
    if (record == NULL) return;
    free(record->made_by);
    ce_series_free(&record->series);
    ce_fit_free(&record->fit);
    ce_checksums_free(record->file, record->n_files);
    *record = (ce_record){0};
    ce_series_clear(&record->series);
}
