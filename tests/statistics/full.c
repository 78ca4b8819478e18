/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file full.c  The full form: every cell of the table of coverage, printed as it goes.
 *   statistics_full [SEGMENTS [FIRST_CELL [CELLS]]]
 * A line a cell and measure: share that held the truth, its binomial interval, misses on
 * either side, mean width over 3.92 times the spread, bias over the spread; "FAIL" where the
 * binomial interval excludes 93 to 97 %. Exit status 1 if any cell failed.
 */
#include <gsl/gsl_errno.h>
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "statistics/count.h"

static const char *const measure_names[MEASURE_COUNT] = {
    "K",      "m",       "local-mean", "local-sigma", "outage-5", "outage-10", "outage-15",
    "same-5", "same-10", "same-15",    "next-5",      "next-10",  "next-15"};

static const struct circumstances base = {.k = 0.0,
                                          .ray_angle_deg = 90.0,
                                          .step_db = 1.0,
                                          .spacing_wavelengths = 0.15,
                                          .shadowing_db = 4.0,
                                          .decorrelation_m = 60.0,
                                          .shadowing = RFADE_SHADOWING_SMOOTH,
                                          .segment_m = 100.0,
                                          .margin_windows = 2.0,
                                          .passes = 1};

static const double ks[] = {0.0, 1.0, 4.0, 10.0};
static const double angles_deg[] = {90.0, 0.0};

/* Exponential shadowing: K 1, 4, 10 and decorrelation 20, 60 m, after the others. */
enum {
    VARIATIONS = 8,
    SMOOTH_CELLS = 4 * 2 * VARIATIONS,
    EXPONENTIAL_CELLS = 3 * 2,
    CELLS = SMOOTH_CELLS + EXPONENTIAL_CELLS
};

/* Each K and direction of the ray with the base and with one thing changed. */
static struct circumstances cell(int index)
{
    struct circumstances it = base;
    if (index >= SMOOTH_CELLS) {
        it.shadowing = RFADE_SHADOWING_EXPONENTIAL;
        it.margin_windows = 20.0;
        it.k = ks[1 + (index - SMOOTH_CELLS) % 3];
        it.decorrelation_m = index - SMOOTH_CELLS < 3 ? 20.0 : 60.0;
        return it;
    }
    it.k = ks[index / VARIATIONS % 4];
    it.ray_angle_deg = angles_deg[index / VARIATIONS / 4];
    switch (index % VARIATIONS) {
    case 1:
        it.step_db = 0.1;
        break;
    case 2:
        it.spacing_wavelengths = 0.05;
        break;
    case 3:
        it.spacing_wavelengths = 0.3;
        break;
    case 4:
        it.censored = 0.1;
        break;
    case 5:
        it.decorrelation_m = 200.0;
        break;
    case 6:
        it.passes = 3;
        break;
    case 7:
        it.segment_m = 300.0;
        break;
    default:
        break;
    }
    return it;
}

static void print_share(const struct share *share, double low, double high, bool *failed)
{
    double ends[2];
    bool excluded = share_excludes(share, low, high);
    share_ends(share, &ends[0], &ends[1]);
    printf(" %6.2f%% [%.2f %.2f] n %" PRId64 "%s",
           100.0 * (double)share->hits / (double)share->trials, 100.0 * ends[0],
           100.0 * ends[1], share->trials, excluded ? " FAIL" : "");
    *failed |= excluded;
}

static void print_measure(const struct circumstances *it, int measure,
                          const struct coverage *coverage, bool *failed)
{
    /* At K = 0 an interval can only miss upwards: it is to hold the truth at least as often. */
    double most = measure == MEASURE_K && it->k == 0.0 ? 1.0 : 0.97;
    /* A fraction that is next to never seen, or a rounded one, is held more often. */
    if (measure >= MEASURE_SAME && coverage->share.trials > 0) {
        most = 1.0;
    }
    printf("  %-11s", measure_names[measure]);
    print_share(&coverage->share, 0.93, most, failed);
    printf("  below %" PRId64 " above %" PRId64, coverage->below, coverage->above);
    if (coverage->finite > 0) {
        printf("  width %.3f bias %+.3f", coverage_width_ratio(coverage),
               coverage_bias(coverage));
    }
    printf("\n");
}

/* K of the segments called resolved is to be right in the middle. */
static bool run_exponential(int index, int64_t segments)
{
    struct circumstances it = cell(index);
    struct count count;
    if (!count_segments(&it, segments, 1 + (uint64_t)index * 100000, &count)) {
        return false;
    }
    double ratio = count.k_count > 0 ? count_median_k(&count) / it.k : 1.0;
    bool right = count.k_count < segments / 10 || (ratio >= 0.9 && ratio <= 1.1);
    printf("cell %d: exponential, K %g D %g: resolved %" PRId64 " inseparable %" PRId64
           "; median K of resolved over truth %.3f%s\n",
           index, it.k, it.decorrelation_m, count.resolved, count.inseparable, ratio,
           right ? "" : " FAIL");
    fflush(stdout);
    count_clear(&count);
    return right;
}

static bool run_cell(int index, int64_t segments)
{
    struct circumstances it = cell(index);
    struct count count;
    bool failed = false;
    if (!count_segments(&it, segments, 1 + (uint64_t)index * 100000, &count)) {
        return false;
    }
    printf("cell %d: K %g ray %g step %g spacing %g censored %g D %g passes %d length %g:"
           " resolved %" PRId64 " inseparable %" PRId64 " failed %" PRId64 "; median K %.3f\n",
           index, it.k, it.ray_angle_deg, it.step_db, it.spacing_wavelengths, it.censored,
           it.decorrelation_m, it.passes, it.segment_m, count.resolved, count.inseparable,
           count.failed, count_median_k(&count));
    for (int i = 0; i < MEASURE_COUNT; i++) {
        if (count.coverage[i].share.trials > 0) {
            print_measure(&it, i, &count.coverage[i], &failed);
        }
    }
    printf("  goodness   ");
    print_share(&count.goodness, 0.04, 0.06, &failed);
    printf("\n");
    if (it.k == 0.0) {
        printf("  rice-test  ");
        print_share(&count.rice, 0.04, 0.06, &failed);
        printf("\n  not-rayleigh");
        print_share(&count.preferred, 0.0, 0.1, &failed);
        printf("\n");
    }
    fflush(stdout);
    count_clear(&count);
    return !failed;
}

static long argument(int count, char **values, int place, long otherwise)
{
    return count > place ? strtol(values[place], NULL, 10) : otherwise;
}

int main(int count, char **values)
{
    long segments = argument(count, values, 1, 2000);
    int first = (int)argument(count, values, 2, 0);
    int cells = (int)argument(count, values, 3, CELLS);
    bool good = segments > 0 && first >= 0;
    gsl_set_error_handler_off();
    for (int i = first; i < first + cells && i < CELLS; i++) {
        good &= i < SMOOTH_CELLS ? run_cell(i, segments) : run_exponential(i, segments);
    }
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
