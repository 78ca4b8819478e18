/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file pass.h  One pass in work: weights of travel, exact sums of power, local means. */
#ifndef ROUTEFADE_SEPARATE_PASS_H
#define ROUTEFADE_SEPARATE_PASS_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "routefade/separate.h"

/** Weight times power, summed without rounding: 34 bits of travel, 14 of resolution, 80 of
 * range. */
__extension__ typedef unsigned __int128 rfade_power_sum;

/** Squared second differences of the means at one scale, summed along the pass. */
struct rfade_curvature {
    int64_t *square; /**< [count + 1] prefix sums, mm cdB^2 */
    int64_t *mm;     /**< [count + 1] prefix sums of the weights that went in */
};

struct rfade_pass {
    const struct rfade_track_reading *readings;
    size_t count;
    struct rfade_receiver receiver;
    int64_t wavelength_um;
    int64_t half_wave_mm;
    int64_t window_mm;
    int64_t block_mm;
    bool held;              /**< the level is updated much more rarely than rows come */
    int32_t reference_cdb;  /**< the level whose power is the unit of the power sums */
    int64_t *weight_mm;     /**< [count] travel that a reading stands for */
    int64_t *weight_sum;    /**< [count + 1] prefix sums of the weights */
    int64_t *kept_sum;      /**< [count + 1] how many readings with weight came before */
    rfade_power_sum *power; /**< [count + 1] prefix sums of weight times power */
    double *local_mean_cdb; /**< [count]; NaN where there is no weight */
    int64_t *fading;        /**< [count] power over local mean less 1, thousandths, at most
                                 30000 so that sums of products stay below 2^63 */
    struct rfade_curvature curvature[RFADE_SAMPLING_SCALES];
};

/** A range of readings, [from, to). */
struct rfade_range {
    size_t from;
    size_t to;
};

/** Validates, weighs, sums, and finds the local means. On failure nothing is owned. */
enum rfade_status rfade_pass_create(struct rfade_pass *pass,
                                    const struct rfade_track_reading *readings, size_t count,
                                    const struct rfade_receiver *receiver,
                                    const struct rfade_separate_settings *settings);
void rfade_pass_destroy(struct rfade_pass *pass);

/** Level of the mean power of a range, cdB; NaN if nothing in it has weight. */
double rfade_pass_mean_cdb(const struct rfade_pass *pass, struct rfade_range range);

/**
 * Moves a window on to the readings within half a window of reading i; to be called for
 * rising i, from {0, 0}.
 */
void rfade_pass_window(const struct rfade_pass *pass, size_t i, struct rfade_range *window);

/** Fast fading of a level at a reading's place, quantised to 0.1 dB, in cdB. */
int32_t rfade_pass_fading_cdb(const struct rfade_pass *pass, size_t i, double level_cdb);

/** Fills the sums of the second differences. */
enum rfade_status rfade_pass_curvature(struct rfade_pass *pass);

/** The sums of a run of readings that make one traversal. */
void rfade_pass_sampling(const struct rfade_pass *pass, struct rfade_range run,
                         struct rfade_sampling_sums *sums);

/** Crossings along a run: a step between two readings belongs to the later one's segment. */
void rfade_pass_crossings(const struct rfade_pass *pass, struct rfade_range run,
                          struct rfade_crossings *crossings);

/** Counts rows, travel and level updates of a run: the members up to travel_mm. */
void rfade_pass_count_rows(const struct rfade_pass *pass, struct rfade_range run,
                           struct rfade_sampling_sums *sums);

/** What a reading's SNR, where there is one, adds to the tallies of SNR and noise. */
enum rfade_status rfade_pass_add_snr(const struct rfade_pass *pass, size_t i,
                                     struct rfade_traversal_tally *traversal);

/** Whether these rows repeat a level that is updated much more rarely. */
bool rfade_sampling_is_held(const struct rfade_sampling_sums *sums, int64_t half_wave_mm);

#endif
