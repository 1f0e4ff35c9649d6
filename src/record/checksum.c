/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/record.h>

#include <errno.h>
#include <nettle/sha2.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

static ce_status digest(FILE *f, const char *path, ce_checksum *c, ce_error *err)
{
    struct sha256_ctx sha;
    struct stat is;
    unsigned char block[16384], out[SHA256_DIGEST_SIZE];
    if (fstat(fileno(f), &is) != 0 || !S_ISREG(is.st_mode))
        return ce_fail_at(err, CE_E_IO, path, 0, 0, "is not a file that can be read again");
    sha256_init(&sha);
    for (size_t n; (n = fread(block, 1, sizeof block, f)) > 0; c->bytes += n)
        sha256_update(&sha, n, block);
    if (ferror(f)) return ce_fail_at(err, CE_E_IO, path, 0, 0, "%s", strerrordesc_np(errno));
    sha256_digest(&sha, sizeof out, out);
    for (size_t i = 0; i < sizeof out; i++) (void)snprintf(c->sha256 + 2 * i, 3, "%02x", out[i]);
    return CE_OK;
}

ce_status ce_checksum_file(const char *path, ce_checksum *checksum, ce_error *err)
{
    *checksum = (ce_checksum){0};
    ce_checksum c = {.path = strdup(path)};
    if (c.path == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    FILE *f = fopen(path, "rbe");
    ce_status st = f == NULL ? ce_fail_at(err, CE_E_IO, path, 0, 0, "%s", strerrordesc_np(errno))
                             : digest(f, path, &c, err);
    if (f != NULL) (void)fclose(f);
    if (st == CE_OK)
        *checksum = c;
    else
        free(c.path);
    return st;
}

/* The first row with this run. */
static bool is_first(const ce_series *series, size_t row)
{
    for (size_t i = 0; i < row; i++)
        if (series->row[i].path != NULL && strcmp(series->row[i].path, series->row[row].path) == 0)
            return false;
    return true;
}

ce_status ce_checksum_series(const ce_series *series, ce_checksum **list, size_t *n, ce_error *err)
{
    *n = 0;
    *list = calloc(series->n_rows + 1, sizeof **list);
    if (*list == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    ce_status st = CE_OK;
    if (strcmp(series->path, "-") != 0) {
        st = ce_checksum_file(series->path, &(*list)[0], err);
        if (st == CE_OK) ++*n;
    }
    for (size_t i = 0; i < series->n_rows && st == CE_OK; i++) {
        const ce_series_row *row = &series->row[i];
        /* a run that could not be read is named by its reason */
        if (row->path == NULL || !row->used || !is_first(series, i)) continue;
        st = ce_checksum_file(row->path, &(*list)[*n], err);
        if (st == CE_OK) ++*n;
    }
    if (st == CE_OK) return CE_OK;
    ce_checksums_free(*list, *n);
    *list = NULL;
    *n = 0;
    return st;
}

void ce_checksums_free(ce_checksum *list, size_t n)
{
    for (size_t i = 0; list != NULL && i < n; i++) free(list[i].path);
    free(list);
}
