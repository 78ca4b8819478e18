/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file column_map_check.h  Whether the parts of a column map fit together. */
#ifndef ROUTEFADE_INGEST_COLUMN_MAP_CHECK_H
#define ROUTEFADE_INGEST_COLUMN_MAP_CHECK_H

#include "ingest/column_map_parts.h"

/**
 * Also finds the position's form. RFADE_INPUT with what doesn't fit, the line of its section
 * and the remedy.
 */
enum rfade_status rfade_column_map_check(struct rfade_column_map *map,
                                         struct rfade_error *error);

#endif
