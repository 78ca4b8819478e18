/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file layout.h  Where a column map's columns lie in one file: its header found, names made
 * numbers, and the number of values most rows have.
 */
#ifndef ROUTEFADE_INGEST_LAYOUT_H
#define ROUTEFADE_INGEST_LAYOUT_H

#include "ingest/column_map_parts.h"
#include "ingest/fields.h"

/** What a column is for. Levels follow: RFADE_ROLE_LEVELS + 2 * i, and its SNR one on. */
enum rfade_role {
    RFADE_ROLE_TIME,
    RFADE_ROLE_DATE,
    RFADE_ROLE_SUBSECOND,
    RFADE_ROLE_FIRST,  /**< latitude or x */
    RFADE_ROLE_SECOND, /**< longitude or y */
    RFADE_ROLE_SPEED,
    RFADE_ROLE_VEHICLE,
    RFADE_ROLE_CHANNEL,
    RFADE_ROLE_CAMPAIGN,
    RFADE_ROLE_SEQUENCE,
    RFADE_ROLE_GNSS, /**< time that the GNSS receiver says */
    RFADE_ROLE_LEVELS
};

enum { RFADE_MOST_ROLES = RFADE_ROLE_LEVELS + 2 * RFADE_MOST_LEVELS };

struct rfade_layout {
    size_t first_line;                /**< of data, at the earliest */
    size_t columns[RFADE_MOST_ROLES]; /**< from 1; 0: the map has none for that role */
    size_t column_count;              /**< roles that have a column */
    size_t last_column;               /**< highest of them */
    size_t value_count;               /**< that most of the first rows have */
    size_t header_size;               /**< 0: no header */
    char header[RFADE_LINE_SIZE];     /**< the header line, which may come again */
};

/**
 * Lays a map over the first bytes of a file. RFADE_INPUT, with what the map asks for and the
 * file doesn't have, if it doesn't fit; RFADE_NO_MEMORY. *layout must be freed.
 * @param whole  whether the bytes are all of the file
 */
enum rfade_status rfade_layout_create(const struct rfade_column_map *map, const char *head,
                                      size_t head_size, bool whole,
                                      struct rfade_layout **layout, struct rfade_error *error);

/** Column of a map, by role. */
const struct rfade_column *rfade_map_column(const struct rfade_column_map *map, size_t role);

/**
 * The name as it is compared: lower case, without blanks, underscores, and what stands in
 * brackets. `plain` holds RFADE_NAME_SIZE bytes.
 */
void rfade_plain_name(const char *name, char *plain);

/** Whether a first line says only what the separator is: sep=; with or without quotes. */
bool rfade_is_separator_line(const struct rfade_line *line);

#endif
