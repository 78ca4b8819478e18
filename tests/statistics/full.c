/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file full.c  The full form: every cell of the table of coverage, printed as it goes.
 *   statistics_full [SEGMENTS [FIRST_CELL [CELLS]]]
 * A line a cell and measure, as a row of a table: the share that held the truth and its
 * binomial interval, misses on either side, mean width over 3.92 times the spread, mean error
 * over the spread; "FAIL" where the binomial interval excludes 93 to 97 %, or the width's own
 * interval 0.9 to 1.2. A summary at the end. Exit status 1 if any cell failed.
 *
 * Seeds follow from the cell alone, so that several processes may share the cells. Most runs
 * by which the method was made took others; cells 0, 1, 2, 16 and 39 were looked at in between.
 */
#include <gsl/gsl_errno.h>
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "statistics/count.h"

static const char *const measure_names[MEASURE_COUNT] = {
    "K",       "m",        "local mean", "local sigma", "outage -5", "outage -10", "outage -15",
    "same -5", "same -10", "same -15",   "next -5",     "next -10",  "next -15"};

static const double ks[] = {0.0, 1.0, 4.0, 10.0};
static const double angles_deg[] = {90.0, 0.0};
static const int shifted_passes[] = {1, 2, 3, 6};

/* After the others: exponential shadowing, K 1, 4, 10 and decorrelation 20, 60 m; passes that
 * differ by 2 dB, K 1 and 4 and one to six of them. */
enum {
    VARIATIONS = 8,
    SMOOTH_CELLS = 4 * 2 * VARIATIONS,
    EXPONENTIAL_CELLS = 3 * 2,
    SHIFTED_CELLS = 2 * 4,
    CELLS = SMOOTH_CELLS + EXPONENTIAL_CELLS + SHIFTED_CELLS
};

/* Seeds of other runs lie below. */
enum { FIRST_SEED_CELL = 2000, SEEDS_A_CELL = 100000 };

struct tally_of_cells {
    int run;
    int failed;
};

/* One thing changed of the usual_circumstances. */
static void vary(int variation, struct circumstances *it)
{
    switch (variation) {
    case 1:
        it->step_db = 0.1;
        break;
    case 2:
        it->spacing_wavelengths = 0.05;
        break;
    case 3:
        it->spacing_wavelengths = 0.3;
        break;
    case 4:
        it->censored = 0.1;
        break;
    case 5:
        it->decorrelation_m = 200.0;
        break;
    case 6:
        it->passes = 3;
        break;
    case 7:
        it->segment_m = 300.0;
        break;
    default:
        break;
    }
}

/* Each K and direction of the ray with the base and with one thing changed. */
static struct circumstances cell(int index)
{
    struct circumstances it = usual_circumstances;
    int exponential = index - SMOOTH_CELLS;
    int shifted = exponential - EXPONENTIAL_CELLS;
    if (shifted >= 0) {
        it.k = ks[1 + shifted / 4];
        it.passes = shifted_passes[shifted % 4];
        it.pass_shift_db = 2.0;
    } else if (exponential >= 0) {
        it.shadowing = RFADE_SHADOWING_EXPONENTIAL;
        it.margin_windows = 20.0;
        it.k = ks[1 + exponential % 3];
        it.decorrelation_m = exponential < 3 ? 20.0 : 60.0;
    } else {
        it.k = ks[index / VARIATIONS % 4];
        it.ray_angle_deg = angles_deg[index / VARIATIONS / 4];
        vary(index % VARIATIONS, &it);
    }
    return it;
}

static void print_cell(int index, const struct circumstances *it)
{
    printf("| %d | K %g, ray %g", index, it->k, it->ray_angle_deg);
    if (it->step_db != usual_circumstances.step_db) {
        printf(", step %g", it->step_db);
    }
    if (it->spacing_wavelengths != usual_circumstances.spacing_wavelengths) {
        printf(", spacing %g", it->spacing_wavelengths);
    }
    if (it->censored > 0.0) {
        printf(", censored %g", it->censored);
    }
    if (it->decorrelation_m != usual_circumstances.decorrelation_m) {
        printf(", D %g", it->decorrelation_m);
    }
    if (it->shadowing != usual_circumstances.shadowing) {
        printf(", exponential");
    }
    if (it->passes != usual_circumstances.passes || it->pass_shift_db > 0.0) {
        printf(", passes %d", it->passes);
    }
    if (it->pass_shift_db > 0.0) {
        printf(", differing %g dB", it->pass_shift_db);
    }
    if (it->segment_m != usual_circumstances.segment_m) {
        printf(", %g m", it->segment_m);
    }
    printf(" | ");
}

/* The band that a share is to lie in; from 0 to 1: nothing is asked. */
struct band {
    double low;
    double high;
};

static bool print_share(const struct share *share, const struct band *band)
{
    double ends[2];
    bool excluded = share_excludes(share, band->low, band->high);
    share_ends(share, &ends[0], &ends[1]);
    printf("%.2f [%.2f %.2f] | %" PRId64 " | ",
           100.0 * (double)share->hits / (double)share->trials, 100.0 * ends[0],
           100.0 * ends[1], share->trials);
    return excluded;
}

/* Levels of passes that are alike, as far as they show. */
static bool cautious(const struct circumstances *it, int measure)
{
    return it->passes > 1 && it->pass_shift_db == 0.0 && measure >= MEASURE_LOCAL_MEAN;
}

/*
 * At K = 0 a two-sided interval can only miss upwards: it is to hold the truth at least as
 * often. The prediction interval is made for another pass: the one that was fitted is held
 * more often, and a fraction of few fades, which moves by whole ones, is, too. One pass says
 * nothing of passes that differ, and three that don't differ can't tell that they don't.
 */
static struct band band_of(const struct circumstances *it, int measure)
{
    bool few_fades = measure > MEASURE_NEXT || it->k >= 10.0;
    if (measure == MEASURE_LOCAL_SIGMA || (it->pass_shift_db > 0.0 && it->passes == 1)) {
        return (struct band){0.0, 1.0};
    }
    if (measure == MEASURE_K && it->k == 0.0) {
        return (struct band){0.95, 1.0};
    }
    if (cautious(it, measure)) {
        return (struct band){0.93, 1.0};
    }
    if (measure >= MEASURE_SAME && (measure < MEASURE_NEXT || few_fades)) {
        return (struct band){0.93, 1.0};
    }
    return (struct band){0.93, 0.97};
}

static bool judges_width(const struct circumstances *it, int measure)
{
    return measure < MEASURE_SAME && measure != MEASURE_LOCAL_SIGMA &&
           !(measure == MEASURE_K && it->k == 0.0) &&
           !(it->pass_shift_db > 0.0 && it->passes == 1) &&
           !(it->passes > 1 && measure >= MEASURE_LOCAL_MEAN); /* Student's t of a few */
}

/* The spread is known to about a share 1/sqrt(2 n) of itself. */
static bool width_failed(const struct coverage *coverage)
{
    double ratio = coverage_width_ratio(coverage);
    double error = 1.96 / sqrt(2.0 * (double)coverage->finite);
    return ratio * (1.0 + error) < 0.9 || ratio * (1.0 - error) > 1.2;
}

static bool print_measure(int index, const struct circumstances *it, int measure,
                          const struct coverage *coverage)
{
    struct band band = band_of(it, measure);
    print_cell(index, it);
    printf("%s | ", measure_names[measure]);
    bool failed = print_share(&coverage->share, &band);
    printf("%" PRId64 "/%" PRId64 " | ", coverage->below, coverage->above);
    if (coverage->finite > 0) {
        printf("%.2f | %+.2f | ", coverage_width_ratio(coverage), coverage_bias(coverage));
        failed |= judges_width(it, measure) && width_failed(coverage);
    } else {
        printf(" | | ");
    }
    printf("%s |\n", failed ? "FAIL" : "");
    return failed;
}

static bool print_rate(int index, const struct circumstances *it, const char *name,
                       const struct share *share, const struct band *band)
{
    print_cell(index, it);
    printf("%s | ", name);
    bool failed = share->trials > 0 && print_share(share, band);
    printf(" | | | %s |\n", failed ? "FAIL" : "");
    return failed;
}

/* K of the segments called resolved is to be right in the middle. */
static bool print_exponential(int index, const struct circumstances *it, struct count *count)
{
    double ratio = count->k_count > 0 ? count_median_k(count) / it->k : 1.0;
    bool failed = count->k_count >= count->segments / 10 && !(ratio >= 0.9 && ratio <= 1.1);
    print_cell(index, it);
    printf("median K over truth | %.3f | %" PRId64 " | inseparable %" PRId64 " | | | %s |\n",
           ratio, count->resolved, count->inseparable, failed ? "FAIL" : "");
    return failed;
}

static bool print_smooth(int index, const struct circumstances *it, const struct count *count)
{
    bool failed = count->failed > 0;
    for (int i = 0; i < MEASURE_COUNT; i++) {
        if (count->coverage[i].share.trials > 0) {
            failed |= print_measure(index, it, i, &count->coverage[i]);
        }
    }
    failed |=
        print_rate(index, it, "goodness 5 %", &count->goodness, &(struct band){0.04, 0.06});
    if (it->k == 0.0) {
        failed |= print_rate(index, it, "Rayleigh against Rice 5 %", &count->rice,
                             &(struct band){0.04, 0.06});
        failed |= print_rate(index, it, "Rayleigh not preferred", &count->preferred,
                             &(struct band){0.0, 0.1});
    }
    return failed;
}

static bool run_cell(int index, int64_t segments, struct tally_of_cells *tally)
{
    struct circumstances it = cell(index);
    struct count count;
    uint64_t seed = 1 + (uint64_t)(FIRST_SEED_CELL + index) * SEEDS_A_CELL;
    if (!count_segments(&it, segments, seed, &count)) {
        return false;
    }
    bool failed = it.shadowing == RFADE_SHADOWING_EXPONENTIAL
                      ? print_exponential(index, &it, &count)
                      : print_smooth(index, &it, &count);
    fflush(stdout);
    count_clear(&count);
    tally->run++;
    tally->failed += failed;
    return true;
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
    struct tally_of_cells tally = {0, 0};
    bool good = segments > 0 && segments <= SEEDS_A_CELL && first >= 0;
    gsl_set_error_handler_off();
    printf(
        "| cell | circumstances | measure | %% [95 %%] | n | below/above | width | bias | |\n"
        "| --- | --- | --- | --- | --- | --- | --- | --- | --- |\n");
    for (int i = first; i < first + cells && i < CELLS && good; i++) {
        good = run_cell(i, segments, &tally);
    }
    printf("\n%d of %d cells failed\n", tally.failed, tally.run);
    return good && tally.failed == 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
