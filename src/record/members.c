/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "record/members.h"

#include <math.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* ---- writing ------------------------------------------------------------------------------ */

static json_t *number_or_null(double x)
{
    return isfinite(x) ? json_real(x) : json_null();
}

static json_t *vector(const double *x, size_t n)
{
    json_t *list = json_array();
    for (size_t i = 0; i < n; i++) {
        json_t *v = json_real(x[i]); /* NULL unless finite */
        if (v == NULL || json_array_append_new(list, v) != 0) {
            json_decref(list);
            return NULL;
        }
    }
    return list;
}

static json_t *matrix(const double *x, size_t p)
{
    json_t *rows = json_array();
    for (size_t i = 0; i < p; i++) {
        json_t *row = vector(x + i * p, p);
        if (row == NULL || json_array_append_new(rows, row) != 0) {
            json_decref(rows);
            return NULL;
        }
    }
    return rows;
}

static json_t *value_of(const ce_member *m, const void *from, size_t p)
{
    const char *at = (const char *)from + m->at;
    const double *x = (const void *)at;
    switch (m->kind) {
    case CE_M_NUMBER:
        return json_real(*x);
    case CE_M_KNOWN:
    case CE_M_LIMITED:
    case CE_M_FROM_BELOW:
        return number_or_null(*x);
    case CE_M_COUNT:
        return json_integer((json_int_t) * (const size_t *)(const void *)at);
    case CE_M_BITS:
        return json_integer((json_int_t) * (const unsigned *)(const void *)at);
    case CE_M_FLAG:
        return json_boolean(*(const bool *)at);
    case CE_M_TEXT:
    case CE_M_WORDS: {
        const char *text = *(char *const *)(const void *)at;
        return text == NULL ? json_null() : json_string(text);
    }
    case CE_M_CHOICE:
        return json_string(m->name(*(const unsigned *)(const void *)at));
    case CE_M_VECTOR:
        return vector(x, p);
    case CE_M_MATRIX:
        return matrix(x, p);
    case CE_M_LIST:
        return json_array();
    case CE_M_ASIDE:
        break;
    }
    return json_null();
}

json_t *ce_members_write(const ce_members *table, const void *from, size_t p)
{
    json_t *o = json_object();
    for (size_t i = 0; i < table->n && o != NULL; i++)
        if (json_object_set_new(o, table->member[i].key, value_of(&table->member[i], from, p)) !=
            0) {
            json_decref(o);
            o = NULL;
        }
    return o;
}

/* ---- reading ------------------------------------------------------------------------------ */

ce_status ce_member_fail(ce_error *err, ce_status status, const char *path, const char *fmt, ...)
{
    char text[256];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    return ce_fail(err, status, "%s: %s", path, text);
}

static const char *kind_of(const json_t *v)
{
    switch (json_typeof(v)) {
    case JSON_OBJECT:
        return "an object";
    case JSON_ARRAY:
        return "a list";
    case JSON_STRING:
        return "a text";
    case JSON_INTEGER:
    case JSON_REAL:
        return "a number";
    case JSON_TRUE:
    case JSON_FALSE:
        return "true or false";
    case JSON_NULL:
        break;
    }
    return "null";
}

typedef struct {
    char path[200];
    ce_error *err;
} place;

static ce_status wrong_kind(const place *at, const json_t *v, const char *wanted)
{
    return ce_member_fail(at->err, CE_E_SYNTAX, at->path, "is %s, %s is wanted", kind_of(v),
                          wanted);
}

static ce_status read_numbers(const place *at, const json_t *v, size_t n, double *to)
{
    if (!json_is_array(v)) return wrong_kind(at, v, "a list of numbers");
    if (json_array_size(v) != n)
        return ce_member_fail(at->err, CE_E_SYNTAX, at->path, "has %zu members, %zu are wanted",
                              json_array_size(v), n);
    for (size_t i = 0; i < n; i++) {
        const json_t *x = json_array_get(v, i);
        if (!json_is_number(x)) return wrong_kind(at, x, "a number in the list");
        to[i] = json_number_value(x);
    }
    return CE_OK;
}

static ce_status read_matrix(const place *at, const json_t *v, size_t p, double *to)
{
    if (!json_is_array(v)) return wrong_kind(at, v, "a list of rows");
    if (json_array_size(v) != p)
        return ce_member_fail(at->err, CE_E_SYNTAX, at->path, "has %zu rows, %zu are wanted",
                              json_array_size(v), p);
    ce_status st = CE_OK;
    for (size_t i = 0; i < p && st == CE_OK; i++)
        st = read_numbers(at, json_array_get(v, i), p, to + i * p);
    return st;
}

static ce_status read_count(const place *at, const json_t *v, unsigned long long most, void *to,
                            bool small)
{
    if (!json_is_integer(v)) return wrong_kind(at, v, "a whole number");
    const json_int_t x = json_integer_value(v);
    if (x < 0 || (unsigned long long)x > most)
        return ce_member_fail(at->err, CE_E_SYNTAX, at->path, "is out of range");
    if (small)
        *(unsigned *)to = (unsigned)x;
    else
        *(size_t *)to = (size_t)x;
    return CE_OK;
}

static ce_status read_text(const place *at, const json_t *v, char **to)
{
    if (!json_is_string(v)) return wrong_kind(at, v, "a text");
    *to = strdup(json_string_value(v));
    return *to == NULL ? ce_fail(at->err, CE_E_NOMEM, "out of memory") : CE_OK;
}

static ce_status read_choice(const place *at, const json_t *v, const ce_member *m, unsigned *to)
{
    if (!json_is_string(v)) return wrong_kind(at, v, "a word");
    for (unsigned i = 0; m->name(i) != NULL; i++)
        if (strcmp(m->name(i), json_string_value(v)) == 0) {
            *to = i;
            return CE_OK;
        }
    return ce_member_fail(at->err, CE_E_SYNTAX, at->path, "'%.40s' is not a word known here",
                          json_string_value(v));
}

static ce_status read_number(const place *at, const json_t *v, const ce_member *m, double *to)
{
    if (json_is_null(v) && m->kind != CE_M_NUMBER) {
        *to = m->kind == CE_M_KNOWN     ? (double)NAN
              : m->kind == CE_M_LIMITED ? (double)INFINITY
                                        : -(double)INFINITY;
        return CE_OK;
    }
    if (!json_is_number(v)) return wrong_kind(at, v, "a number");
    *to = json_number_value(v);
    return CE_OK;
}

static ce_status read_value(const place *at, const json_t *v, const ce_member *m, size_t p,
                            void *to)
{
    char *where = (char *)to + m->at;
    switch (m->kind) {
    case CE_M_NUMBER:
    case CE_M_KNOWN:
    case CE_M_LIMITED:
    case CE_M_FROM_BELOW:
        return read_number(at, v, m, (double *)(void *)where);
    case CE_M_COUNT:
        return read_count(at, v, (1ull << 53), where, false);
    case CE_M_BITS:
        return read_count(at, v, 0xffffffffu, where, true);
    case CE_M_FLAG:
        if (!json_is_boolean(v)) return wrong_kind(at, v, "true or false");
        *(bool *)where = json_is_true(v);
        return CE_OK;
    case CE_M_WORDS:
        if (json_is_null(v)) return CE_OK;
        return read_text(at, v, (char **)(void *)where);
    case CE_M_TEXT:
        return read_text(at, v, (char **)(void *)where);
    case CE_M_CHOICE:
        return read_choice(at, v, m, (unsigned *)(void *)where);
    case CE_M_VECTOR:
        return read_numbers(at, v, p, (double *)(void *)where);
    case CE_M_MATRIX:
        return read_matrix(at, v, p, (double *)(void *)where);
    case CE_M_LIST:
        if (!json_is_array(v)) return wrong_kind(at, v, "a list");
        return CE_OK;
    case CE_M_ASIDE:
        return CE_OK;
    }
    return CE_OK;
}

static ce_status nothing_else(const ce_members *table, const json_t *object, const char *path,
                              ce_error *err)
{
    const char *key;
    const json_t *v;
    json_object_foreach((json_t *)(uintptr_t)object, key, v)
    {
        bool known = false;
        for (size_t i = 0; i < table->n && !known; i++)
            known = strcmp(table->member[i].key, key) == 0;
        if (!known)
            return ce_member_fail(err, CE_E_SYNTAX, path, "member '%.60s' is not known here", key);
    }
    return CE_OK;
}

ce_status ce_members_read(const ce_members *table, const json_t *object, const char *path, size_t p,
                          void *to, ce_error *err)
{
    if (!json_is_object(object))
        return ce_member_fail(err, CE_E_SYNTAX, path, "is %s, an object is wanted",
                              object == NULL ? "missing" : kind_of(object));
    ce_status st = nothing_else(table, object, path, err);
    for (size_t i = 0; i < table->n && st == CE_OK; i++) {
        const ce_member *m = &table->member[i];
        const json_t *v = json_object_get(object, m->key);
        place at = {.err = err};
        (void)snprintf(at.path, sizeof at.path, "%s.%s", path, m->key);
        st = v == NULL ? ce_member_fail(err, CE_E_SYNTAX, at.path, "is missing")
                       : read_value(&at, v, m, p, to);
    }
    return st;
}
