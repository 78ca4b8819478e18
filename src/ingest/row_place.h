/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file row_place.h  The position and speed of a row. */
#ifndef ROUTEFADE_INGEST_ROW_PLACE_H
#define ROUTEFADE_INGEST_ROW_PLACE_H

#include "ingest/row.h"

struct rfade_place_reader; /* opaque */

/** Map and values are borrowed. @return as rfade_position_converter_create */
enum rfade_status rfade_place_reader_create(const struct rfade_column_map *map,
                                            const struct rfade_row_values *values,
                                            struct rfade_place_reader **reader,
                                            struct rfade_error *error);
void rfade_place_reader_destroy(struct rfade_place_reader *reader); /* NULL is harmless */

/** Fills the row's place, if it has one, and then its speed. What can't be right is refused. */
void rfade_place_read(struct rfade_place_reader *reader, struct rfade_row *row);

#endif
