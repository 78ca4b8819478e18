/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Runs a fuzz target over files and folders of them, each also cut short at every eighth
 * byte, for compilers without libFuzzer. Fails if there was nothing to run.
 */
#include <string.h>

#include "ingest/walk.h"

#include "fuzz.h"

enum { MOST_SIZE = 1 << 20, CUTS = 8 };

static int run_file(const char *path, uint8_t *bytes)
{
    FILE *file = fopen(path, "rb");
    if (!file)
        return 0;
    size_t size = fread(bytes, 1, MOST_SIZE, file);
    (void)fclose(file);
    for (size_t i = 1; i <= CUTS; i++) {
        /* A copy of its own size, so that a sanitizer sees any byte read behind it. */
        size_t cut = size * i / CUTS;
        uint8_t *copy = malloc(cut ? cut : 1);
        if (!copy)
            return 0;
        memcpy(copy, bytes, cut);
        (void)LLVMFuzzerTestOneInput(copy, cut);
        free(copy);
    }
    return 1;
}

int main(int argument_count, char **arguments)
{
    struct rfade_path_list list = {0};
    struct rfade_error error = {0};
    uint8_t *bytes = malloc(MOST_SIZE);
    int run = 0;
    for (int i = 1; i < argument_count; i++)
        if (rfade_path_list_add(&list, arguments[i], &error) != RFADE_OK)
            (void)fprintf(stderr, "%s: %s\n", error.file, error.what);
    for (size_t i = 0; i < list.count && bytes; i++)
        run += run_file(list.paths[i], bytes);
    (void)printf("%d of %zu inputs run\n", run, list.count);
    int status = run > 0 && (size_t)run == list.count ? EXIT_SUCCESS : EXIT_FAILURE;
    free(bytes);
    rfade_path_list_clear(&list);
    return status;
}
