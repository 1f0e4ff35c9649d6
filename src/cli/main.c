/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/cli.h"
#include "cli/commands.h"

#include <chainend/version.h>

#include <csv.h>
#include <errno.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_version.h>
#include <jansson.h>
#include <nettle/version.h>
#include <string.h>

typedef struct {
    const char *name;
    int (*run)(int argc, char **argv);
    const char *summary;
} command;

static const command commands[] = {
#define X(name, summary) {#name, cmd_##name, summary},
    CLI_COMMANDS(X)
#undef X
};

static int put_usage(FILE *to, int status)
{
    fputs(
        "usage: chainend COMMAND [options] [files]\n\n"
        "Molar mass from a glass transition: reads Tg off DSC runs, fits Tg against Mn, and says\n"
        "what the Mn of an unknown is, with an honest interval.\n\n"
        "commands:\n",
        to);
    for (size_t i = 0; i < sizeof commands / sizeof *commands; i++)
        fprintf(to, "  %-10s %s\n", commands[i].name, commands[i].summary);
    fputs(
        "\n'chainend COMMAND --help' tells more; 'chainend --version' what computed your numbers.\n"
        "A molar mass read off a Tg is an estimate, for this polymer, its end groups, its "
        "tacticity\n"
        "and its thermal history only.\n",
        to);
    return status;
}

static int put_version(void)
{
    printf("chainend %s\nGSL      %s (built against %s)\nlibcsv   %d.%d.%d\njansson  %s (built "
           "against %s)\nnettle   %d.%d\n"
           "compiler %s\n",
           ce_version(), gsl_version, GSL_VERSION, CSV_MAJOR, CSV_MINOR, CSV_RELEASE,
           jansson_version_str(), JANSSON_VERSION, NETTLE_VERSION_MAJOR, NETTLE_VERSION_MINOR,
           __VERSION__);
    return XIT_OK;
}

/* The last thing the program does is ask whether its output arrived. */
static int finish(int status)
{
    int bad = ferror(stdout);
    if (fclose(stdout) == 0 && !bad) return status;
    if (errno != EPIPE)
        fprintf(stderr, "chainend: cannot write standard output: %s\n", strerror(errno));
    return XIT_FAILED;
}

static int run(int argc, char **argv)
{
    if (argc < 2) return put_usage(stderr, XIT_USAGE);
    const char *name = argv[1];
    if (strcmp(name, "--help") == 0 || strcmp(name, "-h") == 0 || strcmp(name, "help") == 0)
        return put_usage(stdout, XIT_OK);
    if (strcmp(name, "--version") == 0) return put_version();
    for (size_t i = 0; i < sizeof commands / sizeof *commands; i++)
        if (strcmp(name, commands[i].name) == 0) return commands[i].run(argc - 1, argv + 1);
    fprintf(stderr, "chainend: there is no command '%.*s'; 'chainend --help' lists them\n", 40,
            name);
    return XIT_USAGE;
}

int main(int argc, char **argv)
{
    (void)gsl_set_error_handler_off();
    return finish(run(argc, argv));
}
