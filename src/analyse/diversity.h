/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file diversity.h  What two antennas of one vehicle read together, by segment. */
#ifndef ROUTEFADE_ANALYSE_DIVERSITY_H
#define ROUTEFADE_ANALYSE_DIVERSITY_H

#include "analyse/results.h"
#include "analyse/settings.h"
#include "routefade/paired.h"

/** Pairs added up. Owned; see the functions below. */
struct rfade_paired_total {
    struct rfade_tally *level[2];
    struct rfade_tally *best;
    struct rfade_paired_sums *blocks;
    size_t block_count;
    size_t block_room;
};

enum rfade_status rfade_paired_total_create(struct rfade_paired_total *total);
enum rfade_status rfade_paired_total_add(struct rfade_paired_total *total,
                                         const struct rfade_paired_run *run);
void rfade_paired_total_clear(struct rfade_paired_total *total);

/** A segment in one campaign, with its results on both channels. */
struct rfade_diversity_row {
    const struct rfade_segment_result *branch[2]; /**< borrowed */
    int32_t shift_cdb[2]; /**< brings each channel's level to one scale */
    int64_t campaign_id;
    struct rfade_paired_total total;
};

/**
 * Pairs the survey's readings on two channels, by vehicle, outing and pass, and adds them to
 * the rows, which it creates the totals of; the caller clears them. Reads all readings of
 * outings that have both channels, one outing at a time, and stores nothing.
 * @param threshold_cdb  on the rows' common scale
 */
enum rfade_status rfade_diversity_pair(struct rfade_survey *survey,
                                       const struct rfade_analysis_settings *settings,
                                       const char *const channels[2], int32_t threshold_cdb,
                                       struct rfade_diversity_row *rows, size_t count,
                                       struct rfade_error *error);

/** Outages at which the diversity gain is measured. */
enum { RFADE_DIVERSITY_GAINS = 2 };
extern const double rfade_diversity_outages[RFADE_DIVERSITY_GAINS]; /**< 0.1, 0.01 */

/** NaN where there is nothing to say. */
struct rfade_diversity {
    int64_t pairs;
    double travel_m;   /**< that they stand for */
    double below[2];   /**< share of it below the threshold, by branch */
    double both_below; /**< and on both, with its confidence interval */
    double both_below_low;
    double both_below_high;
    double both_below_independent; /**< by the fitted models, were the fast fading of the
                                        branches independent */
    double power_correlation;      /**< of the fast fading, with its confidence interval */
    double power_correlation_low;
    double power_correlation_high;
    double envelope_correlation;
    /** Level exceeded but for that outage by the stronger branch of each pair, over that of
     * the better single branch, dB; and what independent branches would give. */
    double gain_db[RFADE_DIVERSITY_GAINS];
    double gain_independent_db[RFADE_DIVERSITY_GAINS];
};

/** Intervals come from the blocks of travel: at least 6, else NaN. */
enum rfade_status rfade_diversity_evaluate(const struct rfade_diversity_row *row,
                                           double threshold_db, double confidence,
                                           struct rfade_diversity *result,
                                           struct rfade_error *error);

#endif
