/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file time.h  The times of one file, row after row, as microseconds since 1970 UTC.
 */
#ifndef ROUTEFADE_INGEST_TIME_H
#define ROUTEFADE_INGEST_TIME_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ingest/zone.h"

/* A logger's clock that says otherwise was never set. */
#define RFADE_EARLIEST_US INT64_C(315532800000000) /* 1980-01-01T00:00:00Z */
#define RFADE_LATEST_US INT64_C(7258118400000000)  /* 2200-01-01T00:00:00Z */

enum rfade_time_form {
    RFADE_TIME_AUTO, /**< ISO 8601, or an epoch told apart by its digits */
    RFADE_TIME_ISO8601,
    RFADE_TIME_EPOCH,
    RFADE_TIME_PATTERN
};

enum { RFADE_TIME_PATTERN_SIZE = 128 };

struct rfade_time_format {
    enum rfade_time_form form;
    int epoch_digits; /**< 0 s, 3 ms, 6 us, 9 ns */
    char decimal_sign;
    char pattern[RFADE_TIME_PATTERN_SIZE];
    const struct rfade_zone *zone; /**< of times without one; NULL: UTC */
    int64_t origin_us;             /**< that an epoch counts from */
    bool has_date;                 /**< the date is not in the text but here: */
    int64_t date_days;             /**< day of the first row, since 1970-01-01 */
};

/** What is known from the rows before. Start with the format and all else 0. */
struct rfade_time_reader {
    const struct rfade_time_format *format;
    bool any;            /**< there were rows before */
    bool falling;        /**< the file goes back in time */
    int64_t previous_us; /**< UTC time of the row before */
    int64_t of_day_us;   /**< time of day of the row before */
    int64_t day_offset;  /**< midnights passed since the first row */
    int64_t safe_from_s; /**< local seconds in [from, until) have safe_offset_s alone */
    int64_t safe_until_s;
    int32_t safe_offset_s;
};

/**
 * Reads the time of the next row. Of the two times that a clock put back makes of one, the
 * one that goes on in the order of the file (a minute's disorder allowed), the earlier if
 * both do.
 * @param[out] time_us  in [RFADE_EARLIEST_US, RFADE_LATEST_US); 0 on failure
 * @return NULL, or a reason why the time can't be used: a plain clause, static storage
 */
const char *rfade_time_read(struct rfade_time_reader *reader, const char *text, size_t size,
                            int64_t *time_us);

#endif
