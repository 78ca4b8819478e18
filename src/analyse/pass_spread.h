/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file pass_spread.h  How much the level of a segment differs from pass to pass. */
#ifndef ROUTEFADE_ANALYSE_PASS_SPREAD_H
#define ROUTEFADE_ANALYSE_PASS_SPREAD_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/status.h"
#include "routefade/tally.h"

/** One vehicle's pass along the route, over one segment. */
struct rfade_pass_level {
    int64_t vehicle_id;
    int64_t start_us;
    double travel_mm;
    double sum_mm_db; /**< travel times local mean in dBm */
};

struct rfade_pass_levels {
    struct rfade_pass_level *passes;
    size_t count;
};

void rfade_pass_levels_clear(struct rfade_pass_levels *levels);

/** Adds a traversal's local mean to its pass. RFADE_NO_MEMORY leaves `levels` as it was. */
enum rfade_status rfade_pass_levels_add(struct rfade_pass_levels *levels, int64_t vehicle_id,
                                        int64_t start_us, struct rfade_tally *local_mean);

/** Standard deviations, dB, that reach as far by the normal quantile as what is known does. */
struct rfade_pass_spread {
    double mean_db; /**< of the mean over all passes */
    double next_db; /**< of another pass's level about it, fading left out; NaN: one pass */
};

/**
 * @param fading_db   standard deviation of one pass's level by fading alone, from theory
 * @param confidence  of the interval that the deviations are for, (0, 1)
 */
struct rfade_pass_spread rfade_find_pass_spread(const struct rfade_pass_levels *levels,
                                                double fading_db, double confidence);

#endif
