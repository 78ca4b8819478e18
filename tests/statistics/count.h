/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file count.h  Outcomes of many segments counted into coverage, width and error rates. */
#ifndef ROUTEFADE_TEST_STATISTICS_COUNT_H
#define ROUTEFADE_TEST_STATISTICS_COUNT_H

#include <stdbool.h>
#include <stdint.h>

#include "statistics/segment.h"

/** How often something happened, in how many trials. */
struct share {
    int64_t hits;
    int64_t trials;
};

/** Ends of the exact 95 % interval of a share [Clopper and Pearson 1934]. */
void share_ends(const struct share *share, double *low, double *high);

/** Whether the share's interval has nothing in common with [low, high]. */
bool share_excludes(const struct share *share, double low, double high);

struct coverage {
    struct share share; /**< how often the truth was held */
    int64_t below;      /**< truth below the interval */
    int64_t above;
    double width;   /**< sums: of the widths, ... */
    double error;   /**< ... of estimate less truth, ... */
    double square;  /**< ... and of its square; on the measure's own scale */
    int64_t finite; /**< intervals with two finite ends inside the range */
};

struct count {
    int64_t segments;
    int64_t failed;
    int64_t resolved;
    int64_t inseparable;
    struct coverage coverage[MEASURE_COUNT];
    struct share goodness;      /**< true model refused at 5 % */
    struct share rice_goodness; /**< Rice refused at 5 % */
    struct share rice;          /**< Rayleigh refused against Rice at 5 % */
    struct share preferred;     /**< Rayleigh not preferred */
    double *k;                  /**< [room] estimates of K of resolved segments */
    int64_t k_count;
};

/** Runs segments with seeds from `first_seed` on. The caller frees with count_clear. */
bool count_segments(const struct circumstances *circumstances, int64_t segments,
                    uint64_t first_seed, struct count *count);
void count_clear(struct count *count);

/** Mean width over 3.92 times the spread of the estimates; NaN where it means nothing. */
double coverage_width_ratio(const struct coverage *coverage);

/** Mean error over the spread. */
double coverage_bias(const struct coverage *coverage);

/** Median of the estimates of K over resolved segments. */
double count_median_k(struct count *count);

#endif
