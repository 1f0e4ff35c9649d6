/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/cli.h"

#include "output/file.h"

#include <errno.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

/* ce_error has no control bytes; what comes from the command line may. */
static void put_safe(const char *s)
{
    for (; *s != '\0'; s++) (void)fputc((unsigned char)*s < 0x20 || *s == 0x7f ? '?' : *s, stderr);
}

static void put_error(const cli_command *command, const char *kind, const ce_error *err)
{
    (void)fflush(stdout); /* keep both streams in order */
    fprintf(stderr, "chainend %s: ", command->name);
    if (err->file[0] != '\0') {
        fprintf(stderr, "%s:", err->file);
        if (err->line > 0) fprintf(stderr, "%zu:", err->line);
        if (err->line > 0 && err->column > 0) fprintf(stderr, "%zu:", err->column);
        (void)fputc(' ', stderr);
    }
    fprintf(stderr, "%s%s\n", kind, err->message);
}

void cli_error(const cli_command *command, const ce_error *err)
{
    put_error(command, "", err);
}

void cli_messages(const cli_command *command, const ce_messages *list, bool quiet)
{
    static const char *const kind[] = {"note: ", "warning: ", ""};
    for (size_t i = 0; list != NULL && i < list->n; i++)
        if (!quiet || list->item[i].severity == CE_ERROR)
            put_error(command, kind[list->item[i].severity], &list->item[i].at);
}

int cli_usage_error(const cli_command *command, const char *fmt, ...)
{
    char text[512];
    va_list ap;
    va_start(ap, fmt);
    (void)vsnprintf(text, sizeof text, fmt, ap);
    va_end(ap);
    (void)fflush(stdout);
    fprintf(stderr, "chainend %s: ", command->name);
    put_safe(text);
    fprintf(stderr, "\nchainend %s: see 'chainend %s --help'\n", command->name, command->name);
    return XIT_USAGE;
}

/* NO_COLOR counts when set and not empty (no-color.org). */
bool cli_colour(FILE *to)
{
    const char *no = getenv("NO_COLOR"), *term = getenv("TERM");
    if (no != NULL && no[0] != '\0') return false;
    return isatty(fileno(to)) == 1 && term != NULL && strcmp(term, "dumb") != 0;
}

/* The first of these that is set decides (POSIX); the locale itself is not touched. */
bool cli_speaks_utf8(void)
{
    static const char *const names[] = {"LC_ALL", "LC_CTYPE", "LANG"};
    for (size_t i = 0; i < sizeof names / sizeof *names; i++) {
        const char *value = getenv(names[i]);
        if (value == NULL || value[0] == '\0') continue;
        return strcasestr(value, "utf-8") != NULL || strcasestr(value, "utf8") != NULL;
    }
    return false;
}

static int deliver_to_file(const cli_command *command, const cli_common *common, ce_writer write,
                           const void *what, int status)
{
    ce_error err = CE_ERROR_INIT;
    ce_output output;
    if (ce_output_begin(&output, common->output, &err) != CE_OK) {
        cli_error(command, &err);
        return XIT_FAILED;
    }
    ce_status st = write(what, output.stream, common->format, false);
    if (st == CE_OK)
        st = ce_output_commit(&output, &err);
    else
        (void)ce_fail_at(&err, st, common->output, 0, 0, "cannot write: %s", ce_status_text(st));
    ce_output_discard(&output);
    if (st == CE_OK) return status;
    cli_error(command, &err);
    return XIT_FAILED;
}

int cli_deliver(const cli_command *command, const cli_common *common, ce_writer write,
                const void *what, int status)
{
    if (common->output != NULL && strcmp(common->output, "-") != 0)
        return deliver_to_file(command, common, write, what, status);
    ce_status st =
        write(what, stdout, common->format, common->format == CE_AS_TEXT && cli_colour(stdout));
    if (st == CE_OK) return status; /* main() sees to it that the bytes arrived */
    fprintf(stderr, "chainend %s: %s\n", command->name, ce_status_text(st));
    return XIT_FAILED;
}
