/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file outing.h  A vehicle's outings: stretches of time in which it logged something, on any
 * channel, without a gap that ends a trace. Fixes are matched once an outing.
 */
#ifndef ROUTEFADE_ANALYSE_OUTING_H
#define ROUTEFADE_ANALYSE_OUTING_H

#include <stddef.h>

#include "survey/survey.h"

struct rfade_outing {
    int64_t vehicle_id;
    int64_t start_us;
    int64_t end_us;
};

/** What a vehicle logged of one channel in one campaign during an outing. */
struct rfade_outing_stream {
    int64_t channel_id;
    int64_t campaign_id;
};

/** All outings, by vehicle and time. free() the array. */
enum rfade_status rfade_outings(struct rfade_survey *survey, double gap_s,
                                struct rfade_outing **outings, size_t *count,
                                struct rfade_error *error);

/** The streams of one outing, by channel and campaign. free() the array. */
enum rfade_status rfade_outing_streams(struct rfade_survey *survey,
                                       const struct rfade_outing *outing,
                                       struct rfade_outing_stream **streams, size_t *count,
                                       struct rfade_error *error);

#endif
