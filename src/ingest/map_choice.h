/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file map_choice.h  Which of several column maps a file is read by, from its first bytes. */
#ifndef ROUTEFADE_INGEST_CHOOSE_H
#define ROUTEFADE_INGEST_CHOOSE_H

#include "ingest/column_map_parts.h"
#include "ingest/layout.h"

/** Start with {0}. */
struct rfade_map_choice {
    const struct rfade_column_map *map;
    struct rfade_column_map *own; /**< the map, if it was made for this file */
    struct rfade_layout *layout;  /**< of delimited text */
};

/**
 * Of the maps for the format, and for a file of that name, that fit, the one with most columns;
 * two that fit equally well are refused. Where none fits, the built-in map. What a map takes
 * out of the file's name is put into a map of the file's own.
 * @param path   of the file
 * @param whole  whether the bytes are all of the file
 * @return RFADE_OK | RFADE_INPUT | RFADE_NO_MEMORY; clear the choice either way
 */
enum rfade_status rfade_map_choose(const struct rfade_column_map *const *maps, size_t map_count,
                                   const char *path, enum rfade_log_format format,
                                   const char *head, size_t size, bool whole,
                                   struct rfade_map_choice *choice, struct rfade_error *error);
void rfade_map_choice_clear(struct rfade_map_choice *choice);

#endif
