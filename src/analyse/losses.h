/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file losses.h  Readings that a trace lacks: numbered ones that were lost, and gaps. */
#ifndef ROUTEFADE_ANALYSE_LOSSES_H
#define ROUTEFADE_ANALYSE_LOSSES_H

#include <stddef.h>
#include <stdint.h>

#include "common/error.h"
#include "survey/read.h"

/** Numbers missing between the readings of a trace; -1: the log has no sequence numbers. */
int64_t rfade_count_lost(const struct rfade_survey_reading *readings, size_t count);

/**
 * The readings of a trace with those that were lost put in, spread evenly in time between
 * their neighbours. What was lost before the first reading is no part of the trace.
 * @param lost_level_cdb  the level that a lost reading gets, as logged
 * @param[out] filled     [*filled_count]; free() the array
 */
enum rfade_status rfade_fill_losses(const struct rfade_survey_reading *readings, size_t count,
                                    int32_t lost_level_cdb,
                                    struct rfade_survey_reading **filled, size_t *filled_count,
                                    struct rfade_error *error);

/**
 * How many readings a regular logger left out: a gap of about n median intervals lacks n - 1.
 * A logger is regular if nine in ten intervals lie within a fifth of the median of a whole
 * number of medians. -1: it isn't, or there are fewer than 20 readings.
 */
enum rfade_status rfade_count_missing(const struct rfade_survey_reading *readings, size_t count,
                                      int64_t *missing, struct rfade_error *error);

#endif
