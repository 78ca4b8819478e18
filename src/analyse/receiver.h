/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file receiver.h  What is known of the receiver behind a trace: told, or found in the data.
 */
#ifndef ROUTEFADE_ANALYSE_RECEIVER_H
#define ROUTEFADE_ANALYSE_RECEIVER_H

#include <stdbool.h>
#include <stddef.h>

#include "analyse/settings.h"
#include "routefade/separate.h"
#include "survey/channel.h"
#include "survey/read.h"
#include "survey/vehicle.h"

/** Where a floor or ceiling comes from. */
enum rfade_limit_source {
    RFADE_LIMIT_NONE,
    RFADE_LIMIT_CHANNEL, /**< told */
    RFADE_LIMIT_PILE_UP, /**< found: clipping.h */
    RFADE_LIMIT_NOISE,   /**< the noise and its margin: below, level is mostly noise */
    RFADE_LIMIT_LOST     /**< the lowest level that was heard, where numbers are missing */
};

struct rfade_trace_receiver {
    struct rfade_receiver reported; /**< on the calibrated scale */
    struct rfade_receiver receiver; /**< likewise, with the noise taken off */
    enum rfade_limit_source floor_source;
    enum rfade_limit_source ceiling_source;
    int32_t offset_cdb; /**< calibration: added to each level as logged */
    double uncertainty_db;
    bool step_found;  /**< found in the data, not told */
    double noise_dbm; /**< part of each level, to be taken off; NaN: not known, or not asked */
};

/**
 * The step is the channel's, else found by rfade_find_step_db. Floor and ceiling are the
 * channel's, else levels at which readings pile up. Where the channel's noise is known, its
 * power is taken off each level, and levels whose interval begins less than the margin above
 * it are censored: there the noise's own fluctuation is as large as the signal.
 * @param calibration  in force; NULL: none told
 * @param readings     [count] with levels, in time order
 */
enum rfade_status rfade_trace_receiver(const struct rfade_channel *channel,
                                       const struct rfade_calibration *calibration,
                                       const struct rfade_analysis_settings *settings,
                                       const struct rfade_survey_reading *readings,
                                       size_t count, struct rfade_trace_receiver *known);

/**
 * What lost packets stand for: all below the floor, and below the lowest level that came
 * through. Raises the floor to the step under that level, which censors no reading.
 */
void rfade_trace_receiver_losing(struct rfade_trace_receiver *known,
                                 const struct rfade_survey_reading *readings, size_t count);

/** A level as logged, on the calibrated scale, its noise taken off, or at the floor. */
int32_t rfade_trace_level_cdb(const struct rfade_trace_receiver *known, int32_t logged_cdb);

/** The word in the survey for where a limit comes from; NULL for none. */
const char *rfade_limit_source_name(enum rfade_limit_source source);

#endif
