/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file fit_bench.c  Times the Rice and Nakagami fits of a file of doubles (levels in dB, the
 * machine's own byte order), and all three models with intervals on tallies of it by 0.1 and
 * 0.02 dB (some 470 and 1,900 bins of a million readings). Prints one line a measurement: what,
 * processor seconds, log-likelihood, parameter.
 */
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "routefade/estimate.h"

enum { REPEATS = 5 };

static const struct rfade_estimate_settings PLAIN = {.confidence = 0.95};

static double now_s(void)
{
    struct timespec time;
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &time);
    return (double)time.tv_sec + 1e-9 * (double)time.tv_nsec;
}

static struct rfade_bin *read_bins(const char *path, size_t *count)
{
    FILE *file = fopen(path, "rb");
    struct rfade_bin *bins = NULL;
    size_t capacity = 0;
    double level_db = 0.0;
    *count = 0;
    while (file != NULL && fread(&level_db, sizeof level_db, 1, file) == 1) {
        if (*count == capacity) {
            capacity = capacity == 0 ? 1024 : 2 * capacity;
            struct rfade_bin *more = realloc(bins, capacity * sizeof *bins);
            if (more == NULL) {
                break;
            }
            bins = more;
        }
        bins[(*count)++] = (struct rfade_bin){level_db, level_db, 1.0};
    }
    if (file != NULL) {
        fclose(file);
    }
    return bins;
}

static int time_model(const char *name, const struct rfade_bin *bins, size_t count)
{
    struct rfade_fit fit;
    double best_s = INFINITY;
    for (int repeat = 0; repeat < REPEATS; repeat++) {
        double start_s = now_s();
        if (rfade_fit_bins(rfade_model_by_name(name), bins, count, &PLAIN, &fit) != RFADE_OK) {
            return EXIT_FAILURE;
        }
        best_s = fmin(best_s, now_s() - start_s);
    }
    printf("%s %.9g %.17g %.17g\n", name, best_s, fit.log_likelihood, fit.parameter);
    return EXIT_SUCCESS;
}

/* 1 dB steps about local means on a grid. */
static int time_tally(const struct rfade_bin *readings, size_t count, int32_t grid_cdb)
{
    struct rfade_tally *tally = NULL;
    struct rfade_bin *bins = NULL;
    struct rfade_estimate estimate;
    size_t bin_count = 0;
    double best_s = INFINITY;
    enum rfade_status status = rfade_tally_create(&tally);
    for (size_t i = 0; status == RFADE_OK && i < count; i++) {
        struct rfade_tally_key key = {.step_cdb = 100};
        key.centre_cdb = grid_cdb * (int32_t)lround(100.0 / grid_cdb * readings[i].low_db);
        status = rfade_tally_add(tally, &key, 1, 1);
    }
    if (status == RFADE_OK) {
        status = rfade_bins_from_tally(tally, &bins, &bin_count);
    }
    for (int repeat = 0; status == RFADE_OK && repeat < REPEATS; repeat++) {
        double start_s = now_s();
        status = rfade_estimate_bins(bins, bin_count, &PLAIN, &estimate);
        best_s = fmin(best_s, now_s() - start_s);
    }
    if (status == RFADE_OK) {
        printf("tally_%zu_bins %.9g %.17g %.17g\n", bin_count, best_s,
               estimate.fits[RFADE_RICE].log_likelihood, estimate.fits[RFADE_RICE].parameter);
    }
    free(bins);
    rfade_tally_destroy(tally);
    return status == RFADE_OK ? EXIT_SUCCESS : EXIT_FAILURE;
}

int main(int argc, char **argv)
{
    size_t count = 0;
    gsl_set_error_handler_off();
    struct rfade_bin *bins = argc == 2 ? read_bins(argv[1], &count) : NULL;
    if (count == 0) {
        fputs("usage: bench_fit FILE (doubles: levels in dB)\n", stderr);
        free(bins);
        return 2;
    }
    int failed = time_model("rice", bins, count) | time_model("nakagami", bins, count) |
                 time_tally(bins, count, 10) | time_tally(bins, count, 2);
    free(bins);
    return failed;
}
