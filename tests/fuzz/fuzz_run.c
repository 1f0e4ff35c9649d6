/* SPDX-License-Identifier: GPL-3.0-or-later
 * Any bytes as a run file: read or refused; what is read hangs together; and the direct scan of plain
 * rows gives the same run, bit by bit, as libcsv row by row. The last two bytes choose options. */
#include "fuzz.h"

#include "run/run_internal.h"

#include <math.h>
#include <string.h>

static ce_run_options options_from(const uint8_t *data, size_t *size)
{
    static const char delimiters[] = {0, 0, 0, ',', ';', '\t', '|', ' '};
    ce_run_options o = ce_run_options_default();
    if (*size < 2 || (data[*size - 1] & 0x80) == 0) return o;
    uint8_t a = data[*size - 2], b = data[*size - 1];
    *size -= 2;
    o.delimiter = delimiters[a & 7];
    o.decimal = (a & 8) != 0 ? ((a & 16) != 0 ? ',' : '.') : 0;
    if ((a & 32) != 0) o.temperature_unit = (a & 64) != 0 ? "K" : "°C";
    if ((b & 1) != 0) o.time_column = (b & 2) != 0 ? "none" : "1";
    if ((b & 4) != 0) o.temperature_column = "2";
    if ((b & 8) != 0) o.signal_column = "3";
    if ((b & 16) != 0) o.time_unit = "min";
    if ((b & 32) != 0) o.signal_unit = "mW";
    if ((b & 64) != 0) o.mass_g = 0.005;
    return o;
}

static void check(const ce_run *run)
{
    size_t n = ce_run_size(run), n_segments, n_facts, points = 0;
    const ce_segment *s = ce_run_segments(run, &n_segments);
    const ce_fact *f = ce_run_facts(run, &n_facts);
    MUST(n >= 2 && n <= CE_MAX_POINTS && n_segments > 0 && n_segments <= CE_MAX_SEGMENTS);
    for (size_t i = 0; i < n; i++) {
        MUST(isfinite(ce_run_temperature_K(run)[i]) && ce_run_temperature_K(run)[i] >= 0.0);
        MUST(isfinite(ce_run_signal(run)[i]));
        MUST(ce_run_time_s(run) == NULL || isfinite(ce_run_time_s(run)[i]));
    }
    for (size_t i = 0; i < n_segments; i++) {
        MUST(s[i].first == points && s[i].n > 0 && s[i].index == i + 1 && s[i].line > 0);
        MUST(s[i].low_K <= s[i].high_K);
        points += s[i].n;
    }
    MUST(points == n);
    for (size_t i = 0; i < n_facts; i++)
        for (const char *p = f[i].value; *p != '\0'; p++) MUST((unsigned char)*p >= 0x20);
    MUST(isnan(ce_run_mass_g(run)) || ce_run_mass_g(run) > 0.0);
}

static void same(const ce_run *a, const ce_run *b)
{
    size_t n = a->n;
    MUST(n == b->n && a->n_segments == b->n_segments && a->messages.n == b->messages.n);
    MUST(memcmp(a->temperature_K, b->temperature_K, n * sizeof(double)) == 0);
    MUST(memcmp(a->signal, b->signal, n * sizeof(double)) == 0);
    MUST((a->time_s == NULL) == (b->time_s == NULL));
    MUST(a->time_s == NULL || memcmp(a->time_s, b->time_s, n * sizeof(double)) == 0);
    for (size_t i = 0; i < a->n_segments; i++) MUST(a->segment[i].line == b->segment[i].line);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    ce_run *fast, *slow;
    ce_error err = CE_ERROR_INIT, other = CE_ERROR_INIT;
    ce_run_options o = options_from(data, &size);
    ce_status st = ce_run_read_as(data, size, "fuzz", &o, true, &fast, &err);
    ce_status st2 = ce_run_read_as(data, size, "fuzz", &o, false, &slow, &other);
    MUST(st == st2 && st == err.code && err.line == other.line && err.column == other.column);
    MUST(strcmp(err.message, other.message) == 0);
    if (st == CE_OK) {
        check(fast);
        same(fast, slow);
    } else
        MUST(fast == NULL && slow == NULL && err.message[0] != '\0');
    ce_run_free(fast);
    ce_run_free(slow);
    return 0;
}
