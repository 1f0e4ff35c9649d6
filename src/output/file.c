/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/file.h"

#include <errno.h>
#include <fcntl.h>
#include <libgen.h>
#include <limits.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

static ce_status io_error(ce_error *err, const char *path, const char *what, int code)
{
    char text[128];
    return ce_fail_at(err, CE_E_IO, path, 0, 0, "cannot %s: %s", what,
                      strerror_r(code, text, sizeof text));
}

/* Not mkstemp(): its files are for the owner alone, and asking for the umask means changing it. */
static int open_beside(ce_output *output)
{
    size_t room = strlen(output->path) + 48;
    output->temporary = malloc(room);
    if (output->temporary == NULL) return -1;
    for (int i = 0; i < 100; i++) {
        (void)snprintf(output->temporary, room, "%s.%ld-%d.part", output->path, (long)getpid(), i);
        int fd = open(output->temporary, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
        if (fd >= 0 || errno != EEXIST) return fd;
    }
    return -1;
}

static ce_status begin_beside(ce_output *output, const struct stat *old, ce_error *err)
{
    int fd = open_beside(output);
    if (fd < 0) {
        int code = errno;
        free(output->temporary);
        output->temporary = NULL;
        return io_error(err, output->path, "write", code);
    }
    if (old != NULL) (void)fchmod(fd, old->st_mode & 07777);
    output->stream = fdopen(fd, "wb");
    if (output->stream != NULL) return CE_OK;
    (void)close(fd);
    return ce_fail(err, CE_E_NOMEM, "out of memory");
}

ce_status ce_output_begin(ce_output *output, const char *path, ce_error *err)
{
    *output = (ce_output){0};
    struct stat st;
    bool exists = stat(path, &st) == 0;
    if (exists && S_ISDIR(st.st_mode)) return io_error(err, path, "write", EISDIR);
    output->path = exists ? realpath(path, NULL) : strdup(path);
    if (output->path == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    ce_status st_code;
    if (exists && !S_ISREG(st.st_mode)) {
        output->stream = fopen(path, "wb");
        st_code = output->stream == NULL ? io_error(err, path, "write", errno) : CE_OK;
    } else
        st_code = begin_beside(output, exists ? &st : NULL, err);
    if (st_code != CE_OK) ce_output_discard(output);
    return st_code;
}

/* The new name itself must survive a crash, not only the bytes. */
static void sync_folder(const char *path)
{
    char *copy = strdup(path);
    if (copy == NULL) return;
    int fd = open(dirname(copy), O_RDONLY | O_DIRECTORY);
    if (fd >= 0) {
        (void)fsync(fd);
        (void)close(fd);
    }
    free(copy);
}

ce_status ce_output_commit(ce_output *output, ce_error *err)
{
    int bad = 0;
    if (fflush(output->stream) != 0 || ferror(output->stream)) bad = errno != 0 ? errno : EIO;
    if (bad == 0 && output->temporary != NULL && fsync(fileno(output->stream)) != 0) bad = errno;
    if (fclose(output->stream) != 0 && bad == 0) bad = errno;
    output->stream = NULL;
    if (bad == 0 && output->temporary != NULL) {
        if (rename(output->temporary, output->path) != 0)
            bad = errno;
        else {
            sync_folder(output->path);
            free(output->temporary);
            output->temporary = NULL;
        }
    }
    ce_status st = bad == 0 ? CE_OK : io_error(err, output->path, "write", bad);
    ce_output_discard(output);
    return st;
}

void ce_output_discard(ce_output *output)
{
    if (output->stream != NULL) (void)fclose(output->stream);
    if (output->temporary != NULL) (void)unlink(output->temporary);
    free(output->temporary);
    free(output->path);
    *output = (ce_output){0};
}
