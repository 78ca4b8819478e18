/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file channel.h  What is told of a radio channel. NaN: not told. */
#ifndef ROUTEFADE_SURVEY_CHANNEL_H
#define ROUTEFADE_SURVEY_CHANNEL_H

#include <stddef.h>

#include "survey/name.h"

struct rfade_channel {
    int64_t channel_id; /**< 0 in a description that isn't stored yet */
    char name[RFADE_NAME_SIZE];
    double carrier_hz;      /**< [1e5, 3e11] */
    double bandwidth_hz;    /**< > 0, at most 1e11 */
    double symbol_rate_hz;  /**< > 0, at most 1e11 */
    double noise_figure_db; /**< [0, 100] */
    double noise_floor_dbm; /**< [-250, 100], in the bandwidth */
    double step_db;         /**< quantisation of the level, [0.01, 20] */
    double floor_dbm;       /**< lowest level the receiver reports, [-250, 100] */
    double ceiling_dbm;     /**< highest, > floor_dbm */
};

/**
 * Noise power in the bandwidth: what was told, else kTB at 290 K, the reference temperature of
 * a noise figure (IEEE Std 161), and the noise figure. NaN: not known.
 */
double rfade_noise_floor_dbm(double told_dbm, double bandwidth_hz, double noise_figure_db);

/** Nothing told. */
struct rfade_channel rfade_channel_undescribed(void);

/**
 * Stores what `told` says about the channel `name` (NaN fields keep what is stored; name and
 * channel_id of `told` aren't used) and adds the channel if it is missing. In one
 * transaction of its own. Counts as a change only if something differs.
 * @return RFADE_OK | RFADE_INPUT (a value outside its range, ceiling not above floor, a bad
 *         name) | RFADE_STORAGE
 */
enum rfade_status rfade_survey_channel_set(struct rfade_survey *survey, const char *name,
                                           const struct rfade_channel *told,
                                           struct rfade_error *error);

/** A channel by name. @return RFADE_OK | RFADE_INPUT (no such channel) | RFADE_STORAGE */
enum rfade_status rfade_survey_channel(struct rfade_survey *survey, const char *name,
                                       struct rfade_channel *channel,
                                       struct rfade_error *error);

/** All channels by name. free() the array. */
enum rfade_status rfade_survey_channels(struct rfade_survey *survey,
                                        struct rfade_channel **channels, size_t *count,
                                        struct rfade_error *error);

#endif
