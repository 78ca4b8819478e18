/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file json.h  The records of a JSON file, by a column map whose columns are paths. */
#ifndef ROUTEFADE_INGEST_JSON_H
#define ROUTEFADE_INGEST_JSON_H

#include "ingest/lines.h"
#include "ingest/open.h"

/**
 * Lays a map over the first bytes of a file.
 * @param[out] columns  how many of the map's columns some record has; 0 on failure
 * @return RFADE_OK; RFADE_INPUT if no record has a time where the map says, and a level or a
 *     position; RFADE_NO_MEMORY
 */
enum rfade_status rfade_json_fit(const struct rfade_column_map *map, const char *head,
                                 size_t head_size, size_t *columns, struct rfade_error *error);

/**
 * The built-in map by the names of the first records. RFADE_INPUT if they don't say enough.
 */
enum rfade_status rfade_json_built_in(const char *head, size_t head_size,
                                      struct rfade_column_map **map, struct rfade_error *error);

/**
 * Reads all records of a reader that has read nothing yet. A record is a row (column_map.h);
 * one that has none of the columns says that nothing was received. The summary's map name is
 * left alone. @return as rfade_ingest
 */
enum rfade_status
rfade_json_read(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                const struct rfade_ingest_names *names, const struct rfade_sink *sink,
                struct rfade_ingest_summary *summary, struct rfade_error *error);

#endif
