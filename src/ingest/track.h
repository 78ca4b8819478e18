/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file track.h  The positions of a file's rows, vehicle by vehicle, thinned to fixes.
 *
 * Rows repeat a position until the receiver has the next one, or the vehicle stands. A
 * position is told when it changes. One repeated for longer than `held_s` is a standstill,
 * and told again every `held_s` and at its end, so that nobody takes the vehicle for having
 * crept. One instant has one fix, the first.
 *
 * A position must be reachable from the one before: 200 m and max_speed times the time
 * between. One that is not waits for the next: if that agrees with it, the vehicle was moved
 * (or the positions before were wrong), else it is refused.
 */
#ifndef ROUTEFADE_INGEST_TRACK_H
#define ROUTEFADE_INGEST_TRACK_H

#include "ingest/column_map_parts.h"
#include "ingest/lines.h"
#include "ingest/sink.h"

struct rfade_tracks; /* opaque */

/** NULL: no memory. Map and sink are borrowed. */
struct rfade_tracks *rfade_tracks_create(const struct rfade_position_map *map,
                                         const struct rfade_sink *sink);
void rfade_tracks_destroy(struct rfade_tracks *tracks);

/**
 * Takes the next row's position. fix->vehicle must stay valid and be the same pointer for
 * the same vehicle. The line is for a refusal, now or later.
 */
enum rfade_status rfade_tracks_add(struct rfade_tracks *tracks,
                                   const struct rfade_ingest_fix *fix,
                                   const struct rfade_line *line, struct rfade_error *error);

/** After the last row: tells or refuses what still waits. */
enum rfade_status rfade_tracks_finish(struct rfade_tracks *tracks, struct rfade_error *error);

size_t rfade_tracks_fixes(const struct rfade_tracks *tracks);   /**< told so far */
size_t rfade_tracks_refused(const struct rfade_tracks *tracks); /**< refused so far */

#endif
