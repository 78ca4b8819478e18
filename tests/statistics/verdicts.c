/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file verdicts.c  The full form of the verdicts' truth: wrong ones of `acceptance` at 90 %
 * confidence, printed a cell and threshold.
 *   statistics_verdicts [SEGMENTS [FIRST_CELL [CELLS]]]
 * Exit status 1 where the share's binomial interval lies above 10 %.
 */
#include <gsl/gsl_errno.h>
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "statistics/wrong.h"

static const double confidence = 0.90;

/* K 0, 1, 4, 10; smooth shadowing once and in three passes, exponential of 60 and 20 m. */
enum { KINDS = 4, CELLS = 4 * KINDS };
static const double ks[] = {0.0, 1.0, 4.0, 10.0};
static const char *const kinds[] = {"smooth 60 m", "smooth 60 m, 3 passes", "exponential 60 m",
                                    "exponential 20 m"};

static struct circumstances cell(int index)
{
    struct circumstances it = {.k = ks[index / KINDS],
                               .ray_angle_deg = 90.0,
                               .step_db = 1.0,
                               .spacing_wavelengths = 0.15,
                               .shadowing_db = 4.0,
                               .decorrelation_m = index % KINDS == 3 ? 20.0 : 60.0,
                               .shadowing = index % KINDS < 2 ? RFADE_SHADOWING_SMOOTH
                                                              : RFADE_SHADOWING_EXPONENTIAL,
                               .segment_m = 100.0,
                               .margin_windows = index % KINDS < 2 ? 2.0 : 20.0,
                               .passes = index % KINDS == 1 ? 3 : 1};
    return it;
}

static void print_share(const char *what, const struct share *share, bool *failed)
{
    bool excluded = share_excludes(share, 0.0, 1.0 - confidence);
    double low, high;
    share_ends(share, &low, &high);
    printf("  %s %5.1f%% [%.1f %.1f]%s", what,
           100.0 * (double)share->hits / (double)share->trials, 100.0 * low, 100.0 * high,
           excluded ? " FAIL" : "");
    *failed |= excluded;
}

static bool run_cell(int index, int64_t segments)
{
    struct circumstances it = cell(index);
    enum rfade_sampling sampling = index % KINDS < 2 ? RFADE_RESOLVED : RFADE_INSEPARABLE;
    struct wrong wrong;
    bool failed = !wrong_verdicts(&it, sampling, segments, 1 + (uint64_t)index * 100000,
                                  confidence, &wrong);
    printf("cell %d: K %g, %s: %" PRId64 " of %" PRId64 " %s\n", index, it.k,
           kinds[index % KINDS], wrong.met[0].trials, wrong.segments,
           sampling == RFADE_RESOLVED ? "resolved" : "inseparable");
    for (int t = 0; t < THRESHOLDS && wrong.met[0].trials > 0; t++) {
        printf("  %3.0f dB", threshold_db[t]);
        print_share("met though failing", &wrong.met[t], &failed);
        print_share("failing though met", &wrong.failing[t], &failed);
        double n = (double)wrong.met[t].trials, mean = wrong.error[t] / n;
        printf("  ln(odds) off by %+.3f +- %.3f\n", mean,
               sqrt(wrong.square[t] / n - mean * mean));
    }
    (void)fflush(stdout);
    return !failed;
}

int main(int count, char **arguments)
{
    int64_t segments = count > 1 ? strtoll(arguments[1], NULL, 10) : 1000;
    int first = count > 2 ? (int)strtol(arguments[2], NULL, 10) : 0;
    int cells = count > 3 ? (int)strtol(arguments[3], NULL, 10) : CELLS;
    bool right = true;
    gsl_set_error_handler_off();
    for (int i = first; i < first + cells && i < CELLS; i++) {
        right &= run_cell(i, segments);
    }
    return right ? EXIT_SUCCESS : EXIT_FAILURE;
}
