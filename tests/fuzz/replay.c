/* SPDX-License-Identifier: GPL-3.0-or-later
 * Calls a fuzz target with every file named, or every file in the folders named. */
#include "fuzz.h"

#include <dirent.h>
#include <sys/stat.h>

static int failures;

static void replay_file(const char *path)
{
    FILE *f = fopen(path, "rb");
    static uint8_t bytes[1 << 20];
    if (f == NULL) {
        fprintf(stderr, "%s: cannot open\n", path);
        failures++;
        return;
    }
    size_t n = fread(bytes, 1, sizeof bytes, f);
    (void)fclose(f);
    /* A copy of exactly that size, so that the sanitizers see a step beyond. */
    uint8_t *copy = malloc(n > 0 ? n : 1);
    MUST(copy != NULL);
    for (size_t i = 0; i < n; i++) copy[i] = bytes[i];
    (void)LLVMFuzzerTestOneInput(copy, n);
    free(copy);
}

static size_t replay(const char *path)
{
    struct stat is;
    size_t n = 0;
    if (stat(path, &is) == 0 && S_ISDIR(is.st_mode)) {
        struct dirent **entry;
        int count = scandir(path, &entry, NULL, alphasort);
        for (int i = 0; i < count; i++) {
            char inner[1200];
            (void)snprintf(inner, sizeof inner, "%s/%s", path, entry[i]->d_name);
            if (entry[i]->d_name[0] != '.') n += replay(inner);
            free(entry[i]);
        }
        if (count >= 0) free(entry);
        return n;
    }
    replay_file(path);
    return 1;
}

int main(int argc, char **argv)
{
    size_t n = 0;
    for (int i = 1; i < argc; i++) n += replay(argv[i]);
    printf("%zu inputs replayed\n", n);
    return failures > 0 || n == 0;
}
