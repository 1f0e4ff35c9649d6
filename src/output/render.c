/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/file.h"
#include "output/gnuplot.h"

#include <errno.h>
#include <math.h>
#include <spawn.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

extern char **environ;

/* columns: 1 or 2 of a journal's. */
static void terminal_of(char *text, size_t room, ce_picture kind, double columns, double height)
{
    height *= columns;
    switch (kind) {
    case CE_PICTURE_PNG: /* 300 dots per inch of a column of 85 mm */
        (void)snprintf(text, room,
                       "set terminal pngcairo size %.0f,%.0f fontscale 1 font ',24' linewidth 3",
                       1004.0 * columns, 1004.0 * height);
        return;
    case CE_PICTURE_PDF:
        (void)snprintf(text, room, "set terminal pdfcairo size %.2fcm,%.2fcm font ',8'",
                       8.5 * columns, 8.5 * height);
        return;
    case CE_PICTURE_TERMINAL: /* characters are twice as high as wide */
        (void)snprintf(text, room, "set terminal dumb mono noenhanced size 98,%.0f",
                       fmin(98.0 * 0.45 * height / columns, 60.0));
        return;
    case CE_PICTURE_SVG:
    case CE_PICTURES:
        break;
    }
    (void)snprintf(text, room,
                   "set terminal svg size %.0f,%.0f dynamic font 'Helvetica,Arial,sans-serif,15' "
                   "linewidth 1.6 background '#ffffff'",
                   640.0 * columns, 640.0 * height);
}

/* The script comes from an unnamed file, the picture goes straight to its own: no pipe, no file name that gnuplot
 * could take for something else. */
static int spawn(char *terminal, int script, int picture, int messages, pid_t *pid)
{
    char *const argv[] = {
        (char[]){"gnuplot"}, (char[]){"-d"}, (char[]){"-e"}, terminal, (char[]){"-"}, NULL};
    posix_spawn_file_actions_t actions;
    if (posix_spawn_file_actions_init(&actions) != 0) return ENOMEM;
    (void)posix_spawn_file_actions_adddup2(&actions, script, STDIN_FILENO);
    (void)posix_spawn_file_actions_adddup2(&actions, picture, STDOUT_FILENO);
    (void)posix_spawn_file_actions_adddup2(&actions, messages, STDERR_FILENO);
    int code = posix_spawnp(pid, "gnuplot", &actions, NULL, argv, environ);
    (void)posix_spawn_file_actions_destroy(&actions);
    return code;
}

static ce_status report(FILE *messages, int status, ce_error *err)
{
    char line[300] = "";
    rewind(messages);
    while (fgets(line, sizeof line, messages) != NULL)
        if (strspn(line, " \t\r\n^") != strlen(line)) break;
    line[strcspn(line, "\n")] = '\0';
    return ce_fail(err, CE_E_IO, "gnuplot failed (status %d): %s", status, line);
}

static ce_status draw(FILE *script, FILE *messages, char *terminal, FILE *picture, bool *missing,
                      ce_error *err)
{
    pid_t pid = 0;
    int code = spawn(terminal, fileno(script), fileno(picture), fileno(messages), &pid), status = 0;
    *missing = code == ENOENT;
    if (code != 0) return ce_fail(err, CE_E_IO, "cannot start gnuplot: %s", strerrordesc_np(code));
    while (waitpid(pid, &status, 0) < 0 && errno == EINTR) {
    }
    if (WIFEXITED(status) && WEXITSTATUS(status) == 127) *missing = true;
    if (!WIFEXITED(status) || WEXITSTATUS(status) != 0) return report(messages, status, err);
    if (lseek(fileno(picture), 0, SEEK_END) <= 0) return report(messages, 0, err);
    return CE_OK;
}

/* Everything in an open file from its beginning. */
static ce_status slurp(FILE *f, char **bytes, size_t *n, ce_error *err)
{
    if (fseek(f, 0, SEEK_END) != 0) return ce_fail(err, CE_E_IO, "cannot read a temporary file");
    const long end = ftell(f);
    rewind(f);
    *bytes = end < 0 ? NULL : malloc((size_t)end + 1);
    if (*bytes == NULL) return ce_fail(err, CE_E_NOMEM, "out of memory");
    *n = fread(*bytes, 1, (size_t)end, f);
    (*bytes)[*n] = '\0';
    return CE_OK;
}

/* A PDF says when it was made; the same figure is to be the same bytes, so it says the beginning of 1970.
 * The length stays, and with it the table of addresses. */
static void forget_date(char *bytes, size_t n)
{
    static const char key[] = "/CreationDate (D:", never[] = "19700101000000";
    char *at = memmem(bytes, n, key, sizeof key - 1);
    if (at == NULL) return;
    at += sizeof key - 1;
    if ((size_t)(bytes + n - at) >= sizeof never && strspn(at, "0123456789") == sizeof never - 1)
        memcpy(at, never, sizeof never - 1);
}

ce_status ce_render_memory(const char *script, size_t n, double height, ce_picture kind,
                           char **bytes, size_t *n_bytes, bool *missing, ce_error *err)
{
    char terminal[200];
    const double columns =
        memmem(script, n, CE_PLOT_WIDE, strlen(CE_PLOT_WIDE)) != NULL ? 2.0 : 1.0;
    *bytes = NULL;
    *n_bytes = 0;
    *missing = false;
    terminal_of(terminal, sizeof terminal, kind, columns, height);
    FILE *text = tmpfile(), *messages = tmpfile(), *picture = tmpfile();
    ce_status st = CE_OK;
    if (text == NULL || messages == NULL || picture == NULL || fwrite(script, 1, n, text) != n ||
        fflush(text) != 0 || lseek(fileno(text), 0, SEEK_SET) != 0)
        st = ce_fail(err, CE_E_IO, "cannot write a temporary file");
    if (st == CE_OK) st = draw(text, messages, terminal, picture, missing, err);
    if (st == CE_OK) st = slurp(picture, bytes, n_bytes, err);
    if (st == CE_OK && kind == CE_PICTURE_PDF) forget_date(*bytes, *n_bytes);
    if (text != NULL) (void)fclose(text);
    if (messages != NULL) (void)fclose(messages);
    if (picture != NULL) (void)fclose(picture);
    return st;
}

/* Drawn into memory first: when gnuplot fails nothing half is written. */
ce_status ce_render(const char *script, size_t n, double height, ce_picture kind, const char *path,
                    bool *missing, ce_error *err)
{
    char *bytes;
    size_t size;
    ce_output output;
    ce_status st = ce_render_memory(script, n, height, kind, &bytes, &size, missing, err);
    if (st != CE_OK) return st;
    if (kind == CE_PICTURE_TERMINAL) {
        if (fwrite(bytes, 1, size, stdout) != size) st = ce_fail(err, CE_E_IO, "cannot write");
    } else if ((st = ce_output_begin(&output, path, err)) == CE_OK) {
        if (fwrite(bytes, 1, size, output.stream) != size)
            st = ce_fail_at(err, CE_E_IO, path, 0, 0, "cannot write");
        if (st == CE_OK) st = ce_output_commit(&output, err);
        ce_output_discard(&output);
    }
    free(bytes);
    return st;
}
