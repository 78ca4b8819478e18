/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file paired.h  Two antennas of one vehicle that were both logged: what they read at the same
 * time and place. Reentrant; no input or output.
 */
#ifndef ROUTEFADE_PAIRED_H
#define ROUTEFADE_PAIRED_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/separate.h"
#include "routefade/status.h"
#include "routefade/tally.h"

#ifdef __cplusplus
extern "C" {
#endif

/** The readings of one branch along a pass. */
struct rfade_branch {
    const struct rfade_track_reading *readings; /**< [count], travel never falling */
    size_t count;
    struct rfade_receiver receiver;
    struct rfade_separate_settings settings;
    /** [segments] cdB, added to each level so that both branches have one scale (from level to
     * SNR); NULL: nothing */
    const int32_t *shift_cdb;
};

/** Integer sums over the pairs of a block of travel; they add. */
struct rfade_paired_sums {
    int64_t pairs;
    int64_t weight_mm;
    int64_t known_mm;      /**< of it, travel where both are known to lie above or below */
    int64_t below_mm[2];   /**< of that, below the threshold */
    int64_t both_below_mm; /**< of that, both below */
    int64_t mean_cdb[2];   /**< local mean, shifted: mm cdB */
    /** Fast fading: power over local mean less 1, and its root less 1, in thousandths. */
    int64_t power[2];
    int64_t power_square[2];
    int64_t power_product;
    int64_t amplitude[2];
    int64_t amplitude_square[2];
    int64_t amplitude_product;
};

/** What one run of readings in one segment gave. Owned by the list. */
struct rfade_paired_run {
    int32_t segment;
    struct rfade_tally *level[2];     /**< of the pairs, shifted; weights in mm */
    struct rfade_tally *best;         /**< the stronger of each pair: selection combining */
    struct rfade_paired_sums *blocks; /**< blocks of travel that have a pair */
    size_t block_count;
};

struct rfade_pairing {
    struct rfade_paired_run *runs; /**< in order of travel */
    size_t count;
};

/**
 * Pairs the readings of two branches of one pass. A reading of the first is paired with the
 * nearest in time of the second, if that lies within half the interval to the first branch's
 * own neighbour, and within a twentieth of a wavelength of travel: beyond, the fast fading at
 * the one place says little of that at the other. Each branch has its own local mean. A pair
 * weighs the travel that the first branch's reading stands for; standing readings none.
 * @param branches       [2]
 * @param threshold_cdb  on the shifted scale; a censored reading counts where its bound tells
 * @return RFADE_OK (without runs if nothing pairs) | RFADE_DOMAIN | RFADE_NO_DATA (a branch
 *         without readings) | RFADE_NO_MEMORY | RFADE_OVERFLOW; on failure `result` is empty
 */
RFADE_API enum rfade_status rfade_pair_branches(const struct rfade_branch branches[2],
                                                int32_t threshold_cdb,
                                                struct rfade_pairing *result);
RFADE_API void rfade_pairing_clear(struct rfade_pairing *pairing);

#ifdef __cplusplus
}
#endif
#endif
