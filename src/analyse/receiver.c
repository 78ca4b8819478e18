/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/receiver.h"

#include <math.h>
#include <stdlib.h>

/* Steps that receivers report in, centi-dB, coarsest first (common practice). */
static const int32_t usual_steps_cdb[] = {200, 100, 50, 25, 20, 10, 5, 2, 1};

/* With fewer changes of level than this, even steps of 2 dB may be chance. */
enum { CHANGES_FOR_COARSEST = 30 };

static int32_t common_divisor(int32_t a, int32_t b)
{
    while (b != 0) {
        int32_t rest = a % b;
        a = b;
        b = rest;
    }
    return abs(a);
}

static int32_t find_step(const struct rfade_survey_reading *readings, size_t count)
{
    int32_t divisor = 0;
    size_t changes = 0;
    for (size_t i = 1; i < count; i++) {
        int32_t change_cdb = readings[i].level_cdb - readings[i - 1].level_cdb;
        changes += change_cdb != 0;
        divisor = common_divisor(divisor, change_cdb);
    }
    /* A level that never changes tells its grid by its own digits. */
    if (divisor == 0 && count > 0)
        divisor = readings[0].level_cdb;
    size_t first = changes < CHANGES_FOR_COARSEST;
    for (size_t i = first; i < sizeof usual_steps_cdb / sizeof usual_steps_cdb[0]; i++)
        if (divisor % usual_steps_cdb[i] == 0)
            return usual_steps_cdb[i];
    return 1;
}

struct rfade_trace_receiver rfade_trace_receiver(const struct rfade_channel *channel,
                                                 const struct rfade_calibration *calibration,
                                                 const struct rfade_survey_reading *readings,
                                                 size_t count)
{
    struct rfade_trace_receiver known = {
        .receiver = {.floor_cdb = RFADE_NO_FLOOR_CDB, .ceiling_cdb = RFADE_NO_CEILING_CDB},
        .step_found = isnan(channel->step_db),
    };
    if (calibration) {
        known.offset_cdb = (int32_t)lround(calibration->offset_db * 100.0);
        known.uncertainty_db = calibration->offset_uncertainty_db;
    }
    known.receiver.step_cdb = known.step_found ? find_step(readings, count)
                                               : (int32_t)lround(channel->step_db * 100.0);
    if (!isnan(channel->floor_dbm))
        known.receiver.floor_cdb =
            (int32_t)lround(channel->floor_dbm * 100.0) + known.offset_cdb;
    if (!isnan(channel->ceiling_dbm))
        known.receiver.ceiling_cdb =
            (int32_t)lround(channel->ceiling_dbm * 100.0) + known.offset_cdb;
    return known;
}
