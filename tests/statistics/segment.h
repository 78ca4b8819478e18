/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file segment.h  One simulated segment taken through the chain: drive, separation, fit,
 * outage; and what is true of it.
 */
#ifndef ROUTEFADE_TEST_STATISTICS_SEGMENT_H
#define ROUTEFADE_TEST_STATISTICS_SEGMENT_H

#include <stdbool.h>
#include <stdint.h>

#include "routefade/separate.h"
#include "routefade/simulate.h"

/** How the segment fades and what the logger makes of it. */
struct circumstances {
    double k;
    double ray_angle_deg;
    double step_db;
    double spacing_wavelengths;
    double censored; /**< share of readings below the receiver's floor */
    double shadowing_db;
    double decorrelation_m;
    enum rfade_shadowing shadowing;
    double segment_m;
    double margin_windows; /**< road before and behind it: 2, so that no window is cut, or 20,
                                the neighbourhood that the label is judged by */
    int passes;
    double pass_shift_db; /**< standard deviation of each pass's level about the local mean */
    double standstill_s;  /**< at the middle of the segment; 0: none */
};

/** What the cells are variations of: Rayleigh, ray across the road, 1 dB steps, readings 0.15
 * wavelengths apart, smooth shadowing of 4 dB decorrelated over 60 m, one pass of 100 m. */
extern const struct circumstances usual_circumstances;

enum { THRESHOLDS = 3 };

/** Thresholds about the segment's true mean power, dB. */
extern const double threshold_db[THRESHOLDS];

enum measure {
    MEASURE_K,
    MEASURE_M,
    MEASURE_LOCAL_MEAN,
    MEASURE_LOCAL_SIGMA,
    MEASURE_OUTAGE,                             /**< the stretch's true probability */
    MEASURE_SAME = MEASURE_OUTAGE + THRESHOLDS, /**< what the pass itself observed */
    MEASURE_NEXT = MEASURE_SAME + THRESHOLDS,   /**< what a fresh pass observed */
    MEASURE_COUNT = MEASURE_NEXT + THRESHOLDS
};

struct interval {
    double truth;
    double estimate;
    double low;
    double high;
};

struct outcome {
    enum rfade_sampling sampling;
    bool fitted;
    bool rayleigh_preferred;
    bool rice_significant; /**< Rayleigh refused in favour of Rice, one-sided 5 % */
    double goodness_p;     /**< of the true model: Rayleigh at K = 0, else Rice */
    double rice_goodness_p;
    struct interval intervals[MEASURE_COUNT];
};

/** Simulates one segment from a seed and evaluates it. False if anything refused. */
bool segment_run(const struct circumstances *circumstances, uint64_t seed,
                 struct outcome *outcome);

#endif
