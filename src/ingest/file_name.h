/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file file_name.h  What a log's file name says, by a column map's pattern. Pure functions.
 */
#ifndef ROUTEFADE_INGEST_FILE_NAME_H
#define ROUTEFADE_INGEST_FILE_NAME_H

#include <stdbool.h>

#include "ingest/column_map_parts.h"

enum rfade_name_part {
    RFADE_PART_VEHICLE,
    RFADE_PART_CHANNEL,
    RFADE_PART_CAMPAIGN,
    RFADE_PART_DATE,
    RFADE_PART_LATITUDE,
    RFADE_PART_LONGITUDE,
    RFADE_PART_X,
    RFADE_PART_Y,
    RFADE_PARTS
};

/** Texts of the parts; empty: the pattern has no such part. */
struct rfade_name_parts {
    char texts[RFADE_PARTS][RFADE_NAME_SIZE];
};

/** Whether the pattern has a part, from its {name}. */
bool rfade_name_pattern_has(const char *pattern, enum rfade_name_part part);

/** NULL, or what is wrong with a pattern (column_map.h has its language): a plain clause. */
const char *rfade_name_pattern_check(const char *pattern);

/**
 * Matches a whole name, without its folders. A part is one character or more, as few as will
 * do; a date must be one, a coordinate a number. False if it doesn't match.
 */
bool rfade_name_match(const char *pattern, const char *name, struct rfade_name_parts *parts);

/** Reads 2026-01-15, 2026_01_15, 2026.01.15 or 20260115 as days since 1970-01-01. */
bool rfade_name_date(const char *text, int64_t *days);

#endif
