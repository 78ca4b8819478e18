/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file pool.h  All traversals of one segment on one channel in one campaign, added up, and
 * what follows from them.
 */
#ifndef ROUTEFADE_ANALYSE_POOL_H
#define ROUTEFADE_ANALYSE_POOL_H

#include <stdbool.h>
#include <stdint.h>

#include "analyse/pass_spread.h"
#include "analyse/settings.h"
#include "common/error.h"
#include "routefade/estimate.h"
#include "routefade/separate.h"
#include "routefade/tally.h"

struct rfade_pool {
    struct rfade_tally *fading;
    struct rfade_tally *level;
    struct rfade_tally *local_mean;
    struct rfade_tally *snr;   /**< as logged; empty where none was */
    struct rfade_tally *noise; /**< level less SNR */
    struct rfade_blocks blocks;
    struct rfade_sampling_sums sampling;
    int64_t passes;
    struct rfade_pass_levels pass_levels; /**< may be of none, or of all passes */
    int64_t readings;
    double travel_m;
    double wavelength_m;
    double calibration_db; /**< largest uncertainty of the vehicles' calibrations */
};

/** What a pool says; NaN where it says nothing. */
struct rfade_pool_result {
    enum rfade_sampling sampling;
    double mean_power_dbm;
    double local_mean_dbm;
    double local_sigma_db;
    double local_sigma_low_db;
    double local_sigma_high_db;
    double window_noise_db;
    double effective_count; /**< independent readings that would know the mean as well */
    double level_uncertainty_db;
    double pass_deviation_db; /**< of the next pass's level from the mean, fading left out */
    double noise_dbm;         /**< mean noise power by the logged SNR */
    bool fitted;              /**< whether `estimate` holds fits of the fast fading */
    struct rfade_estimate estimate;
};

enum rfade_status rfade_pool_create(struct rfade_pool *pool);
void rfade_pool_clear(struct rfade_pool *pool);

/** Fits the pool's fast fading where the sampling could see it, and its local mean. */
enum rfade_status rfade_pool_evaluate(struct rfade_pool *pool,
                                      const struct rfade_analysis_settings *settings,
                                      struct rfade_pool_result *result,
                                      struct rfade_error *error);

#endif
