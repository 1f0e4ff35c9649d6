/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text/load.h"

#include "base/large.h"

#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#define CHUNK ((size_t)1 << 20)

/* How a file that cannot stand still, or is none, is called; NULL for a regular file. */
static const char *irregular(mode_t mode)
{
    if (S_ISREG(mode)) return NULL;
    if (S_ISDIR(mode)) return "is a directory, not a file";
    if (S_ISFIFO(mode)) return "is a pipe, which may never end: give its content on standard input";
    return "is a device or socket, not a file";
}

static ce_status grow(ce_bytes *b, size_t *room, size_t max, const char *name, ce_error *err)
{
    if (b->n + 1 < *room) return CE_OK;
    size_t want = *room < CHUNK ? CHUNK : *room + *room / 2;
    if (want > max + 2) want = max + 2;
    char *p = realloc(b->data, want);
    if (p == NULL) return ce_fail_at(err, CE_E_NOMEM, name, 0, 0, "out of memory");
    b->data = p;
    *room = want;
    return CE_OK;
}

/* Number of the line that begins last in the bytes. */
static size_t count_lines(const ce_bytes *b)
{
    size_t n = 1;
    for (const char *p = b->data, *end = b->data + b->n; p < end;) {
        const char *e = ce_line_end(p, end);
        n += e < end;
        p = ce_line_next(e, end);
    }
    return n;
}

/* A line end among the bytes [from, n), or the line has become too long. */
static ce_status watch_line(const ce_bytes *b, size_t from, size_t *line_begin, const char *name,
                            ce_error *err)
{
    const char *lf = memrchr(b->data + from, '\n', b->n - from);
    const char *cr = lf != NULL ? NULL : memrchr(b->data + from, '\r', b->n - from);
    const char *last = lf != NULL ? lf : cr;
    if (last != NULL) *line_begin = (size_t)(last - b->data) + 1;
    if (b->n - *line_begin <= CE_MAX_LINE) return CE_OK;
    return ce_fail_at(err, CE_E_LIMIT, name, count_lines(b), 1,
                      "line is longer than %zu bytes: not a table of text", CE_MAX_LINE);
}

static ce_status read_all(int fd, size_t size_hint, const char *name, size_t max, ce_bytes *b,
                          ce_error *err)
{
    size_t room = 0, line_begin = 0;
    if (size_hint < max) {
        b->data = ce_large(size_hint + 2, 1);
        if (b->data == NULL) return ce_fail_at(err, CE_E_NOMEM, name, 0, 0, "out of memory");
        room = size_hint + 2;
    }
    for (;;) {
        ce_status st = grow(b, &room, max, name, err);
        if (st != CE_OK) return st;
        size_t want = room - 1 - b->n;
        ssize_t got = read(fd, b->data + b->n, want < CHUNK ? want : CHUNK);
        if (got < 0 && errno == EINTR) continue;
        if (got < 0) return ce_fail_at(err, CE_E_IO, name, 0, 0, "%s", strerrordesc_np(errno));
        if (got == 0) break;
        b->n += (size_t)got;
        if (b->n > max)
            return ce_fail_at(err, CE_E_LIMIT, name, 0, 0, "larger than the limit of %zu bytes",
                              max);
        st = watch_line(b, b->n - (size_t)got, &line_begin, name, err);
        if (st != CE_OK) return st;
    }
    b->data[b->n] = '\0';
    return CE_OK;
}

static bool moved(const struct stat *a, const struct stat *b, size_t n)
{
    return a->st_size != b->st_size || (size_t)b->st_size != n ||
           a->st_mtim.tv_sec != b->st_mtim.tv_sec || a->st_mtim.tv_nsec != b->st_mtim.tv_nsec;
}

ce_status ce_bytes_read(int fd, const struct stat *before, const char *name, size_t max,
                        ce_bytes *bytes, ce_error *err)
{
    ce_bytes b = {0};
    *bytes = b;
    size_t hint = before == NULL || before->st_size < 0 ? 0 : (size_t)before->st_size;
    ce_status st = hint > max ? ce_fail_at(err, CE_E_LIMIT, name, 0, 0,
                                           "larger than the limit of %zu bytes", max)
                              : read_all(fd, hint, name, max, &b, err);
    struct stat after;
    if (st == CE_OK && before != NULL && (fstat(fd, &after) != 0 || moved(before, &after, b.n)))
        st = ce_fail_at(err, CE_E_IO, name, count_lines(&b), 0,
                        "changed while it was read: wait until it is complete and read it again");
    if (st == CE_OK)
        *bytes = b;
    else
        free(b.data);
    return st;
}

ce_status ce_bytes_load(const char *path, size_t max, ce_bytes *bytes, ce_error *err)
{
    *bytes = (ce_bytes){0};
    struct stat is;
    if (strcmp(path, "-") == 0) {
        bool regular = fstat(STDIN_FILENO, &is) == 0 && S_ISREG(is.st_mode) &&
                       lseek(STDIN_FILENO, 0, SEEK_CUR) == 0;
        return ce_bytes_read(STDIN_FILENO, regular ? &is : NULL, path, max, bytes, err);
    }
    /* Not blocking, or opening a pipe would wait for its writer. */
    int fd = open(path, O_RDONLY | O_CLOEXEC | O_NONBLOCK | O_NOCTTY);
    if (fd < 0) return ce_fail_at(err, CE_E_IO, path, 0, 0, "%s", strerrordesc_np(errno));
    ce_status st;
    const char *why = NULL;
    if (fstat(fd, &is) != 0)
        st = ce_fail_at(err, CE_E_IO, path, 0, 0, "%s", strerrordesc_np(errno));
    else if ((why = irregular(is.st_mode)) != NULL)
        st = ce_fail_at(err, CE_E_IO, path, 0, 0, "%s", why);
    else
        st = ce_bytes_read(fd, &is, path, max, bytes, err);
    (void)close(fd);
    return st;
}

const char *ce_line_end(const char *p, const char *end)
{
    while (p < end && *p != '\n' && *p != '\r') p++;
    return p;
}
