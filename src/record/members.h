/* SPDX-License-Identifier: GPL-3.0-or-later
 * Members of JSON objects against members of structs: one table both writes and reads, so that what is
 * written is what is read. */
#ifndef CE_RECORD_MEMBERS_H
#define CE_RECORD_MEMBERS_H

#include <chainend/base.h>

#include <jansson.h>
#include <stddef.h>

typedef enum {
    CE_M_NUMBER,     /* double, finite                                              */
    CE_M_KNOWN,      /* double; null = NaN, not known                               */
    CE_M_LIMITED,    /* double; null = infinite                                     */
    CE_M_FROM_BELOW, /* double; null = minus infinite                               */
    CE_M_COUNT,      /* size_t                                                      */
    CE_M_BITS,       /* unsigned                                                    */
    CE_M_FLAG,       /* bool                                                        */
    CE_M_TEXT,       /* char *, owned                                               */
    CE_M_WORDS,      /* char *, owned; null = NULL                                  */
    CE_M_CHOICE,     /* enum with names                                             */
    CE_M_VECTOR,     /* double[p], finite                                           */
    CE_M_MATRIX,     /* double[p * p], row by row, finite                           */
    CE_M_LIST,       /* array, handled by the caller                                */
    CE_M_ASIDE       /* anything, handled by the caller                             */
} ce_member_kind;

typedef struct {
    const char *key;
    ce_member_kind kind;
    size_t at;                     /* offset in the struct                                    */
    const char *(*name)(size_t i); /* of choice i; NULL beyond the last                        */
} ce_member;

typedef struct {
    size_t n;
    const ce_member *member;
} ce_members;

/* A new object with every member but the lists; p = length of vectors. NULL when out of memory or when
 * a number that must be finite is not. */
json_t *ce_members_write(const ce_members *table, const void *from, size_t p);

/* ce_members_read - into a struct that is zeroed.
 *   Members must all be there, of their kind, and there must be no others. p may stand in the object
 *   itself: see tables.c.
 *   ret  CE_OK | CE_E_SYNTAX with the path of the member | CE_E_NOMEM */
ce_status ce_members_read(const ce_members *table, const json_t *object, const char *path, size_t p,
                          void *to, ce_error *err);
/* path is where in the file, such as "$.fit". */
CE_PRINTF(4, 5)
ce_status ce_member_fail(ce_error *err, ce_status status, const char *path, const char *fmt, ...);

#endif
