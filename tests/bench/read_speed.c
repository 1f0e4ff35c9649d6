/* SPDX-License-Identifier: GPL-3.0-or-later
 * How fast a run file is read, and with how much memory. Writes plain comma text with three columns
 * into a file, reads it several times and prints the best rate; see read_speed.py for the same file
 * side by side in pandas.
 *
 * usage: read_speed FILE [MEGABYTES [REPEATS]]   FILE is written first when MEGABYTES is not 0 */
#include <chainend/run.h>

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <time.h>

static double now(void)
{
    struct timespec t;
    (void)clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

/* A glass-like heating, repeated with rising time until the file is large enough. */
static int write_file(const char *path, double bytes)
{
    FILE *f = fopen(path, "w");
    if (f == NULL) return 0;
    double written = (double)fprintf(f, "Time (s),Temperature (°C),Heat flow endo up (W/g)\n");
    for (size_t i = 0; written < bytes; i++) {
        double t = 0.005 * (double)i, T = 20.0 + 180.0 * fmod(t / 1080.0, 1.0);
        int n = fprintf(f, "%.3f,%.4f,%.6f\n", t, T,
                        0.2 + 0.0002 * T + 0.05 / (1.0 + exp(-(T - 105.0) / 2.0)));
        written += (double)n;
    }
    return fclose(f) == 0;
}

/* Most memory this program ever held, bytes. Not getrusage(): that remembers the parent. */
static double peak_memory(void)
{
    FILE *f = fopen("/proc/self/status", "r");
    char line[256];
    double kb = (double)NAN;
    while (f != NULL && fgets(line, sizeof line, f) != NULL)
        if (strncmp(line, "VmHWM:", 6) == 0) kb = strtod(line + 6, NULL);
    if (f != NULL) (void)fclose(f);
    return 1024.0 * kb;
}

int main(int argc, char **argv)
{
    double mb = argc > 2 ? strtod(argv[2], NULL) : 100.0, best = HUGE_VAL;
    int repeats = argc > 3 ? atoi(argv[3]) : 5;
    struct stat is;
    if (argc < 2 || (mb > 0.0 && !write_file(argv[1], mb * 1e6)) || stat(argv[1], &is) != 0) {
        fprintf(stderr, "usage: read_speed FILE [MEGABYTES [REPEATS]]\n");
        return 2;
    }
    size_t points = 0;
    for (int i = 0; i < repeats; i++) {
        ce_run *run;
        ce_error err = CE_ERROR_INIT;
        double begin = now();
        if (ce_run_read(argv[1], NULL, &run, &err) != CE_OK) {
            fprintf(stderr, "%s:%zu:%zu: %s\n", err.file, err.line, err.column, err.message);
            return 1;
        }
        best = fmin(best, now() - begin);
        points = ce_run_size(run);
        ce_run_free(run);
    }
    printf("%.1f MB, %zu points, %.3f s, %.1f MB/s, peak memory %.2f times the numbers\n",
           (double)is.st_size / 1e6, points, best, (double)is.st_size / 1e6 / best,
           peak_memory() / (24.0 * (double)points));
    return 0;
}
