/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/progress.h"

#include <stdio.h>
#include <time.h>
#include <unistd.h>

static double now_s(void)
{
    struct timespec t;
    (void)clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

cli_progress cli_progress_begin(const char *what, bool quiet)
{
    return (cli_progress){
        .what = what, .on = !quiet && isatty(STDERR_FILENO) == 1, .begun_s = now_s()};
}

void cli_progress_step(void *context, size_t i, size_t n, const char *item)
{
    cli_progress *p = context;
    (void)item;
    if (!p->on || i < 2) return;
    double now = now_s(), spent = now - p->begun_s;
    if (spent < 0.5 || now - p->last_s < 0.1) return;
    double rate = (double)(i - 1) / spent;
    p->last_s = now;
    p->shown = true;
    fprintf(stderr, "\r%zu of %zu %s, %.3g a second, %.0f s left \033[K", i, n, p->what, rate,
            (double)(n - i + 1) / rate);
}

void cli_progress_end(cli_progress *progress)
{
    if (progress->shown) fputs("\r\033[K", stderr);
}
