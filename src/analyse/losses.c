/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/losses.h"

#include <math.h>
#include <stdlib.h>

#include "ingest/sink.h"

static const double REGULAR_TOLERANCE = 0.2; /* of the median interval */
static const double REGULAR_SHARE = 0.9;
enum { LEAST_FOR_INTERVAL = 20 };

static int64_t lost_between(const struct rfade_survey_reading *readings, size_t i)
{
    return i > 0 && readings[i].lost_before > 0 ? readings[i].lost_before : 0;
}

int64_t rfade_count_lost(const struct rfade_survey_reading *readings, size_t count)
{
    int64_t lost = -1;
    for (size_t i = 0; i < count; i++)
        if (readings[i].lost_before != RFADE_LOST_UNKNOWN)
            lost = (lost < 0 ? 0 : lost) + lost_between(readings, i);
    return lost;
}

enum rfade_status rfade_fill_losses(const struct rfade_survey_reading *readings, size_t count,
                                    int32_t lost_level_cdb,
                                    struct rfade_survey_reading **filled, size_t *filled_count,
                                    struct rfade_error *error)
{
    int64_t lost = rfade_count_lost(readings, count);
    *filled_count = 0;
    *filled = malloc((count + (size_t)(lost > 0 ? lost : 0) + 1) * sizeof **filled);
    if (!*filled)
        return rfade_error_no_memory(error);
    for (size_t i = 0; i < count; i++) {
        int64_t between = lost_between(readings, i);
        for (int64_t n = 1; n <= between; n++) {
            int64_t gap_us = readings[i].time_us - readings[i - 1].time_us;
            (*filled)[(*filled_count)++] = (struct rfade_survey_reading){
                .time_us = readings[i - 1].time_us + gap_us * n / (between + 1),
                .level_cdb = lost_level_cdb,
                .snr_cdb = RFADE_NO_VALUE_CDB,
                .lost_before = 0,
            };
        }
        (*filled)[(*filled_count)++] = readings[i];
    }
    return RFADE_OK;
}

static int by_value(const void *left, const void *right)
{
    int64_t a = *(const int64_t *)left, b = *(const int64_t *)right;
    return (a > b) - (a < b);
}

enum rfade_status rfade_count_missing(const struct rfade_survey_reading *readings, size_t count,
                                      int64_t *missing, struct rfade_error *error)
{
    *missing = -1;
    if (count < LEAST_FOR_INTERVAL)
        return RFADE_OK;
    size_t gaps = count - 1, middle = gaps / 2, regular = 0;
    int64_t *gaps_us = malloc(gaps * sizeof *gaps_us);
    if (!gaps_us)
        return rfade_error_no_memory(error);
    for (size_t i = 0; i < gaps; i++)
        gaps_us[i] = readings[i + 1].time_us - readings[i].time_us;
    qsort(gaps_us, gaps, sizeof *gaps_us, by_value);
    double median_us = (double)gaps_us[middle];
    int64_t left_out = 0;
    for (size_t i = 0; i < gaps && median_us > 0.0; i++) {
        double intervals = (double)gaps_us[i] / median_us;
        double whole = fmax(1.0, round(intervals));
        regular += fabs(intervals - whole) <= REGULAR_TOLERANCE;
        left_out += (int64_t)whole - 1;
    }
    if ((double)regular >= REGULAR_SHARE * (double)gaps)
        *missing = left_out;
    free(gaps_us);
    return RFADE_OK;
}
