/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file map_of_file.h  A column map with what a file's name says put in. */
#ifndef ROUTEFADE_INGEST_MAP_OF_FILE_H
#define ROUTEFADE_INGEST_MAP_OF_FILE_H

#include "ingest/file_name.h"

/** A copy that borrows nothing but the zone of `map`. NULL: no memory. */
struct rfade_column_map *rfade_map_copy(const struct rfade_column_map *map);

/**
 * @param parts  of the name, as the map's pattern has them
 * @param[out] own  the new map, to be destroyed; NULL on failure
 * @return RFADE_OK | RFADE_INPUT (the name says no place) | RFADE_NO_MEMORY
 */
enum rfade_status rfade_map_of_file(const struct rfade_column_map *map,
                                    const struct rfade_name_parts *parts,
                                    struct rfade_column_map **own, struct rfade_error *error);

#endif
