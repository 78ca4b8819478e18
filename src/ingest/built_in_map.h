/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file built_in_map.h  The column map that a header makes by itself, its names saying what
 * the columns hold: time, timestamp or utc; lat or latitude; lon, lng or longitude; speed_kmh
 * or speed_ms; channel; rssi, rssi_dbm or level_dbm; snr or snr_db; vehicle; campaign. Case,
 * blanks, underscores and units in brackets do not matter; a level whose brackets hold a unit
 * other than dBm is not guessed at.
 */
#ifndef ROUTEFADE_INGEST_BUILT_IN_MAP_H
#define ROUTEFADE_INGEST_BUILT_IN_MAP_H

#include "ingest/column_map_parts.h"
#include "ingest/fields.h"

/**
 * Makes a map for a file from its first bytes: separator comma, semicolon, tab, pipe or
 * blanks; with any but the comma a decimal comma is read too.
 * @return RFADE_OK; RFADE_INPUT if the header doesn't say enough, or says something twice;
 *     RFADE_NO_MEMORY. *map is NULL on failure.
 */
enum rfade_status rfade_built_in_map(const char *head, size_t head_size,
                                     struct rfade_column_map **map, struct rfade_error *error);

/** As _map, from the names in the records of a JSON file. */
enum rfade_status rfade_built_in_json_map(const struct rfade_header *header,
                                          struct rfade_column_map **map,
                                          struct rfade_error *error);

#endif
