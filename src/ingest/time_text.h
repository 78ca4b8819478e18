/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file time_text.h  What a time written as text says, before its zone is looked at: ISO 8601,
 * epochs, and patterns in the manner of strptime. Locale-free pure functions.
 */
#ifndef ROUTEFADE_INGEST_TIME_TEXT_H
#define ROUTEFADE_INGEST_TIME_TEXT_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

/** A clock's reading. */
struct rfade_clock_time {
    bool has_date;
    bool has_offset;
    int64_t days;      /**< since 1970-01-01; 0 without date */
    int64_t of_day_us; /**< [0, 86400e6]; a leap second is the next day's first */
    int32_t offset_s;  /**< local less UTC; 0 if none was written */
};

/*
 * Each reads a whole text of `size` bytes and returns NULL, or a reason why it can't be read:
 * a plain clause, static storage.
 */

/** 2026-01-15T20:15:00.25+01:00, 20260115T201500Z, 2026-01-15 20:15, 20:15:00. */
const char *rfade_time_iso8601(const char *text, size_t size, struct rfade_clock_time *time);

/** By a pattern as column_map.h describes it. */
const char *rfade_time_pattern(const char *pattern, const char *text, size_t size,
                               struct rfade_clock_time *time);

/** NULL, or what is wrong with a pattern. */
const char *rfade_time_pattern_check(const char *pattern);

/**
 * A count of units since some origin, rounded to microseconds.
 * @param digits  decimal places from unit to second: 0 s, 3 ms, 6 us, 9 ns; -1: by the number
 *     of digits, which tells the four apart from 1980 to 2199
 */
const char *rfade_time_epoch(const char *text, size_t size, int digits, char decimal_sign,
                             int64_t *time_us);

#endif
