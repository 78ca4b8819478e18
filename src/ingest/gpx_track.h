/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file gpx_track.h  The timed positions of a GPX file's tracks, into a sink. */
#ifndef ROUTEFADE_INGEST_GPX_TRACK_H
#define ROUTEFADE_INGEST_GPX_TRACK_H

#include "ingest/lines.h"
#include "ingest/open.h"

/**
 * Reads a reader that has read nothing yet. Every track point with a time is a position;
 * waypoints and routes, which nobody drove, are passed over. A file that is cut off keeps the
 * points before, and that is refused which follows. @return as rfade_ingest
 */
enum rfade_status
rfade_gpx_track_read(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                     const struct rfade_ingest_names *names, const struct rfade_sink *sink,
                     struct rfade_ingest_summary *summary, struct rfade_error *error);

#endif
