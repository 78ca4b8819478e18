/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file crossings.h  Crossings of fixed levels about the local mean, counted along a pass.
 * Reentrant; no input or output.
 */
#ifndef ROUTEFADE_CROSSINGS_H
#define ROUTEFADE_CROSSINGS_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

enum { RFADE_CROSSING_LEVELS = 9 };

/** The levels, centi-dB about the local mean power, falling: 5, 0, -3, -5, -10 ... -30 dB. */
RFADE_API extern const int32_t rfade_crossing_levels_cdb[RFADE_CROSSING_LEVELS];

/** What was seen of one level. All but the last two add over traversals; those are maxima. */
struct rfade_level_crossings {
    int64_t crossings;  /**< from above to below */
    int64_t exposed_mm; /**< travel between readings that are known to lie above or below */
    int64_t below_mm;   /**< of it, below: half of the way to a reading above */
    int64_t hidden_mm;  /**< travel to or from a censored reading that may lie on either side:
                             no part of exposed_mm */
    int64_t longest_mm; /**< longest fade: travel */
    int64_t longest_us; /**< longest fade: time with travel; maybe another fade's */
};

/** Integer sums of one traversal, or of several. */
struct rfade_crossings {
    int64_t travel_mm;  /**< between readings that follow each other within a wavelength */
    int64_t moving_us;  /**< the time that took, standing left out */
    int64_t square_mm2; /**< sum of those distances squared: how far readings lie apart */
    struct rfade_level_crossings level[RFADE_CROSSING_LEVELS];
};

/** Adds `other`, and takes the larger of maxima. RFADE_OVERFLOW leaves `sum` as it was. */
RFADE_API enum rfade_status rfade_crossings_merge(struct rfade_crossings *sum,
                                                  const struct rfade_crossings *other);

/** The members in their order as little-endian int64, nothing else. free() it. */
RFADE_API enum rfade_status rfade_crossings_encode(const struct rfade_crossings *crossings,
                                                   uint8_t **bytes, size_t *size);

/** RFADE_INPUT, and all 0, if the size is not that of the sums. */
RFADE_API enum rfade_status rfade_crossings_decode(const uint8_t *bytes, size_t size,
                                                   struct rfade_crossings *crossings);

#ifdef __cplusplus
}
#endif
#endif
