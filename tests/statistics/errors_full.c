/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file errors_full.c  The full form: errors_full [TRIALS [FIRST_CELL [CELLS]]]
 * How often tests at 5 % refuse what is true: goodness of the true model, and Rayleigh
 * against Rice one-sided where there is no ray, on simulated segments taken through the
 * chain; then how often goodness refuses Rice in columns that are Rice fading and that
 * aren't. Shares with their binomial 95 % interval; "FAIL" where, for a true model, that
 * excludes 4 to 6 %. Exit status 1 if any cell failed.
 */
#include <gsl/gsl_errno.h>
#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>

#include "statistics/count.h"
#include "statistics/power.h"

static const double ks[] = {0.0, 1.0, 4.0, 10.0};
static const double spacings_wavelengths[] = {0.05, 0.15};
static const double angles_deg[] = {90.0, 0.0};
static const int effective_counts[] = {100, 300, 1000};
static const char *const population_names[POPULATION_COUNT] = {"Rice", "lognormal 6 dB",
                                                               "two populations"};

/* Segments, and all columns as the last cell. */
enum { SEGMENT_CELLS = 2 * 2 * 4, CELLS = SEGMENT_CELLS + 1 };

static bool print_share(const char *what, const struct share *share, bool judged)
{
    double ends[2];
    bool failed = judged && share_excludes(share, 0.04, 0.06);
    share_ends(share, &ends[0], &ends[1]);
    printf("  %s %.2f%% [%.2f %.2f] n %" PRId64 "%s", what,
           100.0 * (double)share->hits / (double)share->trials, 100.0 * ends[0],
           100.0 * ends[1], share->trials, failed ? " FAIL" : "");
    return !failed;
}

static bool run_segments(int index, int64_t trials)
{
    struct circumstances it = usual_circumstances;
    it.k = ks[index % 4];
    it.ray_angle_deg = angles_deg[index / 8];
    it.spacing_wavelengths = spacings_wavelengths[index / 4 % 2];
    struct count count;
    if (!count_segments(&it, trials, 1 + 10000000 * ((uint64_t)index + 1), &count)) {
        return false;
    }
    printf("K %g, ray %g, spacing %g:", it.k, it.ray_angle_deg, it.spacing_wavelengths);
    bool good = print_share("goodness", &count.goodness, true);
    if (it.k == 0.0) {
        good &= print_share("against Rice", &count.rice, true);
    }
    printf("\n");
    fflush(stdout);
    count_clear(&count);
    return good;
}

static bool run_columns(int samples)
{
    bool good = true;
    for (int population = 0; population < POPULATION_COUNT; population++) {
        for (int i = 0; i < 6; i++) {
            const struct power_cell cell = {(enum population)population,
                                            effective_counts[i / 2], i % 2 == 0 ? 1 : 3};
            struct share refused;
            if (!power_run(&cell, 501 + (unsigned long)i, samples, &refused)) {
                return false;
            }
            printf("%s, %d levels read %d times:", population_names[population], cell.effective,
                   cell.repeats);
            /* 100 levels make no more than ten blocks. */
            good &= print_share("Rice refused", &refused,
                                population == POPULATION_RICE && cell.effective > 100);
            printf("\n");
            fflush(stdout);
        }
    }
    return good;
}

static bool run_cell(int index, int trials)
{
    if (index == SEGMENT_CELLS) {
        return run_columns(trials);
    }
    /* Without a ray its direction doesn't matter. */
    return (index >= 8 && ks[index % 4] == 0.0) || run_segments(index, trials);
}

static long argument(int count, char **values, int place, long otherwise)
{
    return count > place ? strtol(values[place], NULL, 10) : otherwise;
}

int main(int count, char **values)
{
    long trials = argument(count, values, 1, 4000);
    long first = argument(count, values, 2, 0);
    long cells = argument(count, values, 3, CELLS);
    bool valid = trials > 0 && trials < 1000000 && first >= 0 && cells > 0;
    bool good = valid;
    gsl_set_error_handler_off();
    for (long i = first; valid && i < CELLS && i - first < cells; i++) {
        good &= run_cell((int)i, (int)trials);
    }
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
