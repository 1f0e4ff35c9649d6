/* SPDX-License-Identifier: GPL-3.0-or-later
 * What estimate is asked: Tg readings and molar masses from the command line. */
#ifndef CE_CLI_ASKED_H
#define CE_CLI_ASKED_H

#include <chainend/base.h>

#include <stdbool.h>

#define CLI_MAX_READINGS 64

/* One --tg READING or --mn VALUE. */
typedef struct {
    const char *text; /* as it was typed: the name of the answer */
    bool is_mn;
    double mn_g_mol;
    size_t n;
    double tg_K[CLI_MAX_READINGS];
    double tg_u_K; /* NaN = not stated                       */
    bool celsius_assumed;
} cli_asked;

typedef struct {
    size_t n;
    cli_asked *item; /* owned */
} cli_questions;

/* Options: both append to a cli_questions. */
ce_status cli_add_tg(void *to, const char *value, ce_error *err);
ce_status cli_add_mn(void *to, const char *value, ce_error *err);
void cli_questions_free(cli_questions *questions);

/* V[,V...][±U][C|K|F] into asked; "+-" is taken for "±". Internal, for its test. */
ce_status cli_parse_reading(const char *text, cli_asked *asked, ce_error *err);

#endif
