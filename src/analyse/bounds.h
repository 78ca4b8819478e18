/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file bounds.h  How sure a segment's outage is, and how much of that is calibration, which
 * no further pass makes better.
 */
#ifndef ROUTEFADE_ANALYSE_BOUNDS_H
#define ROUTEFADE_ANALYSE_BOUNDS_H

#include "analyse/results.h"
#include "routefade/special.h"

/** On the scale of ln(odds) of the outage; NaN where nothing was predicted. */
struct rfade_outage_bounds {
    double outage;
    double log_odds;          /**< of the outage; infinite for 0 and 1 */
    double below;             /**< >= 0: from it to the lower bound, all uncertainty together */
    double above;             /**< and to the upper bound */
    double calibration_below; /**< >= 0: the same from the calibration alone */
    double calibration_above;
    double calibration_db; /**< standard uncertainty of the vehicles' calibration, dB */
    struct rfade_observed observed;
};

/** What travel makes smaller of a distance: the root of the difference of the squares. */
double rfade_own_distance(double all, double calibration);

/**
 * Bounds of a row's outage: each end is exceeded, or undercut, with a probability of
 * 1 - confidence. Distances are those of the two-sided 95 % interval, in ratio of the normal
 * quantiles.
 * @param confidence  one-sided, in (0.5, 1)
 */
enum rfade_status rfade_result_bounds(struct rfade_segment_result *row,
                                      const struct rfade_threshold *threshold,
                                      double confidence, struct rfade_outage_bounds *bounds,
                                      struct rfade_error *error);

#endif
