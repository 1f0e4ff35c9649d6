/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/base.h>
#include <chainend/version.h>

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

const char *ce_version(void)
{
    return CE_VERSION_TEXT;
}

const char *ce_status_text(ce_status status)
{
#define CE_X(name, value, text)                                                                    \
    case name:                                                                                     \
        return text;
    switch (status) {
        CE_STATUS_LIST(CE_X)
    case CE_STATUS_END:
        break;
    }
#undef CE_X
    return "unknown status";
}

/* Text from files and file names ends up on terminals: no control byte passes. */
static void tame(char *s)
{
    for (; *s != '\0'; s++)
        if ((unsigned char)*s < 0x20 || *s == 0x7f) *s = '?';
}

/* A name that does not fit keeps its end, which tells files apart. */
static void set_file(ce_error *err, const char *file)
{
    size_t n = file == NULL ? 0 : strlen(file), room = sizeof err->file - 1;
    if (n > room)
        (void)snprintf(err->file, sizeof err->file, "...%s", file + (n - room + 3));
    else
        (void)snprintf(err->file, sizeof err->file, "%s", file == NULL ? "" : file);
    tame(err->file);
}

static CE_PRINTF(6, 0) void set_error(ce_error *err, ce_status code, const char *file, size_t line,
                                      size_t column, const char *fmt, va_list ap)
{
    if (err == NULL || err->code != CE_OK) return;
    (void)vsnprintf(err->message, sizeof err->message, fmt, ap);
    tame(err->message);
    set_file(err, file);
    err->code = code;
    err->line = line;
    err->column = column;
}

ce_status ce_fail(ce_error *err, ce_status code, const char *fmt, ...)
{
    va_list ap;
    va_start(ap, fmt);
    set_error(err, code, NULL, 0, 0, fmt, ap);
    va_end(ap);
    return code;
}

ce_status ce_fail_at(ce_error *err, ce_status code, const char *file, size_t line, size_t column,
                     const char *fmt, ...)
{
    va_list ap;
    va_start(ap, fmt);
    set_error(err, code, file, line, column, fmt, ap);
    va_end(ap);
    return code;
}

ce_status ce_messages_add(ce_messages *list, ce_severity severity, const ce_error *err)
{
    if (list == NULL) return CE_OK;
    if (list->n == list->capacity) {
        size_t want = list->capacity < 8 ? 8 : 2 * list->capacity;
        ce_message *p = reallocarray(list->item, want, sizeof *p);
        if (p == NULL) return CE_E_NOMEM;
        list->item = p;
        list->capacity = want;
    }
    list->item[list->n++] = (ce_message){.severity = severity, .at = *err};
    return CE_OK;
}

ce_status ce_messages_say(ce_messages *list, ce_severity severity, const char *file, size_t line,
                          size_t column, const char *fmt, ...)
{
    ce_error e = CE_ERROR_INIT;
    va_list ap;
    va_start(ap, fmt);
    set_error(&e, CE_E_DOMAIN, file, line, column, fmt, ap);
    va_end(ap);
    return ce_messages_add(list, severity, &e);
}

size_t ce_messages_count(const ce_messages *list, ce_severity at_least)
{
    size_t n = 0;
    for (size_t i = 0; list != NULL && i < list->n; i++) n += list->item[i].severity >= at_least;
    return n;
}

void ce_messages_free(ce_messages *list)
{
    if (list == NULL) return;
    free(list->item);
    *list = (ce_messages){0};
}
