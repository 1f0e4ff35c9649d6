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

/* The environment, with a date that PDF files are given unless there is one: the same picture is the same
 * bytes (reproducible-builds.org). The caller frees the array. */
static char **with_fixed_date(void)
{
    static char date[] = "SOURCE_DATE_EPOCH=0";
    size_t n = 0;
    while (environ[n] != NULL) n++;
    char **copy = calloc(n + 2, sizeof *copy);
    if (copy == NULL) return NULL;
    memcpy((void *)copy, (void *)environ, n * sizeof *copy);
    if (getenv("SOURCE_DATE_EPOCH") == NULL) copy[n] = date;
    return copy;
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
    char **const plain = with_fixed_date();
    int code = plain == NULL ? ENOMEM : posix_spawnp(pid, "gnuplot", &actions, NULL, argv, plain);
    free((void *)plain);
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

/* Drawn into an unnamed file first: when gnuplot fails nothing half is shown. */
static ce_status show(FILE *script, FILE *messages, char *terminal, bool *missing, ce_error *err)
{
    FILE *picture = tmpfile();
    if (picture == NULL) return ce_fail(err, CE_E_IO, "cannot write a temporary file");
    ce_status st = draw(script, messages, terminal, picture, missing, err);
    char block[4096];
    rewind(picture);
    for (size_t n; st == CE_OK && (n = fread(block, 1, sizeof block, picture)) > 0;)
        if (fwrite(block, 1, n, stdout) != n) st = ce_fail(err, CE_E_IO, "cannot write");
    (void)fclose(picture);
    return st;
}

ce_status ce_render(const char *script, size_t n, double height, ce_picture kind, const char *path,
                    bool *missing, ce_error *err)
{
    char terminal[200];
    ce_output output;
    *missing = false;
    const double columns =
        memmem(script, n, CE_PLOT_WIDE, strlen(CE_PLOT_WIDE)) != NULL ? 2.0 : 1.0;
    terminal_of(terminal, sizeof terminal, kind, columns, height);
    FILE *text = tmpfile(), *messages = tmpfile();
    ce_status st = CE_OK;
    if (text == NULL || messages == NULL || fwrite(script, 1, n, text) != n || fflush(text) != 0 ||
        lseek(fileno(text), 0, SEEK_SET) != 0)
        st = ce_fail(err, CE_E_IO, "cannot write a temporary file");
    if (st == CE_OK && kind == CE_PICTURE_TERMINAL)
        st = show(text, messages, terminal, missing, err);
    else if (st == CE_OK && (st = ce_output_begin(&output, path, err)) == CE_OK) {
        st = draw(text, messages, terminal, output.stream, missing, err);
        if (st == CE_OK) st = ce_output_commit(&output, err);
        ce_output_discard(&output);
    }
    if (text != NULL) (void)fclose(text);
    if (messages != NULL) (void)fclose(messages);
    return st;
}
