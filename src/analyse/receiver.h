/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file receiver.h  What is known of the receiver behind a trace: told, or found in the data.
 */
#ifndef ROUTEFADE_ANALYSE_RECEIVER_H
#define ROUTEFADE_ANALYSE_RECEIVER_H

#include <stdbool.h>
#include <stddef.h>

#include "routefade/separate.h"
#include "survey/channel.h"
#include "survey/read.h"
#include "survey/vehicle.h"

struct rfade_trace_receiver {
    struct rfade_receiver receiver; /**< on the calibrated scale */
    int32_t offset_cdb;             /**< calibration: added to each level as logged */
    double uncertainty_db;
    bool step_found; /**< found in the data, not told */
};

/**
 * The step is the channel's, else the largest of the usual ones (2, 1, 0.5, ... 0.01 dB) on
 * whose grid all the levels lie. Floor and ceiling are the channel's.
 * @param calibration  in force; NULL: none told
 */
struct rfade_trace_receiver rfade_trace_receiver(const struct rfade_channel *channel,
                                                 const struct rfade_calibration *calibration,
                                                 const struct rfade_survey_reading *readings,
                                                 size_t count);

#endif
