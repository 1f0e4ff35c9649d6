/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/cli.h"

#include "output/text.h"
#include "text/number.h"

#include <errno.h>
#include <getopt.h>
#include <limits.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

#define MAX_OPTIONS 64
#define FIRST_ID    (CHAR_MAX + 1)

static const cli_option help_option = {
    .name = "help", .letter = 'h', .help = "show this", .kind = CLI_FLAG};

static void put_option(const cli_option *o)
{
    char head[64];
    (void)snprintf(head, sizeof head, "%s%c%s--%s%s%s", o->letter ? "-" : " ",
                   o->letter ? o->letter : ' ', o->letter ? ", " : "  ", o->name,
                   o->argument ? " " : "", o->argument ? o->argument : "");
    printf("  %-32s", head);
    if (strlen(head) > 30) printf("\n%34s", "");
    ce_text_wrap(stdout, o->help, 34, 34, CE_TEXT_WIDTH);
}

static void put_help(const cli_command *command, const cli_option *option, size_t n)
{
    printf("usage: chainend %s [options] %s\n\n", command->name, command->operands);
    ce_text_wrap(stdout, command->summary, 0, 0, CE_TEXT_WIDTH);
    if (command->detail[0] != '\0') {
        putchar('\n');
        ce_text_wrap(stdout, command->detail, 0, 0, CE_TEXT_WIDTH);
    }
    printf("\noptions:\n");
    for (size_t i = 0; i < n; i++) put_option(&option[i]);
    put_option(&help_option);
    printf("\nexample:\n");
    for (const char *s = command->example; *s != '\0';) {
        size_t k = strcspn(s, "\n");
        printf("  %.*s\n", (int)k, s);
        s += k + (s[k] == '\n');
    }
    printf("\nThe manual: man chainend-%s\n", command->name);
}

static ce_status set_number(const cli_option *o, const char *value, ce_error *err)
{
    double x;
    if (!ce_parse_number(value, strlen(value), '.', &x) || !(x > o->low) || !(x < o->high))
        return ce_fail(err, CE_E_ARG, "'%s' is not a number between %g and %g", value, o->low,
                       o->high);
    *(double *)o->to = x;
    return CE_OK;
}

static ce_status set_count(const cli_option *o, const char *value, ce_error *err)
{
    double x;
    if (strspn(value, "0123456789") != strlen(value) ||
        !ce_parse_number(value, strlen(value), '.', &x) || x < o->low || x > o->high)
        return ce_fail(err, CE_E_ARG, "'%s' is not a whole number from %.0f to %.0f", value, o->low,
                       o->high);
    *(size_t *)o->to = (size_t)x;
    return CE_OK;
}

static ce_status set_option(const cli_option *o, const char *value, ce_error *err)
{
    switch (o->kind) {
    case CLI_FLAG:
        *(bool *)o->to = true;
        return CE_OK;
    case CLI_TEXT:
        *(const char **)o->to = value;
        return CE_OK;
    case CLI_NUMBER:
        return set_number(o, value, err);
    case CLI_COUNT:
        return set_count(o, value, err);
    case CLI_CALL:
        return o->call(o->to, value, err);
    }
    return CE_OK;
}

/* getopt's tables from ours. */
static void make_tables(const cli_option *option, size_t n, struct option *longs, char *shorts)
{
    *shorts++ = ':';
    for (size_t i = 0; i <= n; i++) {
        const cli_option *o = i < n ? &option[i] : &help_option;
        int takes = o->argument != NULL ? required_argument : no_argument;
        longs[i] = (struct option){o->name, takes, NULL, FIRST_ID + (int)i};
        if (o->letter == 0) continue;
        *shorts++ = o->letter;
        if (takes == required_argument) *shorts++ = ':';
    }
    longs[n + 1] = (struct option){0};
    *shorts = '\0';
}

static const cli_option *option_of(const cli_option *option, size_t n, int c)
{
    for (size_t i = 0; i <= n; i++) {
        const cli_option *o = i < n ? &option[i] : &help_option;
        if (c == FIRST_ID + (int)i || (o->letter != 0 && c == o->letter)) return o;
    }
    return NULL;
}

/* Abbreviations would break scripts when an option is added: they are not options. */
static bool written_out(const char *word, const char *name)
{
    return strncmp(word, "--", 2) != 0 ||
           (strncmp(word + 2, name, strlen(name)) == 0 &&
            (word[2 + strlen(name)] == '\0' || word[2 + strlen(name)] == '='));
}

/* The word of the command line an option came from, for messages. */
static const char *word_before(char **argv, const cli_option *o)
{
    const char *last = argv[optind - 1];
    return o->argument != NULL && last == optarg && optind >= 2 ? argv[optind - 2] : last;
}

bool cli_parse(const cli_command *command, const cli_option *option, size_t n_options, int argc,
               char **argv, int *first, int *status)
{
    struct option longs[MAX_OPTIONS + 2];
    char shorts[2 * MAX_OPTIONS + 4];
    make_tables(option, n_options, longs, shorts);
    opterr = 0;
    optind = 1;
    for (int c; (c = getopt_long(argc, argv, shorts, longs, NULL)) != -1;) {
        if (c == ':' || c == '?') {
            if (c == '?' && optopt > 0 && optopt <= CHAR_MAX)
                *status = cli_usage_error(command, "unknown option '-%c'", optopt);
            else if (c == ':')
                *status = cli_usage_error(command, "option '%s' needs a value", argv[optind - 1]);
            else
                *status = cli_usage_error(command, "unknown option '%s'", argv[optind - 1]);
            return false;
        }
        const cli_option *o = option_of(option, n_options, c);
        const char *word = word_before(argv, o);
        if (!written_out(word, o->name)) {
            *status = cli_usage_error(
                command, "unknown option '%s' (options are written out: '--%s')", word, o->name);
            return false;
        }
        if (o == &help_option) {
            put_help(command, option, n_options);
            *status = XIT_OK;
            return false;
        }
        if (o->kind == CLI_TEXT && strncmp(optarg, "--", 2) == 0) {
            *status = cli_usage_error(command, "option '--%s' needs a value", o->name);
            return false;
        }
        ce_error err = CE_ERROR_INIT;
        if (set_option(o, optarg, &err) != CE_OK) {
            *status = cli_usage_error(command, "--%s: %s", o->name, err.message);
            return false;
        }
    }
    *first = optind;
    return true;
}

ce_status cli_whole_number(uint64_t *to, const char *value, ce_error *err)
{
    char *end;
    unsigned long long x = strtoull(value, &end, 10);
    if (value[0] < '0' || value[0] > '9' || *end != '\0' || strlen(value) > 18)
        return ce_fail(err, CE_E_ARG, "'%.30s' is not a whole number of at most 18 digits", value);
    *to = x;
    return CE_OK;
}

ce_status cli_set_format(void *to, const char *value, ce_error *err)
{
    static const char *const names[] = {"text", "csv", "json"};
    for (size_t i = 0; i < sizeof names / sizeof *names; i++)
        if (strcmp(value, names[i]) == 0) {
            *(ce_format *)to = (ce_format)i;
            return CE_OK;
        }
    return ce_fail(err, CE_E_ARG, "'%s' is none of text, csv, json", value);
}
