/* SPDX-License-Identifier: GPL-3.0-or-later
 * The program's own scaffolding: commands, options, exit statuses, messages. No science here. */
#ifndef CE_CLI_CLI_H
#define CE_CLI_CLI_H

#include <chainend/base.h>

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#include "output/document.h"

/* EXIT STATUS of chainend(1): part of the interface. */
enum {
    XIT_OK = 0,    /* all that was asked for was produced                    */
    XIT_PART = 1,  /* some input was refused, or a check does not hold       */
    XIT_USAGE = 2, /* command line not understood                            */
    XIT_FAILED = 3 /* nothing could be done: input, memory, disk, output     */
};

/* ---- options ------------------------------------------------------------------------------ */

typedef enum {
    CLI_FLAG,   /* bool *: set to true                                       */
    CLI_TEXT,   /* const char **                                             */
    CLI_NUMBER, /* double *: low < value < high                              */
    CLI_COUNT,  /* size_t *: low <= value <= high                            */
    CLI_CALL    /* call(to, option, value): CE_OK, or an error to report     */
} cli_kind;

/* One option: how it is given, where it goes, what --help says. One table a command is the single
 * source for parsing and for help. */
typedef struct {
    const char *name;     /* long name without dashes                        */
    char letter;          /* 0 = none                                        */
    const char *argument; /* "FILE"; NULL for flags                          */
    const char *help;
    cli_kind kind;
    void *to;
    double low, high;
    ce_status (*call)(void *to, const char *value, ce_error *err);
} cli_option;

typedef struct {
    const char *name;     /* "tg"                                            */
    const char *operands; /* "RUN..."                                        */
    const char *summary;  /* one line                                        */
    const char *detail;   /* more of --help; may be ""                       */
    const char *example;  /* command lines, one a line                       */
} cli_command;

/* Parse argv into the places the options name; operands are left in argv[*first .. argc). Prints
 * help or what is wrong. Returns true to go on, else *status is the exit status. */
bool cli_parse(const cli_command *command, const cli_option *option, size_t n_options, int argc,
               char **argv, int *first, int *status);

/* ---- output ------------------------------------------------------------------------------- */

/* What nearly every command shares. */
typedef struct {
    ce_format format;
    const char *output; /* NULL or "-" = standard output */
    bool quiet;
} cli_common;

/* Does the environment say that text is shown in UTF-8? */
bool cli_speaks_utf8(void);
/* A whole number of at most 18 digits, as seeds are. */
ce_status cli_whole_number(uint64_t *to, const char *value, ce_error *err);
ce_status cli_set_format(void *to, const char *value, ce_error *err);
#define CLI_COMMON_OPTIONS(c)                                                                      \
    {.name = "format",                                                                             \
     .argument = "FORM",                                                                           \
     .help = "text (default: for reading, in °C), csv or json (in kelvin, all digits)",            \
     .kind = CLI_CALL,                                                                             \
     .to = &(c)->format,                                                                           \
     .call = cli_set_format},                                                                      \
        {.name = "output",                                                                         \
         .letter = 'o',                                                                            \
         .argument = "FILE",                                                                       \
         .help = "write the result to FILE, whole or not at all",                                  \
         .kind = CLI_TEXT,                                                                         \
         .to = &(c)->output},                                                                      \
    {                                                                                              \
        .name = "quiet", .help = "no warnings and no progress on standard error",                  \
        .kind = CLI_FLAG, .to = &(c)->quiet                                                        \
    }

/* Write what with the stream and form the options name, and see that all of it arrives. Returns
 * status, or XIT_FAILED with a message. */
int cli_deliver(const cli_command *command, const cli_common *common, ce_writer write,
                const void *what, int status);

/* ---- messages ----------------------------------------------------------------------------- */

/* "chainend tg: run7.csv:41:2: cannot read '12,x' as a number" on standard error. */
void cli_error(const cli_command *command, const ce_error *err);
/* Messages of a list: errors always; warnings and notes unless quiet. */
void cli_messages(const cli_command *command, const ce_messages *list, bool quiet);
/* Exit status that belongs to a failure: XIT_FAILED for what the system or the input denies. */
int cli_usage_error(const cli_command *command, const char *fmt, ...) CE_PRINTF(2, 3);
bool cli_colour(FILE *to);

#endif
