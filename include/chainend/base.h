/* SPDX-License-Identifier: GPL-3.0-or-later
 * What every room shares: status codes, error objects, lists of messages. */
#ifndef CHAINEND_BASE_H
#define CHAINEND_BASE_H

#include <stddef.h>

#if defined(__GNUC__)
#define CE_API             __attribute__((visibility("default")))
#define CE_PRINTF(fmt, va) __attribute__((format(printf, fmt, va)))
#else
#define CE_API
#define CE_PRINTF(fmt, va)
#endif

#ifdef __cplusplus
extern "C" {
#endif

/* Version of the library actually loaded, e.g. "0.1.0"; compare with CE_VERSION_TEXT of version.h.
 */
CE_API const char *ce_version(void);

/* Status codes. Numbers are written out and never reused. */
#define CE_STATUS_LIST(X)                                                                          \
    X(CE_OK, 0, "success")                                                                         \
    X(CE_E_ARG, 1, "invalid argument")                                                             \
    X(CE_E_NOMEM, 2, "out of memory")                                                              \
    X(CE_E_IO, 3, "cannot read or write")                                                          \
    X(CE_E_SYNTAX, 4, "malformed input")                                                           \
    X(CE_E_LIMIT, 5, "input exceeds a documented limit")                                           \
    X(CE_E_DOMAIN, 6, "value outside its physical range")                                          \
    X(CE_E_NOFIT, 7, "fit failed")                                                                 \
    X(CE_E_REFUSED, 8, "refused: no answer can be given honestly")
#define CE_X(name, value, text) name = (value),
typedef enum { CE_STATUS_LIST(CE_X) CE_STATUS_END } ce_status;
#undef CE_X

/* The short text of a status; "unknown status" for anything else. Static storage. */
CE_API const char *ce_status_text(ce_status status);

/* What went wrong and where. The caller owns it; nothing in it is allocated. Initialise it with
 * CE_ERROR_INIT before each use: the first error stays, later ones on the way out are ignored. */
typedef struct {
    ce_status code;
    size_t line, column; /* 1-based position in the file; 0 = does not apply          */
    char file[256];      /* the file as the user named it, perhaps shortened          */
    char message[512];   /* one line: what is wrong and what to do; no full stop      */
} ce_error;
#define CE_ERROR_INIT                                                                              \
    {                                                                                              \
        .code = CE_OK                                                                              \
    }

/* Set an error, printf-like, and return its code. Nothing happens when err is NULL or already set.
 */
CE_API ce_status ce_fail(ce_error *err, ce_status code, const char *fmt, ...) CE_PRINTF(3, 4);
/* The same with a position; file may be NULL, line and column 0. Control bytes become '?'. */
CE_API ce_status ce_fail_at(ce_error *err, ce_status code, const char *file, size_t line,
                            size_t column, const char *fmt, ...) CE_PRINTF(6, 7);

/* Limits of any delimited text, enforced before anything is allocated. */
#define CE_MAX_COLUMNS ((size_t)4096)  /* columns of one table */
#define CE_MAX_CELL    ((size_t)65536) /* bytes in one cell    */

/* Messages collected on the way, so that everything wrong is reported at once. */
typedef enum { CE_NOTE, CE_WARNING, CE_ERROR } ce_severity;
typedef struct {
    ce_severity severity;
    ce_error at;
} ce_message;
/* A growing list; start from {0}. item is owned by the list and valid until it grows or is freed.
 */
typedef struct {
    ce_message *item;
    size_t n, capacity;
} ce_messages;

/* Append a copy of err. CE_OK or CE_E_NOMEM. list may be NULL: the message is dropped, CE_OK. */
CE_API ce_status ce_messages_add(ce_messages *list, ce_severity severity, const ce_error *err);
/* Append, printf-like. CE_OK or CE_E_NOMEM. */
CE_API ce_status ce_messages_say(ce_messages *list, ce_severity severity, const char *file,
                                 size_t line, size_t column, const char *fmt, ...) CE_PRINTF(6, 7);
/* How many of at least this severity. */
CE_API size_t ce_messages_count(const ce_messages *list, ce_severity at_least);
/* Free the items and reset to empty. NULL allowed. */
CE_API void ce_messages_free(ce_messages *list);

#ifdef __cplusplus
}
#endif
#endif
