/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file wrong.h  How often a verdict on a simulated segment is wrong, at worst. */
#ifndef ROUTEFADE_TEST_STATISTICS_WRONG_H
#define ROUTEFADE_TEST_STATISTICS_WRONG_H

#include <stdbool.h>
#include <stdint.h>

#include "statistics/count.h"

/**
 * Verdicts against targets next to the segment's true outage, where they are wrong most often:
 * one just below it, which the segment fails, and one just above it, which it meets.
 */
struct wrong {
    int64_t segments;
    int64_t failed;                   /**< simulations that broke off */
    int64_t inseparable;              /**< of the segments */
    struct share met[THRESHOLDS];     /**< called met though the segment fails */
    struct share failing[THRESHOLDS]; /**< called failing though it meets */
    double error[THRESHOLDS];  /**< sums over the trials, in ln(odds): estimate less truth, */
    double square[THRESHOLDS]; /**< and of its square */
};

/** @param sampling  only segments that are labelled so; RFADE_RESOLVED or RFADE_INSEPARABLE */
bool wrong_verdicts(const struct circumstances *circumstances, enum rfade_sampling sampling,
                    int64_t segments, uint64_t first_seed, double confidence,
                    struct wrong *wrong);

#endif
