/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file expected_blocks.h  What theory says of the covariance of a segment's classes of level,
 * put beside what its blocks of travel say.
 */
#ifndef ROUTEFADE_ANALYSE_EXPECTED_BLOCKS_H
#define ROUTEFADE_ANALYSE_EXPECTED_BLOCKS_H

#include "routefade/separate.h"
#include "routefade/tally.h"

/** How the segment fades, as far as theory needs it. */
struct rfade_expected_fading {
    double k;
    struct rfade_ray ray;
    struct rfade_lag_means pass;     /**< over one pass */
    struct rfade_lag_means followed; /**< over the lags that blocks follow: three of them */
    double travel_wavelengths;       /**< over all passes */
    double spacing_wavelengths;      /**< of the readings */
    double step_db;                  /**< of their levels */
    struct rfade_tally *levels; /**< fast fading: its censored readings' bounds; borrowed */
};

/**
 * Adds the correlation at lags beyond those that blocks follow, and as many expected blocks as
 * RFADE_EXPECTED_BLOCKS, to measured ones: the covariance that follows from the result is the
 * mean of both by their number, and the number of blocks in the result says how well it is
 * known. A few blocks know a variance but poorly, and theory knows it as far as scatter comes
 * from all around. With fewer than 6 measured blocks theory stands alone.
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_OVERFLOW; blocks stay as they were on failure
 */
enum rfade_status rfade_expect_blocks(const struct rfade_expected_fading *fading,
                                      struct rfade_blocks *blocks);

enum { RFADE_EXPECTED_BLOCKS = 16 };

#endif
