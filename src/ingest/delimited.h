/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file delimited.h  The rows of a delimited text file, by a column map, into a sink. */
#ifndef ROUTEFADE_INGEST_DELIMITED_H
#define ROUTEFADE_INGEST_DELIMITED_H

#include "ingest/layout.h"
#include "ingest/lines.h"
#include "ingest/open.h"

/**
 * Reads all lines of a reader that has read none yet. What becomes of a row is said in
 * column_map.h. The summary's map name is left alone.
 * @return as rfade_ingest
 */
enum rfade_status
rfade_delimited_read(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                     const struct rfade_layout *layout, const struct rfade_ingest_names *names,
                     const struct rfade_sink *sink, struct rfade_ingest_summary *summary,
                     struct rfade_error *error);

#endif
